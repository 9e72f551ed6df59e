/** XYZ: a count, a comment, one line an atom (symbol or atomic number, x, y, z in Å); several frames are several entries. Bonds come from the distances. */
import { elementNumber, LAST_ELEMENT } from '../chemistry/elements.ts';
import { assembleMolecule, type Molecule } from '../chemistry/molecule.ts';
import { bondOrders } from '../perception/bond-orders.ts';
import { bondsFromCoordinates } from '../perception/bonds-from-coordinates.ts';
import { EntryProblem } from './errors.ts';
import type { Entry, Format, Limits, RawEntry } from './format.ts';
import { LineTable } from './line-table.ts';
import { decodeText, splitLines } from './lines.ts';

const ATOM_LINE =
  /^\s*(?:[A-Za-z]{1,2}\d*|\d{1,3})(?:\s+[+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?){3}(?:\s|$)/u;

export const xyzFormat: Format = {
  name: 'XYZ',
  extensions: ['xyz'],

  sniff(head) {
    const lines = decodeText(head).split(/\r\n|\n|\r/u);
    if (!/^\s*\d+\s*$/u.test(lines[0] ?? '')) return 0;
    return ATOM_LINE.test(lines[2] ?? '') ? 0.9 : 0;
  },

  async *split(chunks, limits) {
    let parts: Uint8Array[] = [];
    let wanted = -1;
    let entry = 0;
    let line = 1;
    const take = (): RawEntry => {
      const size = parts.reduce((sum, part) => sum + part.length, 0);
      const bytes = new Uint8Array(size);
      let at = 0;
      for (const part of parts) {
        bytes.set(part, at);
        at += part.length;
      }
      parts = [];
      wanted = -1;
      entry++;
      return { entry, line, bytes };
    };
    for await (const each of splitLines(chunks, limits)) {
      if (parts.length === 0) {
        if (each.bytes.every(byte => byte <= 0x20)) continue;
        line = each.line;
        const count = Number(decodeText(each.bytes).trim());
        wanted = Number.isInteger(count) && count >= 0 ? count + 2 : Number.MAX_SAFE_INTEGER;
      }
      parts.push(each.bytes);
      if (parts.length === wanted) yield take();
    }
    if (parts.length > 0) yield take();
  },

  parse(raw, limits) {
    return [parseFrame(raw, limits)];
  },
};

function parseFrame(raw: RawEntry, limits: Limits): Entry {
  const table = new LineTable(raw.bytes);
  const name = table.text(1).trim();
  const common = { entry: raw.entry, line: raw.line, name, data: [] };
  try {
    const molecule = readFrame(table, name, limits);
    return {
      ...common,
      molecule,
      warnings: ['bonds and their orders are taken from the distances'],
      error: null,
    };
  } catch (error) {
    if (!(error instanceof EntryProblem)) throw error;
    const line = error.at === null ? raw.line : raw.line + error.at;
    return {
      ...common,
      molecule: null,
      warnings: [],
      error: { code: error.code, message: error.message, line },
    };
  }
}

function readFrame(table: LineTable, name: string, limits: Limits): Molecule {
  const count = Number(table.text(0).trim());
  if (!Number.isInteger(count) || count < 1) {
    throw new EntryProblem('bad-counts', `${table.text(0).trim()} is no number of atoms`, 0);
  }
  if (count > limits.atoms) throw new EntryProblem('too-many-atoms', `more than ${limits.atoms} atoms`, 0);
  if (table.count < count + 2) {
    throw new EntryProblem(
      'truncated-entry',
      `${count} atoms are announced, ${Math.max(0, table.count - 2)} follow`,
      table.count - 1,
    );
  }
  const elements = new Uint8Array(count);
  const isotopes = new Uint16Array(count);
  const coordinates = new Float64Array(3 * count);
  for (let i = 0; i < count; i++) {
    const words = table.words(i + 2);
    const symbol = words[0] ?? '';
    const z = /^\d+$/u.test(symbol)
      ? Number(symbol) <= LAST_ELEMENT
        ? Number(symbol)
        : undefined
      : elementOf(symbol);
    if (z === undefined)
      throw new EntryProblem(
        'unknown-element',
        `${symbol === '' ? 'an empty line' : symbol} is no element`,
        i + 2,
      );
    elements[i] = z;
    if (symbol === 'D') isotopes[i] = 2;
    if (symbol === 'T') isotopes[i] = 3;
    for (let axis = 0; axis < 3; axis++) {
      const text = words[axis + 1];
      const value = text === undefined ? Number.NaN : Number(text.replace(/[dD]/u, 'e'));
      if (!Number.isFinite(value)) {
        throw new EntryProblem(
          'bad-coordinates',
          `${text ?? 'nothing'} is no coordinate; x, y and z are wanted`,
          i + 2,
        );
      }
      coordinates[3 * i + axis] = value;
    }
  }
  const { pairs, doubtful } = bondsFromCoordinates({ elements, coordinates });
  const orders = bondOrders({ elements, coordinates, pairs });
  return assembleMolecule({
    name,
    elements,
    charges: orders.charges,
    isotopes,
    radicals: new Uint8Array(count),
    hydrogens: orders.hydrogens,
    bondAtoms: pairs,
    bondOrders: orders.orders,
    bondMarks: new Uint8Array(pairs.length / 2),
    coordinates,
    dimension: 3,
    labels: null,
    stated: [],
    stereoGroups: [],
    residues: null,
    uncertainty: null,
    occupancies: null,
    doubtfulBonding: orders.doubtful.map((value, i) => (value || doubtful[i] ? 1 : 0)),
  });
}

function elementOf(symbol: string): number | undefined {
  const letters = /^[A-Za-z]{1,2}/u.exec(symbol)?.[0] ?? '';
  const proper = letters.charAt(0).toUpperCase() + letters.slice(1).toLowerCase();
  return elementNumber(proper) ?? elementNumber(proper.charAt(0));
}
