/**
 * SDF and Molfiles, V2000 and V3000 (CTfile Formats, BIOVIA 2020): cut at the lines `$$$$`, each entry kept byte for byte.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import { EntryProblem } from './errors.ts';
import type { DataItem, Entry, Format, Limits, RawEntry } from './format.ts';
import { ByteQueue, decodeText, LimitError } from './lines.ts';
import { LineTable } from './line-table.ts';
import { readV2000 } from './molfile-v2000.ts';
import { readV3000 } from './molfile-v3000.ts';

const LF = 0x0a;
const CR = 0x0d;
const DOLLAR = 0x24;

/** Whether the line that begins at `start` is `$$$$`. */
function isTerminator(data: Uint8Array, start: number, end: number): boolean {
  return (
    end - start >= 4 &&
    data[start] === DOLLAR &&
    data[start + 1] === DOLLAR &&
    data[start + 2] === DOLLAR &&
    data[start + 3] === DOLLAR
  );
}

/** SDF; a single Molfile is an SDF of one entry. */
export const sdfFormat: Format = {
  name: 'SDF',
  extensions: ['sdf', 'sd', 'mol', 'mdl'],

  sniff(head) {
    const text = decodeText(head);
    const lines = text.split(/\r\n|\n|\r/u);
    const counts = lines[3] ?? '';
    if (/V[23]000\s*$/u.test(counts)) return 1;
    if (/^[ \d]{2}\d[ \d]{2}\d/u.test(counts) && lines.length > 4) return 0.8;
    return /^\${4}/mu.test(text) || /^M {2}END/mu.test(text) ? 0.7 : 0;
  },

  async *split(chunks, limits) {
    yield* splitEntries(chunks, limits);
  },

  parse(raw, limits) {
    return [parseEntry(raw, limits)];
  },
};

/** Cuts at the terminator lines without looking at anything else; memory is bounded by the largest entry. */
async function* splitEntries(chunks: AsyncIterable<Uint8Array>, limits: Limits): AsyncGenerator<RawEntry> {
  const held = new ByteQueue();
  let entry = 0;
  /** Line on which the bytes held begin. */
  let line = 1;
  /** In the bytes held: where the unfinished line begins, how far it was looked at, how many lines stand before it. */
  let lineStart = 0;
  let i = 0;
  let lines = 0;
  for await (const chunk of chunks) {
    if (chunk.length === 0) continue;
    held.add(chunk);
    const data = held.bytes;
    let begin = 0;
    for (;;) {
      // Lines are short: a byte loop beats a search for each of the two endings.
      while (i < data.length && data[i] !== LF && data[i] !== CR) i++;
      if (i >= data.length) break;
      if (data[i] === CR && i + 1 === data.length) break;
      const end = data[i] === CR && data[i + 1] === LF ? i + 2 : i + 1;
      lines++;
      if (isTerminator(data, lineStart, i)) {
        entry++;
        yield { entry, line, bytes: data.slice(begin, end) };
        line += lines;
        lines = 0;
        begin = end;
      }
      lineStart = end;
      i = end;
    }
    held.drop(begin);
    lineStart -= begin;
    i -= begin;
    if (held.length > limits.entryBytes) {
      throw new LimitError(`an entry of more than ${limits.entryBytes} bytes; is a line $$$$ missing?`, line);
    }
  }
  const rest = held.bytes.slice();
  if (rest.some(byte => byte !== 0x20 && byte !== 0x09 && byte !== LF && byte !== CR)) {
    yield { entry: entry + 1, line, bytes: rest };
  }
}

function parseEntry(raw: RawEntry, limits: Limits): Entry {
  const table = new LineTable(raw.bytes);
  const name = table.text(0).trim();
  const warnings: string[] = [];
  let data: readonly DataItem[] = [];
  let molecule: Molecule | null = null;
  try {
    const counts = table.text(3);
    if (table.count < 4)
      throw new EntryProblem(
        'truncated-entry',
        'the entry ends before the counts line, the fourth line',
        table.count - 1,
      );
    const reader = /V3000/u.test(counts) ? readV3000 : readV2000;
    const result = reader(table, name, limits, warnings);
    molecule = result.molecule;
    data = dataItems(table, result.next);
  } catch (error) {
    if (!(error instanceof EntryProblem)) throw error;
    return {
      entry: raw.entry,
      line: raw.line,
      name,
      molecule: null,
      data: dataItems(table, firstDataLine(table)),
      warnings,
      error: {
        code: error.code,
        message: error.message,
        line: error.at === null ? raw.line : raw.line + error.at,
      },
    };
  }
  return { entry: raw.entry, line: raw.line, name, molecule, data, warnings, error: null };
}

function firstDataLine(table: LineTable): number {
  for (let i = 4; i < table.count; i++) if (table.byte(i, 0) === 0x3e) return i;
  return table.count;
}

/** Data items from line `from` on: a header `> <NAME>`, the value to the next blank line. */
function dataItems(table: LineTable, from: number): DataItem[] {
  const items: DataItem[] = [];
  let i = from;
  while (i < table.count) {
    if (table.byte(i, 0) !== 0x3e) {
      i++;
      continue;
    }
    const header = table.text(i);
    const named = /<([^>]*)>/u.exec(header)?.[1] ?? /\b(DT\d+)\b/u.exec(header)?.[1];
    const value: string[] = [];
    i++;
    while (i < table.count) {
      const text = table.text(i);
      if (text.trim() === '' || text.startsWith('$$$$')) break;
      // A value that holds a line beginning with > is kept as long as it does not look like a header.
      if (/^>\s.*<[^>]*>/u.test(text)) break;
      value.push(text);
      i++;
    }
    if (named !== undefined) items.push({ name: named, value: value.join('\n') });
  }
  return items;
}
