/** The list of recently opened files, kept between runs. */
import { readFile } from 'node:fs/promises';
import { dirname, isAbsolute } from 'node:path';
import { z } from 'zod';
import { ensurePrivateFolder, writeAtomically } from '../../core/commands/atomic-write.ts';

/** Files kept in the list. */
const LENGTH = 20;

const document = z.strictObject({ version: z.literal(1), files: z.array(z.string()) });

export class RecentList {
  readonly #path: string;
  #writing: Promise<void> = Promise.resolve();

  /** @param path Where the list is kept. */
  constructor(path: string) {
    this.#path = path;
  }

  /** Absolute paths, the latest first. A list that cannot be read is an empty one: it is a convenience, never the only copy of anything. */
  async paths(): Promise<string[]> {
    const text = await readFile(this.#path, 'utf8').catch(() => null);
    if (text === null) return [];
    try {
      return document
        .parse(JSON.parse(text))
        .files.filter(path => isAbsolute(path))
        .slice(0, LENGTH);
    } catch {
      return [];
    }
  }

  /** Puts paths at the head of the list. */
  async add(paths: readonly string[]): Promise<void> {
    this.#writing = this.#writing.then(async () => {
      const files = [...new Set([...paths, ...(await this.paths())])].slice(0, LENGTH);
      await ensurePrivateFolder(dirname(this.#path));
      await writeAtomically(this.#path, `${JSON.stringify({ version: 1, files }, null, 1)}\n`, {
        mode: 0o600,
      });
    });
    const written = this.#writing;
    // A failed write must not block the next one.
    this.#writing = written.catch(() => undefined);
    await written;
  }
}
