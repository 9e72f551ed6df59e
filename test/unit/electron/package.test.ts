/** Packing: the configuration by the builder's own check, and the files of a real pack around a stand-in for the runtime. */
import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build, type Configuration, Platform } from 'electron-builder';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import configuration from '../../../electron-builder.config.ts';
import { ASSOCIATIONS } from '../../../electron/associations.ts';
import { ensureBuilt } from '../../browser/launch.ts';

const root = fileURLToPath(new URL('../../..', import.meta.url));
const require = createRequire(import.meta.url);

interface Checker {
  readonly getConfig: (folder: string, file: string, more: null) => Promise<Configuration>;
  readonly validateConfiguration: (configuration: unknown, logger: unknown) => Promise<void>;
}

const { getConfig, validateConfiguration } = require('app-builder-lib/out/util/config/config.js') as Checker;
const { DebugLogger } = require('builder-util') as { DebugLogger: new (enabled: boolean) => unknown };
const asar = require('@electron/asar') as {
  listPackage(path: string): string[];
  extractFile(path: string, name: string): Buffer;
};

describe("the builder's configuration", () => {
  test('is accepted by the builder, which refuses a key it does not know', async () => {
    const read = await getConfig(root, 'electron-builder.config.ts', null);
    await expect(validateConfiguration(read, new DebugLogger(false))).resolves.toBeUndefined();
    await expect(validateConfiguration({ ...read, unheardOf: true }, new DebugLogger(false))).rejects.toThrow(
      /unheardOf/,
    );
  });

  test('sets every fuse to the safe side', () => {
    expect(configuration.electronFuses).toEqual({
      runAsNode: false,
      enableCookieEncryption: true,
      enableNodeOptionsEnvironmentVariable: false,
      enableNodeCliInspectArguments: false,
      enableEmbeddedAsarIntegrityValidation: true,
      onlyLoadAppFromAsar: true,
      loadBrowserProcessSpecificV8Snapshot: false,
      grantFileProtocolExtraPrivileges: false,
    });
  });

  test('associates the formats that are ours to open', () => {
    const extensions = ASSOCIATIONS.flatMap(kind => kind.extensions);
    for (const extension of ['sdf', 'mol', 'smi', 'cif', 'pdb', 'ent', 'mmcif', 'xyz'])
      expect(extensions).toContain(extension);
    expect(new Set(extensions).size).toBe(extensions.length);
    const associated = configuration.fileAssociations;
    expect(Array.isArray(associated) ? associated.flatMap(kind => kind.ext) : []).toEqual(extensions);
  });

  test('builds for Linux, macOS and Windows', () => {
    for (const platform of ['linux', 'mac', 'win'] as const)
      expect(configuration[platform]?.target).toHaveLength(platform === 'linux' ? 2 : 1);
  });
});

