/** The built window as a closed list of files: what is not in the list cannot be asked for, whatever the path says. */
import { readdir, readFile } from 'node:fs/promises';
import { extname, join } from 'node:path';
import { headersFor } from './policy.ts';

const TYPES: Readonly<Record<string, string>> = {
  '.html': 'text/html; charset=utf-8',
  '.js': 'text/javascript; charset=utf-8',
  '.css': 'text/css; charset=utf-8',
  '.json': 'application/json; charset=utf-8',
  '.wasm': 'application/wasm',
  '.svg': 'image/svg+xml',
  '.png': 'image/png',
  '.ico': 'image/x-icon',
  '.woff2': 'font/woff2',
  '.ttf': 'font/ttf',
  '.txt': 'text/plain; charset=utf-8',
};

export interface WindowFile {
  readonly bytes: Uint8Array<ArrayBuffer>;
  readonly headers: Readonly<Record<string, string>>;
}

/** Enters the files under a folder by their address path. */
async function walk(folder: string, prefix: string, paths: Map<string, string>): Promise<void> {
  for (const entry of await readdir(join(folder, prefix), { withFileTypes: true })) {
    const path = prefix === '' ? entry.name : `${prefix}/${entry.name}`;
    if (entry.isDirectory()) await walk(folder, path, paths);
    else if (entry.isFile()) paths.set(`/${path}`, path);
  }
}

export class WindowFiles {
  readonly #folder: string;
  readonly #paths: ReadonlyMap<string, string>;

  private constructor(folder: string, paths: ReadonlyMap<string, string>) {
    this.#folder = folder;
    this.#paths = paths;
  }

  /** Lists the files of the built window. @throws Error when the window was not built. */
  static async list(folder: string): Promise<WindowFiles> {
    const paths = new Map<string, string>();
    try {
      await walk(folder, '', paths);
    } catch (error) {
      throw new Error(`the window is not built: ${folder} cannot be read; run "npm run build"`, {
        cause: error,
      });
    }
    return new WindowFiles(folder, paths);
  }

  /** The file at a path of the address, exactly as listed; `/` is the page. Null when there is none. */
  async get(path: string): Promise<WindowFile | null> {
    const wanted = path === '/' ? '/index.html' : path;
    const file = this.#paths.get(wanted);
    if (file === undefined) return null;
    const bytes = await readFile(join(this.#folder, file));
    return {
      bytes,
      headers: {
        ...headersFor(wanted),
        'Content-Type': TYPES[extname(file).toLowerCase()] ?? 'application/octet-stream',
        // Names under assets/ carry a hash of the content.
        'Cache-Control': wanted.startsWith('/assets/') ? 'private, max-age=31536000, immutable' : 'no-store',
      },
    };
  }
}
