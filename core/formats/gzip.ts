/** Compressed input: gzip undone on the fly, anything else passed through. */
import { Gunzip } from 'fflate';

/** Passes a stream on, decompressed when it begins with the gzip magic number (RFC 1952). */
export async function* gunzip(chunks: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let inflate: Gunzip | null = null;
  let started = false;
  let ready: Uint8Array[] = [];
  for await (const chunk of chunks) {
    if (chunk.length === 0) continue;
    if (!started) {
      started = true;
      if (chunk[0] === 0x1f && chunk[1] === 0x8b) {
        inflate = new Gunzip(data => {
          if (data.length > 0) ready.push(data);
        });
      }
    }
    if (inflate === null) {
      yield chunk;
      continue;
    }
    inflate.push(chunk);
    yield* ready;
    ready = [];
  }
  if (inflate !== null) {
    inflate.push(new Uint8Array(0), true);
    yield* ready;
  }
}
