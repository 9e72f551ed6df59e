#!/usr/bin/env node
/**
 * Builds the program into `dist/`: the command, the Electron shell with the loopback host, and the window.
 *
 *     node build.config.mjs                everything
 *     node build.config.mjs window         one part or several: command, electron, window
 *     node build.config.mjs --if-stale     the same, but only parts that were built from other sources than those there now
 *     node build.config.mjs sbom           the bill of materials of the last build, into `dist/sbom.json`
 *     node build.config.mjs bench          the benchmarks, into `dist/bench`
 *
 * Each part is built aside and moved into place whole, so that a running program never meets half a build.
 */
import { createHash } from 'node:crypto';
import { chmod, copyFile, mkdir, readFile, readdir, rename, rm, stat, writeFile } from 'node:fs/promises';
import { existsSync } from 'node:fs';
import { basename, dirname, join, relative, sep } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = dirname(fileURLToPath(import.meta.url));
process.chdir(root);
const dist = join(root, 'dist');
const lockFolder = join(root, 'node_modules', '.deasil-build-lock');

/** Sources whose change makes the build stale. */
const SOURCES = ['core', 'electron', 'renderer', 'assets', 'build.config.mjs', 'vite.config.ts', 'package-lock.json', 'package.json'];

/** Packages that hold a native binary and so stay outside the bundles. */
const NATIVE = ['@resvg/resvg-js'];

/** Files of packages that the command may read at run time; they are laid beside its bundle. */
const COMMAND_ASSETS = ['node_modules/@rdkit/rdkit/dist/RDKit_minimal.wasm', 'node_modules/openchemlib/dist/resources.json'];

/** A lock older than this was left behind by a build that was killed, ms. */
const STALE_LOCK = 120_000;

const byText = (a, b) => (a < b ? -1 : a > b ? 1 : 0);

/** Every file under a path of the project, relative to it. */
async function filesUnder(path) {
  const full = join(root, path);
  const info = await stat(full).catch(() => null);
  if (!info) return [];
  if (!info.isDirectory()) return [path];
  const entries = await readdir(full, { withFileTypes: true, recursive: true });
  return entries.filter(entry => entry.isFile()).map(entry => join(relative(root, entry.parentPath), entry.name));
}

/** Names, sizes and times of all sources in one hash. */
async function fingerprint() {
  const hash = createHash('sha256');
  for (const source of SOURCES) {
    for (const file of (await filesUnder(source)).sort(byText)) {
      const info = await stat(join(root, file)).catch(() => null);
      if (info) hash.update(`${file}\0${info.size}\0${info.mtimeMs}\n`);
    }
  }
  return hash.digest('hex');
}

/** Names every package from which a bundle took a module. */
function packageCollector(packages, part) {
  return {
    name: 'deasil-licences',
    generateBundle(_options, bundle) {
      for (const chunk of Object.values(bundle)) {
        if (chunk.type !== 'chunk') continue;
        for (const id of chunk.moduleIds) {
          const clean = id.replace(/^\0/, '').split('?')[0];
          const at = clean.lastIndexOf(`node_modules${sep}`);
          if (at < 0) continue;
          const names = clean.slice(at + `node_modules${sep}`.length).split(sep);
          const name = names[0].startsWith('@') ? `${names[0]}/${names[1]}` : names[0];
          const folder = `${clean.slice(0, at)}node_modules${sep}${name.split('/').join(sep)}`;
          addPackage(packages, folder, part);
        }
      }
    },
  };
}

function addPackage(packages, folder, part) {
  const parts = packages.get(folder) ?? new Set();
  parts.add(part);
  packages.set(folder, parts);
}

/** pdfkit looks its metrics of the standard fonts up beside itself; in a bundle they have to be part of it. */
const standardFonts = {
  name: 'deasil-standard-fonts',
  transform: {
    filter: { id: /pdfkit\.node\.mjs$/ },
    handler(code) {
      const names = [...code.matchAll(/require\$1\('#standard-fonts\/(\w+)'\)/g)].map(([, name]) => name);
      if (names.length === 0) throw new Error('pdfkit no longer looks its fonts up as the build expects');
      const imports = names.map(name => `import font${name} from '#standard-fonts/${name}';\n`).join('');
      return imports + code.replaceAll(/require\$1\('#standard-fonts\/(\w+)'\)/g, 'font$1');
    },
  },
};

