/** Session files: `<input>.deasil.json` beside a named input, or by content in Deasil's own folder for what was handed over. */
import { readFile, stat } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import { ensurePrivateFolder, writeAtomically, WriteError } from '../../core/commands/atomic-write.ts';
import { HostError, SESSION_LIMIT } from '../../renderer/host-messages.ts';
import type { TableEntry } from './file-table.ts';

/** Where the session of a file is kept. @param folder Deasil's own folder, for content without a path. */
export function sessionPath(entry: TableEntry, folder: string): string {
  return entry.digest === null
    ? `${entry.path}.deasil.json`
    : join(folder, 'sessions', `${entry.digest}.deasil.json`);
}

/** Reads a session; null when there is none. @throws HostError `not-readable`, `too-large`. */
export async function readSession(entry: TableEntry, folder: string): Promise<string | null> {
  const path = sessionPath(entry, folder);
  try {
    const info = await stat(path);
    if (info.size > SESSION_LIMIT) {
      throw new HostError('too-large', `${path} is larger than a session can be (${SESSION_LIMIT} bytes)`);
    }
    return await readFile(path, 'utf8');
  } catch (error) {
    if (error instanceof HostError) throw error;
    if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return null;
    throw new HostError('not-readable', `${path} cannot be read: ${String(error)}`, error);
  }
}

/** Writes a session atomically. @throws HostError `bad-request` for what is not JSON, `not-written`. */
export async function writeSession(entry: TableEntry, folder: string, json: string): Promise<void> {
  try {
    JSON.parse(json);
  } catch (error) {
    throw new HostError('bad-request', 'the session is not a JSON document; nothing was written', error);
  }
  const path = sessionPath(entry, folder);
  try {
    if (entry.digest !== null) await ensurePrivateFolder(dirname(path));
    await writeAtomically(path, json, { mode: entry.digest === null ? 0o666 : 0o600 });
  } catch (error) {
    if (error instanceof WriteError) throw new HostError('not-written', error.message, error);
    throw error;
  }
}
