/** Atomic writing under faults: a full disk, a failing source, a kill at any moment. */
import { spawn } from 'node:child_process';
import {
  chmodSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { rolldown } from 'rolldown';
import { writeAtomically, WriteError } from '../../../core/commands/atomic-write.ts';

let folder: string;
let path: string;

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-write-'));
  path = join(folder, 'record.json');
});

afterEach(() => {
  rmSync(folder, { recursive: true, force: true });
});

async function failure(work: Promise<void>): Promise<unknown> {
  return work.then(
    () => null,
    (error: unknown) => error,
  );
}

describe('writing', () => {
  test('bytes, text and streams arrive whole', async () => {
    await writeAtomically(path, 'σ → text');
    expect(readFileSync(path, 'utf8')).toBe('σ → text');
    await writeAtomically(path, new Uint8Array([0, 255, 10]));
    expect([...readFileSync(path)]).toEqual([0, 255, 10]);
    async function* pieces(): AsyncGenerator<string | Uint8Array> {
      yield 'one ';
      yield new TextEncoder().encode('two ');
      yield 'three';
    }
    await writeAtomically(path, pieces());
    expect(readFileSync(path, 'utf8')).toBe('one two three');
    expect(readdirSync(folder)).toEqual(['record.json']);
  });

  test('a source that fails leaves the old content and no trace, and its own error', async () => {
    writeFileSync(path, 'old');
    async function* failing(): AsyncGenerator<string> {
      yield 'half of the new';
      throw new Error('the source failed');
    }
    await expect(writeAtomically(path, failing())).rejects.toThrow('the source failed');
    expect(readFileSync(path, 'utf8')).toBe('old');
    expect(readdirSync(folder)).toEqual(['record.json']);
  });

  test('a folder that is not there, or a folder in place of the file, is told by name', async () => {
    const absent = await failure(writeAtomically(join(folder, 'absent', 'x'), 'x'));
    expect(absent).toBeInstanceOf(WriteError);
    expect(String(absent)).toMatch(/absent.*folder does not exist/);
    mkdirSync(path);
    expect(String(await failure(writeAtomically(path, 'x')))).toMatch(
      /record\.json was not written: it is a folder/,
    );
  });

  // The superuser may write anywhere.
  test.skipIf(process.getuid?.() === 0)('a read-only folder is told by name', async () => {
    chmodSync(folder, 0o555);
    expect(String(await failure(writeAtomically(path, 'x')))).toMatch(/does not allow writing/);
    chmodSync(folder, 0o755);
  });

  test.skipIf(process.platform === 'win32')('a link is followed and the mode of the file kept', async () => {
    writeFileSync(path, 'old');
    chmodSync(path, 0o640);
    const link = join(folder, 'link.json');
    symlinkSync(path, link);
    await writeAtomically(link, 'new');
    expect(readFileSync(path, 'utf8')).toBe('new');
    expect(statSync(path).mode & 0o777).toBe(0o640);
    expect(readdirSync(folder)).toEqual(['link.json', 'record.json']);
  });
});

/** A child program that writes by our function. */
async function writer(code: string): Promise<string> {
  const entry = join(folder, 'entry.mjs');
  const source = fileURLToPath(new URL('../../../core/commands/atomic-write.ts', import.meta.url));
  writeFileSync(entry, `import { writeAtomically } from ${JSON.stringify(source)};\n${code}`);
  const bundle = await rolldown({ input: entry, platform: 'node', logLevel: 'silent' });
  const program = join(folder, 'writer.mjs');
  await bundle.write({ file: program, format: 'esm' });
  await bundle.close();
  rmSync(entry);
  return program;
}

describe.skipIf(process.platform === 'win32')('faults', () => {
  test('a disk that is full leaves the old content, and says so', async () => {
    writeFileSync(path, 'old');
    // A limit on the size of files (of 1024 bytes, `ulimit -f` counts in blocks) stands in for the full disk.
    const program = await writer(
      `process.on('SIGXFSZ', () => {});\ntry { await writeAtomically(process.argv[2], 'x'.repeat(1_000_000)); } catch (error) { console.log(error.name + ' ' + error.message); }`,
    );
    const child = spawn('bash', ['-c', `ulimit -f 8; exec "${process.execPath}" "${program}" "${path}"`]);
    let said = '';
    child.stdout.on('data', (chunk: Buffer) => (said += chunk.toString()));
    await new Promise(resolve => child.on('exit', resolve));
    expect(said).toMatch(/^WriteError .*record\.json was not written/);
    expect(readFileSync(path, 'utf8')).toBe('old');
    expect(readdirSync(folder).filter(name => name.includes('part'))).toEqual([]);
  });

  test('a kill at any moment leaves a whole document, the last or the one before', async () => {
    const program = await writer(
      `for (let i = 0; ; i++) { await writeAtomically(process.argv[2], JSON.stringify({ i, body: 'x'.repeat(200_000), end: i })); process.stdout.write(i + '\\n'); }`,
    );
    for (let round = 0; round < 12; round++) {
      const child = spawn(process.execPath, [program, path], { stdio: ['ignore', 'pipe', 'ignore'] });
      let last = -1;
      child.stdout.on('data', (chunk: Buffer) => {
        const lines = chunk.toString().trim().split('\n');
        last = Number(lines.at(-1));
      });
      const exit = new Promise(resolve => child.on('exit', resolve));
      await new Promise(resolve => child.stdout.once('data', resolve));
      await new Promise(resolve => setTimeout(resolve, 7 * round));
      child.kill('SIGKILL');
      await exit;
      const document = JSON.parse(readFileSync(path, 'utf8')) as { i: number; end: number };
      expect(document.end).toBe(document.i);
      // What was reported as saved is there.
      expect(document.i).toBeGreaterThanOrEqual(last);
    }
  });
});