/** Bundles TypeScript for Node. */
async function bundle(options) {
  const { build } = await import('rolldown');
  const { input, dir, format, part, packages, external = [], extension = 'js' } = options;
  await build({
    input,
    platform: 'node',
    cwd: root,
    external: [...NATIVE, 'electron', ...external],
    logLevel: 'warn',
    checks: { pluginTimings: false },
    plugins: [standardFonts, packageCollector(packages, part)],
    transform: { define: { 'process.env.NODE_ENV': '"production"' } },
    output: {
      dir,
      format,
      entryFileNames: `[name].${extension}`,
      chunkFileNames: `[name]-[hash].${extension}`,
      codeSplitting: format === 'esm',
    },
  });
}

async function buildCommand(staging, packages) {
  const dir = join(staging, 'command');
  await bundle({ input: { deasil: 'core/commands/main.ts' }, dir, format: 'esm', part: 'command', packages });
  const entry = join(dir, 'deasil.js');
  const text = await readFile(entry, 'utf8');
  if (!text.startsWith('#!')) await writeFile(entry, `#!/usr/bin/env node\n${text}`);
  await chmod(entry, 0o755);
  const chunks = await Promise.all((await readdir(dir)).map(name => readFile(join(dir, name), 'utf8')));
  for (const asset of COMMAND_ASSETS) {
    // Only what the command reads: these are the bulk of its size.
    if (chunks.some(chunk => chunk.includes(basename(asset)))) await copyFile(join(root, asset), join(dir, basename(asset)));
  }
}

async function buildShell(staging, packages) {
  const input = { main: 'electron/main.ts', start: 'electron/start.ts' };
  const dir = join(staging, 'electron');
  await bundle({ input, dir, format: 'esm', part: 'electron', packages });
  await bundle({
    input: { preload: 'electron/preload.ts' },
    dir,
    format: 'cjs',
    extension: 'cjs',
    part: 'electron',
    packages,
  });
}

async function buildWindow(staging, packages) {
  const { build, createLogger, loadConfigFromFile } = await import('vite');
  const environment = { command: 'build', mode: 'production' };
  const loaded = await loadConfigFromFile(environment, join(root, 'vite.config.ts'), root, 'error');
  const config = loaded?.config ?? {};
  const plain = createLogger('warn');
  const logger = createLogger('warn');
  // rdkit.js asks for Node's modules only when it runs in Node.
  logger.warn = (message, options) => {
    if (!/Module "node:(fs|crypto)" has been externalized.*@rdkit/.test(message)) plain.warn(message, options);
  };
  const workerPlugins = config.worker?.plugins;
  const collector = packageCollector(packages, 'window');
  await build({
    ...config,
    configFile: false,
    mode: 'production',
    customLogger: logger,
    logLevel: 'warn',
    plugins: [...(config.plugins ?? []), collector],
    worker: { ...config.worker, plugins: () => [...(workerPlugins?.() ?? []), packageCollector(packages, 'window')] },
    build: { ...config.build, outDir: join(staging, 'window'), emptyOutDir: true },
  });
}

/** Licences of all that the bundles contain, with their texts. */
async function licences(packages) {
  const list = new Map();
  for (const [folder, parts] of packages) {
    const manifest = JSON.parse(await readFile(join(folder, 'package.json'), 'utf8'));
    const files = (await readdir(folder)).filter(name => /^(licen[cs]e|copying|notice)/i.test(name)).sort(byText);
    const texts = [];
    for (const file of files) {
      if ((await stat(join(folder, file))).isFile()) texts.push(await readFile(join(folder, file), 'utf8'));
    }
    const licence = typeof manifest.license === 'string' ? manifest.license : (manifest.license?.type ?? null);
    const key = `${manifest.name}@${manifest.version}`;
    const earlier = list.get(key);
    list.set(key, {
      name: manifest.name,
      version: manifest.version,
      licence: licence ?? 'see the text',
      homepage: manifest.homepage ?? null,
      parts: [...new Set([...(earlier?.parts ?? []), ...parts])].sort(byText),
      text: texts.join('\n\n').trim(),
    });
  }
  return [...list.values()].sort((a, b) => byText(a.name, b.name));
}

