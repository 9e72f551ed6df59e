/**
 * A CIF with its models inverted: coordinates about the point that the operators give, the group changed within its
 * enantiomorphic pair where it must be, torsions and symmetry codes made to fit, and what no longer holds taken out.
 * All else stays byte for byte.
 */
import { mirroredFigure } from './decimal.ts';
import { findInversion, type Inversion, invertedCode } from './inversion.ts';
import { operatorsFromHall } from './hall.ts';
import {
  formatOperator,
  isCentrosymmetric,
  isSohncke,
  operatorKey,
  parseOperator,
  type SymmetryOperator,
} from './operator.ts';
import { enantiomorphOf, settingNamed, STANDARD_SETTINGS } from './space-groups.ts';
import { isCoreBlock, readCoreBlock } from '../formats/cif-core.ts';
import { isComponentBlock } from '../formats/ccd.ts';
import { type CifBlock, type CifLoop, parseCif } from '../formats/cif-syntax.ts';
import { EntryProblem } from '../formats/errors.ts';
import { DEFAULT_LIMITS } from '../formats/format.ts';
import type { Molecule } from '../chemistry/molecule.ts';
import { isModelBlock } from '../formats/mmcif.ts';

export interface MirroredText {
  readonly text: string;
  /** What was done and what to do next, for people. */
  readonly notes: readonly string[];
}

interface Edit {
  readonly start: number;
  readonly end: number;
  readonly text: string;
}

/** Items that hold for the old model only. */
const DROPPED: readonly RegExp[] = [
  /^_refine_ls_abs_structure_/u,
  /^_refine_ls_(?:r_factor|wr_factor|goodness_of_fit|restrained_s|shift\/|r_i_factor|r_fsqd)/u,
  /^_refine_ls_shift_over/u,
  /^_refine_diff_density_/u,
  /^_shelx_res_/u,
  /^_shelx_fab_/u,
  /^_iucr_refine_(?:instructions|fcf|reflections)/u,
  /^_oxford_.*checksum/u,
  /checksum/u,
  /^_olex2_(?:refinement|submission)/u,
  /^_chemical_absolute_configuration$/u,
  /^_chemical_identifier_(?:inchi|smiles)/u,
  /^_chemical_name_inchi/u,
];
/** Names that may hold descriptors. */
const NAMES = /^_chemical_name_(?:systematic|common|mineral|structure_type)$/u;
const DESCRIPTORS = /\b\d*[RS](?:[,\s)\]*-]|\b)|(?:^|[^A-Za-z])[DL]-|\([+-]\)-/u;

/**
 * Inverts every structure of a CIF. The text holds one character for each byte.
 *
 * @throws EntryProblem where a structure cannot be inverted: no symmetry, operators that are no group, a figure that cannot be read.
 */
export function mirrorCif(text: string): MirroredText {
  const document = parseCif(text);
  const notes: string[] = [];
  const edits: Edit[] = [];
  let structures = 0;
  for (const block of document.blocks) {
    if (isModelBlock(block)) {
      mirrorModel(block, edits, notes);
      structures++;
    } else if (isComponentBlock(block)) {
      mirrorComponent(block, edits, notes);
      structures++;
    } else if (isCoreBlock(block)) {
      mirrorCore(block, edits, notes);
      structures++;
    }
  }
  if (structures === 0) throw new EntryProblem('no-structure', 'no block lists atoms', null);
  const result = applied(text, edits);
  verify(document.blocks.filter(isCoreBlock), result);
  return { text: result, notes };
}

function applied(text: string, edits: readonly Edit[]): string {
  const sorted = [...edits].sort((a, b) => a.start - b.start);
  let result = '';
  let at = 0;
  for (const { start, end, text: replacement } of sorted) {
    if (start < at) continue;
    result += text.slice(at, start) + replacement;
    at = end;
  }
  return result + text.slice(at);
}

function mirrorColumn(loop: CifLoop, column: number, shift: number, edits: Edit[]): void {
  if (column < 0) return;
  for (let row = 0; row < loop.rowCount; row++) {
    if (loop.value(row, column) === null) continue;
    const token = loop.token(row, column);
    const figure = loop.document.text.slice(token.start, token.end);
    const mirrored = mirroredFigure(figure, shift);
    if (mirrored === null) {
      throw new EntryProblem(
        'bad-coordinates',
        `${figure} is no figure that can be mirrored`,
        loop.lineOfRow(row),
      );
    }
    edits.push({ start: token.start, end: token.end, text: mirrored });
  }
}

