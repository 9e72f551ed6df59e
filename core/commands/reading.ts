/** Opening of input for a command: the format told by content, then by name; entries as a stream. */
import type { Format, Limits, RawEntry } from '../formats/format.ts';
import { detectFormat } from '../formats/registry.ts';
import type { CommandIo } from './io.ts';

/** Bytes on which the format is told. */
const HEAD_BYTES = 64 * 1024;
/** Bytes below which more is read before the format is told, also from a slow pipe. */
const HEAD_LEAST = 1024;

export interface OpenInput {
  readonly format: Format;
  readonly entries: AsyncGenerator<RawEntry>;
  /** Bytes in all, null where unknown. */
  readonly size: number | null;
}

/** Milliseconds without further bytes after which a pipe's format is told from what has come. */
const PAUSE = 200;

/** Whether nothing comes for a while. */
async function idle(next: Promise<unknown>): Promise<boolean> {
  let timer: NodeJS.Timeout | undefined;
  const pause = new Promise<true>(done => {
    timer = setTimeout(() => done(true), PAUSE);
  });
  const paused = await Promise.race([pause, next.then(() => false)]);
  clearTimeout(timer);
  return paused;
}

/** Opens a file or standard input. @throws Error that names the file and says what is wrong with it. */
export async function openInput(io: CommandIo, path: string, limits: Limits): Promise<OpenInput> {
  const input = await io.open(path);
  const shown = path === '-' ? 'standard input' : path;
  const source = input.chunks[Symbol.asyncIterator]();
  const first: Uint8Array[] = [];
  let length = 0;
  // A pipe is not waited on beyond what is needed to tell the format.
  const wanted = path === '-' ? HEAD_LEAST : HEAD_BYTES;
  let ended = false;
  let pending: Promise<IteratorResult<Uint8Array>> | null = null;
  while (length < wanted) {
    pending ??= source.next();
    if (path === '-' && length > 0 && (await idle(pending))) break;
    const next = await pending;
    pending = null;
    if (next.done) {
      ended = true;
      break;
    }
    first.push(next.value);
    length += next.value.length;
  }
  if (length === 0) throw new Error(`${shown}: the file is empty`);
  const head = new Uint8Array(Math.min(length, HEAD_BYTES));
  let at = 0;
  for (const chunk of first) {
    const part = chunk.subarray(0, head.length - at);
    head.set(part, at);
    at += part.length;
    if (at === head.length) break;
  }
  const format = detectFormat(head, path === '-' ? '' : path);
  if (!format) {
    const binary = head.subarray(0, 4096).includes(0);
    throw new Error(
      `${shown}: ${binary ? 'a binary file' : 'not a format that can be read'}; SDF, Molfile, SMILES, InChI, CIF, mmCIF, PDB and XYZ can be`,
    );
  }
  async function* chunks(): AsyncGenerator<Uint8Array> {
    yield* first;
    if (ended) return;
    for (;;) {
      const next = await (pending ?? source.next());
      pending = null;
      if (next.done) return;
      yield next.value;
    }
  }
  return { format, entries: format.split(chunks(), limits), size: input.size };
}
