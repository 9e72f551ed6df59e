/**
 * What the hierarchical digraph needs to know of a molecule, worked out once: how many duplicate atoms each bond
 * gives, and the averaged atomic numbers of duplicates in mancude rings.
 */
import { isMetal } from '../chemistry/elements.ts';
import type { Molecule } from '../chemistry/molecule.ts';
import { mancudeDuplicates } from './mancude.ts';

export interface RankingGraph {
  /** Duplicate atoms that each bond puts on either of its atoms: its order less one, 0 where d orbitals would be involved. */
  readonly duplicates: Uint8Array;
  /** 1 for double bonds whose place in a mancude ring system is a matter of the Kekulé structure drawn. */
  readonly mancudeBond: Uint8Array;
  /** For an atom of such a bond, the mean atomic number its duplicate has over all places the bond can take; else 0. */
  readonly mancudeNumber: Float64Array;
}

const NITROGEN = 7;

/** Sum of bond orders and hydrogens of an atom. */
export function valenceOf(molecule: Molecule, atom: number): number {
  let sum = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    sum += Math.max(1, molecule.bondOrders[molecule.neighbourBonds[k]!]!);
  }
  return sum;
}

/** Normal valences of the heavier main-group elements; above them a double bond would call on d orbitals. */
function normalValence(z: number, charge: number): number | null {
  switch (z) {
    case 15:
    case 33:
    case 51:
      return charge > 0 ? 4 : 3;
    case 16:
    case 34:
    case 52:
      return charge > 0 ? 3 : 2;
    case 17:
    case 35:
    case 53:
    case 85:
      return charge > 0 ? 2 : 1;
    default:
      return null;
  }
}

function isHypervalent(molecule: Molecule, atom: number): boolean {
  const normal = normalValence(molecule.elements[atom]!, molecule.charges[atom]!);
  return normal !== null && valenceOf(molecule, atom) > normal;
}

/** Builds the ranking graph of a molecule. */
export function rankingGraph(molecule: Molecule): RankingGraph {
  const { bondCount, bondAtoms, bondOrders, elements } = molecule;
  const duplicates = new Uint8Array(bondCount);
  let anyRingCandidate = false;
  const pentavalent = new Uint8Array(molecule.atomCount);
  for (let b = 0; b < bondCount; b++) {
    const order = bondOrders[b]!;
    if (order < 2) continue;
    const first = bondAtoms[2 * b]!;
    const second = bondAtoms[2 * b + 1]!;
    if (isMetal(elements[first]!) || isMetal(elements[second]!)) continue;
    // P=O, S=O, P=S, S=N and their like: contributions of d orbitals are neglected (design.md).
    if (order === 2 && (isHypervalent(molecule, first) || isHypervalent(molecule, second))) continue;
    // Nitrogen has no fifth bond: of two double bonds drawn at one N, the second stands for N⁺–O⁻.
    const crowded = fiveBondedNitrogen(molecule, first)
      ? first
      : fiveBondedNitrogen(molecule, second)
        ? second
        : -1;
    if (crowded >= 0 && order === 2) {
      if (pentavalent[crowded] === 1) continue;
      pentavalent[crowded] = 1;
    }
    duplicates[b] = order - 1;
    if (order === 2) anyRingCandidate = true;
  }
  const { mancudeBond, mancudeNumber } = anyRingCandidate
    ? mancudeDuplicates(molecule, duplicates)
    : { mancudeBond: new Uint8Array(bondCount), mancudeNumber: new Float64Array(molecule.atomCount) };
  return { duplicates, mancudeBond, mancudeNumber };
}

function fiveBondedNitrogen(molecule: Molecule, atom: number): boolean {
  return (
    molecule.elements[atom] === NITROGEN && molecule.charges[atom] === 0 && valenceOf(molecule, atom) === 5
  );
}