function loopOf(block: CifBlock, ...names: string[]): { loop: CifLoop; name: string } | null {
  for (const name of names) {
    const loop = block.looped.get(name);
    if (loop) return { loop, name };
  }
  return null;
}

function mirrorCore(block: CifBlock, edits: Edit[], notes: string[]): void {
  const label = `data_${block.name}`;
  const listed = loopOf(
    block,
    '_space_group_symop_operation_xyz',
    '_symmetry_equiv_pos_as_xyz',
    '_space_group_symop.operation_xyz',
    '_symmetry_equiv.pos_as_xyz',
  );
  const operators = operatorsOf(block, listed);
  let inversion: Inversion;
  try {
    inversion = findInversion(operators);
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    throw new EntryProblem('bad-symmetry', error.message, listed?.loop.line ?? block.line);
  }
  const atoms = loopOf(block, '_atom_site_fract_x', '_atom_site.fract_x');
  if (!atoms) throw new EntryProblem('no-structure', 'no loop of atom sites', block.line);
  ['x', 'y', 'z'].forEach((axis, k) => {
    mirrorColumn(
      atoms.loop,
      atoms.loop.columnIndex(`${atoms.name.slice(0, -1)}${axis}`),
      inversion.shift[k]!,
      edits,
    );
  });
  const point = inversion.shift.map(value => String(value / 2)).join(', ');
  notes.push(`${label}: inverted in the point ${point} (fractions of the cell), found from the operators`);
  if (inversion.changesGroup) changeGroup(block, listed, inversion, edits, notes, label);
  if (isCentrosymmetric(operators))
    notes.push(`${label}: the group is centrosymmetric, both hands were there already`);
  else if (!isSohncke(operators)) {
    notes.push(
      `${label}: both hands of the molecule were in the cell already; inversion changes the polarity of the crystal alone`,
    );
  }
  mirrorTorsions(block, edits);
  recode(block, operators, inversion, edits, notes, label);
  dropItems(block, edits, notes, label);
  notes.push(`${label}: refine the inverted model again against the data; figures of merit were taken out`);
}

function operatorsOf(
  block: CifBlock,
  listed: { loop: CifLoop; name: string } | null,
): readonly SymmetryOperator[] {
  if (listed) {
    const texts = listed.loop.column(listed.name) ?? [];
    return texts.map((text, row) => {
      const operator = text === null ? null : parseOperator(text);
      if (!operator) {
        throw new EntryProblem(
          'bad-symmetry',
          `${text ?? '?'} is no symmetry operator`,
          listed.loop.lineOfRow(row),
        );
      }
      return operator;
    });
  }
  const symbol = block.get('_space_group_name_h-m_alt', '_symmetry_space_group_name_h-m');
  const setting = symbol === null ? null : settingNamed(symbol);
  const operators = setting ? operatorsFromHall(setting.hall) : null;
  if (!operators) {
    throw new EntryProblem(
      'bad-symmetry',
      'the block gives no symmetry operators and no space-group symbol that is known here',
      block.line,
    );
  }
  return operators;
}

/** P41 and P43 and their kin in a Hermann–Mauguin symbol. */
function otherSymbol(symbol: string): string {
  const swap: Readonly<Record<string, string>> = {
    41: '43',
    43: '41',
    31: '32',
    32: '31',
    61: '65',
    65: '61',
    62: '64',
    64: '62',
  };
  return symbol.replace(/4_?[13]|3_?[12]|6_?[1245]/u, found => {
    const other = swap[found.replace('_', '')]!;
    return found.includes('_') ? `${other[0]}_${other[1]}` : other;
  });
}

