/** What the README shows of the command is what the command prints. */
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { runCommandLine } from '../../core/commands/command.ts';
import { nodeIo } from '../../core/commands/node-io.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const readme = readFileSync(`${root}README.md`, 'utf8');

/** Commands of the README that are followed by their output. */
const examples = [...readme.matchAll(/^ {4}npx deasil (.+)\n\n```\n([^]*?)```$/gmu)].map(match => ({
  command: match[1]!,
  shown: match[2]!,
}));

describe('the README', () => {
  it('shows a first check and its reasons', () => {
    expect(examples.map(({ command }) => command.split(' ')[0])).toEqual(['check', 'explain']);
  });

  it.each(examples)('shows what `deasil $command` prints', async ({ command, shown }) => {
    let out = '';
    const io = {
      ...nodeIo(null, root),
      out: (chunk: string | Uint8Array) => {
        out += typeof chunk === 'string' ? chunk : new TextDecoder().decode(chunk);
        return Promise.resolve();
      },
      err: () => {},
    };
    await runCommandLine(command.split(' '), io);
    expect(out).toBe(shown);
  });
});
