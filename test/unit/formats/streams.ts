/** Streams of bytes for reader tests: whole, or cut at chosen places. */
import { DEFAULT_LIMITS, type Entry, type Limits } from '../../../core/formats/format.ts';
import { readEntries } from '../../../core/formats/registry.ts';

export const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);

/** The bytes in chunks of the given sizes, then the rest. */
export async function* chunksOf(
  bytes: Uint8Array,
  sizes: readonly number[] = [],
): AsyncGenerator<Uint8Array> {
  let at = 0;
  for (const size of sizes) {
    yield bytes.subarray(at, at + size);
    at += size;
  }
  if (at < bytes.length || bytes.length === 0) yield bytes.subarray(at);
}

/** All entries of a file's bytes. */
export async function entriesOf(
  content: string | Uint8Array,
  fileName = 'test.sdf',
  sizes: readonly number[] = [],
  limits: Limits = DEFAULT_LIMITS,
): Promise<Entry[]> {
  const bytes = typeof content === 'string' ? bytesOf(content) : content;
  const list: Entry[] = [];
  for await (const entry of readEntries(chunksOf(bytes, sizes), fileName, limits)) list.push(entry);
  return list;
}