/** Moves a built part into place. */
async function install(staging, part) {
  const fresh = join(staging, part);
  const target = join(dist, part);
  const old = join(staging, `${part}.old`);
  if (existsSync(target)) await rename(target, old);
  await rename(fresh, target);
}

/** Runs one build at a time in this checkout. */
async function locked(task) {
  for (;;) {
    try {
      await mkdir(lockFolder, { recursive: false });
      break;
    } catch (error) {
      if (error.code !== 'EEXIST') throw error;
      const info = await stat(lockFolder).catch(() => null);
      if (info && Date.now() - info.mtimeMs > STALE_LOCK) await rm(lockFolder, { recursive: true, force: true });
      await new Promise(resolve => setTimeout(resolve, 100));
    }
  }
  try {
    return await task();
  } finally {
    await rm(lockFolder, { recursive: true, force: true });
  }
}

/** Files of others that lie among our sources (fonts), by the licence beside them: `<name>-LICENSE.txt`. */
async function vendoredLicences() {
  const list = [];
  for (const [folder, parts] of [
    ['renderer', ['window']],
    ['core', ['command', 'window']],
    ['assets', ['command']],
  ]) {
    for (const file of await filesUnder(folder)) {
      const name = /^(.+)-LICEN[CS]E\.txt$/.exec(basename(file))?.[1];
      if (name === undefined) continue;
      const text = await readFile(join(root, file), 'utf8');
      const licence = text.includes('SIL Open Font License, Version 1.1') ? 'OFL-1.1' : 'see the text';
      list.push({ name, version: null, licence, homepage: null, parts, text: text.trim() });
    }
  }
  return list;
}

const PARTS = { command: buildCommand, electron: buildShell, window: buildWindow };

/** Packages that are shipped beside a bundle rather than in it. */
const BESIDE = { command: NATIVE, electron: ['electron'], window: [] };

const stampFile = part => join(dist, `.stamp-${part}`);
const licencesFile = part => join(dist, `.licences-${part}.json`);

/** Builds one part. @returns what went wrong, or null. */
async function buildPart(part, mark, staging) {
  const packages = new Map();
  try {
    await PARTS[part](staging, packages);
    for (const name of BESIDE[part]) addPackage(packages, join(root, 'node_modules', ...name.split('/')), part);
    await writeFile(licencesFile(part), JSON.stringify(await licences(packages)));
    await install(staging, part);
    await writeFile(stampFile(part), mark);
    return null;
  } catch (error) {
    await rm(stampFile(part), { force: true });
    return `build: ${part} failed: ${error instanceof Error ? error.message : String(error)}`;
  }
}

/** Puts the parts' lists of licences together, for the program to show. */
async function joinLicences() {
  const list = new Map();
  for (const part of Object.keys(PARTS)) {
    const text = await readFile(licencesFile(part), 'utf8').catch(() => '[]');
    for (const entry of JSON.parse(text)) {
      const key = `${entry.name}@${entry.version}`;
      const earlier = list.get(key);
      list.set(key, { ...entry, parts: [...(earlier?.parts ?? []), ...entry.parts] });
    }
  }
  for (const entry of await vendoredLicences()) list.set(entry.name, entry);
  const text = JSON.stringify([...list.values()].sort((one, other) => byText(one.name, other.name)), null, 1);
  await writeFile(join(dist, 'licences.json'), text);
  if (existsSync(join(dist, 'window'))) await writeFile(join(dist, 'window', 'licences.json'), text);
}

