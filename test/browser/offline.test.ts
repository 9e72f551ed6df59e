/** The command as it is shipped: packed, installed in another folder without a network, and run with every connection refused. */
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { demoFiles, ensureBuilt } from './launch.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const denyNetwork = pathToFileURL(join(root, 'test', 'deny-network.mjs')).href;
const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm';

let folder: string;
let installed: string;

beforeAll(() => {
  ensureBuilt('command');
  folder = mkdtempSync(join(tmpdir(), 'deasil-install-'));
  const elsewhere = join(folder, 'elsewhere');
  mkdirSync(elsewhere);
  writeFileSync(join(elsewhere, 'package.json'), '{"name":"elsewhere","private":true}');
  const run = (args: readonly string[], cwd: string): string =>
    execFileSync(npm, args, {
      cwd,
      encoding: 'utf8',
      stdio: ['ignore', 'pipe', 'pipe'],
      shell: process.platform === 'win32',
    });
  run(['pack', '--ignore-scripts', '--pack-destination', folder], root);
  const archive = readdirSync(folder).find(name => name.endsWith('.tgz')) ?? '';
  run(['install', '--offline', '--no-audit', '--no-fund', join('..', archive)], elsewhere);
  installed = join(elsewhere, 'node_modules', 'deasil');
}, 120_000);

afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
});

function deasil(
  args: readonly string[],
  input = '',
): { status: number | null; stdout: string; stderr: string } {
  const command = join(installed, 'dist', 'command', 'deasil.js');
  return spawnSync(process.execPath, ['--import', denyNetwork, command, ...args], {
    cwd: folder,
    encoding: 'utf8',
    input,
  });
}

describe('the command, packed and installed elsewhere without a network', () => {
  test('is linked under its name', () => {
    expect(readdirSync(join(folder, 'elsewhere', 'node_modules', '.bin'))).toContain('deasil');
  });

  test('checks the demo against its intention and finds what is wrong there', () => {
    const models = demoFiles().find(path => path.endsWith('.sdf')) ?? '';
    const intended = demoFiles().find(path => path.endsWith('.smi')) ?? '';
    const result = deasil(['check', models, '--intended', intended, '--json']);
    expect(result.stderr).not.toContain('network refused');
    expect(result.status).toBe(1);
    const entries = result.stdout
      .trim()
      .split('\n')
      .map(line => JSON.parse(line) as { units: { verdict: string }[] });
    const verdicts = entries.flatMap(entry => entry.units.map(unit => unit.verdict));
    expect(verdicts).toContain('agrees');
    expect(verdicts).toContain('inverted');
  });

  test('reads from standard input', () => {
    const result = deasil(['check', '-', '--json'], 'C[C@H](N)C(=O)O alanine\n');
    expect(result.status).toBe(0);
    expect(JSON.parse(result.stdout)).toMatchObject({ units: [{ kind: 'centre', descriptor: 'S' }] });
  });

  test('brings no sources, tests or packages of the window', () => {
    const files = readdirSync(installed, { recursive: true, encoding: 'utf8' });
    expect(files.filter(name => /\.tsx?$|(^|\/)(test|renderer|core)\//.test(name))).toEqual([]);
    const packages = readdirSync(join(folder, 'elsewhere', 'node_modules')).filter(
      name => !name.startsWith('.'),
    );
    expect(packages.filter(name => name !== 'deasil' && name !== '@resvg')).toEqual([]);
  });
});
