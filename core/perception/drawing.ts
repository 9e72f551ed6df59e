/**
 * Configuration from a drawing: wedges, hashed and wavy bonds, and double bonds by their geometry in the plane.
 *
 * Graphical representation of stereochemical configuration (IUPAC Recommendations 2006, Pure Appl. Chem. 78, 1897): a
 * wedge belongs to the atom at its narrow end. What a drawing leaves ambiguous is unspecified, with a warning.
 */
import { BondMark, bondBetween, type Molecule } from '../chemistry/molecule.ts';
import { torsion } from '../geometry/torsion.ts';
import type { CentreCandidate } from './centres.ts';
import type { PairCandidate } from './double-bonds.ts';
import type { StereoUnit } from './unit.ts';

/** |V| on unit vectors, marked bonds rising or falling by their own length, below which a drawing is taken as ambiguous. */
const LEAST_VOLUME = 0.1;
/** |sin| of the angle between a bond and the axis below which it is drawn in line with it. */
const LEAST_SINE = 0.05;

/** Height at which the far end of a marked bond is taken, in bond lengths, as seen from `atom`: 1 for a wedge, -1 for a hashed bond, 0 without a mark or where its narrow end is at the other atom. */
export function markHeight(molecule: Molecule, atom: number, ligand: number): 1 | -1 | 0 {
  switch (markFrom(molecule, atom, ligand)) {
    case BondMark.wedge:
      return 1;
    case BondMark.hash:
      return -1;
    default:
      return 0;
  }
}

function markFrom(molecule: Molecule, atom: number, ligand: number): number {
  const bond = ligand < 0 ? -1 : bondBetween(molecule, atom, ligand);
  if (bond < 0 || molecule.bondAtoms[2 * bond] !== atom) return BondMark.none;
  return molecule.bondMarks[bond]!;
}

type Point = [number, number, number];

function direction(molecule: Molecule, from: number, to: number): Point | null {
  const r = molecule.coordinates!;
  const x = r[3 * to]! - r[3 * from]!;
  const y = r[3 * to + 1]! - r[3 * from + 1]!;
  const length = Math.hypot(x, y);
  return length > 1e-6 ? [x / length, y / length, 0] : null;
}

/** A centre as it is drawn. */
export function drawnCentre(molecule: Molecule, candidate: CentreCandidate): StereoUnit {
  const { atom, ligands, labile } = candidate;
  const warnings: string[] = [];
  const points: Point[] = [];
  let marked = 0;
  let wavy = false;
  for (const ligand of ligands) {
    if (ligand < 0) continue;
    const point = direction(molecule, atom, ligand);
    if (point === null) {
      warnings.push('two atoms lie on one another in the drawing');
      continue;
    }
    point[2] = markHeight(molecule, atom, ligand);
    if (point[2] !== 0) marked++;
    wavy ||= markFrom(molecule, atom, ligand) === BondMark.wavy;
    points.push(point);
  }
  let sense: 1 | -1 | 0 = 0;
  if (marked > 0 && !wavy && points.length >= 3) {
    const volume = points.length === 4 ? fourVolume(points) : threeVolume(points);
    if (points.length === 3 && isReentrant(points)) {
      warnings.push(
        'three bonds are drawn to one side of this centre with the mark on the middle one; it counts as unspecified (mark an outer bond)',
      );
    } else if (Math.abs(volume) < LEAST_VOLUME) {
      warnings.push('the wedges at this centre can be read either way; it counts as unspecified');
    } else {
      // Hydrogen and lone pair stand last in the list, so the volume of the drawn ligands is that of the listed order.
      sense = volume < 0 ? 1 : -1;
    }
  }
  return {
    kind: 'centre',
    atoms: [atom],
    ends: [{ atom, ligands }],
    planar: false,
    ...drawn(sense, labile, warnings),
  };
}

/**
 * Whether three bonds lie within a half plane and the one between the others alone is marked: the mark can be meant as
 * if the bonds were spread evenly, or as drawn, with opposite results.
 */
function isReentrant(points: readonly Point[]): boolean {
  for (let i = 0; i < 3; i++) {
    const middle = points[i]!;
    const a = points[(i + 1) % 3]!;
    const b = points[(i + 2) % 3]!;
    if (middle[2] === 0 || a[2] !== 0 || b[2] !== 0) continue;
    const cross = (p: Point, q: Point): number => p[0] * q[1] - p[1] * q[0];
    // The middle bond lies within the angle of less than 180° between the outer ones.
    const turn = Math.sign(cross(a, b));
    if (turn !== 0 && cross(a, middle) * turn > 0 && cross(middle, b) * turn > 0) return true;
  }
  return false;
}

function fourVolume(points: readonly Point[]): number {
  const [a, b, c, d] = points as [Point, Point, Point, Point];
  const from = (p: Point): Point => [p[0] - d[0], p[1] - d[1], p[2] - d[2]];
  return triple(from(a), from(b), from(c)) / 4;
}

/** Three drawn ligands: the fourth lies opposite to their sum. */
function threeVolume(points: readonly Point[]): number {
  const [a, b, c] = points as [Point, Point, Point];
  const sum: Point = [a[0] + b[0] + c[0], a[1] + b[1] + c[1], a[2] + b[2] + c[2]];
  const length = Math.max(1e-6, Math.hypot(...sum));
  return fourVolume([a, b, c, [-sum[0] / length, -sum[1] / length, -sum[2] / length]]);
}

