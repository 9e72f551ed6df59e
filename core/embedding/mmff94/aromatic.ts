/**
 * Aromatic rings as MMFF94 counts them: rings of five and six with exactly six π electrons.
 *
 * A double bond within the ring gives two; one that leaves the ring counts one only where it belongs to a ring already
 * found aromatic; in a ring of five one atom without a double bond gives its lone pair
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, appendix).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import { bondBetween } from '../../chemistry/molecule.ts';

export interface AromaticRing {
  /** Atoms in ring order. */
  readonly atoms: readonly number[];
  /** The atom of a ring of five that gives a lone pair; -1 in a ring of six. */
  readonly lonePairAtom: number;
}

export interface Aromaticity {
  readonly rings: readonly AromaticRing[];
  /** 1 for bonds within an aromatic ring. */
  readonly bonds: Uint8Array;
}

/** Finds the aromatic rings of a molecule with localised double bonds. */
export function aromaticity(molecule: Molecule): Aromaticity {
  const bonds = new Uint8Array(molecule.bondCount);
  const rings: AromaticRing[] = [];
  let waiting = candidateRings(molecule);
  for (let found = true; found; ) {
    found = false;
    const rest: number[][] = [];
    for (const atoms of waiting) {
      const lonePairAtom = judge(molecule, atoms, bonds);
      if (lonePairAtom === null) {
        rest.push(atoms);
        continue;
      }
      rings.push({ atoms, lonePairAtom });
      for (let i = 0; i < atoms.length; i++)
        bonds[bondBetween(molecule, atoms[i]!, atoms[(i + 1) % atoms.length]!)] = 1;
      found = true;
    }
    waiting = rest;
  }
  return { rings, bonds };
}

/** The lone-pair atom (-1 for a ring of six), or null when the ring is not aromatic. */
function judge(molecule: Molecule, atoms: readonly number[], aromaticBond: Uint8Array): number | null {
  let electrons = 0;
  let lonePairAtom = -1;
  for (let i = 0; i < atoms.length; i++) {
    const atom = atoms[i]!;
    const before = atoms[(i + atoms.length - 1) % atoms.length]!;
    const after = atoms[(i + 1) % atoms.length]!;
    let double = -1;
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      if (molecule.bondOrders[molecule.neighbourBonds[k]!] === 2) {
        if (double !== -1) return null;
        double = k;
      }
    }
    if (double >= 0) {
      const partner = molecule.neighbours[double]!;
      if (partner === before || partner === after || aromaticBond[molecule.neighbourBonds[double]!] === 1)
        electrons++;
      else return null;
    } else if (lonePairAtom === -1 && atoms.length === 5 && givesLonePair(molecule, atom)) {
      lonePairAtom = atom;
      electrons += 2;
    } else return null;
  }
  return electrons === 6 ? lonePairAtom : null;
}

function givesLonePair(molecule: Molecule, atom: number): boolean {
  const z = molecule.elements[atom]!;
  const neighbours = molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
  if (z === 7) return neighbours === 3 || (neighbours === 2 && molecule.charges[atom] === -1);
  return (z === 8 || z === 16) && neighbours === 2;
}

/** Rings of five and six without chords whose atoms all could be flat. */
function candidateRings(molecule: Molecule): number[][] {
  const found: number[][] = [];
  const { neighbourStart, neighbours, elements } = molecule;
  const flat = (atom: number): boolean => {
    const z = elements[atom]!;
    const bonds = neighbourStart[atom + 1]! - neighbourStart[atom]!;
    return z === 6 ? bonds === 3 : (z === 7 || z === 8 || z === 16) && bonds <= 3;
  };
  const path: number[] = [];
  const walk = (atom: number, first: number): void => {
    path.push(atom);
    for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
      const next = neighbours[k]!;
      if (next === first && path.length >= 5 && path[1]! < path.at(-1)!) {
        if (!hasChord(molecule, path)) found.push([...path]);
      } else if (next > first && path.length < 6 && !path.includes(next) && flat(next)) walk(next, first);
    }
    path.pop();
  };
  for (let atom = 0; atom < molecule.atomCount; atom++) if (flat(atom)) walk(atom, atom);
  return found.sort((a, b) => b.length - a.length);
}

function hasChord(molecule: Molecule, ring: readonly number[]): boolean {
  for (let i = 0; i < ring.length; i++) {
    for (let j = i + 2; j < ring.length; j++) {
      if (i === 0 && j === ring.length - 1) continue;
      if (bondBetween(molecule, ring[i]!, ring[j]!) >= 0) return true;
    }
  }
  return false;
}
