/** Molecular formulas in the Hill order (E. A. Hill, J. Am. Chem. Soc. 1900, 22, 478). */
import { elementSymbol } from './elements.ts';
import type { Molecule } from './molecule.ts';

const CARBON = 6;
const HYDROGEN = 1;

/**
 * Hill formula with its charge ("C6H5O-", "C2H8N2+2"), implicit hydrogens counted, isotopes not told apart, dummy atoms
 * as `*` at the end. `atoms` restricts it to a part of the molecule.
 */
export function hillFormula(molecule: Molecule, atoms?: readonly number[]): string {
  const counts = new Map<number, number>();
  let charge = 0;
  const add = (atom: number): void => {
    const element = molecule.elements[atom]!;
    counts.set(element, (counts.get(element) ?? 0) + 1);
    const hydrogens = molecule.hydrogens[atom]!;
    if (hydrogens > 0) counts.set(HYDROGEN, (counts.get(HYDROGEN) ?? 0) + hydrogens);
    charge += molecule.charges[atom]!;
  };
  if (atoms) for (const atom of atoms) add(atom);
  else for (let atom = 0; atom < molecule.atomCount; atom++) add(atom);
  const organic = counts.has(CARBON);
  const rank = (element: number): string => {
    if (element === 0) return '3';
    if (organic && element === CARBON) return '0';
    if (organic && element === HYDROGEN) return '1';
    return `2${elementSymbol(element)}`;
  };
  const text = [...counts.entries()]
    .map(([element, count]) => ({
      key: rank(element),
      part: elementSymbol(element) + (count > 1 ? count : ''),
    }))
    .sort((a, b) => (a.key < b.key ? -1 : a.key > b.key ? 1 : 0))
    .map(({ part }) => part)
    .join('');
  if (charge === 0) return text;
  const size = Math.abs(charge) > 1 ? String(Math.abs(charge)) : '';
  return `${text}${charge > 0 ? '+' : '-'}${size}`;
}