function triple(a: Point, b: Point, c: Point): number {
  return (
    a[0] * (b[1] * c[2] - b[2] * c[1]) +
    a[1] * (b[2] * c[0] - b[0] * c[2]) +
    a[2] * (b[0] * c[1] - b[1] * c[0])
  );
}

/** A double bond, cumulene or axis as it is drawn. */
export function drawnPair(molecule: Molecule, pair: PairCandidate): StereoUnit {
  const warnings: string[] = [];
  let sense: 1 | -1 | 0 = 0;
  let angle: number | null = null;
  if (!isLeftOpen(molecule, pair)) {
    const measured = pair.planar ? planarTorsion(molecule, pair) : axialTorsion(molecule, pair);
    if (measured === null) {
      if (pair.planar)
        warnings.push('a ligand is drawn in line with the double bond; it counts as unspecified');
    } else {
      angle = measured;
      const radians = (measured * Math.PI) / 180;
      sense = (pair.planar ? Math.cos(radians) : Math.sin(radians)) > 0 ? 1 : -1;
    }
  }
  return {
    kind: pair.kind,
    atoms: pair.ends,
    ends: [
      { atom: pair.ends[0], ligands: pair.ligands[0] },
      { atom: pair.ends[1], ligands: pair.ligands[1] },
    ],
    planar: pair.kind === 'cumulene' && pair.planar,
    ...drawn(sense, pair.labile, warnings),
    torsion: pair.planar ? angle : null,
  };
}

/** A crossed double bond, or a wavy bond at one of its ends. */
function isLeftOpen(molecule: Molecule, pair: PairCandidate): boolean {
  const path = [pair.ends[0], ...pair.between, pair.ends[1]];
  for (let i = 1; i < path.length; i++) {
    const bond = bondBetween(molecule, path[i - 1]!, path[i]!);
    if (bond >= 0 && molecule.bondMarks[bond] === BondMark.crossed) return true;
  }
  return pair.ends.some((end, e) =>
    pair.ligands[e]!.some(ligand => {
      const bond = ligand < 0 ? -1 : bondBetween(molecule, end, ligand);
      return bond >= 0 && molecule.bondMarks[bond] === BondMark.wavy;
    }),
  );
}

function planarTorsion(molecule: Molecule, pair: PairCandidate): number | null {
  let turns = 0;
  const sides: number[] = [];
  for (let e = 0; e < 2; e++) {
    const end = pair.ends[e]!;
    const along = direction(molecule, end, pair.ends[1 - e]!);
    let side = 0;
    let place = -1;
    pair.ligands[e]!.forEach((ligand, i) => {
      if (ligand < 0 || side !== 0 || along === null) return;
      const to = direction(molecule, end, ligand);
      if (to === null) return;
      const sine = along[0] * to[1] - along[1] * to[0];
      if (Math.abs(sine) < LEAST_SINE) return;
      side = Math.sign(sine);
      place = i;
    });
    if (side === 0) return null;
    turns += place;
    // Seen from either end the other side has the other sign.
    sides.push(e === 0 ? side : -side);
  }
  const same = (sides[0] === sides[1]) === (turns % 2 === 0);
  return same ? 0 : 180;
}

/** Torsion between the first ligands, marked bonds raised or lowered; null where no mark decides. */
function axialTorsion(molecule: Molecule, pair: PairCandidate): number | null {
  const r = new Float64Array(12);
  const source = molecule.coordinates!;
  let marked = false;
  let shift = 0;
  for (let e = 0; e < 2; e++) {
    const end = pair.ends[e]!;
    const ligands = pair.ligands[e]!;
    const marks = ligands.map(ligand => markHeight(molecule, end, ligand));
    const at = ligands.findIndex(ligand => ligand >= 0);
    if (at < 0) return null;
    if (at === 1) shift += 180;
    let height: number = marks[at]!;
    // Where only the other ligand is marked, this one is on the other side.
    if (height === 0) height = -(marks[1 - at] ?? 0);
    if (height !== 0) marked = true;
    const to = direction(molecule, end, ligands[at]!);
    const own = e === 0 ? 1 : 2;
    const far = e === 0 ? 0 : 3;
    for (let c = 0; c < 2; c++) {
      r[3 * own + c] = source[3 * end + c]!;
      r[3 * far + c] = source[3 * end + c]! + (to === null ? 0 : to[c]!);
    }
    r[3 * far + 2] = height;
  }
  if (!marked) return null;
  const angle = torsion(r, 0, 1, 2, 3);
  if (Number.isNaN(angle) || Math.abs(Math.sin((angle * Math.PI) / 180)) < LEAST_SINE) return null;
  const turned = angle + shift;
  return turned > 180 ? turned - 360 : turned;
}

function drawn(
  sense: 1 | -1 | 0,
  labile: string | null,
  warnings: readonly string[],
): Omit<StereoUnit, 'kind' | 'atoms' | 'ends' | 'planar'> {
  return {
    state: sense === 0 ? 'unspecified' : 'clear',
    sense,
    basis: 'drawing',
    signedVolume: null,
    sigma: null,
    firmness: null,
    torsion: null,
    torsionSigma: null,
    labile,
    warnings,
  };
}
