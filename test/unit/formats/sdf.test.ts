/** SDF and both Molfile versions: what is read, and what is said of input that is not right (CTfile Formats, BIOVIA 2020). */
import { describe, expect, it } from 'vitest';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { BondMark } from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry } from '../../../core/formats/format.ts';
import { sdfFormat } from '../../../core/formats/sdf.ts';
import { CHIRAL, type MolfileAtom, type MolfileBond, sdf, v2000, v3000 } from './molfiles.ts';
import { bytesOf, chunksOf, entriesOf } from './streams.ts';

const GOOD = v2000('good', CHIRAL.atoms, CHIRAL.bonds);
const LETTER = 'R';

const letterOf = (entry: Entry | undefined): string | null =>
  examine(entry!.molecule!).units[0]?.descriptor ?? null;

const replaced = (lines: readonly string[], at: number, line: string): string[] =>
  lines.map((old, i) => (i === at ? line : old));

async function only(lines: readonly string[]): Promise<Entry> {
  const list = await entriesOf(sdf([lines]));
  expect(list).toHaveLength(1);
  return list[0]!;
}

async function molecule(lines: readonly string[]): Promise<NonNullable<Entry['molecule']>> {
  const entry = await only(lines);
  expect(entry.error).toBeNull();
  return entry.molecule!;
}

const ring = (symbols: readonly string[], type: number): { atoms: MolfileAtom[]; bonds: MolfileBond[] } => ({
  atoms: symbols.map((symbol, i) => ({
    symbol,
    x: Math.cos((2 * Math.PI * i) / symbols.length),
    y: Math.sin((2 * Math.PI * i) / symbols.length),
  })),
  bonds: symbols.map((_, i) => [i + 1, ((i + 1) % symbols.length) + 1, type] as const),
});

describe('a good entry', () => {
  it('V2000 and V3000 give the same molecule', async () => {
    const two = await molecule(GOOD);
    const three = await molecule(v3000('good', CHIRAL.atoms, CHIRAL.bonds));
    for (const m of [two, three]) {
      expect(hillFormula(m)).toBe('CHBrClF');
      expect(m.dimension).toBe(3);
      expect(m.name).toBe('good');
      expect([...m.coordinates!.subarray(6, 9)]).toEqual([1.82, 0, -0.64]);
      expect(examine(m).units.map(u => u.descriptor)).toEqual([LETTER]);
    }
  });

  it('the same bytes come back, terminator included', async () => {
    const text = sdf([GOOD, GOOD, GOOD]);
    const bytes: number[] = [];
    for await (const raw of sdfFormat.split(chunksOf(bytesOf(text), [10, 100, 3]), DEFAULT_LIMITS)) {
      bytes.push(...raw.bytes);
    }
    expect(new TextDecoder().decode(Uint8Array.from(bytes))).toBe(text);
  });

  it.each(['\n', '\r\n', '\r'])('line ending %j', async ending => {
    const list = await entriesOf(sdf([GOOD, [...GOOD, '> <ID>', 'x1', ''], GOOD], ending));
    expect(list.map(({ line }) => line)).toEqual([1, GOOD.length + 2, 2 * GOOD.length + 6]);
    expect(list.map(letterOf)).toEqual([LETTER, LETTER, LETTER]);
    expect(list[1]!.data).toEqual([{ name: 'ID', value: 'x1' }]);
  });

  it.each(['\n', '\r\n', '\r'])('cut at every byte, line ending %j', async ending => {
    const text = sdf([GOOD, [...GOOD, '>  <A B>', 'one', 'two', '']], ending);
    for (let cut = 1; cut < text.length; cut++) {
      const list = await entriesOf(text, 'x.sdf', [cut]);
      expect(list.map(({ entry, line, name, error }) => [entry, line, name, error])).toEqual([
        [1, 1, 'good', null],
        [2, GOOD.length + 2, 'good', null],
      ]);
      expect(list[1]!.data).toEqual([{ name: 'A B', value: 'one\ntwo' }]);
    }
  });

  it('one byte a chunk', async () => {
    const text = sdf([GOOD, GOOD], '\r\n');
    const list = await entriesOf(
      text,
      'x.sdf',
      Array.from({ length: text.length }, () => 1),
    );
    expect(list.map(letterOf)).toEqual([LETTER, LETTER]);
  });

  it('without the last terminator, and as a lone Molfile', async () => {
    expect((await entriesOf(`${sdf([GOOD])}${GOOD.join('\n')}`)).map(letterOf)).toEqual([LETTER, LETTER]);
    expect((await entriesOf(GOOD.join('\n'), 'x.mol')).map(letterOf)).toEqual([LETTER]);
  });

  it('gzip is undone', async () => {
    const { gzipSync } = await import('fflate');
    expect((await entriesOf(gzipSync(bytesOf(sdf([GOOD, GOOD]))), 'x.sdf.gz')).map(letterOf)).toEqual([
      LETTER,
      LETTER,
    ]);
  });

  it('data items: several lines, blank values, registry numbers in the header, a value with >', async () => {
    const entry = await only([
      ...GOOD,
      '>  <IC50 (nM)>  (7)',
      '12.5',
      '',
      '> 25 <NOTE>',
      'a > b',
      '>b',
      'c',
      '',
      '> <EMPTY>',
      '',
      '> DT12',
      'numbered',
      '',
    ]);
    expect(entry.data).toEqual([
      { name: 'IC50 (nM)', value: '12.5' },
      { name: 'NOTE', value: 'a > b\n>b\nc' },
      { name: 'EMPTY', value: '' },
      { name: 'DT12', value: 'numbered' },
    ]);
  });
});

