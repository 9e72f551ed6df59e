/** Opens the built window in a real Chromium, for tests. */
import { spawn, spawnSync } from 'node:child_process';
import {
  accessSync,
  constants,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  readdirSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { delimiter, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { type Browser, type BrowserContext, chromium, type Page } from 'playwright-core';
import type { LoopbackHost } from '../../electron/loopback/server.ts';
import { serveLoopback } from '../../electron/loopback/serve.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));

/** Where tests put pictures and reports; not kept in the repository. */
export const outputFolder = join(root, 'test', 'output');
mkdirSync(outputFolder, { recursive: true });

/** Names under which systems install Chromium. */
const SYSTEM_NAMES = [
  'chromium',
  'chromium-browser',
  'google-chrome',
  'google-chrome-stable',
  'microsoft-edge',
];
const MAC_PATHS = [
  '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
  '/Applications/Chromium.app/Contents/MacOS/Chromium',
];

/** Software rendering with WebGL 2, and no traffic but the test's own. */
const FLAGS = [
  '--no-sandbox',
  '--use-gl=angle',
  '--use-angle=swiftshader',
  '--enable-unsafe-swiftshader',
  '--force-color-profile=srgb',
  '--hide-scrollbars',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-domain-reliability',
  '--disable-sync',
  '--disable-default-apps',
  '--disable-client-side-phishing-detection',
  '--disable-features=OptimizationHints,MediaRouter,Translate,AutofillServerCommunication,CertificateTransparencyComponentUpdater',
  '--metrics-recording-only',
  '--no-first-run',
  '--no-pings',
  '--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1',
];

function executable(path: string): boolean {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

function systemChromium(): string | null {
  const folders = (process.env['PATH'] ?? '').split(delimiter).filter(folder => folder !== '');
  const candidates = [
    ...folders.flatMap(folder => SYSTEM_NAMES.map(name => join(folder, name))),
    ...MAC_PATHS,
  ];
  return candidates.find(executable) ?? null;
}

/** Names the carried fonts, which the carried configuration looks for elsewhere, and the system's after them. @returns Its path. */
function fontConfiguration(folder: string): string {
  const path = join(folder, 'deasil-fonts.conf');
  const folders = [join(folder, 'fonts', 'fonts'), '/usr/share/fonts', '/usr/local/share/fonts'];
  writeFileSync(
    path,
    `<?xml version="1.0"?><!DOCTYPE fontconfig SYSTEM "fonts.dtd"><fontconfig>${folders
      .map(name => `<dir>${name}</dir>`)
      .join('')}<cachedir>${join(folder, 'font-cache')}</cachedir></fontconfig>`,
  );
  return path;
}

interface Chromium {
  readonly path: string;
  readonly env: NodeJS.ProcessEnv;
}

let carried: Promise<Chromium> | null = null;

/** Another process may be unpacking; one that takes longer than this has died, ms. */
const UNPACK_PATIENCE = 60_000;

/**
 * The Chromium that the test dependency carries, unpacked once for its version.
 *
 * Its libraries are unpacked only where it takes the machine for its own kind of host, so it is told so (`AWS_EXECUTION_ENV`);
 * it unpacks into the system's temporary folder, so it is given one of its own.
 */
async function carriedChromium(): Promise<Chromium> {
  const manifest = readFileSync(join(root, 'node_modules', '@sparticuz', 'chromium', 'package.json'), 'utf8');
  const { version } = JSON.parse(manifest) as { version: string };
  const folder = join(tmpdir(), `deasil-chromium-${version}-${process.getuid?.() ?? 'user'}`);
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  const lock = join(folder, 'lock');
  const started = Date.now();
  for (;;) {
    try {
      mkdirSync(lock);
      break;
    } catch {
      if (Date.now() - started > UNPACK_PATIENCE) rmSync(lock, { recursive: true, force: true });
      await new Promise(resolve => setTimeout(resolve, 100));
    }
  }
  const names = ['TMPDIR', 'AWS_EXECUTION_ENV', 'LD_LIBRARY_PATH', 'FONTCONFIG_PATH', 'HOME'];
  const earlier = names.map(name => [name, process.env[name]] as const);
  process.env['TMPDIR'] = folder;
  process.env['AWS_EXECUTION_ENV'] = 'AWS_Lambda_nodejs20.x';
  try {
    const { default: unpacker } = await import('@sparticuz/chromium');
    const path = await unpacker.executablePath();
    return { path, env: { ...process.env, FONTCONFIG_FILE: fontConfiguration(folder) } };
  } finally {
    for (const [name, value] of earlier) {
      if (value === undefined) delete process.env[name];
      else process.env[name] = value;
    }
    rmSync(lock, { recursive: true, force: true });
  }
}

/** Launches Chromium: `CHROMIUM_PATH`, else the system's, else the carried one. */
export async function launchBrowser(extraFlags: readonly string[] = []): Promise<Browser> {
  const named = process.env['CHROMIUM_PATH'] ?? systemChromium();
  const { path, env } = named ? { path: named, env: process.env } : await (carried ??= carriedChromium());
  return chromium.launch({
    executablePath: path,
    headless: true,
    args: [...FLAGS, ...extraFlags],
    env: Object.fromEntries(
      Object.entries(env).filter((entry): entry is [string, string] => entry[1] !== undefined),
    ),
  });
}

/** Builds parts of the program (`command`, `electron`, `window`) whose sources have changed since their last build. @throws Error with the build's own words. */
export function ensureBuilt(...parts: readonly ('command' | 'electron' | 'window')[]): void {
  const result = spawnSync(process.execPath, ['build.config.mjs', '--if-stale', ...parts], {
    cwd: root,
    encoding: 'utf8',
  });
  if (result.status !== 0) throw new Error(`the build failed:\n${result.stderr}${result.stdout}`);
}

/** The files of the demo. */
export function demoFiles(): string[] {
  const folder = join(root, 'assets', 'demo');
  return readdirSync(folder)
    .sort()
    .map(name => join(folder, name));
}

export interface OpenedWindow {
  readonly page: Page;
  readonly context: BrowserContext;
  readonly host: LoopbackHost;
  /** What the page said on its console as an error, breaches of its content policy, and requests to anywhere but the host. */
  readonly complaints: string[];
  close(): Promise<void>;
}

export interface OpenOptions {
  readonly browser?: Browser;
  readonly width?: number;
  readonly height?: number;
  readonly colorScheme?: 'light' | 'dark';
  readonly reducedMotion?: 'reduce' | 'no-preference';
  readonly deviceScaleFactor?: number;
}

/**
 * Opens the window with files, as `npm start` does on loopback, with recent list and sessions of its own.
 *
 * Without `browser` one is launched and ends with `close`.
 */
export async function openWindow(files: readonly string[], options: OpenOptions = {}): Promise<OpenedWindow> {
  ensureBuilt('window');
  const own = mkdtempSync(join(tmpdir(), 'deasil-test-'));
  const host = await serveLoopback({
    windowFolder: join(root, 'dist', 'window'),
    version: 'test',
    files,
    demo: files.length > 0 && files.every(file => demoFiles().includes(file)),
    log: message => {
      complaints.push(`host: ${message}`);
    },
    configFolder: join(own, 'config'),
    stateFolder: join(own, 'state'),
  });
  const complaints: string[] = [];
  const browser = options.browser ?? (await launchBrowser());
  const context = await browser.newContext({
    viewport: { width: options.width ?? 1280, height: options.height ?? 800 },
    colorScheme: options.colorScheme ?? 'light',
    reducedMotion: options.reducedMotion ?? 'no-preference',
    deviceScaleFactor: options.deviceScaleFactor ?? 1,
    acceptDownloads: true,
  });
  const page = await context.newPage();
  page.on('console', message => {
    if (message.type() === 'error') complaints.push(message.text());
  });
  context.on('request', request => {
    const address = request.url();
    if (![host.origin, `blob:${host.origin}`, 'data:'].some(own => address.startsWith(own))) {
      complaints.push(`the page asked for ${address}`);
    }
  });
  page.on('pageerror', error => complaints.push(error.stack ?? error.message));
  await page.goto(host.address());
  await page.waitForURL(`${host.origin}/`);
  return {
    page,
    context,
    host,
    complaints,
    async close() {
      await context.close();
      if (!options.browser) await browser.close();
      await host.close();
      rmSync(own, { recursive: true, force: true });
    },
  };
}

/** Runs the built command. */
export function runCommand(
  args: readonly string[],
  input = '',
): { status: number | null; stdout: string; stderr: string } {
  const result = spawnSync(process.execPath, [join(root, 'dist', 'command', 'deasil.js'), ...args], {
    encoding: 'utf8',
    input,
    maxBuffer: 256 * 1024 * 1024,
  });
  return { status: result.status, stdout: result.stdout, stderr: result.stderr };
}

/** Starts `npm start`'s program as a child and gives the lines it prints. */
export function startProgram(args: readonly string[], env: NodeJS.ProcessEnv = {}): ReturnType<typeof spawn> {
  return spawn(process.execPath, [join(root, 'dist', 'electron', 'start.js'), ...args], {
    env: { ...process.env, ...env },
    stdio: ['pipe', 'pipe', 'pipe'],
  });
}
