/** Writers: what is written is read back as the same molecule, by our readers and by rdkit.js. */
import { readFileSync } from 'node:fs';
import { assert, array, constantFrom, integer, property } from 'fast-check';
import { describe, expect, it } from 'vitest';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { BondMark, buildMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { DEFAULT_LIMITS, type Entry } from '../../../core/formats/format.ts';
import { writeMolfile, writeSdfEntry } from '../../../core/formats/molfile-writer.ts';
import { sdfFormat } from '../../../core/formats/sdf.ts';
import { smilesOf, writeCxsmiles, writeSmiles } from '../../../core/formats/smiles-writer.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';
import { rdkitModule } from '../../rdkit.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../../shared.ts';
import { bytesOf } from './streams.ts';

function readBack(text: string): Entry {
  return sdfFormat.parse({ entry: 1, line: 1, bytes: bytesOf(text) }, DEFAULT_LIMITS)[0]!;
}

function moleculeOf(smiles: string): Molecule {
  return parseSmiles(smiles).molecule;
}

describe('SMILES', () => {
  it.each([
    ['[13CH4]', '[13CH4]'],
    ['[NH4+].[Cl-]', '[NH4+].[Cl-]'],
    ['[O-2]', '[O-2]'],
    ['C(F)(Cl)Br', 'C(F)(Cl)Br'],
    ['[2H]C([2H])[2H]', '[2H]C([2H])[2H]'],
    ['*C', '*C'],
    ['N[C@@H](C)C(=O)O', 'N[C@@H](C)C(=O)O'],
    ['C[S@](=O)CC', 'C[S@](=O)CC'],
    ['[Fe]~C', '[Fe]~C'],
    ['[CH3]', '[CH3]'],
  ])('%s is written as %s', (smiles, written) => {
    expect(writeSmiles(moleculeOf(smiles))).toBe(written);
  });

  it('lists the atoms in the order of the string', () => {
    const { smiles, order } = smilesOf(moleculeOf('OC(N)(F)Cl'));
    expect(smiles).toBe('OC(N)(F)Cl');
    expect(order).toEqual([0, 1, 2, 3, 4]);
  });

  it.each([
    'F/C=C/F',
    'F/C=C\\C=C/Br',
    'C/C=C/C=CC=C/C',
    'C/C(F)=C(Cl)/C(Br)=C(I)\\C',
    'C/C=C/C=C/C=C/C=C\\C',
    'C1/C=C/CCCCCC1',
    'C/C=C=C=C/C',
    'C/C=C1/CC/C(=C/C)C1',
  ])('double bonds of %s come back', smiles => {
    const molecule = moleculeOf(smiles);
    const again = moleculeOf(writeSmiles(molecule));
    expect(again.stated.length).toBe(molecule.stated.length);
    expect(writeSmiles(moleculeOf(writeSmiles(again)))).toBe(writeSmiles(again));
  });

  it('a double bond left open between two stated ones stays open', () => {
    const molecule = moleculeOf('C/C=C/C=CC=C/C');
    const between = buildMolecule({
      atoms: Array.from({ length: 8 }, (_, i) => ({ element: 6, hydrogens: i === 0 || i === 7 ? 3 : 1 })),
      bonds: [
        [0, 1, 1],
        [1, 2, 2],
        [2, 3, 1],
        [3, 4, 2],
        [4, 5, 1],
        [5, 6, 2],
        [6, 7, 1],
      ],
      stated: [
        { kind: 'double-bond', ends: [1, 2], references: [0, 3], side: 'opposite' },
        { kind: 'double-bond', ends: [5, 6], references: [4, 7], side: 'opposite' },
      ],
    });
    const { smiles, dropped } = smilesOf(between);
    expect(dropped).toEqual([]);
    const again = moleculeOf(smiles);
    expect(hillFormula(again)).toBe(hillFormula(molecule));
    expect(again.stated).toHaveLength(2);
  });

  it('both hands of an allene and of a longer row stay apart (OpenSMILES 1.0, Allene-like systems)', () => {
    for (const tail of ['=C(C)Br', '=C=C=C(C)Br']) {
      const head = tail === '=C(C)Br' ? 'OC(Cl)=' : 'OC(Cl)=C=C=';
      const one = writeSmiles(moleculeOf(`${head}[C@]${tail}`));
      const other = writeSmiles(moleculeOf(`${head}[C@@]${tail}`));
      expect(one).not.toBe(other);
      expect(writeSmiles(moleculeOf(one))).toBe(one);
      expect(moleculeOf(one).stated).toEqual(moleculeOf(`${head}[C@]${tail}`).stated);
    }
  });

  it('stereo groups stand in the tail', () => {
    const text = 'C[C@H](O)[C@H](F)[C@@H](C)Cl |a:1,&1:3,o2:5|';
    expect(moleculeOf(writeCxsmiles(moleculeOf(text))).stereoGroups).toEqual(moleculeOf(text).stereoGroups);
  });

  it('rdkit.js reads the same molecule, stereochemistry included, on published structures', async context => {
    const path = sharedData('chembl-chiral/chembl-20-chiral.smi');
    if (path === null) {
      context.skip(SHARED_DATA_ABSENT);
      return;
    }
    const rdkit = await rdkitModule();
    const canonical = (smiles: string): string | null => {
      const molecule = rdkit.get_mol(smiles);
      const text = molecule?.get_smiles() ?? null;
      molecule?.delete();
      return text;
    };
    // Every eighth of 5,000; all of them are in the reference tests.
    const lines = readFileSync(path, 'utf8')
      .split('\n')
      .filter((_, i) => i % 8 === 0);
    let read = 0;
    for (const line of lines) {
      const smiles = line.split(/\s/u)[0]!;
      if (smiles === '') continue;
      const { smiles: written, dropped } = smilesOf(moleculeOf(smiles));
      expect(dropped).toEqual([]);
      expect([smiles, canonical(written)]).toEqual([smiles, canonical(smiles)]);
      read++;
    }
    expect(read).toBeGreaterThan(600);
  });
});

/** A chain of random atoms with coordinates, charges, isotopes, radicals and marks. */
const molecules = array(
  constantFrom(
    { element: 6 },
    { element: 7, charge: 1 },
    { element: 8, charge: -1 },
    { element: 16 },
    { element: 6, isotope: 13 },
    { element: 6, radical: 1 },
    { element: 1, isotope: 2 },
    { element: 0 },
    { element: 26, charge: 2 },
  ),
  { minLength: 1, maxLength: 12 },
).chain(atoms =>
  array(integer({ min: -99_999, max: 99_999 }), {
    minLength: 3 * atoms.length,
    maxLength: 3 * atoms.length,
  }).map(places => {
    const at = (k: number): number => places[k]! / 1000;
    return buildMolecule({
      name: 'chain',
      dimension: 3,
      atoms: atoms.map((atom, i) => ({
        ...atom,
        hydrogens: i % 3,
        x: at(3 * i),
        y: at(3 * i + 1),
        z: (places[3 * i + 2]! + 200_000) / 1000,
      })),
      bonds: atoms
        .slice(1)
        .map(
          (_, i) =>
            [i, i + 1, ([1, 2, 0] as const)[i % 3]!, i % 6 === 1 ? BondMark.crossed : BondMark.none] as const,
        ),
    });
  }),
);

describe('Molfiles', () => {
  it('radicals of a SMILES come back (methyl, a carbene, a triplet oxygen atom)', () => {
    for (const [smiles, unpaired] of [
      ['[CH3]', 1],
      ['[CH2]', 2],
      ['[O]', 2],
      ['C[O]', 1],
      ['[OH-]', 0],
      ['[Fe]', 0],
    ] as const) {
      const molecule = moleculeOf(smiles);
      expect([smiles, Math.max(...molecule.radicals)]).toEqual([smiles, unpaired]);
      expect(writeSmiles(readBack(writeMolfile(molecule)).molecule!)).toBe(smiles);
    }
  });

  it('any molecule comes back from either version', () => {
    assert(
      property(molecules, constantFrom('V2000' as const, 'V3000' as const), (molecule, version) => {
        const entry = readBack(writeMolfile(molecule, { version }));
        expect(entry.error).toBeNull();
        expect(entry.molecule).toEqual(molecule);
      }),
      { numRuns: 500 },
    );
  });

  it('marks of a drawing come back', () => {
    for (const mark of [BondMark.wedge, BondMark.hash, BondMark.wavy]) {
      const molecule = buildMolecule({
        dimension: 2,
        atoms: [
          { element: 6, hydrogens: 3, x: 0, y: 0 },
          { element: 6, hydrogens: 3, x: 1.5, y: 0 },
        ],
        bonds: [[1, 0, 1, mark]],
      });
      for (const version of ['V2000', 'V3000'] as const) {
        expect(readBack(writeMolfile(molecule, { version })).molecule).toEqual(molecule);
      }
    }
  });

  it('is V3000 where V2000 does not suffice', () => {
    const carbon = { element: 6, hydrogens: 4, x: 1, y: 2, z: 3 };
    const large = buildMolecule({
      dimension: 3,
      atoms: Array.from({ length: 1000 }, () => carbon),
      bonds: [],
    });
    expect(writeMolfile(large)).toContain('V3000');
    expect(readBack(writeMolfile(large)).molecule).toEqual(large);
    expect(() => writeMolfile(large, { version: 'V2000' })).toThrow(RangeError);
    const far = buildMolecule({ dimension: 3, atoms: [{ ...carbon, x: -123_456.789 }], bonds: [] });
    expect(readBack(writeMolfile(far)).molecule).toEqual(far);
    const grouped = { ...far, stereoGroups: [{ kind: 'and', number: 3, atoms: [0] }] as const };
    expect(readBack(writeMolfile(grouped)).molecule?.stereoGroups).toEqual(grouped.stereoGroups);
  });

  it('long stereo groups go over several lines of at most 80 characters', () => {
    const carbon = { element: 6, hydrogens: 4, x: 1, y: 2, z: 3 };
    const molecule = buildMolecule({
      dimension: 3,
      atoms: Array.from({ length: 60 }, () => carbon),
      bonds: [],
      stereoGroups: [{ kind: 'or', number: 12, atoms: Array.from({ length: 60 }, (_, i) => i) }],
    });
    const text = writeMolfile(molecule);
    expect(Math.max(...text.split('\n').map(line => line.length))).toBeLessThanOrEqual(80);
    expect(readBack(text).molecule).toEqual(molecule);
  });

  it('data items come back, and nothing in them can end the entry', () => {
    const molecule = buildMolecule({
      dimension: 3,
      atoms: [{ element: 8, hydrogens: 2, x: 1, y: 1, z: 1 }],
      bonds: [],
    });
    const text = writeSdfEntry(molecule, {
      title: '$$$$',
      data: [
        { name: 'NAME', value: 'one\ntwo' },
        { name: 'ODD', value: '$$$$\n\n> <X>' },
        { name: 'NONE', value: '' },
      ],
    });
    const entry = readBack(text);
    expect(entry.data).toEqual([
      { name: 'NAME', value: 'one\ntwo' },
      { name: 'ODD', value: ' $$$$\n > <X>' },
      { name: 'NONE', value: '' },
    ]);
    expect(text.match(/^\$\$\$\$/gmu)).toHaveLength(1);
    expect(writeSdfEntry(molecule)).toBe(writeSdfEntry(molecule));
  });

  it('an atom without a place is refused by its number', () => {
    const molecule = buildMolecule({ dimension: 3, atoms: [{ element: 6 }], bonds: [] });
    expect(() => writeMolfile(molecule)).toThrow('atom 1 is not located');
  });
});
