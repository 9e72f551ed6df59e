/** The V2000 connection table: fixed columns, read from the bytes; counts of up to 999. */
import { BondMark, type Molecule } from '../chemistry/molecule.ts';
import { EntryProblem } from './errors.ts';
import type { Limits } from './format.ts';
import type { LineTable } from './line-table.ts';
import { finish, MolfileDraft, setBond, setSymbol } from './molfile-common.ts';

/** Charge for each code of the charge column; 4 is a doublet radical. */
const CHARGE_CODES: readonly number[] = [0, 3, 2, 1, 0, -1, -2, -3];
const DOUBLET_CODE = 4;
/** Unpaired electrons for each code of `M  RAD`: singlet, doublet, triplet. */
const RADICAL_CODES: readonly number[] = [0, 2, 1, 2];
/** Code of the valence column for an atom without bonds beyond those listed. */
const ZERO_VALENCE = 15;

/** Mass numbers nearest to the atomic weight, to which the mass difference column refers. */
const COMMON_ISOTOPES: ReadonlyMap<number, number> = new Map([
  [1, 1],
  [5, 11],
  [6, 12],
  [7, 14],
  [8, 16],
  [9, 19],
  [14, 28],
  [15, 31],
  [16, 32],
  [17, 35],
  [34, 80],
  [35, 80],
  [53, 127],
]);

/** Reads the table; `next` is the line after `M  END`. @throws EntryProblem */
export function readV2000(
  table: LineTable,
  name: string,
  limits: Limits,
  warnings: string[],
): { molecule: Molecule; next: number } {
  let atoms = table.integer(3, 0, 3);
  let bonds = table.integer(3, 3, 6);
  if (table.field(3, 0, 3) === '' || !(atoms >= 0) || !(bonds >= 0)) {
    // Some programs separate by single spaces; two plain numbers are taken for what they are.
    const words = table.words(3);
    atoms = Number(words[0]);
    bonds = Number(words[1]);
    if (!Number.isInteger(atoms) || !Number.isInteger(bonds) || atoms < 0 || bonds < 0) {
      throw new EntryProblem(
        'bad-counts',
        `the counts line is "${table.text(3).trim()}", it should begin with the numbers of atoms and bonds`,
        3,
      );
    }
  }
  if (atoms > limits.atoms)
    throw new EntryProblem('too-many-atoms', `${atoms} atoms, the limit is ${limits.atoms}`, 3);
  const firstBond = 4 + atoms;
  const firstProperty = firstBond + bonds;
  if (table.count < firstProperty) {
    throw new EntryProblem(
      'truncated-entry',
      `the counts line promises ${atoms} atoms and ${bonds} bonds, the entry has only ${Math.max(0, table.count - 4)} lines for them`,
      table.count - 1,
    );
  }
  const draft = new MolfileDraft(atoms, bonds);
  for (let i = 0; i < atoms; i++) readAtom(table, draft, i, 4 + i);
  for (let b = 0; b < bonds; b++) readBond(table, draft, b, firstBond + b);
  const next = readProperties(table, draft, firstProperty);
  return { molecule: finish(draft, name, firstBond, warnings), next };
}

function readAtom(table: LineTable, draft: MolfileDraft, atom: number, line: number): void {
  const x = table.decimal(line, 0, 10);
  const y = table.decimal(line, 10, 20);
  const z = table.decimal(line, 20, 30);
  const sum = x + y + z;
  if (!Number.isFinite(sum)) {
    readFreeAtom(table, draft, atom, line);
    return;
  }
  const symbol = table.field(line, 31, 34);
  if (symbol === '') {
    readFreeAtom(table, draft, atom, line);
    return;
  }
  draft.coordinates[3 * atom] = x;
  draft.coordinates[3 * atom + 1] = y;
  draft.coordinates[3 * atom + 2] = z;
  setSymbol(draft, atom, symbol, line);
  if (table.length(line) <= 34) return;
  const mass = table.integer(line, 34, 36);
  if (mass !== 0 && !Number.isNaN(mass)) {
    const common = COMMON_ISOTOPES.get(draft.elements[atom]!);
    if (common !== undefined) draft.isotopes[atom] = common + mass;
  }
  const charge = table.integer(line, 36, 39);
  if (charge === DOUBLET_CODE) draft.radicals[atom] = 1;
  else draft.charges[atom] = CHARGE_CODES[charge] ?? 0;
  const valence = table.integer(line, 48, 51);
  if (valence > 0) draft.valences[atom] = valence === ZERO_VALENCE ? 0 : valence;
}

