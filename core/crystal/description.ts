/** What a file says of a crystal beside its atoms: cell, symmetry, absolute structure, sample. */
import type { Measured } from '../formats/cif-syntax.ts';
import type { Cell } from './cell.ts';
import type { SymmetryOperator } from './operator.ts';

/** Real and imaginary part of the anomalous dispersion of an element, electrons. */
export interface Dispersion {
  readonly real: number;
  readonly imaginary: number;
}

/** What the author declared of the configuration (`_chemical_absolute_configuration`, core CIF dictionary). */
export type DeclaredConfiguration = 'ad' | 'rm' | 'rmad' | 'syn' | 'unk';

export interface CrystalDescription {
  /** Null where the file gives no usable cell. */
  readonly cell: Cell | null;
  /** In the order of the file, so that symmetry codes refer to them; the identity alone where nothing is known. */
  readonly operators: readonly SymmetryOperator[];
  /** Where the operators come from: the file's list, its space-group symbol, or nowhere. */
  readonly operatorSource: 'operators' | 'symbol' | 'none';
  /** Hermann–Mauguin symbol as the file writes it. */
  readonly spaceGroup: string | null;
  /** Number in International Tables A, where the file or its symbol gives it. */
  readonly spaceGroupNumber: number | null;
  /** Whether the operators all keep handedness; null where they are unknown. */
  readonly sohncke: boolean | null;
  readonly centrosymmetric: boolean | null;
  readonly flack: Measured | null;
  readonly hooft: Measured | null;
  readonly declared: DeclaredConfiguration | null;
  /** Å. */
  readonly wavelength: number | null;
  readonly radiation: string | null;
  /** `_chemical_formula_sum`. */
  readonly formula: string | null;
  /** Formula units in the cell. */
  readonly formulaUnits: number | null;
  /** From the CIF, by element symbol; for the wavelength of the experiment. */
  readonly dispersion: ReadonlyMap<string, Dispersion>;
  /** A macromolecule: its hand is known from its residues. */
  readonly macromolecule: boolean;
  /** What the chosen alternates of disordered parts are, and what else is worth knowing. */
  readonly notes: readonly string[];
}
