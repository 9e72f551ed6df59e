/** `npm start`: the window in Electron where its runtime is at hand, else the same window in a browser, served on 127.0.0.1. */
import { type ChildProcess, spawn } from 'node:child_process';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { version } from '../package.json';
import { demoFiles } from './demo.ts';
import { DEMO_SWITCH, parseArguments, type StartArguments, USAGE } from './arguments.ts';
import { serveLoopback } from './loopback/serve.ts';
import type { LoopbackHost } from './loopback/server.ts';
import { electronRuntime, hasDisplay } from './runtime.ts';

/** Electron that ends before this with an error did not get a window up, ms. */
const EARLY = 5000;

const dist = dirname(dirname(fileURLToPath(import.meta.url)));
const root = dirname(dist);

function say(line: string): void {
  process.stdout.write(`${line}\n`);
}

/**
 * Runs Electron until it ends.
 *
 * @returns null when it ran; why not when it never got as far as a window.
 */
function runElectron(runtime: string, args: readonly string[]): Promise<string | null> {
  return new Promise(resolve => {
    const started = Date.now();
    const child = spawn(runtime, [root, ...args], { stdio: ['ignore', 'inherit', 'pipe'] });
    let words = '';
    child.stderr.on('data', (chunk: Buffer) => {
      words = (words + chunk.toString('utf8')).slice(-4096);
      process.stderr.write(chunk);
    });
    const forward = (signal: NodeJS.Signals): void => {
      child.kill(signal);
    };
    process.on('SIGINT', forward);
    process.on('SIGTERM', forward);
    const finish = (reason: string | null): void => {
      process.off('SIGINT', forward);
      process.off('SIGTERM', forward);
      resolve(reason);
    };
    child.on('error', error => {
      finish(error.message);
    });
    child.on('exit', (code, signal) => {
      const asked = signal === 'SIGINT' || signal === 'SIGTERM';
      const failed = !asked && code !== 0 && Date.now() - started < EARLY;
      if (!failed) process.exitCode = code ?? 0;
      finish(failed ? (words.trim().split('\n').at(-1) ?? `it ended with ${code ?? signal}`) : null);
    });
  });
}

/** Opens an address in the person's browser; the address has been printed, so failing to is no error. */
function openBrowser(address: string): void {
  const [command, args]: [string, string[]] =
    process.platform === 'darwin'
      ? ['open', [address]]
      : process.platform === 'win32'
        ? ['cmd', ['/c', 'start', '""', address.replaceAll('&', '^&')]]
        : ['xdg-open', [address]];
  const child: ChildProcess = spawn(command, args, { stdio: 'ignore', detached: true });
  child.on('error', () => undefined);
  child.unref();
}

async function serve(
  reason: string,
  files: readonly string[],
  demo: boolean,
  options: StartArguments,
): Promise<void> {
  const host = await serveLoopback({
    windowFolder: join(dist, 'window'),
    version,
    files,
    demo,
    port: options.port,
    log: message => {
      process.stderr.write(`deasil: ${message}\n`);
    },
  });
  const address = host.address();
  say(reason);
  say('');
  say(`  ${address}`);
  say('');
  say('The address admits one browser, once; press Enter for a fresh one. Ctrl-C ends Deasil.');
  if (!options.quiet && process.stdout.isTTY && hasDisplay()) openBrowser(address);
  freshAddresses(host);
  await ended();
  await host.close();
}

/** Prints a fresh address for each Enter. */
function freshAddresses(host: LoopbackHost): void {
  process.stdin.on('data', (chunk: Buffer) => {
    if (chunk.includes('\n')) say(`  ${host.address()}`);
  });
  // Without a terminal the input may fail or end; the host runs on.
  process.stdin.on('error', () => undefined);
}

function ended(): Promise<void> {
  return new Promise(resolve => {
    for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) {
      process.once(signal, () => {
        resolve();
      });
    }
  });
}

async function main(): Promise<void> {
  // npm runs scripts in the project's folder; paths are meant from where the person is.
  const options = parseArguments(process.argv.slice(2), process.env['INIT_CWD'] ?? process.cwd());
  if (options.help) {
    process.stdout.write(USAGE);
    return;
  }
  const demo = options.files.length === 0;
  const files = demo ? await demoFiles(root) : options.files;
  let reason = 'Deasil runs in the browser, as asked. Open this address:';
  if (!options.browser) {
    const runtime = electronRuntime();
    if (runtime === null) {
      reason =
        'The Electron runtime is not installed ("npx install-electron" fetches it), so Deasil runs in the browser. Open this address:';
    } else if (!hasDisplay()) reason = 'There is no display, so Deasil runs in a browser. Open this address:';
    else {
      const failure = await runElectron(runtime, demo ? [DEMO_SWITCH] : files);
      if (failure === null) return;
      reason = `Electron did not start (${failure}), so Deasil runs in the browser. Open this address:`;
    }
  }
  await serve(reason, files, demo, options);
}

try {
  await main();
  // Standard input may still be open.
  process.exit();
} catch (error) {
  process.stderr.write(`deasil: ${error instanceof Error ? error.message : String(error)}\n`);
  process.exit(2);
}