describe('what is packed', () => {
  let folder: string;
  let archive: string;
  let packed: string[];

  beforeAll(async () => {
    ensureBuilt('electron', 'window');
    folder = mkdtempSync(join(tmpdir(), 'deasil-package-'));
    const runtime = join(folder, 'runtime');
    mkdirSync(join(runtime, 'resources'), { recursive: true });
    writeFileSync(join(runtime, 'electron'), '', { mode: 0o755 });
    writeFileSync(join(runtime, 'version'), '45.5.0');
    await build({
      projectDir: root,
      targets: Platform.LINUX.createTarget('dir'),
      publish: 'never',
      config: {
        ...configuration,
        electronDist: runtime,
        // Fuses are set in the runtime's binary, which the stand-in lacks.
        electronFuses: null,
        directories: { ...configuration.directories, output: join(folder, 'out') },
      },
    });
    archive = join(folder, 'out', 'linux-unpacked', 'resources', 'app.asar');
    packed = asar.listPackage(archive);
  }, 120_000);

  afterAll(() => {
    rmSync(folder, { recursive: true, force: true });
  });

  test('holds the shell, the preload, the demo, the licences and the icon', () => {
    for (const file of [
      '/package.json',
      '/LICENSE',
      '/dist/electron/main.js',
      '/dist/electron/preload.cjs',
      '/dist/licences.json',
      '/assets/icons/icon.png',
    ]) {
      expect(packed).toContain(file);
    }
    expect(packed.filter(file => file.startsWith('/assets/demo/')).length).toBeGreaterThan(0);
  });

  test('holds all of the window: its page, and every file that a file of it names', () => {
    expect(packed).toContain('/dist/window/index.html');
    const files = packed.filter(file => file.startsWith('/dist/window/'));
    const names = new Set(files.map(file => file.slice(file.lastIndexOf('/') + 1)));
    for (const file of files.filter(name => /\.(html|js|css)$/.test(name))) {
      const text = asar.extractFile(archive, file.slice(1)).toString('utf8');
      for (const [, name] of text.matchAll(
        /["'(/]([\w.-]+-[\w-]{8}\.(?:js|css|wasm|woff2|json|svg|png))["')]/g,
      )) {
        expect(names).toContain(name);
      }
    }
  });

  test('holds every chunk that the main process imports', () => {
    for (const file of packed.filter(name => /^\/dist\/electron\/.*\.c?js$/.test(name))) {
      const text = asar.extractFile(archive, file.slice(1)).toString('utf8');
      for (const [, name] of text.matchAll(/(?:from|import)\s*["']\.\/([\w.-]+)["']/g)) {
        expect(packed).toContain(`/dist/electron/${name}`);
      }
    }
  });

  test('holds no sources, tests, tools or packages', () => {
    const strays = packed.filter(file =>
      /\.(ts|tsx|map)$|node_modules|\/test(\/|$)|\/\.|\/core\/|\/renderer\//.test(file),
    );
    expect(strays).toEqual([]);
  });

  test('needs no package at run time but Electron', () => {
    for (const file of packed.filter(name => /^\/dist\/electron\/.*\.c?js$/.test(name))) {
      const text = asar.extractFile(archive, file.slice(1)).toString('utf8');
      const imported = [
        ...text.matchAll(/^import\s[^;]*?["']([^."'][^"']*)["'];?$/gm),
        ...text.matchAll(/require\(["']([^."'][^"']*)["']\)/g),
      ];
      for (const [, name] of imported) expect(name === 'electron' || name?.startsWith('node:')).toBe(true);
    }
  });
});

/** Where the bundles begin. */
const ENTRIES = [
  'core/commands/main.ts',
  'electron/main.ts',
  'electron/start.ts',
  'electron/preload.ts',
  'renderer/main.tsx',
];

/** The packages that the program's own sources import, from the entries on, for more than their types. */
function importedPackages(): Set<string> {
  const packages = new Set<string>();
  const seen = new Set<string>();
  const waiting = ENTRIES.map(entry => join(root, entry));
  for (let file = waiting.pop(); file !== undefined; file = waiting.pop()) {
    if (seen.has(file) || !/\.tsx?$/.test(file)) continue;
    seen.add(file);
    const source = readFileSync(file, 'utf8');
    const modules = [
      ...source.matchAll(/^(?:import|export) (?!type\b)[^';]*from '([^']+)'/gm),
      ...source.matchAll(/\bimport\('([^']+)'\)/g),
      ...source.matchAll(/new URL\('(\.[^']+)', import\.meta\.url\)/g),
    ];
    for (const [, module] of modules) {
      if (module!.startsWith('.')) waiting.push(join(dirname(file), module!));
      else {
        const found = /^(@[^/]+\/[^/]+|[^/:]+)(\/|$)/.exec(module!)?.[1];
        if (found !== undefined) packages.add(found);
      }
    }
  }
  return packages;
}

test('the list of licences names every package of the program, each with its text and a licence that allows shipping it', () => {
  ensureBuilt();
  const list = JSON.parse(readFileSync(join(root, 'dist', 'licences.json'), 'utf8')) as {
    name: string;
    version: string | null;
    licence: string;
    text: string;
    parts: string[];
  }[];
  const names = list.map(entry => entry.name);
  const imported = importedPackages();
  expect(imported.size).toBeGreaterThan(3);
  for (const name of imported) expect(names).toContain(name);
  expect(names).toContain('@resvg/resvg-js');
  for (const entry of list) {
    const { name, licence, parts } = entry;
    expect({ name, licence, parts }).toEqual({
      name,
      licence: expect.stringMatching(PERMISSIVE),
      parts: expect.arrayContaining([expect.stringMatching(/^(command|electron|window)$/)]),
    });
    // Some packages name their licence and ship no text of it.
    expect({ name, text: entry.text.length > 500 || TEXTLESS.has(name) }).toEqual({ name, text: true });
  }
  expect(JSON.parse(readFileSync(join(root, 'dist', 'window', 'licences.json'), 'utf8'))).toEqual(list);
});

/** Packages whose npm archive names a licence without its text. */
const TEXTLESS: ReadonlySet<string> = new Set(['@rdkit/rdkit']);

/** Licences under which a program may be shipped with its own MIT licence. */
const PERMISSIVE =
  /^\(?(MIT|ISC|BSD-2-Clause|BSD-3-Clause|Apache-2\.0|0BSD|MPL-2\.0|CC0-1\.0|Unlicense|Zlib|OFL-1\.1|WTFPL|MIT AND Zlib|MIT OR .*)\)?/;
