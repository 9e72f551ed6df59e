/** `npm start` as a person meets it: what it prints, what it opens, how it ends; and that nothing leaves the machine. */
import { type ChildProcessWithoutNullStreams, spawn, spawnSync } from 'node:child_process';
import { chmodSync, mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { HostService } from '../../electron/host-service.ts';
import { hostFiles } from '../../renderer/host-messages.ts';
import { demoFiles, ensureBuilt } from './launch.ts';
import { ask } from './loopback-client.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const denyNetwork = pathToFileURL(join(root, 'test', 'deny-network.mjs')).href;

let folder: string;
const children: ChildProcessWithoutNullStreams[] = [];

beforeAll(() => {
  ensureBuilt('electron', 'window');
});

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-start-'));
  mkdirSync(join(folder, 'temporary'));
});

afterEach(() => {
  for (const child of children.splice(0)) child.kill('SIGKILL');
  rmSync(folder, { recursive: true, force: true });
});

interface Running {
  readonly child: ChildProcessWithoutNullStreams;
  /** Waits until standard output holds this; what it matched. */
  printed(pattern: RegExp): Promise<RegExpExecArray>;
  stdout(): string;
  stderr(): string;
  ended: Promise<number | null>;
}

function start(args: readonly string[], env: NodeJS.ProcessEnv = {}): Running {
  const child = spawn(
    process.execPath,
    ['--import', denyNetwork, join(root, 'dist', 'electron', 'start.js'), ...args],
    {
      env: {
        ...process.env,
        INIT_CWD: folder,
        TMPDIR: join(folder, 'temporary'),
        XDG_CONFIG_HOME: join(folder, 'config'),
        XDG_STATE_HOME: join(folder, 'state'),
        DISPLAY: '',
        WAYLAND_DISPLAY: '',
        ELECTRON_OVERRIDE_DIST_PATH: join(folder, 'no-runtime'),
        ...env,
      },
    },
  );
  children.push(child);
  let stdout = '';
  let stderr = '';
  let wake: () => void = () => undefined;
  child.stdout.on('data', (chunk: Buffer) => {
    stdout += chunk.toString();
    wake();
  });
  child.stderr.on('data', (chunk: Buffer) => (stderr += chunk.toString()));
  const ended = new Promise<number | null>(resolve => child.on('close', resolve));
  return {
    child,
    async printed(pattern) {
      for (;;) {
        const found = pattern.exec(stdout);
        if (found) return found;
        const over = await Promise.race([
          new Promise<false>(resolve => (wake = () => resolve(false))),
          ended.then(() => true),
        ]);
        if (over && !pattern.test(stdout))
          throw new Error(`it ended without ${pattern}:\n${stdout}\n${stderr}`);
      }
    },
    stdout: () => stdout,
    stderr: () => stderr,
    ended,
  };
}

const ADDRESS = /http:\/\/127\.0\.0\.1:(\d+)\/(\?token=[\w-]+)/;

/** Goes where the printed address leads, and asks for the files to open. */
async function startFiles(found: RegExpExecArray): Promise<string[]> {
  const port = Number(found[1]);
  const admitted = await ask(port, { path: `/${found[2]}` });
  const cookie = admitted.headers['set-cookie']?.[0]?.split(';')[0] ?? '';
  const answer = await ask(port, {
    path: '/api/startFiles',
    method: 'POST',
    body: '{}',
    headers: { Cookie: cookie, Origin: `http://127.0.0.1:${port}`, 'Content-Type': 'application/json' },
  });
  return hostFiles.parse((JSON.parse(answer.text) as { value: unknown }).value).map(file => file.name);
}

