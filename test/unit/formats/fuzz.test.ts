/** Mutated files: a reader may refuse an entry, never throw for it, never hang, and never give a molecule that contradicts itself. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { examine } from '../../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry, type Format } from '../../../core/formats/format.ts';
import { LimitError } from '../../../core/formats/lines.ts';
import { detectFormat } from '../../../core/formats/registry.ts';
import { sdfFormat } from '../../../core/formats/sdf.ts';
import { smilesFormat } from '../../../core/formats/smiles.ts';
import { seeded } from '../../molecules.ts';
import { CHIRAL, sdf, v2000, v3000 } from './molfiles.ts';
import { bytesOf, chunksOf } from './streams.ts';

/** Time given to each property, ms: a bound on the run, not an expectation. */
const TIME = 6000;

const LIMITS = { ...DEFAULT_LIMITS, atoms: 5000, entryBytes: 1_000_000, lineLength: 100_000 };

const SEEDS: readonly Uint8Array[] = [
  bytesOf(
    sdf([
      v2000('one', CHIRAL.atoms, CHIRAL.bonds, [
        'M  CHG  1   1   1',
        'M  ISO  1   2   2',
        'M  RAD  1   3   2',
      ]),
      [...v3000('two', CHIRAL.atoms, CHIRAL.bonds, ['MDLV30/STERAC1 ATOMS=(1 1)']), '> <ID>', 'x', ''],
    ]),
  ),
];

const SMILES_SEEDS: readonly Uint8Array[] = [
  'N[C@@H](Cc1c[nH]c2ccccc12)C(=O)O name |&1:1|\n',
  'F/C=C/C=C(/Cl)[2H]\tx\nCC(F)=[C@]=C(Cl)O |w:2,a:1,^1:0|\n',
  'C1CC2CC%11CC1(C2)[N+](C)(C)%11 q\n[O-][n+]1ccccc1.[Na+]\n',
].map(bytesOf);

/** Fragments that formats give a meaning to. */
const PIECES = [
  '$$$$',
  'M  END',
  'M  V30 ',
  'M  CHG',
  'V3000',
  '999',
  '-1',
  'NaN',
  '1e400',
  '\r',
  '\n',
  '\0',
  '(((',
  '[',
  ']',
  '%(99999)',
  '@@',
  '/',
  '|',
  '&1:',
  'é',
  ' '.repeat(40),
  '9'.repeat(40),
].map(bytesOf);

function mutated(source: Uint8Array, random: () => number, changes: number): Uint8Array {
  let bytes = [...source];
  for (let c = 0; c < changes; c++) {
    const at = Math.floor(random() * (bytes.length + 1));
    const choice = random();
    if (choice < 0.35) bytes[Math.min(at, bytes.length - 1)] = Math.floor(random() * 256);
    else if (choice < 0.5) bytes.splice(at, 1 + Math.floor(random() * 20));
    else if (choice < 0.8) bytes.splice(at, 0, ...PIECES[Math.floor(random() * PIECES.length)]!);
    else if (choice < 0.9) bytes = bytes.slice(0, at);
    else bytes.splice(at, 0, ...bytes.slice(at, at + Math.floor(random() * 60)));
    if (bytes.length === 0) bytes = [0x43];
  }
  return Uint8Array.from(bytes);
}

async function read(format: Format, bytes: Uint8Array, chunk: number): Promise<Entry[]> {
  const sizes = Array.from({ length: Math.ceil(bytes.length / chunk) }, () => chunk);
  const list: Entry[] = [];
  try {
    for await (const raw of format.split(chunksOf(bytes, sizes), LIMITS))
      list.push(...format.parse(raw, LIMITS));
  } catch (error) {
    if (!(error instanceof LimitError)) throw error;
  }
  return list;
}

function consistent(entry: Entry): void {
  expect((entry.molecule === null) === (entry.error !== null)).toBe(true);
  if (entry.error !== null) {
    expect(entry.error.code).toMatch(/^[a-z][a-z-]+$/u);
    expect(entry.error.message.length).toBeGreaterThan(5);
    if (entry.error.line !== null) expect(entry.error.line).toBeGreaterThanOrEqual(entry.line);
  }
  const { molecule } = entry;
  if (molecule === null) return;
  for (const atom of molecule.bondAtoms) expect(atom).toBeLessThan(molecule.atomCount);
  for (const order of molecule.bondOrders) expect(order).toBeLessThanOrEqual(4);
  if (molecule.coordinates) for (const r of molecule.coordinates) expect(Number.isFinite(r)).toBe(true);
  for (const stereo of molecule.stated) {
    const named =
      stereo.kind === 'double-bond' ? [...stereo.ends, ...stereo.references] : [...stereo.ligands];
    for (const atom of named) expect(atom).toBeLessThan(molecule.atomCount);
    for (const atom of named) expect(atom).toBeGreaterThanOrEqual(-2);
  }
  // Whatever was read can be examined.
  examine(molecule);
}

describe.each([
  ['SDF', sdfFormat, SEEDS],
  ['SMILES', smilesFormat, SMILES_SEEDS],
] as const)('mutated %s', (_, format, seeds) => {
  it('never throws, never hangs, and what it gives is consistent', { timeout: TIME * 10 }, async () => {
    let readable = 0;
    let refused = 0;
    await fc.assert(
      fc.asyncProperty(
        fc.nat(),
        fc.integer({ min: 1, max: 12 }),
        fc.integer({ min: 1, max: 400 }),
        async (seed, changes, chunk) => {
          const random = seeded(seed);
          const source = seeds[seed % seeds.length]!;
          const bytes = mutated(source, random, changes);
          const whole = await read(format, bytes, bytes.length);
          for (const entry of whole) {
            consistent(entry);
            if (entry.error === null) readable++;
            else refused++;
          }
          const pieces = await read(format, bytes, chunk);
          expect(pieces.map(({ line, error }) => [line, error])).toEqual(
            whole.map(({ line, error }) => [line, error]),
          );
          detectFormat(bytes, 'x');
        },
      ),
      { numRuns: 4000, interruptAfterTimeLimit: TIME },
    );
    expect(readable).toBeGreaterThan(50);
    expect(refused).toBeGreaterThan(50);
  });
});
