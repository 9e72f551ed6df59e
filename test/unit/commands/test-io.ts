/** A command run in this process: its own folder, standard streams as text. */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { runCommandLine } from '../../../core/commands/command.ts';
import type { CommandIo } from '../../../core/commands/io.ts';
import { nodeIo } from '../../../core/commands/node-io.ts';
import type { EntryRecord } from '../../../core/record/json.ts';

export interface RunResult {
  readonly status: number;
  readonly out: string;
  readonly err: string;
  /** Standard output read as JSON lines. */
  readonly lines: () => EntryRecord[];
}

/** A folder of files for one test. */
export class Workplace {
  readonly folder = mkdtempSync(join(tmpdir(), 'deasil-test-'));

  write(name: string, content: string | Uint8Array): string {
    writeFileSync(join(this.folder, name), content);
    return name;
  }

  read(name: string): string {
    return readFileSync(join(this.folder, name), 'utf8');
  }

  remove(): void {
    rmSync(this.folder, { recursive: true, force: true });
  }

  /** Runs a command line in the folder. */
  async run(
    args: readonly string[],
    options: { readonly input?: string; readonly signal?: AbortSignal; readonly terminal?: boolean } = {},
  ): Promise<RunResult> {
    let out = '';
    let err = '';
    const real = nodeIo(null, this.folder);
    const io: CommandIo = {
      ...real,
      errorIsTerminal: options.terminal ?? false,
      signal: options.signal ?? new AbortController().signal,
      out: chunk => {
        out += typeof chunk === 'string' ? chunk : new TextDecoder().decode(chunk);
        return Promise.resolve();
      },
      err: text => {
        err += text;
      },
      open: path =>
        path === '-'
          ? Promise.resolve({ chunks: inChunks(options.input ?? ''), size: null })
          : real.open(path),
    };
    const status = await runCommandLine(args, io);
    return {
      status,
      out,
      err,
      lines: () =>
        out
          .split('\n')
          .filter(line => line !== '')
          .map(line => JSON.parse(line) as EntryRecord),
    };
  }
}

/** Small chunks, so that entries lie across their borders. */
async function* inChunks(text: string): AsyncGenerator<Uint8Array> {
  const bytes = new TextEncoder().encode(text);
  for (let at = 0; at < bytes.length; at += 700) {
    await Promise.resolve();
    yield bytes.subarray(at, at + 700);
  }
}
