/**
 * The sight of a unit as a direction of view: down the lowest-priority bond of a centre, end-on for axes and
 * cumulenes, into the plane of a double bond.
 */
import { LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import type { LabelledUnit, RankedLigand } from '../docket.ts';

export type Vector = readonly [number, number, number];

/** A view: model coordinates minus `origin`, in the three directions of the reader. Unit vectors, right-handed. */
export interface SightFrame {
  /** Å. */
  readonly origin: Vector;
  readonly right: Vector;
  readonly up: Vector;
  /** From the unit towards the reader. */
  readonly toReader: Vector;
}

/** A ranked ligand as the dial shows it. */
export interface DialPlace {
  /** 1 to 4 for a centre; 1 and 2 at each end of a unit with two. */
  readonly rank: number;
  readonly ligand: number;
  readonly end: 1 | 2 | null;
  /** Where it projects from the middle of the view, Å, x to the right and y up. */
  readonly x: number;
  readonly y: number;
  /** Towards the reader, Å. */
  readonly z: number;
}

const at = (r: Float64Array, i: number): Vector => [r[3 * i]!, r[3 * i + 1]!, r[3 * i + 2]!];
const minus = (a: Vector, b: Vector): Vector => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
const plus = (a: Vector, b: Vector): Vector => [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
const times = (a: Vector, k: number): Vector => [a[0] * k, a[1] * k, a[2] * k];
const dot = (a: Vector, b: Vector): number => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const cross = (a: Vector, b: Vector): Vector => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];

function unit(a: Vector): Vector | null {
  const length = Math.sqrt(dot(a, a));
  return length > 1e-6 ? times(a, 1 / length) : null;
}

/** Any unit vector at right angles to `a`. */
function perpendicular(a: Vector): Vector {
  const other: Vector = Math.abs(a[0]) < 0.6 ? [1, 0, 0] : [0, 1, 0];
  return unit(cross(a, other))!;
}

function frameFrom(origin: Vector, toReader: Vector, upwards: Vector | null): SightFrame {
  const flat = upwards === null ? null : unit(minus(upwards, times(toReader, dot(upwards, toReader))));
  const up = flat ?? perpendicular(toReader);
  return { origin, toReader, up, right: cross(up, toReader) };
}

/** The direction of a ligand from its atom; an implicit hydrogen or lone pair points away from the located ones. */
export function ligandDirection(
  molecule: Molecule,
  atom: number,
  ligand: number,
  all: readonly number[],
): Vector | null {
  const r = molecule.coordinates!;
  const centre = at(r, atom);
  if (ligand >= 0) return unit(minus(at(r, ligand), centre));
  let sum: Vector = [0, 0, 0];
  for (const other of all) {
    if (other < 0) continue;
    const direction = unit(minus(at(r, other), centre));
    if (direction) sum = plus(sum, direction);
  }
  return unit(times(sum, -1));
}

function ranked(labelled: LabelledUnit, end: 1 | 2 | null): readonly RankedLigand[] {
  return labelled.ranking.filter(place => place.end === end).sort((a, b) => a.rank - b.rank);
}

/** The sight of a unit of a model in space; null without coordinates. */
export function sightFrame(molecule: Molecule, labelled: LabelledUnit): SightFrame | null {
  const r = molecule.coordinates;
  if (r === null || molecule.dimension !== 3) return null;
  const { unit: stereo } = labelled;
  const [first, second] = stereo.ends;
  if (first === undefined) return null;
  if (second === undefined) {
    const ligands = labelled.ranking.length > 0 ? ranked(labelled, null).map(l => l.ligand) : first.ligands;
    const last = ligands[ligands.length - 1];
    const origin = at(r, first.atom);
    if (last === undefined) return frameFrom(origin, [0, 0, 1], null);
    const away = ligandDirection(molecule, first.atom, last, ligands) ?? [0, 0, -1];
    return frameFrom(origin, times(away, -1), ligandDirection(molecule, first.atom, ligands[0]!, ligands));
  }
  const front = at(r, first.atom);
  const rear = at(r, second.atom);
  const middle = times(plus(front, rear), 0.5);
  const along = unit(minus(rear, front)) ?? [0, 0, -1];
  const top = ranked(labelled, 1)[0]?.ligand ?? first.ligands[0];
  const direction =
    top === undefined ? null : ligandDirection(molecule, first.atom, top, [...first.ligands, second.atom]);
  if (stereo.kind === 'double-bond' || stereo.planar) {
    const normal = unit(cross(along, direction ?? perpendicular(along))) ?? perpendicular(along);
    return frameFrom(middle, normal, direction);
  }
  return frameFrom(middle, times(along, -1), direction);
}

/** A point of the model in the view: x to the right, y up, z towards the reader, Å. */
export function project(frame: SightFrame, point: Vector): Vector {
  const from = minus(point, frame.origin);
  return [dot(from, frame.right), dot(from, frame.up), dot(from, frame.toReader)];
}

/** Typical length of a bond to hydrogen, Å, at which an implicit one (or a lone pair) is shown. */
const STUB_LENGTH = 1.0;

/** Where the ranked ligands of a unit stand in the view. */
export function dialPlaces(molecule: Molecule, labelled: LabelledUnit, frame: SightFrame): DialPlace[] {
  const r = molecule.coordinates!;
  const places: DialPlace[] = [];
  labelled.unit.ends.forEach((end, e) => {
    const number = labelled.unit.ends.length === 2 ? ((e + 1) as 1 | 2) : null;
    const neighbours = [...end.ligands];
    if (number !== null) neighbours.push(labelled.unit.ends[1 - e]!.atom);
    for (const { ligand, rank } of ranked(labelled, number)) {
      const direction = ligandDirection(molecule, end.atom, ligand, neighbours);
      if (direction === null) continue;
      const point = ligand >= 0 ? at(r, ligand) : plus(at(r, end.atom), times(direction, STUB_LENGTH));
      const [x, y, z] = project(frame, point);
      places.push({ rank, ligand, end: number, x, y, z });
    }
  });
  return places;
}

/** What stands for a ligand in text: "H", "a lone pair", or the atom's label. */
export function ligandText(ligand: number, label: (atom: number) => string): string {
  if (ligand >= 0) return label(ligand);
  return ligand === LONE_PAIR ? 'a lone pair' : 'H';
}
