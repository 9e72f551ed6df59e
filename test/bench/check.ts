/**
 * Benchmark of `deasil check`: entries a second on one thread and on two over 20,000 entries with hydrogens, beside
 * rdkit.js reading the same entries and giving their labels; peak memory over 20,000 and over 200,000 entries.
 *
 * The entries are the published aligned ligands of `../shared/data/poses/cdk2.sdf`, repeated.
 */
import { spawn } from 'node:child_process';
import { createWriteStream, existsSync, readFileSync, statSync } from 'node:fs';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import initRDKit from '@rdkit/rdkit';

const ENTRIES = 20_000;
const MANY = 10 * ENTRIES;
/** Milliseconds between two looks at the memory of the command. */
const LOOK = 50;

function entriesOf(path: string): string[] {
  return readFileSync(path, 'utf8')
    .split(/(?<=^\$\$\$\$\r?\n)/m)
    .filter(entry => entry.trim() !== '');
}

async function writeEntries(path: string, entries: readonly string[], count: number): Promise<void> {
  const stream = createWriteStream(path);
  for (let k = 0; k < count; k++) {
    if (!stream.write(entries[k % entries.length]))
      await new Promise<void>(done => stream.once('drain', () => done()));
  }
  await new Promise<void>((done, failed) =>
    stream.end((error?: Error | null) => (error ? failed(error) : done())),
  );
}

interface Run {
  readonly seconds: number;
  /** Peak resident memory in MB, null where the system does not tell (other than Linux). */
  readonly peak: number | null;
  readonly status: number | null;
}

/** Runs the built command and watches its memory. */
async function timed(command: string, args: readonly string[]): Promise<Run> {
  const started = performance.now();
  const child = spawn(process.execPath, [command, ...args], { stdio: ['ignore', 'ignore', 'ignore'] });
  let peak: number | null = null;
  const timer = setInterval(() => {
    readFile(`/proc/${child.pid}/status`, 'utf8')
      .then(text => {
        const match = /VmHWM:\s+(\d+) kB/.exec(text);
        if (match) peak = Math.max(peak ?? 0, Number(match[1]) / 1024);
      })
      .catch(() => undefined);
  }, LOOK);
  const status = await new Promise<number | null>((done, failed) => {
    child.once('error', failed);
    child.once('exit', code => done(code));
  });
  clearInterval(timer);
  return { seconds: (performance.now() - started) / 1000, peak, status };
}

async function timeRDKit(entries: readonly string[], count: number): Promise<number> {
  const rdkit = await initRDKit();
  const started = performance.now();
  for (let k = 0; k < count; k++) {
    const molecule = rdkit.get_mol(entries[k % entries.length]!, JSON.stringify({ removeHs: false }));
    if (!molecule) continue;
    molecule.get_stereo_tags();
    molecule.delete();
  }
  return (performance.now() - started) / 1000;
}

/** Runs the benchmark and reports line by line. */
export async function run(report: (line: string) => void): Promise<void> {
  const source = join(process.cwd(), '..', 'shared', 'data', 'poses', 'cdk2.sdf');
  const command = join(process.cwd(), 'dist', 'command', 'deasil.js');
  if (!existsSync(source)) {
    report('check: skipped, the published poses (../shared/data/poses) are not beside this checkout');
    return;
  }
  const entries = entriesOf(source);
  const folder = await mkdtemp(join(tmpdir(), 'deasil-bench-'));
  try {
    const small = join(folder, 'small.sdf');
    const large = join(folder, 'large.sdf');
    await writeEntries(small, entries, ENTRIES);
    await writeEntries(large, entries, MANY);
    report(
      `check: ${ENTRIES} entries, ${(statSync(small).size / 1e6).toFixed(0)} MB, against intentions of the same names`,
    );
    const say = (what: string, count: number, { seconds, peak, status }: Run): void => {
      const memory = peak === null ? '' : `, peak ${peak.toFixed(0)} MB`;
      report(
        `  ${what}: ${(count / seconds).toFixed(0)} entries/s (${seconds.toFixed(1)} s, status ${status}${memory})`,
      );
    };
    const args = ['check', small, '--intended', source, '--json'];
    say('1 thread', ENTRIES, await timed(command, [...args, '--jobs', '1']));
    say('2 threads', ENTRIES, await timed(command, [...args, '--jobs', '2']));
    say(
      '2 threads, nothing intended',
      ENTRIES,
      await timed(command, ['check', small, '--json', '--jobs', '2']),
    );
    const seconds = await timeRDKit(entries, ENTRIES);
    report(
      `  rdkit.js, reading and labels alone: ${(ENTRIES / seconds).toFixed(0)} entries/s (${seconds.toFixed(1)} s)`,
    );
    say(
      `2 threads, ${MANY} entries`,
      MANY,
      await timed(command, ['check', large, '--intended', source, '--json', '--jobs', '2']),
    );
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}
