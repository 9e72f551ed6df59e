/** Atomic writing of files: a reader meets the old content or the new, whole, also after a power cut. */
import { randomBytes } from 'node:crypto';
import { type FileHandle, lstat, mkdir, open, realpath, rename, rm } from 'node:fs/promises';
import { basename, dirname, join } from 'node:path';

/** What can be written: bytes, text, or a stream of either. */
export type Content = Uint8Array | string | AsyncIterable<Uint8Array | string>;

/** Why a file could not be written: names the file, says what happened and what to do. */
export class WriteError extends Error {
  readonly path: string;
  /** The system's code: `ENOSPC`, `EACCES`, … */
  readonly code: string;

  constructor(path: string, code: string, cause: unknown) {
    super(`${path} was not written: ${reason(code)}. What it held before is untouched.`, { cause });
    this.name = 'WriteError';
    this.path = path;
    this.code = code;
  }
}

function reason(code: string): string {
  switch (code) {
    case 'ENOSPC':
    case 'EDQUOT':
      return 'the disk is full; make room and save again';
    case 'EACCES':
    case 'EPERM':
    case 'EROFS':
      return 'its folder does not allow writing; choose another folder';
    case 'ENOENT':
      return 'its folder does not exist';
    case 'EISDIR':
      return 'it is a folder';
    default:
      return `the system answered ${code}`;
  }
}

function systemCode(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? error.code : null;
  return typeof code === 'string' ? code : 'an unknown error';
}

/**
 * Writes a file through a temporary file in the same folder: written, flushed to the disk (fsync), renamed over the old one.
 *
 * A symbolic link is followed, its target replaced. The mode of an existing file is kept.
 *
 * @throws WriteError; the old content is then untouched and no temporary file remains.
 */
export async function writeAtomically(
  path: string,
  content: Content,
  options: { mode?: number } = {},
): Promise<void> {
  let temporary: string | null = null;
  try {
    const target = await realpath(path).catch(() => path);
    const existing = await lstat(target).catch(() => null);
    if (existing?.isDirectory()) throw Object.assign(new Error('a folder'), { code: 'EISDIR' });
    const mode = existing ? existing.mode & 0o777 : (options.mode ?? 0o666);
    const name = join(dirname(target), `.${basename(target)}.${randomBytes(6).toString('hex')}.part`);
    const handle = await open(name, 'wx', mode);
    temporary = name;
    try {
      if (existing) await handle.chmod(mode);
      await writeContent(handle, content);
      await handle.sync();
    } finally {
      await handle.close();
    }
    await rename(temporary, target);
    temporary = null;
    await syncFolder(dirname(target));
  } catch (error) {
    if (temporary !== null) await rm(temporary, { force: true });
    const code = systemCode(error);
    // An error of the content's own source is its own; only the file system's errors are told in our words.
    if (code === 'an unknown error') throw error;
    throw new WriteError(path, code, error);
  }
}

async function writeContent(handle: FileHandle, content: Content): Promise<void> {
  if (typeof content === 'string' || content instanceof Uint8Array) {
    await writeAll(handle, content);
    return;
  }
  for await (const chunk of content) await writeAll(handle, chunk);
}

async function writeAll(handle: FileHandle, chunk: Uint8Array | string): Promise<void> {
  const bytes = typeof chunk === 'string' ? Buffer.from(chunk, 'utf8') : chunk;
  let at = 0;
  while (at < bytes.length) {
    const { bytesWritten } = await handle.write(bytes, at, bytes.length - at);
    at += bytesWritten;
  }
}

/** Flushes the rename itself; not every system lets a folder be opened for that. */
async function syncFolder(folder: string): Promise<void> {
  const handle = await open(folder, 'r').catch(() => null);
  if (!handle) return;
  await handle.sync().catch(() => undefined);
  await handle.close();
}

/** Makes a folder and its parents, open to its owner alone. */
export async function ensurePrivateFolder(folder: string): Promise<void> {
  await mkdir(folder, { recursive: true, mode: 0o700 });
}
