/** From where a unit is seen: the sight of the records, and for helices and chirality planes directions of their own. */
import { isLocated, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { type SightFrame, sightFrame, type Vector } from '../../core/record/sight-frame.ts';

const sum = (a: Vector, b: Vector): Vector => [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
const minus = (a: Vector, b: Vector): Vector => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
const times = (a: Vector, k: number): Vector => [a[0] * k, a[1] * k, a[2] * k];
const dot = (a: Vector, b: Vector): number => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const cross = (a: Vector, b: Vector): Vector => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];

function unitVector(a: Vector): Vector | null {
  const length = Math.sqrt(dot(a, a));
  return length > 1e-6 ? times(a, 1 / length) : null;
}

const point = (molecule: Molecule, atom: number): Vector => {
  const r = molecule.coordinates!;
  return [r[3 * atom]!, r[3 * atom + 1]!, r[3 * atom + 2]!];
};

function looking(origin: Vector, toReader: Vector, upwards: Vector): SightFrame | null {
  const up = unitVector(minus(upwards, times(toReader, dot(upwards, toReader))));
  return up === null ? null : { origin, toReader, up, right: cross(up, toReader) };
}

/** The inner rim of a helix: the shortest way through bonds from one end to the other. */
export function helixRim(molecule: Molecule, labelled: LabelledUnit): readonly number[] {
  const [first, last] = labelled.unit.atoms;
  if (first === undefined || last === undefined) return [];
  const before = new Int32Array(molecule.atomCount).fill(-1);
  before[first] = first;
  const queue = [first];
  for (let head = 0; head < queue.length && before[last] === -1; head++) {
    const atom = queue[head]!;
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const next = molecule.neighbours[k]!;
      if (before[next] !== -1) continue;
      before[next] = atom;
      queue.push(next);
    }
  }
  if (before[last] === -1) return [];
  const path: number[] = [last];
  for (let atom = last; atom !== first; atom = before[atom]!) path.unshift(before[atom]!);
  return path;
}

/** Along the axis about which the rim winds, its first end in front. */
function helixFrame(molecule: Molecule, labelled: LabelledUnit): SightFrame | null {
  const rim = helixRim(molecule, labelled);
  if (rim.length < 4 || !rim.every(atom => isLocated(molecule, atom))) return null;
  const points = rim.map(atom => point(molecule, atom));
  // Second differences point to the axis; the product of two in a row points along it (P. C. Kahn, Comput. Chem. 1989, 13, 185; from memory).
  let axis: Vector = [0, 0, 0];
  for (let k = 1; k + 2 < points.length; k++) {
    const bend = (j: number): Vector => minus(sum(points[j - 1]!, points[j + 1]!), times(points[j]!, 2));
    axis = sum(axis, cross(bend(k), bend(k + 1)));
  }
  const along = unitVector(axis);
  if (along === null) return null;
  const way = minus(points.at(-1)!, points[0]!);
  const toReader = times(along, dot(along, way) > 0 ? -1 : 1);
  const origin = times(
    points.reduce((total, each) => sum(total, each), [0, 0, 0] as Vector),
    1 / points.length,
  );
  return looking(origin, toReader, minus(points[0]!, origin));
}

/** From the side of the pilot atom onto the chirality plane. */
function planeFrame(molecule: Molecule, labelled: LabelledUnit): SightFrame | null {
  if (labelled.torsionAtoms === null) return null;
  const [pilot, a, b, c] = labelled.torsionAtoms.map(atom => point(molecule, atom)) as [
    Vector,
    Vector,
    Vector,
    Vector,
  ];
  const normal = unitVector(cross(minus(a, b), minus(c, b)));
  if (normal === null) return null;
  const toReader = times(normal, dot(normal, minus(pilot, b)) > 0 ? 1 : -1);
  const origin = times(sum(sum(a, b), c), 1 / 3);
  return looking(origin, toReader, minus(a, origin));
}

/** The sight of a unit; null without coordinates. */
export function frameOf(molecule: Molecule, labelled: LabelledUnit): SightFrame | null {
  if (molecule.coordinates === null || molecule.dimension !== 3) return null;
  const own =
    labelled.unit.kind === 'helix'
      ? helixFrame(molecule, labelled)
      : labelled.unit.kind === 'plane'
        ? planeFrame(molecule, labelled)
        : null;
  return own ?? sightFrame(molecule, labelled);
}
