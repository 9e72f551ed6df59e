/**
 * Other resonance forms of amidinium, guanidinium, thiocarboxylate and like groups: X=C–Y with a charge that either end
 * can bear.
 *
 * P-92.1.4.4 averages duplicate atoms over Kekulé structures of mancude rings only. Elsewhere the ranking is that of
 * the form drawn; where another form would give another letter, the reader has to know.
 */
import { degree, type Molecule } from '../chemistry/molecule.ts';

/** Most groups whose other form is tried. */
const MOST_GROUPS = 8;

/** The molecule with one group in its other form, for each such group. */
export function resonanceForms(molecule: Molecule): Molecule[] {
  const { bondAtoms, bondOrders, elements, charges } = molecule;
  let charged = false;
  for (let i = 0; i < molecule.atomCount && !charged; i++) charged = charges[i] !== 0;
  if (!charged) return [];
  const forms: Molecule[] = [];
  for (let double = 0; double < molecule.bondCount && forms.length < MOST_GROUPS; double++) {
    if (bondOrders[double] !== 2) continue;
    for (const side of [0, 1]) {
      const x = bondAtoms[2 * double + side]!;
      const c = bondAtoms[2 * double + 1 - side]!;
      if (elements[c] !== 6 || !bearsCharge(elements[x]!)) continue;
      for (let k = molecule.neighbourStart[c]!; k < molecule.neighbourStart[c + 1]!; k++) {
        const y = molecule.neighbours[k]!;
        const single = molecule.neighbourBonds[k]!;
        if (y === x || bondOrders[single] !== 1 || !bearsCharge(elements[y]!)) continue;
        const cation = charges[x] === 1 && charges[y] === 0 && elements[x] === 7 && elements[y] === 7;
        const anion = charges[x] === 0 && charges[y] === -1;
        if (!cation && !anion) continue;
        if (elements[x] === elements[y] && isBare(molecule, x) && isBare(molecule, y)) continue;
        const orders = bondOrders.slice();
        orders[double] = 1;
        orders[single] = 2;
        const shifted = charges.slice();
        shifted[x]!--;
        shifted[y]!++;
        forms.push({ ...molecule, bondOrders: orders, charges: shifted });
      }
    }
  }
  return forms;
}

function bearsCharge(z: number): boolean {
  return z === 7 || z === 8 || z === 16 || z === 34;
}

/** An end that carries nothing: exchanging two such ends of one element changes no set. */
function isBare(molecule: Molecule, atom: number): boolean {
  return degree(molecule, atom) === 1 && molecule.hydrogens[atom] === 0 && molecule.isotopes[atom] === 0;
}