/** An atom line whose columns have slipped: three numbers and a symbol, separated by white space. */
function readFreeAtom(table: LineTable, draft: MolfileDraft, atom: number, line: number): void {
  const words = table.words(line);
  const numbers = words.slice(0, 3).map(Number);
  const symbol = words[3];
  if (
    words.slice(0, 3).some(word => /^[+-]?(?:nan|inf)/iu.test(word)) ||
    numbers.some(value => Number.isNaN(value))
  ) {
    throw new EntryProblem(
      numbers.length === 3 ? 'bad-coordinates' : 'bad-atom',
      `atom ${atom + 1}: "${table.text(line).slice(0, 40).trim()}" does not begin with three finite coordinates`,
      line,
    );
  }
  if (numbers.length < 3 || symbol === undefined || !numbers.every(Number.isFinite)) {
    throw new EntryProblem(
      'bad-atom',
      `atom ${atom + 1}: "${table.text(line).slice(0, 40).trim()}" is not x, y, z and a symbol`,
      line,
    );
  }
  numbers.forEach((value, c) => {
    draft.coordinates[3 * atom + c] = value;
  });
  setSymbol(draft, atom, symbol, line);
}

function readBond(table: LineTable, draft: MolfileDraft, bond: number, line: number): void {
  let first = table.integer(line, 0, 3);
  let second = table.integer(line, 3, 6);
  let type = table.integer(line, 6, 9);
  let stereo = table.integer(line, 9, 12);
  if (!(first > 0 && second > 0 && type > 0)) {
    const words = table.words(line).map(Number);
    if (words.length >= 3 && words.slice(0, 3).every(Number.isInteger)) {
      [first, second, type] = words as [number, number, number];
      stereo = words[3] ?? 0;
    }
  }
  if (!Number.isInteger(first) || !Number.isInteger(second) || !Number.isInteger(type)) {
    throw new EntryProblem(
      'bad-bond',
      `bond ${bond + 1}: "${table.text(line).trim()}" is not two atoms and a type`,
      line,
    );
  }
  setBond(draft, bond, first, second, line);
  if (type < 1 || type > 10) {
    throw new EntryProblem('bad-bond', `bond ${bond + 1} has type ${type}; 1 to 4 and 8 are known`, line);
  }
  draft.bondTypes[bond] = type;
  if (type === 2) {
    if (stereo === 3) draft.bondMarks[bond] = BondMark.crossed;
  } else if (stereo === 1) draft.bondMarks[bond] = BondMark.wedge;
  else if (stereo === 6) draft.bondMarks[bond] = BondMark.hash;
  else if (stereo === 4) draft.bondMarks[bond] = BondMark.wavy;
}

/** Reads `M  CHG`, `M  ISO`, `M  RAD` and aliases up to `M  END`; other properties do not bear on configuration. */
function readProperties(table: LineTable, draft: MolfileDraft, from: number): number {
  const atoms = draft.elements.length;
  let chargesReset = false;
  let line = from;
  for (; line < table.count; line++) {
    const lead = table.byte(line, 0);
    if (lead === 0x24 || lead === 0x3e) return line;
    if (lead === 0x41 && /^A {1,2}\s*\d+\s*$/u.test(table.text(line))) {
      line++;
      continue;
    }
    if (lead !== 0x4d) continue;
    const key = table.field(line, 3, 6);
    if (key === 'END') return line + 1;
    if (key !== 'CHG' && key !== 'ISO' && key !== 'RAD') continue;
    const values = table.words(line).slice(2).map(Number);
    const count = values[0] ?? Number.NaN;
    if (
      !Number.isInteger(count) ||
      values.length < 1 + 2 * count ||
      values.some(value => !Number.isInteger(value))
    ) {
      throw new EntryProblem(
        'bad-property',
        `"${table.text(line).trim()}" is not a count and that many pairs of atom and value`,
        line,
      );
    }
    if ((key === 'CHG' || key === 'RAD') && !chargesReset) {
      // These lines replace all charges and radicals of the atom block.
      draft.charges.fill(0);
      draft.radicals.fill(0);
      chargesReset = true;
    }
    for (let k = 0; k < count; k++) {
      const atom = values[1 + 2 * k]!;
      const value = values[2 + 2 * k]!;
      if (atom < 1 || atom > atoms) {
        throw new EntryProblem('bad-property', `M  ${key} names atom ${atom}, the entry has ${atoms}`, line);
      }
      if (key === 'CHG') draft.charges[atom - 1] = value;
      else if (key === 'ISO') draft.isotopes[atom - 1] = value;
      else draft.radicals[atom - 1] = RADICAL_CODES[value] ?? 0;
    }
  }
  return line;
}