describe('npm start without the runtime', () => {
  test('says so, prints the address, serves the demo, and ends cleanly with Ctrl-C', async () => {
    const program = start([]);
    const found = await program.printed(ADDRESS);
    expect(program.stdout()).toContain('The Electron runtime is not installed');
    expect(await startFiles(found)).toEqual(demoFiles().map(path => path.slice(path.lastIndexOf('/') + 1)));
    program.child.kill('SIGINT');
    expect(await program.ended).toBe(0);
    expect(program.stderr()).toBe('');
    expect(readdirSync(join(folder, 'temporary'))).toEqual([]);
  });

  test('opens the files named, relative to where the person is; names one that it cannot open', async () => {
    writeFileSync(join(folder, 'a.sdf'), 'a');
    const program = start(['a.sdf', 'absent.sdf']);
    expect(await startFiles(await program.printed(ADDRESS))).toEqual(['a.sdf']);
    expect(program.stderr()).toMatch(/absent\.sdf cannot be opened: there is no such file/);
    program.child.kill('SIGTERM');
    expect(await program.ended).toBe(0);
  });

  test('gives a fresh address for each Enter', async () => {
    const program = start(['--browser']);
    const first = await program.printed(ADDRESS);
    expect(program.stdout()).toContain('as asked');
    program.child.stdin.write('\n');
    const [, second] = await program
      .printed(new RegExp(`${ADDRESS.source}[^]*?${ADDRESS.source}`))
      .then(found => [found, found[4]]);
    expect(second).not.toBe(first[2]);
  });

  test('refuses an option it does not have', () => {
    const result = spawnSync(process.execPath, [join(root, 'dist', 'electron', 'start.js'), '--nonsense'], {
      encoding: 'utf8',
    });
    expect(result.status).toBe(2);
    expect(result.stderr).toContain('there is no option --nonsense');
  });

  test('says that a port is taken', async () => {
    const first = start(['--browser']);
    const [, port] = await first.printed(ADDRESS);
    const second = start(['--browser', '--port', String(port)]);
    expect(await second.ended).toBe(2);
    expect(second.stderr()).toContain(`port ${port} is in use`);
  });
});

describe.skipIf(process.platform !== 'linux')('npm start with a runtime', () => {
  /** A stand-in for the runtime that notes its arguments. */
  function runtime(script: string): NodeJS.ProcessEnv {
    const place = join(folder, 'runtime');
    mkdirSync(place);
    writeFileSync(join(place, 'electron'), `#!/bin/sh\necho "runtime $@"\n${script}\n`);
    chmodSync(join(place, 'electron'), 0o755);
    return { ELECTRON_OVERRIDE_DIST_PATH: place, DISPLAY: ':99' };
  }

  test('runs it with the files and ends with it', async () => {
    const program = start(['a.sdf'], runtime('exit 0'));
    expect(await program.ended).toBe(0);
    expect(program.stdout()).toContain(join(folder, 'a.sdf'));
    expect(program.stdout()).not.toMatch(ADDRESS);
  });

  test('runs it with the demo when no file is named', async () => {
    const program = start([], runtime('exit 0'));
    await program.ended;
    expect(program.stdout()).toContain('--deasil-demo');
  });

  test('falls back to the browser when it ends at once, with its last words', async () => {
    const program = start([], runtime('echo "cannot open display" >&2; exit 1'));
    await program.printed(ADDRESS);
    expect(program.stdout()).toContain('Electron did not start (cannot open display)');
  });

  test('falls back to the browser without a display', async () => {
    const program = start([], { ...runtime('exit 0'), DISPLAY: '' });
    await program.printed(ADDRESS);
    expect(program.stdout()).toContain('There is no display');
    expect(program.stdout()).not.toContain('runtime ');
  });
});

test('a session of the demo is kept apart from the program', async () => {
  const service = new HostService({
    info: { version: 'test', shell: 'loopback', platform: process.platform },
    configFolder: join(folder, 'config'),
    stateFolder: join(folder, 'state'),
    chooseFiles: null,
    save: null,
    send: () => undefined,
    log: message => {
      throw new Error(message);
    },
  });
  const program = join(folder, 'program');
  mkdirSync(program);
  writeFileSync(join(program, 'demo.sdf'), 'demo');
  const [file] = await service.setStartFiles([join(program, 'demo.sdf')], true);
  await service.call('writeSession', { id: file!.id, json: '{"accepted":1}' });
  expect(readdirSync(program)).toEqual(['demo.sdf']);
  expect(await service.call('recent', {})).toEqual([]);
  const [again] = await service.setStartFiles([join(program, 'demo.sdf')], true);
  expect(await service.call('readSession', { id: again!.id })).toBe('{"accepted":1}');
  service.dispose();
});

test('the refusal of the network would be noticed', () => {
  const result = spawnSync(
    process.execPath,
    [
      '--import',
      denyNetwork,
      '--input-type=module',
      '-e',
      "await fetch('http://192.0.2.1/').catch(() => 0); await fetch('http://example.org/').catch(() => 0);",
    ],
    { encoding: 'utf8' },
  );
  expect(result.status).toBe(97);
  expect(result.stderr).toContain('network refused');
});
