/** pro-R and pro-S, Re and Si: the sides of a prochiral atom (IUPAC 1996, Basic Terminology of Stereochemistry: prochirality), for any way of ranking. */
import type { Molecule } from '../chemistry/molecule.ts';
import { signedVolume, tripleProduct } from '../geometry/signed-volume.ts';

/** Ranks the neighbours of an atom, the highest first; those that no rule separates share a rank. */
export type RankNeighbours = (
  molecule: Molecule,
  atom: number,
) => readonly { readonly atom: number; readonly rank: number }[];

/**
 * Of two like ligands at a tetrahedral atom, which is pro-R: ranking it above its twin, and nothing else, makes the centre R.
 *
 * @returns null unless the atom has four located neighbours of which exactly two share a rank.
 */
export function proRS(
  molecule: Molecule,
  centre: number,
  rank: RankNeighbours,
): { readonly proR: number; readonly proS: number } | null {
  const r = molecule.coordinates;
  const ranked = [...rank(molecule, centre)].sort((a, b) => a.rank - b.rank);
  if (!r || ranked.length !== 4) return null;
  const ties: number[] = [];
  for (let k = 0; k + 1 < 4; k++) if (ranked[k]!.rank === ranked[k + 1]!.rank) ties.push(k);
  const tie = ties[0];
  if (ties.length !== 1 || tie === undefined) return null;
  const volume = signedVolume(
    r,
    centre,
    ranked.map(({ atom }) => atom),
  );
  if (!Number.isFinite(volume) || volume === 0) return null;
  const first = ranked[tie]!.atom;
  const second = ranked[tie + 1]!.atom;
  // Negative is R for the order as it stands, with `first` above `second`.
  return volume < 0 ? { proR: first, proS: second } : { proR: second, proS: first };
}

/**
 * The face of a trigonal atom that a point sees: Re where the three neighbours run clockwise in order of rank.
 *
 * @param from x, y, z of the point, Å.
 * @returns null unless the atom has three located neighbours of different rank.
 */
export function faceFrom(
  molecule: Molecule,
  atom: number,
  from: readonly [number, number, number],
  rank: RankNeighbours,
): 'Re' | 'Si' | null {
  const r = molecule.coordinates;
  const ranked = [...rank(molecule, atom)].sort((a, b) => a.rank - b.rank);
  if (!r || ranked.length !== 3) return null;
  if (ranked[0]!.rank === ranked[1]!.rank || ranked[1]!.rank === ranked[2]!.rank) return null;
  const points = new Float64Array(12);
  points.set(from, 0);
  ranked.forEach(({ atom: ligand }, k) => {
    for (let x = 0; x < 3; x++) points[3 * k + 3 + x] = r[3 * ligand + x]!;
  });
  // Seen from the point, the three run clockwise where the volume about it is positive.
  const volume = tripleProduct(points, 0, 1, 2, 3);
  if (!Number.isFinite(volume) || volume === 0) return null;
  return volume > 0 ? 'Re' : 'Si';
}