function changeGroup(
  block: CifBlock,
  listed: { loop: CifLoop; name: string } | null,
  inversion: Inversion,
  edits: Edit[],
  notes: string[],
  label: string,
): void {
  if (listed) {
    const column = listed.loop.columnIndex(listed.name);
    inversion.operators.forEach((operator, row) => {
      const { start, end } = listed.loop.token(row, column);
      edits.push({ start, end, text: `'${formatOperator(operator)}'` });
    });
  }
  const replace = (name: string, value: (old: string) => string): void => {
    const item = block.items.get(name);
    if (!item) return;
    const { start, end, kind } = item.token;
    const old = block.document.valueOf(start, end, kind);
    if (old === null) return;
    const next = value(old);
    edits.push({ start, end, text: /\s/u.test(next) || kind !== 0 ? `'${next}'` : next });
  };
  let before = '';
  let after = '';
  for (const name of [
    '_space_group_name_h-m_alt',
    '_symmetry_space_group_name_h-m',
    '_space_group_name_h-m_full',
    '_space_group.name_h-m_alt',
    '_symmetry.space_group_name_h-m',
  ]) {
    replace(name, old => {
      before = old;
      after = otherSymbol(old);
      return after;
    });
  }
  const keys = new Set(inversion.operators.map(operatorKey));
  const hall = STANDARD_SETTINGS.find(setting => {
    const operators = operatorsFromHall(setting.hall);
    return operators?.length === keys.size && operators.every(operator => keys.has(operatorKey(operator)));
  })?.hall;
  for (const name of [
    '_space_group_name_hall',
    '_symmetry_space_group_name_hall',
    '_space_group.name_hall',
  ]) {
    replace(name, () => hall ?? '?');
  }
  for (const name of ['_space_group_it_number', '_symmetry_int_tables_number', '_space_group.it_number']) {
    replace(name, old => String(enantiomorphOf(Number(old))));
  }
  notes.push(
    `${label}: the space group changes to its enantiomorph${before === '' ? '' : `, ${before} to ${after}`}; the operators were rewritten`,
  );
}

function mirrorTorsions(block: CifBlock, edits: Edit[]): void {
  const torsions = loopOf(block, '_geom_torsion', '_geom_torsion.angle');
  if (torsions) mirrorColumn(torsions.loop, torsions.loop.columnIndex(torsions.name), 0, edits);
}

/** Symmetry codes of the geometry tables. */
function recode(
  block: CifBlock,
  old: readonly SymmetryOperator[],
  inversion: Inversion,
  edits: Edit[],
  notes: string[],
  label: string,
): void {
  let lost = 0;
  for (const loop of block.loops) {
    loop.names.forEach((name, column) => {
      if (!/^_geom_.*site_symmetry_/u.test(name)) return;
      for (let row = 0; row < loop.rowCount; row++) {
        const code = loop.value(row, column);
        if (code === null) continue;
        const next = invertedCode(code, old, inversion);
        const { start, end } = loop.token(row, column);
        if (next === null) lost++;
        // A code without cell digits is left in that style where it still holds.
        if (next !== null && `${code}_555` === next) continue;
        edits.push({ start, end, text: next ?? '?' });
      }
    });
  }
  if (lost > 0)
    notes.push(`${label}: ${lost} symmetry codes could not be put in the new terms and stand as ?`);
}

function dropItems(block: CifBlock, edits: Edit[], notes: string[], label: string): void {
  const { text } = block.document;
  const dropped: string[] = [];
  for (const [name, item] of block.items) {
    const { start: valueStart, end: valueEnd, kind } = item.token;
    const value = block.document.valueOf(valueStart, valueEnd, kind);
    if (value === null) continue;
    if (!DROPPED.some(pattern => pattern.test(name)) && !(NAMES.test(name) && DESCRIPTORS.test(value)))
      continue;
    let start = item.nameStart;
    while (start > 0 && (text[start - 1] === ' ' || text[start - 1] === '\t')) start--;
    let end = valueEnd;
    while (end < text.length && (text[end] === ' ' || text[end] === '\t')) end++;
    if (text[end] === '\r') end++;
    if (text[end] === '\n') end++;
    edits.push({ start, end, text: '' });
    dropped.push(name);
  }
  const loops = block.loops.flatMap(loop =>
    loop.names.filter(name => DROPPED.some(pattern => pattern.test(name))),
  );
  if (dropped.length > 0)
    notes.push(`${label}: taken out, since they hold for the old model: ${dropped.join(', ')}`);
  if (loops.length > 0)
    notes.push(`${label}: left in loops though they hold for the old model: ${loops.join(', ')}`);
}

