/** The outside of a command run from a shell: the process's own streams and the file system. */
import { createReadStream } from 'node:fs';
import { open, stat } from 'node:fs/promises';
import { availableParallelism } from 'node:os';
import { resolve } from 'node:path';
import { createGunzip } from 'node:zlib';
import type { CommandIo, InputStream } from './io.ts';

const GZIP_MAGIC = [0x1f, 0x8b] as const;

function reasonOf(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? error.code : null;
  switch (code) {
    case 'ENOENT':
      return 'there is no such file';
    case 'EACCES':
    case 'EPERM':
      return 'reading it is not allowed';
    case 'EISDIR':
      return 'it is a folder';
    default:
      return error instanceof Error ? error.message : String(error);
  }
}

async function openFile(path: string): Promise<InputStream> {
  try {
    const info = await stat(path);
    if (info.isDirectory()) throw Object.assign(new Error('a folder'), { code: 'EISDIR' });
    const handle = await open(path, 'r');
    const magic = new Uint8Array(2);
    await handle.read(magic, 0, 2, info.isFile() ? 0 : null);
    await handle.close();
    const stream = createReadStream(path, { highWaterMark: 256 * 1024 });
    if (magic[0] === GZIP_MAGIC[0] && magic[1] === GZIP_MAGIC[1]) {
      return { chunks: stream.pipe(createGunzip()) as AsyncIterable<Uint8Array>, size: null };
    }
    return { chunks: stream as AsyncIterable<Uint8Array>, size: info.size };
  } catch (error) {
    throw new Error(`${path}: ${reasonOf(error)}`, { cause: error });
  }
}

/** Ends the run in order on the first interruption, and quietly when the reader of standard output has gone (`| head`). */
export function watchProcess(interruption: AbortController): void {
  process.once('SIGINT', () => interruption.abort());
  process.stdout.on('error', error => {
    if ('code' in error && error.code === 'EPIPE') process.exit(0);
    throw error;
  });
}

/** The process's own streams and files. `workerEntry` is the bundle that also starts as a worker. */
export function nodeIo(
  workerEntry: URL | null,
  cwd = process.cwd(),
  interruption = new AbortController(),
): CommandIo {
  return {
    cwd,
    signal: interruption.signal,
    errorIsTerminal: process.stderr.isTTY,
    processors: availableParallelism(),
    workerEntry,
    out: chunk =>
      new Promise<void>((done, failed) => {
        process.stdout.write(chunk, error => (error ? failed(error) : done()));
      }),
    err: text => {
      process.stderr.write(text);
    },
    open: async path => {
      if (path === '-') return { chunks: process.stdin as AsyncIterable<Uint8Array>, size: null };
      return openFile(resolve(cwd, path));
    },
    now: () => performance.now(),
  };
}
