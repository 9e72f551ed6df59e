/** What every part of perception looks up about a molecule, worked out once. */
import { type Molecule, hydrogenCount, IMPLICIT_HYDROGEN } from '../chemistry/molecule.ts';
import { ringInfo, type RingInfo } from '../chemistry/rings.ts';
import { symmetryClasses } from '../chemistry/symmetry.ts';
import { mancudeDuplicates } from '../cip/mancude.ts';
import type { Settings } from '../docket.ts';
import type { Ligand } from './unit.ts';

export interface PerceptionContext {
  readonly molecule: Molecule;
  readonly settings: Settings;
  readonly rings: RingInfo;
  /** Constitutional class of each atom. */
  readonly classes: Int32Array;
  /** 1 for double bonds that can stand elsewhere in their ring system. */
  readonly movable: Uint8Array;
  /** Coordinates in space, null for drawings and bare notation. */
  readonly space: Float64Array | null;
}

export function perceptionContext(molecule: Molecule, settings: Settings): PerceptionContext {
  const rings = ringInfo(molecule);
  const ones = molecule.bondOrders.map(order => (order === 2 ? 1 : 0));
  return {
    molecule,
    settings,
    rings,
    classes: symmetryClasses(molecule),
    movable: mancudeDuplicates(molecule, ones).mancudeBond,
    space: molecule.dimension === 3 ? molecule.coordinates : null,
  };
}

/** Number of bonds of order two at an atom. */
export function doubleBondsAt(molecule: Molecule, atom: number): number {
  let count = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!] === 2) count++;
  }
  return count;
}

/** Sum of bond orders, implicit hydrogens included. */
export function valence(molecule: Molecule, atom: number): number {
  let sum = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    sum += Math.max(1, molecule.bondOrders[molecule.neighbourBonds[k]!]!);
  }
  return sum;
}

/** Hydrogens that are alike: listed without a stated isotope, and implicit ones. */
export function plainHydrogens(molecule: Molecule, atom: number): number {
  let count = hydrogenCount(molecule, atom);
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] === 1 && molecule.isotopes[neighbour] !== 0) count--;
  }
  return count;
}

/** Whether an atom is a hydrogen that ranks as plain hydrogen. */
export function isPlainHydrogen(molecule: Molecule, ligand: Ligand): boolean {
  return (
    ligand === IMPLICIT_HYDROGEN ||
    (ligand >= 0 && molecule.elements[ligand] === 1 && molecule.isotopes[ligand] === 0)
  );
}

/** Whether an atom is doubly bonded or part of a mancude system: it can conjugate with a lone pair beside it. */
export function isUnsaturated(molecule: Molecule, atom: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!]! >= 2) return true;
  }
  return false;
}
