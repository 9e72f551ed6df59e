/** A molecule with one atom more, for trial rankings: no coordinates, no labels, only what a digraph needs. */
import { assembleMolecule, type Molecule } from '../chemistry/molecule.ts';

/** Adds an atom of the given element and implicit hydrogens, singly bound to each of `neighbours`; its index is the old atom count. */
export function withAtom(
  molecule: Molecule,
  element: number,
  hydrogens: number,
  neighbours: readonly number[],
): Molecule {
  const atom = molecule.atomCount;
  const bondAtoms = new Uint32Array(molecule.bondAtoms.length + 2 * neighbours.length);
  bondAtoms.set(molecule.bondAtoms);
  neighbours.forEach((neighbour, k) => {
    bondAtoms[molecule.bondAtoms.length + 2 * k] = atom;
    bondAtoms[molecule.bondAtoms.length + 2 * k + 1] = neighbour;
  });
  const bonds = molecule.bondCount + neighbours.length;
  const bondOrders = new Uint8Array(bonds).fill(1);
  bondOrders.set(molecule.bondOrders);
  return assembleMolecule({
    ...molecule,
    elements: grown(molecule.elements, new Uint8Array(atom + 1), element),
    charges: grown(molecule.charges, new Int8Array(atom + 1), 0),
    isotopes: grown(molecule.isotopes, new Uint16Array(atom + 1), 0),
    radicals: grown(molecule.radicals, new Uint8Array(atom + 1), 0),
    hydrogens: grown(molecule.hydrogens, new Uint8Array(atom + 1), hydrogens),
    bondAtoms,
    bondOrders,
    bondMarks: new Uint8Array(bonds),
    coordinates: null,
    dimension: 0,
    labels: null,
    occupancies: null,
    doubtfulBonding: null,
    residues: null,
    uncertainty: null,
  });
}

function grown<T extends Uint8Array | Int8Array | Uint16Array>(old: T, longer: T, last: number): T {
  longer.set(old);
  longer[old.length] = last;
  return longer;
}
