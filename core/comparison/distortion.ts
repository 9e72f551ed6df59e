/** Distortion that precedes inversion: firmness set against what an undistorted unit of the same rings would have. */
import { bondBetween, type Molecule, neighboursOf } from '../chemistry/molecule.ts';
import type { LabelledUnit } from '../docket.ts';

/** |V| on unit vectors at ideal tetrahedral angles (design.md, Conventions of measurement). */
const TETRAHEDRAL_VOLUME = 0.7698;
/** Share of the ideal firmness below which a unit is called distorted. Ours, no source. */
export const DISTORTED_SHARE = 0.75;

const TETRAHEDRAL_ANGLE = 109.47;
/** Angles in degrees inside a three- and a four-membered ring, and those left to the other pairs of bonds (common practice, no source). */
const SMALL_RINGS = { three: { inside: 60, outside: 117 }, four: { inside: 90, outside: 114 } } as const;

/** Firmness that an undistorted unit would have; 1 for units other than centres, null without ligands to judge by. */
export function idealFirmness(molecule: Molecule, labelled: LabelledUnit): number | null {
  const { unit } = labelled;
  if (unit.firmness === null) return null;
  if (unit.kind !== 'centre') return unit.kind === 'double-bond' || unit.kind === 'cumulene' ? 1 : null;
  const end = unit.ends[0];
  if (!end) return null;
  const ligands = end.ligands;
  let outside = TETRAHEDRAL_ANGLE;
  const inside = new Map<number, number>();
  for (let i = 0; i < ligands.length; i++) {
    for (let j = i + 1; j < ligands.length; j++) {
      const ring = smallRing(molecule, end.atom, ligands[i]!, ligands[j]!);
      if (ring === null) continue;
      inside.set(i * 4 + j, ring.inside);
      outside = Math.max(outside, ring.outside);
    }
  }
  if (inside.size === 0) return 1;
  const cosine = (i: number, j: number): number => {
    const angle = inside.get(i < j ? i * 4 + j : j * 4 + i) ?? outside;
    return Math.cos((angle * Math.PI) / 180);
  };
  // The four-neighbour volume is the mean of the four triples' (the centre being inside); hydrogens count as directions.
  let sum = 0;
  let triples = 0;
  for (let skip = 0; skip < ligands.length; skip++) {
    const [i, j, k] = [0, 1, 2, 3].filter(index => index !== skip && index < ligands.length);
    if (i === undefined || j === undefined || k === undefined) continue;
    const [a, b, c] = [cosine(i, j), cosine(i, k), cosine(j, k)];
    sum += Math.sqrt(Math.max(0, 1 + 2 * a * b * c - a * a - b * b - c * c));
    triples++;
  }
  return triples === 0 ? null : Math.min(1, sum / triples / TETRAHEDRAL_VOLUME);
}

function smallRing(
  molecule: Molecule,
  centre: number,
  first: number,
  second: number,
): { inside: number; outside: number } | null {
  if (first < 0 || second < 0) return null;
  if (bondBetween(molecule, first, second) !== -1) return SMALL_RINGS.three;
  for (const other of neighboursOf(molecule, first)) {
    if (other !== centre && bondBetween(molecule, other, second) !== -1) return SMALL_RINGS.four;
  }
  return null;
}

/** The ideal firmness of a unit that falls far below it, null for one that does not. */
export function distortionOf(molecule: Molecule, labelled: LabelledUnit): number | null {
  const ideal = idealFirmness(molecule, labelled);
  const { firmness } = labelled.unit;
  if (ideal === null || firmness === null) return null;
  return firmness < DISTORTED_SHARE * ideal ? ideal : null;
}
