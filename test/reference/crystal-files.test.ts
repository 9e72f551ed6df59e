/** Every file of the published small-molecule crystal structures and models: read, or refused with line and reason; formulas, hands and absolute structures by the file's own account. */
import { readdirSync, readFileSync } from 'node:fs';
import { gunzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { mirrorBytes } from '../../core/commands/mirror.ts';
import { absoluteStructure } from '../../core/crystal/absolute-structure.ts';
import { compareIndependent } from '../../core/crystal/independent.ts';
import { tabulatedDispersion } from '../../core/crystal/resonant-signal.ts';
import { examine } from '../../core/examine.ts';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { hillFormula } from '../../core/chemistry/formula.ts';
import { parseCif } from '../../core/formats/cif-syntax.ts';
import type { Entry } from '../../core/formats/format.ts';
import { readEntries } from '../../core/formats/registry.ts';
import { bondOrders } from '../../core/perception/bond-orders.ts';
import { bondsFromCoordinates } from '../../core/perception/bonds-from-coordinates.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const small = sharedData('small-molecule-cif');
const poses = sharedData('poses');
const macromolecules = sharedData('macromolecule');

async function entriesOf(path: string): Promise<Entry[]> {
  const bytes = readFileSync(path);
  async function* chunks(): AsyncGenerator<Uint8Array> {
    yield await Promise.resolve(bytes);
  }
  const entries: Entry[] = [];
  for await (const entry of readEntries(chunks(), path)) entries.push(entry);
  return entries;
}

const formulaOf = (molecule: Molecule): string =>
  hillFormula(
    molecule,
    Array.from({ length: molecule.atomCount }, (_, i) => i),
  );

/** File: entries as atoms, absolute structure by the criteria (worked by hand from the Flack parameter and the operators). */
const SMALL: Readonly<Record<string, readonly (readonly [number, string])[]>> = {
  'broken-quote.cif': [
    [19, 'not-applicable'],
    [37, 'not-applicable'],
    [35, 'not-applicable'],
    [84, 'not-applicable'],
    [34, 'not-applicable'],
    [50, 'not-applicable'],
  ],
  // Molecules already expanded, written in P 1 and without a Flack parameter.
  'cod-1004001-disorder.cif': [
    [254, 'undetermined'],
    [254, 'undetermined'],
  ],
  // 0.2(2)
  'cod-2007008.cif': [[124, 'undetermined']],
  // P m n 21
  'cod-2100345.cif': [[14, 'not-applicable']],
  // 0.00(7)
  'cod-2102846.cif': [[23, 'conditional']],
  // P -4 c 2
  'cod-2224874.cif': [[67, 'not-applicable']],
  'cod-2238212.cif': [[141, 'not-applicable']],
  // C c, by its operators alone
  'cod-4024913.cif': [[48, 'not-applicable']],
  'cod-7050857.cif': [[106, 'not-applicable']],
  // 0.10(8)
  'cod-7101147.cif': [[154, 'conditional']],
  // -0.042(13): 3.2 u below 0
  'cod-7151730.cif': [[52, 'undetermined']],
  'cod-carbo.cif': [
    [66, 'not-applicable'],
    [72, 'not-applicable'],
  ],
};

/** Formulas of the molecules as they must come out where the file's sum formula is that of its molecules. */
const FORMULAS: Readonly<Record<string, string>> = {
  'cod-2100345.cif': 'C3H9ClSi',
  'cod-2102846.cif': 'C5H13ClN2O2',
  'cod-4024913.cif': 'C18H23NO3S3',
};

describe.skipIf(small === null)(`small-molecule CIF (${small === null ? SHARED_DATA_ABSENT : 'COD'})`, () => {
  const folder = small ?? '';

  it('has the files this test knows', () => {
    expect(readdirSync(folder).sort()).toEqual(Object.keys(SMALL).sort());
  });

  it.each(Object.entries(SMALL))('%s', async (name, expected) => {
    const entries = await entriesOf(`${folder}/${name}`);
    expect(entries.map(({ error }) => error)).toEqual(expected.map(() => null));
    expect(
      entries.map(({ molecule, crystal }) => [
        molecule?.atomCount,
        crystal && absoluteStructure(crystal).verdict,
      ]),
    ).toEqual(expected);
    const formula = FORMULAS[name];
    if (formula !== undefined) expect(formulaOf(entries[0]!.molecule!)).toBe(formula);
  });

  it('tells the line of the one error of syntax, and reads that structure all the same', async () => {
    const entries = await entriesOf(`${folder}/broken-quote.cif`);
    expect(entries.map(({ warnings }) => warnings.filter(text => text.startsWith('line ')))).toEqual([
      [],
      [],
      [],
      [],
      [expect.stringMatching(/^line 1667: the quoted string/u)],
      [],
    ]);
  });

  it('finds both independent molecules of 2007008 in opposite hands, those of 7151730 in the same', async () => {
    const relation = async (name: string): Promise<string[]> => {
      const [entry] = await entriesOf(`${folder}/${name}`);
      const { molecule, crystal } = entry!;
      return compareIndependent(molecule!, crystal!.operators, crystal!.cell, each => examine(each)).map(
        each => each.relation,
      );
    };
    expect(await relation('cod-2007008.cif')).toEqual(['opposite hands']);
    expect(await relation('cod-7151730.cif')).toEqual(['same hand']);
  });

  it('has dispersion values like those of the built-in tables (International Tables C, as the files cite)', async () => {
    let compared = 0;
    for (const name of Object.keys(SMALL)) {
      for (const { crystal } of await entriesOf(`${folder}/${name}`)) {
        const table = crystal?.wavelength ? tabulatedDispersion(crystal.wavelength) : null;
        for (const [symbol, own] of crystal?.dispersion ?? []) {
          const value = table?.get(symbol);
          if (!value) continue;
          compared++;
          expect(value, `${name} ${symbol}`).toEqual(own);
        }
      }
    }
    expect(compared).toBeGreaterThan(30);
  });

  it.each(Object.keys(SMALL))('%s comes back to the last digit when mirrored twice', name => {
    const bytes = readFileSync(`${folder}/${name}`);
    const twice = mirrorBytes(mirrorBytes(bytes, name).bytes, name).bytes;
    const figures = (content: Uint8Array): (string | null)[][] =>
      parseCif(new TextDecoder().decode(content)).blocks.flatMap(block =>
        [
          '_atom_site_fract_x',
          '_atom_site_fract_y',
          '_atom_site_fract_z',
          '_geom_torsion',
          '_geom_bond_site_symmetry_2',
        ].map(item => block.all(item) ?? []),
      );
    // A minus sign before a zero is not a digit.
    const plain = (list: (string | null)[][]): (string | null)[][] =>
      list.map(column => column.map(text => text?.replace(/^-(?=[0.]+(?:\(|$))/u, '') ?? null));
    expect(plain(figures(twice))).toEqual(plain(figures(bytes)));
  });
});

describe.skipIf(macromolecules === null)('macromolecular models', () => {
  it('have no absolute structure of their own, and are mirrored and mirrored back byte for byte', async () => {
    for (const name of readdirSync(macromolecules!)) {
      const path = `${macromolecules!}/${name}`;
      for (const { error, crystal } of await entriesOf(path)) {
        expect(error, name).toBeNull();
        // 4TNA and all others carry a cell.
        expect(crystal && absoluteStructure(crystal).verdict, name).toBe('not-applicable');
      }
      const file = readFileSync(path);
      const bytes = name.endsWith('.gz') ? gunzipSync(file) : file;
      const twice = mirrorBytes(mirrorBytes(bytes, name).bytes, name).bytes;
      const text = (content: Uint8Array): string => new TextDecoder().decode(content);
      // A minus sign before a zero is not a digit; fixed columns keep its place.
      const zero = (content: string): string =>
        content.replace(/-0\.000(?!\d)/gu, ' 0.000').replace(/[ ]+/gu, ' ');
      expect(zero(text(twice)), name).toBe(zero(text(bytes)));
    }
  });
});

describe.skipIf(poses === null)('ligands without bond orders', () => {
  it.each([
    ['3m11_AKI.pdb', 'C33H27N5O2', 40],
    ['3w2c_N15.pdb', 'C24H25N7O', 32],
    ['docked_2c6e_AKI_pH74_netcharge1.pdb', 'C33H27N5O2', 43],
    ['docked_2c6e_N15_pH74_netcharge1.pdb', 'C24H25N7O', 35],
    ['docked_2c6e_SKE_pH74_netcharge1.pdb', 'C15H12F2N6O3S', 32],
  ])('%s is %s, crystal pose and docked pose alike', async (name, formula, atoms) => {
    const [entry] = await entriesOf(`${poses!}/${name}`);
    expect(entry?.error).toBeNull();
    expect(entry?.molecule?.atomCount).toBe(atoms);
    expect(formulaOf(entry!.molecule!)).toBe(formula);
  });

  it('the SDF of the same folder has its bonds found again from the coordinates', async () => {
    const entries = await entriesOf(`${poses!}/cdk2.sdf`);
    expect(entries.length).toBeGreaterThan(40);
    for (const { molecule, name } of entries) {
      const { elements, bondAtoms, bondOrders: listed } = molecule!;
      const coordinates = molecule!.coordinates!;
      const { pairs } = bondsFromCoordinates({ elements, coordinates });
      const key = (list: Uint32Array): string[] =>
        Array.from({ length: list.length / 2 }, (_, b) =>
          [list[2 * b]!, list[2 * b + 1]!].sort((x, y) => x - y).join('-'),
        ).sort();
      expect(key(pairs), name).toEqual(key(bondAtoms));
      const found = bondOrders({ elements, coordinates, pairs });
      const multiple = (list: Uint8Array): number =>
        list.reduce((sum, order) => sum + Math.max(0, order - 1), 0);
      expect(multiple(found.orders), name).toBe(multiple(listed));
      expect(
        [...found.hydrogens].every(count => count === 0),
        name,
      ).toBe(true);
    }
  });
});
