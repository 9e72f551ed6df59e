/** The files the person named or handed over: the only ones the window can reach, each by a random handle. */
import { createHash, randomBytes } from 'node:crypto';
import { type FileHandle, mkdtemp, open, realpath, rm, stat } from 'node:fs/promises';
import { createReadStream, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { basename, join, resolve } from 'node:path';
import type { HostFile } from '../../renderer/host.ts';
import { CONTENT_LIMIT, HostError, READ_LIMIT } from '../../renderer/host-messages.ts';

/** What tells one version of a file from the next. */
export interface Version {
  readonly size: number;
  readonly modified: number;
  readonly inode: number;
}

export interface TableEntry {
  readonly id: string;
  readonly name: string;
  /** Where the bytes are: the named file, or the private copy of handed-over content. */
  readonly path: string;
  /** SHA-256 of handed-over content and of the program's own files, beside which nothing can be kept; null for a named file. */
  readonly digest: string | null;
  version: Version;
}

function versionOf(info: { size: number; mtimeMs: number; ino: number }): Version {
  return { size: info.size, modified: info.mtimeMs, inode: info.ino };
}

/** Whether two looks at a file saw the same version. */
export function sameVersion(one: Version, other: Version): boolean {
  return one.size === other.size && one.modified === other.modified && one.inode === other.inode;
}

function systemReason(error: unknown): string {
  const code = error instanceof Error && 'code' in error ? error.code : null;
  if (code === 'ENOENT') return 'there is no such file';
  if (code === 'EACCES' || code === 'EPERM') return 'reading it is not allowed';
  if (code === 'EISDIR') return 'it is a folder';
  return error instanceof Error ? error.message : String(error);
}

export class FileTable {
  readonly #entries = new Map<string, TableEntry>();
  readonly #byPath = new Map<string, TableEntry>();
  #folder: string | null = null;

  /**
   * Enters a file the person named, or one of the program's own, which is treated like handed-over content: the
   * folder it lies in is not the person's to write to.
   *
   * @throws HostError `not-readable` when it cannot be read or is not a file.
   */
  async add(path: string, own = false): Promise<HostFile> {
    const full = resolve(path);
    try {
      const real = await realpath(full);
      const info = await stat(real);
      if (!info.isFile()) throw new HostError('not-readable', `${full} cannot be opened: it is not a file`);
      const known = this.#byPath.get(full);
      if (known) return { id: known.id, name: known.name, size: info.size };
      const handle = await open(real, 'r');
      await handle.close();
      return this.#enter(basename(full), full, own ? await digestOf(real) : null, versionOf(info));
    } catch (error) {
      if (error instanceof HostError) throw error;
      throw new HostError('not-readable', `${full} cannot be opened: ${systemReason(error)}`, error);
    }
  }

  /** Enters content that has no path; it is kept in a private temporary folder until `dispose`. @throws HostError `too-large`. */
  async offer(name: string, content: AsyncIterable<Uint8Array>, limit = CONTENT_LIMIT): Promise<HostFile> {
    this.#folder ??= await mkdtemp(join(tmpdir(), 'deasil-content-'));
    const path = join(this.#folder, randomBytes(16).toString('hex'));
    const hash = createHash('sha256');
    const handle = await open(path, 'wx', 0o600);
    try {
      await store(handle, content, limit, name, chunk => hash.update(chunk));
    } catch (error) {
      await handle.close();
      await rm(path, { force: true });
      throw error;
    }
    const info = await handle.stat();
    await handle.close();
    return this.#enter(name, path, hash.digest('hex'), versionOf(info));
  }

  #enter(name: string, path: string, digest: string | null, version: Version): HostFile {
    const entry: TableEntry = { id: randomBytes(16).toString('hex'), name, path, digest, version };
    this.#entries.set(entry.id, entry);
    this.#byPath.set(path, entry);
    return publicView(entry);
  }

  /** The entry of a handle. @throws HostError `unknown-file`. */
  entry(id: string): TableEntry {
    const entry = this.#entries.get(id);
    if (!entry)
      throw new HostError('unknown-file', 'the window asked for a file that was not opened; open it again');
    return entry;
  }

  /**
   * Reads at most `length` bytes from `offset`. A read from 0 begins a new pass over the file as it now is; a later
   * read of the same pass meets the same version or fails.
   *
   * @throws HostError `unknown-file`, `not-readable`, `file-changed`.
   */
  async read(id: string, offset: number, length: number): Promise<Uint8Array> {
    const entry = this.entry(id);
    let handle: FileHandle;
    try {
      handle = await open(entry.path, 'r');
    } catch (error) {
      throw new HostError(
        'not-readable',
        `${entry.name} can no longer be read: ${systemReason(error)}`,
        error,
      );
    }
    try {
      const version = versionOf(await handle.stat());
      if (offset === 0) entry.version = version;
      else if (!sameVersion(version, entry.version)) {
        throw new HostError(
          'file-changed',
          `${entry.name} was changed while it was being read; read it again`,
        );
      }
      const wanted = Math.max(0, Math.min(length, READ_LIMIT, version.size - offset));
      const bytes = new Uint8Array(wanted);
      let filled = 0;
      while (filled < wanted) {
        const { bytesRead } = await handle.read(bytes, filled, wanted - filled, offset + filled);
        if (bytesRead === 0) break;
        filled += bytesRead;
      }
      if (filled < wanted) {
        throw new HostError(
          'file-changed',
          `${entry.name} was cut short while it was being read; read it again`,
        );
      }
      return bytes;
    } catch (error) {
      if (error instanceof HostError) throw error;
      throw new HostError('not-readable', `${entry.name} could not be read: ${systemReason(error)}`, error);
    } finally {
      await handle.close();
    }
  }

  /** The version on the disk now; null while there is no such file. */
  async look(entry: TableEntry): Promise<Version | null> {
    const info = await stat(entry.path).catch(() => null);
    return info?.isFile() ? versionOf(info) : null;
  }

  /** Removes the private copies. */
  dispose(): void {
    if (this.#folder !== null) rmSync(this.#folder, { recursive: true, force: true });
    this.#folder = null;
    this.#entries.clear();
    this.#byPath.clear();
  }
}

async function digestOf(path: string): Promise<string> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path) as AsyncIterable<Buffer>) hash.update(chunk);
  return hash.digest('hex');
}

function publicView(entry: TableEntry): HostFile {
  return { id: entry.id, name: entry.name, size: entry.version.size };
}

async function store(
  handle: FileHandle,
  content: AsyncIterable<Uint8Array>,
  limit: number,
  name: string,
  seen: (chunk: Uint8Array) => void,
): Promise<void> {
  let total = 0;
  for await (const chunk of content) {
    total += chunk.length;
    if (total > limit)
      throw new HostError('too-large', `${name} is larger than ${limit} bytes; open it by its path`);
    seen(chunk);
    await handle.writeFile(chunk);
  }
}