async function buildParts(parts, onlyStale) {
  const started = Date.now();
  const mark = await fingerprint();
  const stale = [];
  for (const part of parts) {
    if (!onlyStale || (await readFile(stampFile(part), 'utf8').catch(() => '')) !== mark) stale.push(part);
  }
  if (stale.length === 0) return;
  await mkdir(dist, { recursive: true });
  const staging = join(dist, `.staging-${process.pid}`);
  const failures = await Promise.all(stale.map(part => buildPart(part, mark, staging)));
  await rm(staging, { recursive: true, force: true });
  await joinLicences();
  for (const failure of failures) if (failure !== null) console.error(failure);
  if (failures.some(failure => failure !== null)) process.exitCode = 1;
  console.error(`build: ${stale.join(', ')} in ${((Date.now() - started) / 1000).toFixed(1)} s`);
}

async function buildBench() {
  const dir = join(dist, 'bench');
  await rm(dir, { recursive: true, force: true });
  await bundle({
    input: { main: 'test/bench/main.ts' },
    dir,
    format: 'esm',
    part: 'bench',
    packages: new Map(),
    external: [/^[^./]/],
  });
}

/** The software bill of materials of what is shipped (CycloneDX): the lock file's entries for the packages in the bundles. */
async function buildSbom() {
  const { execFile } = await import('node:child_process');
  const { promisify } = await import('node:util');
  const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm';
  const options = { cwd: root, maxBuffer: 64 * 1024 * 1024, shell: process.platform === 'win32' };
  const { stdout } = await promisify(execFile)(npm, ['sbom', '--sbom-format', 'cyclonedx', '--package-lock-only'], options);
  const document = JSON.parse(stdout);
  const shipped = JSON.parse(await readFile(join(dist, 'licences.json'), 'utf8'));
  const wanted = new Set(shipped.filter(entry => entry.version !== null).map(entry => `${entry.name}@${entry.version}`));
  const components = [];
  for (const component of document.components) {
    const name = component.group ? `${component.group}/${component.name}` : component.name;
    if (!wanted.delete(`${name}@${component.version}`)) continue;
    // Packages are bundled, so npm holds them for tools of development; they are shipped all the same.
    const properties = (component.properties ?? []).filter(({ name: property }) => property !== 'cdx:npm:package:development');
    components.push({ ...component, scope: 'required', properties });
  }
  if (wanted.size > 0) throw new Error(`build: the lock file does not know ${[...wanted].join(', ')}`);
  for (const entry of await vendoredLicences()) {
    components.push({
      'bom-ref': entry.name,
      type: 'file',
      name: entry.name,
      scope: 'required',
      licenses: [{ license: { id: entry.licence } }],
    });
  }
  // npm names the component after the folder of the checkout.
  document.metadata.component.name = JSON.parse(await readFile(join(root, 'package.json'), 'utf8')).name;
  const references = new Set([document.metadata.component['bom-ref'], ...components.map(component => component['bom-ref'])]);
  const dependencies = document.dependencies
    .filter(({ ref }) => references.has(ref))
    .map(({ ref, dependsOn = [] }) => ({ ref, dependsOn: dependsOn.filter(other => references.has(other)) }));
  await writeFile(join(dist, 'sbom.json'), JSON.stringify({ ...document, components, dependencies }, null, 1));
  console.error(`build: ${components.length} packages in dist/sbom.json`);
}

const args = process.argv.slice(2);
const names = args.filter(argument => argument !== '--if-stale');
if (names.length === 1 && names[0] === 'bench') await buildBench();
else if (names.length === 1 && names[0] === 'sbom') await buildSbom();
else if (names.every(name => Object.hasOwn(PARTS, name))) {
  const parts = names.length === 0 ? Object.keys(PARTS) : names;
  await locked(() => buildParts(parts, args.includes('--if-stale')));
} else {
  console.error(`build: ${names.join(' ')} is not understood; parts are ${Object.keys(PARTS).join(', ')}, or bench, or sbom`);
  process.exitCode = 2;
}
