/** The V3000 connection table: lines `M  V30 …`, continued by a final hyphen, atoms named by any index. */
import { BondMark, type Molecule } from '../chemistry/molecule.ts';
import { EntryProblem } from './errors.ts';
import type { Limits } from './format.ts';
import type { LineTable } from './line-table.ts';
import { finish, MolfileDraft, setBond, setSymbol } from './molfile-common.ts';

const RADICAL_CODES: readonly number[] = [0, 2, 1, 2];

interface LogicalLine {
  readonly text: string;
  readonly at: number;
}

/** Joins continued lines; `next` is the line after `M  END`. */
function logicalLines(table: LineTable): { lines: LogicalLine[]; next: number } {
  const lines: LogicalLine[] = [];
  let pending = '';
  let begun = -1;
  let i = 4;
  for (; i < table.count; i++) {
    const text = table.text(i);
    if (text.startsWith('M  END')) {
      i++;
      break;
    }
    if (text.startsWith('>') || text.startsWith('$$$$')) break;
    if (!text.startsWith('M  V30')) continue;
    const content = text.slice(6).trimEnd();
    if (begun < 0) begun = i;
    if (content.endsWith('-')) {
      pending += content.slice(0, -1);
      continue;
    }
    lines.push({ text: (pending + content).trim(), at: begun });
    pending = '';
    begun = -1;
  }
  return { lines, next: i };
}

/** Splits at white space; a parenthesised list or a quoted string stays in one piece. */
function tokens(text: string): string[] {
  return text.match(/[^\s"(]*(?:"(?:[^"]|"")*"|\([^)]*\))|[^\s]+/gu) ?? [];
}

/** Reads the table. @throws EntryProblem */
export function readV3000(
  table: LineTable,
  name: string,
  limits: Limits,
  warnings: string[],
): { molecule: Molecule; next: number } {
  const { lines, next } = logicalLines(table);
  const counts = lines.find(line => line.text.startsWith('COUNTS'));
  if (counts === undefined) throw new EntryProblem('truncated-entry', 'there is no COUNTS line', 3);
  const [, a, b] = counts.text.split(/\s+/u);
  const atoms = Number(a);
  const bonds = Number(b);
  if (!Number.isInteger(atoms) || !Number.isInteger(bonds) || atoms < 0 || bonds < 0) {
    throw new EntryProblem(
      'bad-counts',
      `"${counts.text}" should hold the numbers of atoms and bonds`,
      counts.at,
    );
  }
  if (atoms > limits.atoms)
    throw new EntryProblem('too-many-atoms', `${atoms} atoms, the limit is ${limits.atoms}`, counts.at);
  const atomLines = block(lines, 'ATOM');
  const bondLines = block(lines, 'BOND');
  if (atomLines.length < atoms || bondLines.length < bonds) {
    throw new EntryProblem(
      'truncated-entry',
      `the counts promise ${atoms} atoms and ${bonds} bonds, the entry has ${atomLines.length} and ${bondLines.length}`,
      table.count - 1,
    );
  }
  const draft = new MolfileDraft(atomLines.length, bondLines.length);
  const number = new Map<string, number>();
  atomLines.forEach((line, i) => readAtom(draft, i, line, number));
  bondLines.forEach((line, i) => readBond(draft, i, line, number));
  for (const line of block(lines, 'COLLECTION')) readCollection(draft, line, number);
  return { molecule: finish(draft, name, bondLines[0]?.at ?? counts.at, warnings), next };
}

function block(lines: readonly LogicalLine[], kind: string): LogicalLine[] {
  const begin = lines.findIndex(line => line.text === `BEGIN ${kind}`);
  if (begin < 0) return [];
  const end = lines.findIndex((line, i) => i > begin && line.text === `END ${kind}`);
  return lines.slice(begin + 1, end < 0 ? lines.length : end);
}

function readAtom(draft: MolfileDraft, atom: number, line: LogicalLine, number: Map<string, number>): void {
  const words = tokens(line.text);
  const [index, symbol, ...rest] = words;
  const coordinates = rest.slice(0, 3).map(Number);
  if (index === undefined || symbol === undefined || coordinates.length < 3) {
    throw new EntryProblem('bad-atom', `"${line.text.slice(0, 60)}" is not index, symbol, x, y, z`, line.at);
  }
  if (!coordinates.every(Number.isFinite)) {
    throw new EntryProblem(
      'bad-coordinates',
      `atom ${index}: the coordinates are not three finite numbers`,
      line.at,
    );
  }
  if (number.has(index)) throw new EntryProblem('bad-atom', `two atoms have the index ${index}`, line.at);
  number.set(index, atom);
  setSymbol(draft, atom, symbol.replace(/^"|"$/gu, ''), line.at);
  coordinates.forEach((value, c) => {
    draft.coordinates[3 * atom + c] = value;
  });
  for (const word of words.slice(6)) {
    const [key, text] = word.split('=') as [string, string | undefined];
    const value = Number(text);
    if (text === undefined || !Number.isInteger(value)) continue;
    if (key === 'CHG') draft.charges[atom] = value;
    else if (key === 'RAD') draft.radicals[atom] = RADICAL_CODES[value] ?? 0;
    else if (key === 'MASS') draft.isotopes[atom] = value;
    else if (key === 'VAL') draft.valences[atom] = value < 0 ? 0 : value;
  }
}

function readBond(draft: MolfileDraft, bond: number, line: LogicalLine, number: Map<string, number>): void {
  const words = tokens(line.text);
  const [, typeText, first, second] = words;
  const type = Number(typeText);
  if (!Number.isInteger(type) || type < 1 || type > 10) {
    throw new EntryProblem(
      'bad-bond',
      `bond ${bond + 1}: "${line.text.slice(0, 60)}" has no known type`,
      line.at,
    );
  }
  const place = (name: string | undefined): number => {
    const at = number.get(name ?? '');
    if (at === undefined) {
      throw new EntryProblem(
        'bond-atom-missing',
        `bond ${bond + 1} names atom ${name ?? ''}, which is not in the list`,
        line.at,
      );
    }
    return at + 1;
  };
  setBond(draft, bond, place(first), place(second), line.at);
  draft.bondTypes[bond] = type;
  const mark = words.find(word => word.startsWith('CFG='))?.slice(4);
  if (mark === '1') draft.bondMarks[bond] = BondMark.wedge;
  else if (mark === '3') draft.bondMarks[bond] = BondMark.hash;
  else if (mark === '2') draft.bondMarks[bond] = type === 2 ? BondMark.crossed : BondMark.wavy;
}

/** `MDLV30/STEABS`, `MDLV30/STERACn` ("and"), `MDLV30/STERELn` ("or") with `ATOMS=(n a b …)`. */
function readCollection(draft: MolfileDraft, line: LogicalLine, number: Map<string, number>): void {
  const match = /^MDLV30\/STE(ABS|RAC(\d+)|REL(\d+))\b.*ATOMS=\(([^)]*)\)/u.exec(line.text);
  if (match === null) return;
  const atoms = match[4]!
    .trim()
    .split(/\s+/u)
    .slice(1)
    .flatMap(name => {
      const at = number.get(name);
      return at === undefined ? [] : [at];
    });
  const kind = match[1] === 'ABS' ? 'absolute' : match[1]!.startsWith('RAC') ? 'and' : 'or';
  draft.groups.push({ kind, number: Number(match[2] ?? match[3] ?? 0), atoms });
}
