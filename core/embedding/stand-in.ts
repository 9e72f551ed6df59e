/**
 * The force field of a molecule for building: MMFF94 where it has types for all atoms; else with a lighter element of the
 * same group standing in for an atom that it does not know, its bonds lengthened by the difference of the covalent radii.
 */
import { elementSymbol } from '../chemistry/elements.ts';
import { degree, type Molecule } from '../chemistry/molecule.ts';
import { Mmff94 } from './mmff94/energy.ts';
import type { Mmff94Parameters } from './mmff94/parameters.ts';
import { TypingError } from './mmff94/typing.ts';
import { covalentRadius } from './radii.ts';

export interface BuildingField {
  /** Null when no stand-in helps. */
  readonly field: Mmff94 | null;
  /** True when the energy is that of MMFF94 and of nothing else. */
  readonly exact: boolean;
  readonly warnings: readonly string[];
}

/** The element that stands in for another with this number of neighbours; 0 for none. */
function standIn(z: number, neighbours: number): number {
  switch (z) {
    case 34:
    case 52:
      return 16;
    case 33:
    case 51:
      return 15;
    case 32:
    case 50:
    case 82:
      return 14;
    case 5:
      return neighbours === 4 ? 6 : 0;
    case 85:
      return 53;
    default:
      return 0;
  }
}

/** The force field for building and relaxing a molecule with all hydrogens listed. */
export function buildingField(molecule: Molecule, parameters: Mmff94Parameters): BuildingField {
  let model = molecule;
  const replaced: number[] = [];
  const warnings: string[] = [];
  for (;;) {
    try {
      const field = new Mmff94(model, parameters);
      for (const atom of replaced) {
        const longer = covalentRadius(molecule.elements[atom]!) - covalentRadius(model.elements[atom]!);
        for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
          field.bonds.length[molecule.neighbourBonds[k]!]! += longer;
        }
      }
      return { field, exact: replaced.length === 0, warnings };
    } catch (error) {
      if (!(error instanceof TypingError)) {
        if (!(error instanceof Error)) throw error;
        return { field: null, exact: false, warnings: [...warnings, error.message] };
      }
      const { atom } = error;
      const z = molecule.elements[atom]!;
      const other = replaced.includes(atom) ? 0 : standIn(z, degree(molecule, atom));
      if (other === 0) return { field: null, exact: false, warnings: [...warnings, error.message] };
      warnings.push(
        `${error.message}; ${elementSymbol(other)} stands in for it, so the energy is no MMFF94 energy`,
      );
      const elements = model.elements.slice();
      elements[atom] = other;
      const charges = model.charges;
      replaced.push(atom);
      model = { ...model, elements, charges };
    }
  }
}
