/** The demonstration that comes with the program: an invented campaign, marked as invented in its files. */
import { readdir } from 'node:fs/promises';
import { join } from 'node:path';

/** Paths of the demo's models in order of name; empty where the program came without them. @param root The program's folder. */
export async function demoFiles(root: string): Promise<string[]> {
  const folder = join(root, 'assets', 'demo');
  // Without the demo the window opens empty and says what to do.
  const entries = await readdir(folder, { withFileTypes: true }).catch(() => []);
  return entries
    .filter(
      entry => entry.isFile() && !entry.name.endsWith('.deasil.json') && !/^(readme|\.)/i.test(entry.name),
    )
    .map(entry => join(folder, entry.name))
    .sort();
}