describe('charges, isotopes, radicals, hydrogens', () => {
  it('charge column and M  CHG; the property replaces the column', async () => {
    const atoms: MolfileAtom[] = [
      { symbol: 'N', x: 1, charge: 3 },
      { symbol: 'O', x: 2, charge: 5 },
      { symbol: 'C', x: 3, charge: 4 },
    ];
    const column = await molecule(v2000('', atoms, []));
    expect([...column.charges]).toEqual([1, -1, 0]);
    expect([...column.radicals]).toEqual([0, 0, 1]);
    expect([...column.hydrogens]).toEqual([4, 1, 3]);
    const property = await molecule(v2000('', atoms, [], ['M  CHG  2   2  -2   3   1']));
    expect([...property.charges]).toEqual([0, -2, 1]);
    expect([...property.radicals]).toEqual([0, 0, 0]);
    expect([...property.hydrogens]).toEqual([3, 0, 3]);
  });

  it('isotopes: mass difference, M  ISO, D and T', async () => {
    const m = await molecule(
      v2000(
        '',
        [
          { symbol: 'C', x: 1, mass: 1 },
          { symbol: 'Cl', x: 2, mass: 2 },
          { symbol: 'D', x: 3 },
          { symbol: 'T', x: 4 },
          { symbol: 'N', x: 5 },
        ],
        [],
        ['M  ISO  1   5  15'],
      ),
    );
    expect([...m.isotopes]).toEqual([13, 37, 2, 3, 15]);
    expect([...m.elements]).toEqual([6, 17, 1, 1, 7]);
  });

  it('radicals: singlet and triplet have two unpaired electrons, doublet one', async () => {
    const atoms = [1, 2, 3].map(x => ({ symbol: 'C', x }));
    const m = await molecule(v2000('', atoms, [], ['M  RAD  3   1   1   2   2   3   3']));
    expect([...m.radicals]).toEqual([2, 1, 2]);
    expect([...m.hydrogens]).toEqual([2, 3, 2]);
  });

  it('valence column: 15 is none, another number is the sum of bonds', async () => {
    const m = await molecule(
      v2000(
        '',
        [
          { symbol: 'C', x: 1, valence: 15 },
          { symbol: 'C', x: 2, valence: 3 },
          { symbol: 'P', x: 3, valence: 5 },
          { symbol: 'Na', x: 4 },
        ],
        [],
      ),
    );
    expect([...m.hydrogens]).toEqual([0, 3, 5, 0]);
  });

  it('default hydrogens follow the charge (isoelectronic rule, common practice, no source)', async () => {
    const atoms: MolfileAtom[] = [
      { symbol: 'C', x: 1 },
      { symbol: 'N', x: 2 },
      { symbol: 'O', x: 3 },
      { symbol: 'S', x: 4 },
      { symbol: 'B', x: 5 },
      { symbol: 'Si', x: 6 },
      { symbol: 'Br', x: 7 },
    ];
    const m = await molecule(v2000('', atoms, []));
    expect([...m.hydrogens]).toEqual([4, 3, 2, 2, 3, 4, 1]);
    const charged = await molecule(
      v2000('', atoms, [], ['M  CHG  5   1  -1   2   1   3   1   4   1   5  -1']),
    );
    expect([...charged.hydrogens].slice(0, 5)).toEqual([3, 4, 3, 3, 4]);
  });

  it('an unusual valence is a warning that names the atom', async () => {
    const entry = await only(
      v2000(
        '',
        [0, 1, 2, 3, 4, 5].map(x => ({ symbol: 'C', x, y: x * x })),
        [2, 3, 4, 5, 6].map(k => [1, k, 1] as const),
      ),
    );
    expect(entry.error).toBeNull();
    expect(entry.warnings.join()).toMatch(/C1 \(5 bonds/u);
  });

  it('V3000 keywords', async () => {
    const m = await molecule(
      v3000(
        '',
        [
          { symbol: 'N', x: 1, keywords: 'CHG=1' },
          { symbol: 'C', x: 2, keywords: 'MASS=13 RAD=2' },
          { symbol: 'C', x: 3, keywords: 'VAL=-1' },
          { symbol: 'O', x: 4, keywords: 'CHG=-1 CFG=0' },
        ],
        [],
      ),
    );
    expect([...m.charges]).toEqual([1, 0, 0, -1]);
    expect([...m.isotopes]).toEqual([0, 13, 0, 0]);
    expect([...m.radicals]).toEqual([0, 1, 0, 0]);
    expect([...m.hydrogens]).toEqual([4, 3, 0, 1]);
  });
});

describe('aromatic bonds (type 4)', () => {
  it.each([
    ['benzene', ['C', 'C', 'C', 'C', 'C', 'C'], 'C6H6'],
    ['pyridine', ['N', 'C', 'C', 'C', 'C', 'C'], 'C5H5N'],
    ['furan', ['O', 'C', 'C', 'C', 'C'], 'C4H4O'],
    ['thiophene', ['S', 'C', 'C', 'C', 'C'], 'C4H4S'],
    // Nitrogen bears the hydrogen that the drawing leaves out.
    ['pyrrole', ['N', 'C', 'C', 'C', 'C'], 'C4H5N'],
    ['imidazole', ['N', 'C', 'N', 'C', 'C'], 'C3H4N2'],
    ['1,2,4-triazole', ['N', 'N', 'C', 'N', 'C'], 'C2H3N3'],
    ['pyrimidine', ['N', 'C', 'N', 'C', 'C', 'C'], 'C4H4N2'],
  ] as const)('%s', async (_, symbols, formula) => {
    const { atoms, bonds } = ring(symbols, 4);
    const m = await molecule(v2000('', atoms, bonds));
    expect(hillFormula(m)).toBe(formula);
    expect([...m.bondOrders].every(order => order === 1 || order === 2)).toBe(true);
  });

  it('no Kekulé structure: the atoms are named', async () => {
    const { atoms, bonds } = ring(['C', 'C', 'C', 'C', 'C'], 4);
    const entry = await only(v2000('', atoms, bonds));
    expect(entry.error?.code).toBe('no-kekule-structure');
    expect(entry.error?.message).toMatch(/atoms? \d/u);
  });
});

describe('drawings', () => {
  const plane: MolfileAtom[] = [
    { symbol: 'C' },
    { symbol: 'F', x: 0, y: 1 },
    { symbol: 'Cl', x: -0.87, y: -0.5 },
    { symbol: 'Br', x: 0.87, y: -0.5 },
  ];
  const bonds: MolfileBond[] = [
    [1, 2, 1, 1],
    [1, 3, 1],
    [1, 4, 1],
  ];

  it('z is zero throughout: a drawing, with its wedges', async () => {
    const m = await molecule(v2000('', plane, bonds));
    expect(m.dimension).toBe(2);
    expect([...m.bondMarks]).toEqual([BondMark.wedge, 0, 0]);
    const marks = async (type: number, mark: number): Promise<number> =>
      (await molecule(v2000('', plane, [[1, 2, type, mark]]))).bondMarks[0]!;
    expect(await marks(1, 6)).toBe(BondMark.hash);
    expect(await marks(1, 4)).toBe(BondMark.wavy);
    expect(await marks(2, 3)).toBe(BondMark.crossed);
  });

  it('V3000 has its own numbers for the marks', async () => {
    const marks = async (type: number, mark: number): Promise<number> =>
      (await molecule(v3000('', plane, [[1, 2, type, mark]]))).bondMarks[0]!;
    expect(await marks(1, 1)).toBe(BondMark.wedge);
    expect(await marks(1, 3)).toBe(BondMark.hash);
    expect(await marks(1, 2)).toBe(BondMark.wavy);
    expect(await marks(2, 2)).toBe(BondMark.crossed);
  });

  it('all coordinates zero: no geometry, with a warning, and no letter', async () => {
    const flat = CHIRAL.atoms.map(({ symbol }) => ({ symbol }));
    for (const lines of [v2000('z', flat, CHIRAL.bonds), v3000('z', flat, CHIRAL.bonds)]) {
      const entry = await only(lines);
      expect(entry.molecule?.dimension).toBe(0);
      expect(entry.warnings.join()).toMatch(/all coordinates are zero/u);
      const [unit] = examine(entry.molecule!).units;
      expect([unit!.descriptor, unit!.unit.state]).toEqual([null, 'unspecified']);
    }
  });
});

describe('stereo groups of V3000', () => {
  it('STEABS, STERACn and STERELn, also over a continued line', async () => {
    const atoms = [0, 1, 2, 3, 4].map(x => ({ symbol: 'C', x, y: x % 2, z: 0 }));
    const bonds = [1, 2, 3, 4].map(k => [k, k + 1, 1] as const);
    const m = await molecule(
      v3000('', atoms, bonds, [
        'MDLV30/STEABS ATOMS=(1 2)',
        'MDLV30/STERAC1 ATOMS=(2 3 -',
        '4)',
        'MDLV30/STEREL12 ATOMS=(1 5)',
        'MDLV30/HILITE ATOMS=(1 1)',
      ]),
    );
    expect(m.stereoGroups).toEqual([
      { kind: 'absolute', number: 0, atoms: [1] },
      { kind: 'and', number: 1, atoms: [2, 3] },
      { kind: 'or', number: 12, atoms: [4] },
    ]);
  });

  it('atoms go by their index, not by their place', async () => {
    const lines = v3000('', CHIRAL.atoms, CHIRAL.bonds).map(line => {
      const atom = /^M {2}V30 (\d+) ([A-Z][a-z]?) (.*)$/u.exec(line);
      if (atom !== null) return `M  V30 ${Number(atom[1]) * 10} ${atom[2]} ${atom[3]}`;
      const bond = /^M {2}V30 (\d+) 1 (\d+) (\d+)$/u.exec(line);
      return bond === null ? line : `M  V30 ${bond[1]} 1 ${bond[2]}0 ${bond[3]}0`;
    });
    expect(letterOf(await only(lines))).toBe(LETTER);
  });
});

describe('bad input: the code, the line of the file, and the other entries', () => {
  const start = GOOD.length + 2;
  const V3 = v3000('v3', CHIRAL.atoms, CHIRAL.bonds);
  const bondAt = GOOD.findIndex(line => line.startsWith('  1  2'));
  const v3At = (text: string): number => V3.findIndex(line => line.includes(text));
  const cases: readonly (readonly [string, readonly string[], string, number, RegExp])[] = [
    ['unknown element', replaced(GOOD, 6, GOOD[6]!.replace('Br', 'Qx')), 'unknown-element', 6, /atom 3.*Qx/u],
    [
      'bond to an atom that is not there',
      replaced(GOOD, bondAt, '  1  9  1  0'),
      'bond-atom-missing',
      bondAt,
      /atom 9.*5/u,
    ],
    ['bond to atom 0', replaced(GOOD, bondAt, '  0  2  1  0'), 'bond-atom-missing', bondAt, /atom 0/u],
    ['bond to itself', replaced(GOOD, bondAt, '  2  2  1  0'), 'bond-to-itself', bondAt, /atom 2/u],
    [
      'bond given twice',
      replaced(GOOD, bondAt + 1, '  2  1  1  0'),
      'duplicate-bond',
      bondAt + 1,
      /1 and 2|2 and 1/u,
    ],
    ['bond of unknown type', replaced(GOOD, bondAt, '  1  2 11  0'), 'bad-bond', bondAt, /type 11/u],
    ['bond of words', replaced(GOOD, bondAt, 'one two'), 'bad-bond', bondAt, /bond 1/u],
    ['NaN', replaced(GOOD, 7, GOOD[7]!.replace('   -0.8300', '       NaN')), 'bad-coordinates', 7, /atom 4/u],
    ['nan', replaced(GOOD, 7, GOOD[7]!.replace('   -0.8300', '      -nan')), 'bad-coordinates', 7, /atom 4/u],
    [
      'infinite',
      replaced(GOOD, 7, GOOD[7]!.replace('   -0.8300', '       inf')),
      'bad-coordinates',
      7,
      /atom 4/u,
    ],
    [
      'stars',
      replaced(GOOD, 7, GOOD[7]!.replace('   -0.8300', '**********')),
      'bad-coordinates',
      7,
      /atom 4/u,
    ],
    ['no symbol', replaced(GOOD, 5, '    0.0000    0.0000    1.0900'), 'bad-atom', 5, /atom 2/u],
    ['truncated among the atoms', GOOD.slice(0, 7), 'truncated-entry', 7, /5 atoms and 4 bonds/u],
    ['truncated among the bonds', GOOD.slice(0, bondAt + 2), 'truncated-entry', bondAt + 2, /promises/u],
    ['truncated in the header', ['name'], 'truncated-entry', 1, /counts line/u],
    ['counts of words', replaced(GOOD, 3, ' many atoms'), 'bad-counts', 3, /many atoms/u],
    [
      'negative counts',
      replaced(GOOD, 3, ' -1  4  0  0  0  0            999 V2000'),
      'bad-counts',
      3,
      /counts/u,
    ],
    [
      'bad property',
      [...GOOD.slice(0, -1), 'M  CHG  2   1   1', 'M  END'],
      'bad-property',
      GOOD.length - 1,
      /CHG/u,
    ],
    [
      'property of no atom',
      [...GOOD.slice(0, -1), 'M  CHG  1   9   1', 'M  END'],
      'bad-property',
      GOOD.length - 1,
      /atom 9/u,
    ],
    [
      'V3000 unknown element',
      replaced(V3, v3At('Br'), 'M  V30 3 Qx 0 0 1 0'),
      'unknown-element',
      v3At('Br'),
      /Qx/u,
    ],
    [
      'V3000 NaN',
      replaced(V3, v3At('Br'), 'M  V30 3 Br NaN 0 1 0'),
      'bad-coordinates',
      v3At('Br'),
      /atom 3/u,
    ],
    [
      'V3000 bond to nowhere',
      replaced(V3, v3At('30 2 1 1 3'), 'M  V30 2 1 1 30'),
      'bond-atom-missing',
      v3At('30 2 1 1 3'),
      /atom 30/u,
    ],
    [
      'V3000 index twice',
      replaced(V3, v3At('Br'), 'M  V30 2 Br 0 0 1 0'),
      'bad-atom',
      v3At('Br'),
      /index 2/u,
    ],
    ['V3000 without counts', V3.filter(line => !line.includes('COUNTS')), 'truncated-entry', 3, /COUNTS/u],
    ['V3000 truncated', V3.slice(0, 10), 'truncated-entry', 10, /promise/u],
    [
      'V3000 bond given twice',
      replaced(V3, v3At('30 2 1 1 3'), 'M  V30 2 1 2 1'),
      'duplicate-bond',
      v3At('30 2 1 1 3'),
      /bonded already/u,
    ],
  ];

  it.each(cases)('%s', async (_, lines, code, at, message) => {
    for (const ending of ['\n', '\r\n', '\r']) {
      const list = await entriesOf(sdf([GOOD, lines, GOOD], ending));
      expect(list).toHaveLength(3);
      expect([letterOf(list[0]), letterOf(list[2])]).toEqual([LETTER, LETTER]);
      expect(list[1]!.molecule).toBeNull();
      expect(list[1]!.error?.code).toBe(code);
      expect(list[1]!.error?.message).toMatch(message);
      expect(list[1]!.error?.line).toBe(start + at);
    }
  });

  it('data items of an entry that cannot be read are kept', async () => {
    const entry = await only([...replaced(GOOD, 6, GOOD[6]!.replace('Br', 'Qx')), '> <ID>', 'x7', '']);
    expect(entry.error?.code).toBe('unknown-element');
    expect(entry.data).toEqual([{ name: 'ID', value: 'x7' }]);
  });

  it('an empty file', async () => {
    await expect(entriesOf('', 'poses.sdf')).rejects.toThrow(/poses\.sdf: the file is empty/u);
  });

  it('a file of blank lines', async () => {
    await expect(entriesOf('\n\n  \n', 'poses.sdf')).resolves.toEqual([]);
  });

  it('a binary file', async () => {
    const bytes = Uint8Array.from({ length: 5000 }, (_, i) => (i * 7919) & 0xff);
    await expect(entriesOf(bytes, 'poses.sdf')).rejects.toThrow(
      /poses\.sdf: (?:not a format|a binary file)/u,
    );
  });

  it('more atoms than the limit, and an entry without end', async () => {
    const [entry] = await entriesOf(sdf([GOOD]), 'x.sdf', [], { ...DEFAULT_LIMITS, atoms: 4 });
    expect(entry!.error?.code).toBe('too-many-atoms');
    await expect(
      entriesOf(GOOD.join('\n').repeat(10), 'x.sdf', [100, 100, 100, 100, 100, 100, 100], {
        ...DEFAULT_LIMITS,
        entryBytes: 500,
      }),
    ).rejects.toThrow(/more than 500 bytes/u);
  });
});
