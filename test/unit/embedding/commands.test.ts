/** `deasil build` and `deasil strain` from arguments to output. */
import { describe, expect, it } from 'vitest';
import { run as build } from '../../../core/commands/build.ts';
import type { CommandIo } from '../../../core/commands/io.ts';
import { UsageError } from '../../../core/commands/io.ts';
import { run as strain } from '../../../core/commands/strain.ts';

/** Streams in memory; `files` are the only files there are. */
function memory(files: Readonly<Record<string, string>> = {}): {
  io: CommandIo;
  out: () => string;
  err: () => string;
} {
  let out = '';
  let err = '';
  const io: CommandIo = {
    cwd: '/nowhere',
    errorIsTerminal: false,
    processors: 1,
    workerEntry: null,
    out: async chunk => {
      out += typeof chunk === 'string' ? chunk : new TextDecoder().decode(chunk);
    },
    err: text => {
      err += text;
    },
    open: async path => {
      const text = files[path];
      if (text === undefined) throw new Error(`${path}: there is no such file`);
      async function* chunks(): AsyncGenerator<Uint8Array> {
        yield new TextEncoder().encode(text);
      }
      return { chunks: chunks(), size: text.length };
    },
    signal: new AbortController().signal,
    now: () => 0,
  };
  return { io, out: () => out, err: () => err };
}

describe('build', () => {
  it('writes the model of a SMILES with its descriptor and energy, and strain reads the same energy', async () => {
    const first = memory();
    expect(await build(['C[C@H](N)C(=O)O'], first.io)).toBe(0);
    const sdf = first.out();
    // L-alanine: S (common practice, no source).
    expect(sdf).toContain('> <Descriptors>\n2S\n');
    const energy = Number(/kcal\/mol>\n(\S+)/u.exec(sdf)?.[1]);
    const second = memory({ 'model.sdf': sdf });
    expect(await strain(['model.sdf', '--json', '--terms'], second.io)).toBe(0);
    const record = JSON.parse(second.out()) as { total: number; terms: Record<string, number> };
    // Four decimals of the coordinates in the file.
    expect(Math.abs(record.total - energy)).toBeLessThan(0.01);
    expect(Object.values(record.terms).reduce((a, b) => a + b, 0)).toBeCloseTo(record.total, 8);
    expect(Object.keys(record.terms)).toEqual([
      'bond',
      'angle',
      'stretchBend',
      'outOfPlane',
      'torsion',
      'vanDerWaals',
      'electrostatic',
    ]);
  });

  it('enumerates isomers and says how they are related', async () => {
    const { io, out } = memory();
    expect(await build(['OC(C(O)C(=O)O)C(=O)O', '--isomers'], io)).toBe(0);
    expect(out().split('$$$$\n')).toHaveLength(4);
    expect(out()).toContain('meso');
    expect(out()).toContain('enantiomer of');
  });

  it('builds what it can of a file and names the entry that it cannot', async () => {
    const { io, out, err } = memory({ 'list.smi': 'CCO ethanol\nC1CC broken\nCCN amine\n' });
    expect(await build(['list.smi'], io)).toBe(3);
    expect(out().split('$$$$\n')).toHaveLength(3);
    expect(err()).toMatch(/list\.smi, entry 2, line 2/u);
  });

  it('says what is wrong with a missing file or a bad number', async () => {
    await expect(build(['absent.sdf'], memory().io)).rejects.toThrow(UsageError);
    await expect(build(['CCO', '--conformers', '0'], memory().io)).rejects.toThrow(/--conformers 0/u);
  });
});

describe('strain', () => {
  it('reports an entry without coordinates as an error and goes on', async () => {
    const { io, out } = memory({ 'list.smi': 'CCO ethanol\n' });
    expect(await strain(['list.smi', '--json'], io)).toBe(3);
    const record = JSON.parse(out()) as { total: null; error: { message: string } };
    expect(record.total).toBeNull();
    expect(record.error.message).toContain('no coordinates in space');
  });
});
