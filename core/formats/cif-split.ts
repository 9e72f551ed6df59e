/** Cuts CIF text at its data blocks; blocks without atoms (publication data, reflections) stay with the structure they follow or precede. */
import type { Limits, RawEntry } from './format.ts';
import { decodeText, LimitError, splitLines } from './lines.ts';

const SEMICOLON = 0x3b;

/** Whether a line (its bytes) begins a data block. */
function beginsBlock(line: Uint8Array): boolean {
  let at = 0;
  if (line[0] === 0xef && line[1] === 0xbb && line[2] === 0xbf) at = 3;
  while (at < line.length && (line[at] === 0x20 || line[at] === 0x09)) at++;
  return (
    ((line[at] ?? 0) | 0x20) === 0x64 &&
    ((line[at + 1] ?? 0) | 0x20) === 0x61 &&
    ((line[at + 2] ?? 0) | 0x20) === 0x74 &&
    ((line[at + 3] ?? 0) | 0x20) === 0x61 &&
    line[at + 4] === 0x5f
  );
}

/** Whether a line holds a name by which a block lists atoms. */
function listsAtoms(line: Uint8Array): boolean {
  let at = 0;
  while (at < line.length && (line[at] ?? 0) <= 0x20) at++;
  if (line[at] !== 0x5f && !(line[at] === 0x6c || line[at] === 0x4c)) return false;
  const text = decodeText(line).toLowerCase();
  return /(?:^|\s)_(?:atom_site[_.](?:fract_x|cartn_x)|chem_comp_atom\.(?:atom_id|comp_id))\b/u.test(text);
}

/** Cuts a stream into entries, one for each block that lists atoms; a file with none is one entry. */
export async function* splitCif(chunks: AsyncIterable<Uint8Array>, limits: Limits): AsyncGenerator<RawEntry> {
  let parts: Uint8Array[] = [];
  let size = 0;
  let line = 1;
  let entry = 0;
  let hasAtoms = false;
  let inText = false;
  let triple: string | null = null;
  let second = false;
  let first = true;
  const collect = (): Uint8Array => {
    const bytes = new Uint8Array(size);
    let at = 0;
    for (const part of parts) {
      bytes.set(part, at);
      at += part.length;
    }
    return bytes;
  };
  // Lines of the block being read, which may have no atoms and then belong to the entry before.
  let block: Uint8Array[] = [];
  let blockSize = 0;
  let blockLine = 1;
  let blockAtoms = false;
  const closeBlock = (): RawEntry | null => {
    let done: RawEntry | null = null;
    if (blockAtoms && hasAtoms) {
      entry++;
      done = { entry, line, bytes: collect() };
      parts = [];
      size = 0;
      line = blockLine;
      hasAtoms = false;
    }
    parts.push(...block);
    size += blockSize;
    hasAtoms ||= blockAtoms;
    block = [];
    blockSize = 0;
    blockAtoms = false;
    return done;
  };
  for await (const each of splitLines(chunks, limits)) {
    const { bytes } = each;
    if (first) {
      second = decodeText(bytes.subarray(0, 16)).includes('#\\#CIF_2');
      first = false;
    }
    if (bytes[0] === SEMICOLON && triple === null) inText = !inText;
    else if (!inText && triple === null && beginsBlock(bytes)) {
      const done = closeBlock();
      if (done) yield done;
      blockLine = each.line;
    }
    if (!inText && triple === null && !blockAtoms && listsAtoms(bytes)) blockAtoms = true;
    if (second && !inText) triple = tripleState(decodeText(bytes), triple);
    block.push(bytes);
    blockSize += bytes.length;
    if (blockSize + size > limits.entryBytes) {
      throw new LimitError(`a data block of more than ${limits.entryBytes} bytes`, blockLine);
    }
  }
  const done = closeBlock();
  if (done) yield done;
  if (size > 0) yield { entry: entry + 1, line, bytes: collect() };
}

/** The triple quote that is open after a line, null for none. */
function tripleState(text: string, open: string | null): string | null {
  let at = 0;
  let state = open;
  for (;;) {
    if (state !== null) {
      const close = text.indexOf(state, at);
      if (close < 0) return state;
      at = close + 3;
      state = null;
    }
    const match = /(?:^|[\s[{:])('''|""")/u.exec(text.slice(at));
    if (!match) return null;
    state = match[1]!;
    at += match.index + match[0].length;
  }
}
