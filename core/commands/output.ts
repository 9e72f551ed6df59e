/** Output files of a long run: entries written as they come into a file that appears whole at the end, and lines that can be resumed. */
import { type FileHandle, open } from 'node:fs/promises';
import { resolve } from 'node:path';
import { writeAtomically } from './atomic-write.ts';
import type { CommandIo } from './io.ts';

/** Chunks taken before a writer is made to wait. */
const QUEUE_LIMIT = 16;

/** A place to write entries. */
export interface Sink {
  write(chunk: Uint8Array): Promise<void>;
  close(): Promise<void>;
  /** Gives up: an atomic file keeps what it held before. */
  abort(reason: Error): Promise<void>;
}

class ChunkQueue implements AsyncIterable<Uint8Array> {
  readonly #chunks: Uint8Array[] = [];
  #ended = false;
  #failure: Error | null = null;
  #wakeReader: (() => void) | null = null;
  #wakeWriter: (() => void) | null = null;

  async push(chunk: Uint8Array): Promise<void> {
    this.#chunks.push(chunk);
    this.#wakeReader?.();
    if (this.#chunks.length > QUEUE_LIMIT) {
      await new Promise<void>(done => {
        this.#wakeWriter = done;
      });
    }
  }

  end(failure: Error | null): void {
    this.#ended = true;
    this.#failure = failure;
    this.#wakeReader?.();
  }

  /** Lets a waiting writer go when the reader has failed. */
  release(): void {
    this.#wakeWriter?.();
  }

  async *[Symbol.asyncIterator](): AsyncGenerator<Uint8Array> {
    for (;;) {
      const chunk = this.#chunks.shift();
      if (chunk) {
        if (this.#chunks.length <= QUEUE_LIMIT) this.#wakeWriter?.();
        yield chunk;
        continue;
      }
      if (this.#failure) throw this.#failure;
      if (this.#ended) return;
      await new Promise<void>(done => {
        this.#wakeReader = done;
      });
      this.#wakeReader = null;
    }
  }
}

/** A file that appears whole when closed; `-` is standard output. */
export function openSink(io: CommandIo, path: string): Sink {
  if (path === '-') {
    return { write: chunk => io.out(chunk), close: () => Promise.resolve(), abort: () => Promise.resolve() };
  }
  const queue = new ChunkQueue();
  let failure: unknown = null;
  const written = writeAtomically(resolve(io.cwd, path), queue).catch((error: unknown) => {
    failure = error;
    queue.release();
  });
  return {
    write: async chunk => {
      if (failure) throw failure;
      await queue.push(chunk);
    },
    close: async () => {
      queue.end(null);
      await written;
      if (failure) throw failure;
    },
    abort: async reason => {
      queue.end(reason);
      await written;
    },
  };
}

/** Lines appended from a given byte of a file, so that an interrupted run can go on. */
export class LineFile {
  readonly #handle: FileHandle;
  #at: number;

  private constructor(handle: FileHandle, at: number) {
    this.#handle = handle;
    this.#at = at;
  }

  /** Opens the file, keeping its first `keep` bytes. */
  static async open(path: string, keep: number): Promise<LineFile> {
    const handle = await open(path, keep > 0 ? 'r+' : 'w');
    await handle.truncate(keep);
    return new LineFile(handle, keep);
  }

  async write(text: string): Promise<void> {
    const bytes = Buffer.from(text, 'utf8');
    let done = 0;
    while (done < bytes.length) {
      const { bytesWritten } = await this.#handle.write(bytes, done, bytes.length - done, this.#at);
      done += bytesWritten;
      this.#at += bytesWritten;
    }
  }

  async close(): Promise<void> {
    await this.#handle.sync();
    await this.#handle.close();
  }
}
