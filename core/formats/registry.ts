/** The formats that can be read, told by content first and by name second. */
import { cifFormat } from './cif.ts';
import { gunzip } from './gzip.ts';
import { ByteQueue } from './lines.ts';
import { DEFAULT_LIMITS, type Entry, type Format, type Limits } from './format.ts';
import { inchiFormat } from './inchi.ts';
import { pdbFormat } from './pdb.ts';
import { sdfFormat } from './sdf.ts';
import { smilesFormat } from './smiles.ts';
import { xyzFormat } from './xyz.ts';

/** All formats; where two fit equally well, the earlier. */
export const FORMATS: readonly Format[] = [
  sdfFormat,
  cifFormat,
  pdbFormat,
  xyzFormat,
  inchiFormat,
  smilesFormat,
];

/** Least score at which content alone decides. */
const SURE = 0.5;

/** The format of a file from its first bytes (up to 64 kB, not compressed), then from its name; null when none fits. */
export function detectFormat(head: Uint8Array, fileName: string): Format | null {
  if (head.subarray(0, 4096).includes(0)) return null;
  let best: Format | null = null;
  let score = 0;
  for (const format of FORMATS) {
    const fit = format.sniff(head);
    if (fit > score) {
      score = fit;
      best = format;
    }
  }
  if (score >= SURE) return best;
  const name = fileName.toLowerCase().replace(/\.gz$/u, '');
  const byName = FORMATS.find(format => format.extensions.some(ending => name.endsWith(`.${ending}`)));
  return byName ?? best;
}

/** A format by its name ("SDF"). */
export function formatNamed(name: string): Format | null {
  return FORMATS.find(format => format.name === name) ?? null;
}

/** What is wrong with a file as a whole. */
export class FileProblem extends Error {
  readonly code: 'empty-file' | 'not-text' | 'unknown-format';

  constructor(code: FileProblem['code'], message: string) {
    super(message);
    this.name = 'FileProblem';
    this.code = code;
  }
}

/** Bytes of a file that are looked at to tell its format. */
const HEAD_BYTES = 64 * 1024;

/**
 * Reads all entries of a stream, compressed or not.
 *
 * @throws FileProblem when the stream is empty, binary or in no known format.
 */
export async function* readEntries(
  chunks: AsyncIterable<Uint8Array>,
  fileName: string,
  limits: Limits = DEFAULT_LIMITS,
): AsyncGenerator<Entry> {
  const plain = gunzip(chunks)[Symbol.asyncIterator]();
  const first = new ByteQueue();
  while (first.length < HEAD_BYTES) {
    const next = await plain.next();
    if (next.done) break;
    first.add(next.value);
  }
  const head = first.bytes.slice();
  if (head.length === 0) throw new FileProblem('empty-file', `${fileName}: the file is empty`);
  const format = detectFormat(head.subarray(0, HEAD_BYTES), fileName);
  if (format === null) {
    const binary = head.subarray(0, 4096).includes(0);
    throw new FileProblem(
      binary ? 'not-text' : 'unknown-format',
      `${fileName}: ${binary ? 'a binary file' : 'not a format that can be read'}; SDF, Molfile, SMILES, CIF, mmCIF, PDB and XYZ can be`,
    );
  }
  async function* all(): AsyncGenerator<Uint8Array> {
    yield head;
    for (;;) {
      const next = await plain.next();
      if (next.done) return;
      yield next.value;
    }
  }
  for await (const raw of format.split(all(), limits)) yield* format.parse(raw, limits);
}
