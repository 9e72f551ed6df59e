/** Lines of a byte stream, whatever their ending, in memory bounded by the longest line. */
import type { Limits } from './format.ts';

const LF = 0x0a;
const CR = 0x0d;

const decoder = new TextDecoder('utf-8');

/** Text of bytes, malformed sequences replaced. */
export function decodeText(bytes: Uint8Array): string {
  return decoder.decode(bytes);
}

export interface ByteLine {
  /** 1-based. */
  readonly line: number;
  /** The line with its ending. */
  readonly bytes: Uint8Array;
}

/** Thrown when a stream breaks a limit, so that reading on is pointless. */
export class LimitError extends Error {
  readonly line: number;

  constructor(message: string, line: number) {
    super(`line ${line}: ${message}`);
    this.name = 'LimitError';
    this.line = line;
  }
}

/** Splits a stream into lines ending in LF, CR LF or CR. @throws LimitError for a line longer than the limit. */
export async function* splitLines(
  chunks: AsyncIterable<Uint8Array>,
  limits: Limits,
): AsyncGenerator<ByteLine> {
  let rest: Uint8Array = new Uint8Array(0);
  let line = 1;
  for await (const chunk of chunks) {
    const data = rest.length === 0 ? chunk : joined(rest, chunk);
    let start = 0;
    for (let i = 0; i < data.length; i++) {
      const byte = data[i]!;
      if (byte !== LF && byte !== CR) continue;
      // A CR at the very end may be half of CR LF: wait for the next chunk.
      if (byte === CR && i + 1 === data.length) break;
      const end = byte === CR && data[i + 1] === LF ? i + 2 : i + 1;
      yield { line, bytes: data.slice(start, end) };
      line++;
      start = end;
      i = end - 1;
    }
    rest = data.slice(start);
    if (rest.length > limits.lineLength) {
      throw new LimitError(
        `longer than ${limits.lineLength} bytes; raise the limit or check the line endings`,
        line,
      );
    }
  }
  if (rest.length > 0) yield { line, bytes: rest };
}

/** Two byte arrays in one. */
export function joined(first: Uint8Array, second: Uint8Array): Uint8Array {
  const both = new Uint8Array(first.length + second.length);
  both.set(first);
  both.set(second, first.length);
  return both;
}

/** Bytes that are added at the end and dropped at the beginning, at a cost that grows with their number and not with that of the chunks. */
export class ByteQueue {
  private store = new Uint8Array(0);
  private start = 0;
  private end = 0;

  get length(): number {
    return this.end - this.start;
  }

  /** The bytes held, a view that the next `add` may overwrite. */
  get bytes(): Uint8Array {
    return this.store.subarray(this.start, this.end);
  }

  add(chunk: Uint8Array): void {
    const needed = this.length + chunk.length;
    if (this.end + chunk.length > this.store.length) {
      const target = needed > this.store.length / 2 ? new Uint8Array(2 * needed) : this.store;
      target.set(this.bytes);
      this.end = this.length;
      this.start = 0;
      this.store = target;
    }
    this.store.set(chunk, this.end);
    this.end += chunk.length;
  }

  drop(count: number): void {
    this.start += count;
  }
}
