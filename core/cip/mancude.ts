/**
 * Duplicate atoms in mancude rings (P-92.1.4.4): a duplicate gets the mean of the atomic numbers it would have if the
 * double bond stood at each of its possible places, so that no ranking rests on the Kekulé structure drawn.
 *
 * A place is possible when some Kekulé structure of the ring system has a double bond there: it is double as drawn,
 * or it lies on a cycle of ring bonds that are alternately double and single.
 */
import type { Molecule } from '../chemistry/molecule.ts';

/** Steps after which the search for an alternating cycle through one bond gives up; ordinary ring systems need under a hundred. */
const SEARCH_LIMIT = 20_000;

export interface MancudeDuplicates {
  readonly mancudeBond: Uint8Array;
  readonly mancudeNumber: Float64Array;
}

/** Finds the bonds whose double bond can move, and the averaged atomic numbers. `duplicates` as in `RankingGraph`. */
export function mancudeDuplicates(molecule: Molecule, duplicates: Uint8Array): MancudeDuplicates {
  const {
    atomCount,
    bondCount,
    bondAtoms,
    bondOrders,
    neighbourStart,
    neighbours,
    neighbourBonds,
    elements,
  } = molecule;
  const mancudeBond = new Uint8Array(bondCount);
  const mancudeNumber = new Float64Array(atomCount);
  // partner[a]: the atom to which a has its one double bond.
  const partner = new Int32Array(atomCount).fill(-1);
  const pairedBy = new Int32Array(atomCount).fill(-1);
  for (let b = 0; b < bondCount; b++) {
    if (bondOrders[b] !== 2 || duplicates[b] !== 1) continue;
    const first = bondAtoms[2 * b]!;
    const second = bondAtoms[2 * b + 1]!;
    if (partner[first] !== -1 || partner[second] !== -1) {
      // A cumulated atom: its double bonds cannot move, nor can that of its other neighbour.
      for (const atom of [first, second]) {
        const other = partner[atom]!;
        if (other >= 0) partner[other] = -2;
        partner[atom] = -2;
      }
      continue;
    }
    partner[first] = second;
    partner[second] = first;
    pairedBy[first] = b;
    pairedBy[second] = b;
  }
  const movable = new Uint8Array(bondCount);
  const onPath = new Uint8Array(atomCount);
  let steps = 0;

  /** Extends an alternating path that must leave `at` by a single bond, marks every bond of the cycle when it closes on `goal`. */
  const close = (at: number, goal: number, trail: number[]): boolean => {
    if (++steps > SEARCH_LIMIT) return false;
    for (let k = neighbourStart[at]!; k < neighbourStart[at + 1]!; k++) {
      const next = neighbours[k]!;
      const bond = neighbourBonds[k]!;
      if (bond === pairedBy[at] || partner[next]! < 0) continue;
      if (next === goal) {
        for (const b of trail) movable[b] = 1;
        movable[bond] = 1;
        return true;
      }
      const beyond = partner[next]!;
      if (onPath[next] === 1 || onPath[beyond] === 1) continue;
      onPath[next] = 1;
      onPath[beyond] = 1;
      trail.push(bond, pairedBy[next]!);
      const closed = close(beyond, goal, trail);
      trail.length -= 2;
      onPath[next] = 0;
      onPath[beyond] = 0;
      if (closed) return true;
    }
    return false;
  };

  // Each double bond, and each single bond between two doubly bonded atoms, is tried as part of an alternating cycle.
  for (let b = 0; b < bondCount; b++) {
    if (movable[b] === 1) continue;
    const first = bondAtoms[2 * b]!;
    const second = bondAtoms[2 * b + 1]!;
    if (partner[first]! < 0 || partner[second]! < 0) continue;
    steps = 0;
    if (pairedBy[first] === b) {
      onPath[first] = 1;
      onPath[second] = 1;
      close(second, first, [b]);
      onPath[first] = 0;
      onPath[second] = 0;
    } else {
      // first = p … second = q: the cycle runs p⇒first–second⇒q and back to p by single bonds at both ends.
      const p = partner[first]!;
      const q = partner[second]!;
      if (p === second || q === first) continue;
      for (const atom of [first, second, p, q]) onPath[atom] = 1;
      close(q, p, [pairedBy[first]!, b, pairedBy[second]!]);
      for (const atom of [first, second, p, q]) onPath[atom] = 0;
    }
  }

  for (let atom = 0; atom < atomCount; atom++) {
    const bond = pairedBy[atom]!;
    if (bond < 0 || movable[bond] === 0) continue;
    let sum = 0;
    let places = 0;
    for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
      if (movable[neighbourBonds[k]!] === 1) {
        sum += elements[neighbours[k]!]!;
        places++;
      }
    }
    mancudeBond[bond] = 1;
    mancudeNumber[atom] = sum / places;
  }
  return { mancudeBond, mancudeNumber };
}
