/** The command as a process of its own: worker threads, pipes, interruption. */
import { type ChildProcessWithoutNullStreams, spawn } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build } from 'rolldown';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { halide } from './halide.ts';

const folder = mkdtempSync(join(tmpdir(), 'deasil-process-'));
const command = join(folder, 'command', 'main.js');

beforeAll(async () => {
  await build({
    input: { main: fileURLToPath(new URL('../../../core/commands/main.ts', import.meta.url)) },
    platform: 'node',
    external: ['@resvg/resvg-js'],
    logLevel: 'silent',
    output: { dir: join(folder, 'command'), format: 'esm' },
  });
});

afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
});

interface Ended {
  readonly status: number | null;
  readonly out: string;
  readonly err: string;
}

function start(args: readonly string[]): ChildProcessWithoutNullStreams {
  return spawn(process.execPath, [command, ...args], { cwd: folder });
}

function ended(child: ChildProcessWithoutNullStreams): Promise<Ended> {
  let out = '';
  let err = '';
  child.stdout.setEncoding('utf8').on('data', (text: string) => {
    out += text;
  });
  child.stderr.setEncoding('utf8').on('data', (text: string) => {
    err += text;
  });
  return new Promise((done, failed) => {
    child.once('error', failed);
    child.once('close', status => {
      done({ status, out, err });
    });
  });
}

const entries = (count: number): string =>
  Array.from({ length: count }, (_, k) => halide(`p${k}`, k % 5 === 0 ? -1 : 1)).join('');

describe('the command as a process', () => {
  it('prints the same with threads as without, in the order of the input', async () => {
    writeFileSync(join(folder, 'poses.sdf'), entries(1000));
    writeFileSync(join(folder, 'wanted.sdf'), halide('wanted', 1));
    const args = ['check', 'poses.sdf', '--intended', 'wanted.sdf', '--json'];
    const [one, three] = await Promise.all([
      ended(start([...args, '--jobs', '1'])),
      ended(start([...args, '--jobs', '3'])),
    ]);
    expect(one.status).toBe(1);
    expect(three.status).toBe(1);
    expect(one.out.split('\n')).toHaveLength(1001);
    expect(three.out).toBe(one.out);
  });

  it('reports an unusable intention once, also with threads', async () => {
    writeFileSync(join(folder, 'poses.sdf'), entries(10));
    const { status, err } = await ended(
      start(['check', 'poses.sdf', '--intended', 'none.smi', '--jobs', '2']),
    );
    expect(status).toBe(2);
    expect(err.match(/none\.smi/g)).toHaveLength(1);
  });

  it('answers an entry of a pipe before the next one comes', async () => {
    const child = start(['check', '-', '--json']);
    const result = ended(child);
    const answer = new Promise<string>(done => child.stdout.once('data', (text: string) => done(text)));
    child.stdin.write(halide('first', 1));
    expect(await answer).toMatch(/"name":"first"/);
    child.stdin.end(halide('last', 1));
    const { out, status } = await result;
    expect(status).toBe(0);
    expect(out.trim().split('\n')).toHaveLength(2);
  });

  it('ends quietly when its reader has gone', async () => {
    writeFileSync(join(folder, 'many.sdf'), entries(3000));
    const child = start(['check', 'many.sdf', '--json', '--jobs', '1']);
    const result = ended(child);
    child.stdout.once('data', () => child.stdout.destroy());
    const { err, status } = await result;
    expect(err).not.toMatch(/EPIPE|Error/);
    expect(status).toBe(0);
  });

  it('goes on after an interruption, to the lines an undisturbed run writes', async () => {
    writeFileSync(join(folder, 'many.sdf'), entries(20_000));
    const args = ['check', 'many.sdf', '--intended', 'C1=R', '--jobs', '1'];
    const child = start([...args, '--lines', 'part.jsonl']);
    const interrupted = ended(child);
    const before = (): number => readFileSync(join(folder, 'part.jsonl'), { flag: 'a+' }).length;
    while (before() === 0) await new Promise(done => setTimeout(done, 20));
    child.kill('SIGINT');
    const { status, err } = await interrupted;
    expect(status).toBe(130);
    expect(err).toMatch(/--resume goes on after/);
    const lines = readFileSync(join(folder, 'part.jsonl'), 'utf8').trim().split('\n').length;
    expect(lines).toBeGreaterThan(0);
    expect(lines).toBeLessThan(20_000);
    const [again, whole] = await Promise.all([
      ended(start([...args, '--lines', 'part.jsonl', '--resume'])),
      ended(start([...args, '--lines', 'whole.jsonl'])),
    ]);
    expect([again.status, whole.status]).toEqual([1, 1]);
    expect(readFileSync(join(folder, 'part.jsonl'), 'utf8')).toBe(
      readFileSync(join(folder, 'whole.jsonl'), 'utf8'),
    );
  });
});