function mirrorModel(block: CifBlock, edits: Edit[], notes: string[]): void {
  const loop = block.looped.get('_atom_site.cartn_x');
  if (!loop) throw new EntryProblem('no-structure', 'the atom list is empty', block.line);
  for (const axis of ['x', 'y', 'z'])
    mirrorColumn(loop, loop.columnIndex(`_atom_site.cartn_${axis}`), 0, edits);
  const symbol = block.get('_symmetry.space_group_name_h-m', '_space_group.name_h-m_alt');
  const number = symbol === null ? null : (settingNamed(symbol)?.number ?? null);
  if (symbol !== null && number !== null && enantiomorphOf(number) !== number) {
    for (const name of ['_symmetry.space_group_name_h-m', '_space_group.name_h-m_alt']) {
      const item = block.items.get(name);
      if (item)
        edits.push({ start: item.token.start, end: item.token.end, text: `'${otherSymbol(symbol)}'` });
    }
    for (const name of ['_symmetry.int_tables_number', '_space_group.it_number']) {
      const item = block.items.get(name);
      if (item && block.get(name) !== null) {
        edits.push({ start: item.token.start, end: item.token.end, text: String(enantiomorphOf(number)) });
      }
    }
  }
  notes.push(
    `data_${block.name}: coordinates inverted in the origin; L residues are now D, and all that the file says of them (names, secondary structure, validation) holds for the old model`,
  );
}

function mirrorComponent(block: CifBlock, edits: Edit[], notes: string[]): void {
  for (const prefix of [
    '_chem_comp_atom.model_cartn_',
    '_chem_comp_atom.pdbx_model_cartn_',
    '_chem_comp_atom.',
  ]) {
    for (const axis of ['x', 'y', 'z']) {
      const name = prefix.includes('pdbx') ? `${prefix}${axis}_ideal` : `${prefix}${axis}`;
      const loop = block.looped.get(name);
      if (loop) mirrorColumn(loop, loop.columnIndex(name), 0, edits);
    }
  }
  const loop = block.looped.get('_chem_comp_atom.pdbx_stereo_config');
  const column = loop?.columnIndex('_chem_comp_atom.pdbx_stereo_config') ?? -1;
  if (loop && column >= 0) {
    for (let row = 0; row < loop.rowCount; row++) {
      const flag = loop.value(row, column);
      if (flag !== 'R' && flag !== 'S') continue;
      const { start, end } = loop.token(row, column);
      edits.push({ start, end, text: flag === 'R' ? 'S' : 'R' });
    }
  }
  notes.push(
    `data_${block.name}: coordinates inverted in the origin, R and S flags exchanged; its name and SMILES hold for the old component`,
  );
}

/** How far distances may differ after inversion, Å: the rounding of the arithmetic. */
const DISTANCE_TOLERANCE = 1e-5;

/** Reads the result again and makes sure that it is the mirror image. @throws EntryProblem where it is not. */
function verify(blocks: readonly CifBlock[], result: string): void {
  if (blocks.length === 0) return;
  const after = parseCif(result).blocks.filter(isCoreBlock);
  blocks.forEach((block, k) => {
    const other = after[k];
    const fail = (what: string): never => {
      throw new EntryProblem('inversion-failed', `the inverted structure does not hold: ${what}`, block.line);
    };
    if (!other) {
      fail('a block is missing');
      return;
    }
    const first = readCoreBlock(block, DEFAULT_LIMITS).molecule;
    const second = readCoreBlock(other, DEFAULT_LIMITS).molecule;
    if (!isInverse(first, second)) fail('distances or hands differ from those of the mirror image');
  });
}

/** Whether the second molecule is the first inverted in a point: every pair of atoms has the same sum of coordinates. */
export function isInverse(first: Molecule, second: Molecule): boolean {
  const a = first.coordinates;
  const b = second.coordinates;
  if (!a || !b || first.atomCount !== second.atomCount || first.bondCount !== second.bondCount) return false;
  for (let i = 0; i < first.atomCount; i++) {
    if (first.elements[i] !== second.elements[i]) return false;
    for (let k = 0; k < 3; k++) {
      const sum = a[3 * i + k]! + b[3 * i + k]!;
      if (Math.abs(sum - (a[k]! + b[k]!)) > DISTANCE_TOLERANCE) return false;
    }
  }
  return true;
}
