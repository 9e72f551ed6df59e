/** Inversion of models: right group, right origin, everything that depends on the hand made to fit, and back to the last digit. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { mirroredFigure } from '../../../core/crystal/decimal.ts';
import { invertedCode, invertedOperator, findInversion } from '../../../core/crystal/inversion.ts';
import { isInverse, mirrorCif } from '../../../core/crystal/mirror-cif.ts';
import { operatorsFromHall } from '../../../core/crystal/hall.ts';
import { applyOperator, isClosed, isIntegral, minus } from '../../../core/crystal/operator.ts';
import { STANDARD_SETTINGS } from '../../../core/crystal/space-groups.ts';
import { type CifBlock, parseCif } from '../../../core/formats/cif-syntax.ts';
import { readCoreBlock } from '../../../core/formats/cif-core.ts';
import { DEFAULT_LIMITS } from '../../../core/formats/format.ts';
import { mirrorPdb, mirrorSdf, mirrorXyz } from '../../../core/formats/mirror-plain.ts';
import { examine } from '../../../core/examine.ts';
import { inventedCif, type InventedOptions } from './invented.ts';

function only(text: string): CifBlock {
  const block = parseCif(text).blocks[0];
  if (!block) throw new Error('no block');
  return block;
}

const read = (text: string) => readCoreBlock(only(text), DEFAULT_LIMITS);

function letters(text: string): string[] {
  const { molecule } = read(text);
  return examine(molecule).units.map(
    ({ unit, descriptor }) => `${molecule.labels?.[unit.atoms[0]!]} ${descriptor}`,
  );
}

const CASES: readonly (InventedOptions & { readonly becomes: string; readonly point: string })[] = [
  {
    symbol: 'P 41',
    number: 76,
    hall: 'P 4w',
    lengths: [9.1, 9.1, 12.3],
    at: [0.21, 0.34, 0.13],
    becomes: 'P 43',
    point: '0, 0, 0',
  },
  {
    symbol: 'I 41',
    number: 80,
    hall: 'I 4bw',
    lengths: [12.4, 12.4, 13.7],
    at: [0.21, 0.34, 0.13],
    becomes: 'I 41',
    point: '0, 0.25, 0',
  },
  {
    symbol: 'F d d 2',
    number: 43,
    hall: 'F 2 -2d',
    lengths: [21.5, 19.4, 13.3],
    at: [0.11, 0.17, 0.23],
    becomes: 'F d d 2',
    point: '0.125, 0.125, 0',
  },
  {
    symbol: 'P 32 2 1',
    number: 154,
    hall: 'P 32 2"',
    lengths: [11.2, 11.2, 13.9],
    angles: [90, 90, 120],
    at: [0.31, 0.12, 0.17],
    becomes: 'P 31 2 1',
    point: '0, 0, 0',
  },
  {
    symbol: 'P 21 21 21',
    number: 19,
    hall: 'P 2ac 2ab',
    lengths: [8.2, 9.9, 11.7],
    at: [0.31, 0.12, 0.17],
    becomes: 'P 21 21 21',
    point: '0, 0, 0',
  },
];

describe.each(CASES)('an invented model in $symbol', options => {
  const before = inventedCif(options);
  const { text: after, notes } = mirrorCif(before);

  it(`becomes one in ${options.becomes}, about ${options.point}`, () => {
    const block = only(after);
    expect(block.get('_space_group_name_h-m_alt')).toBe(options.becomes);
    expect(notes.join('\n')).toContain(`in the point ${options.point} `);
    const { crystal } = read(after);
    expect(isClosed(crystal.operators)).toBe(true);
    // The rewritten operators are those of the symbol's own table entry.
    const table = STANDARD_SETTINGS.find(({ symbol }) => symbol === options.becomes);
    const expected = operatorsFromHall(table?.hall ?? '') ?? [];
    const image = (list: typeof expected): string[] =>
      list
        .map(operator =>
          applyOperator(operator, [0.11, 0.23, 0.37])
            .map(x => (((x % 1) + 1) % 1).toFixed(4))
            .join(' '),
        )
        .sort();
    expect(image([...crystal.operators])).toEqual(image(expected));
    expect(block.get('_space_group_it_number')).toBe(String(table?.number));
    expect(operatorsFromHall(block.get('_space_group_name_hall') ?? '')).toHaveLength(expected.length);
  });

  it('has the same distances and the opposite hands', () => {
    expect(isInverse(read(before).molecule, read(after).molecule)).toBe(true);
    const swap: Readonly<Record<string, string>> = { R: 'S', S: 'R' };
    expect(letters(before)).toHaveLength(2);
    expect(letters(after)).toEqual(
      letters(before).map(text => text.replace(/[RS]$/u, letter => swap[letter] ?? letter)),
    );
  });

  it('has the neighbours of the crystal at the same distances, so that the origin is right', () => {
    const contacts = (text: string): string[] => {
      const { molecule, crystal } = read(text);
      const cell = crystal.cell!;
      const [a, b, c] = cell.lengths.map(({ value }) => value) as [number, number, number];
      if (cell.angles[2].value !== 90) return [];
      const places: number[][] = [];
      for (let i = 0; i < molecule.atomCount; i++) {
        const r = molecule.coordinates!;
        places.push([r[3 * i]! / a, r[3 * i + 1]! / b, r[3 * i + 2]! / c]);
      }
      const list: number[] = [];
      for (const operator of crystal.operators) {
        for (const p of places) {
          const q = applyOperator(operator, p as [number, number, number]);
          for (const o of places) {
            const d = [0, 1, 2].map(k => q[k]! - o[k]! - Math.round(q[k]! - o[k]!));
            list.push(Math.hypot(d[0]! * a, d[1]! * b, d[2]! * c));
          }
        }
      }
      return list.map(value => value.toFixed(3)).sort();
    };
    expect(contacts(after)).toEqual(contacts(before));
  });

  it('has its torsions turned and what held for the old model taken out', () => {
    expect(only(after).all('_geom_torsion')).toEqual(['65.2(4)', '-56.1(5)']);
    for (const gone of [
      '_refine_ls_abs_structure_flack',
      '_refine_ls_r_factor_gt',
      '_shelx_res_checksum',
      '_shelx_res_file',
      '_chemical_name_systematic',
    ]) {
      expect(only(after).has(gone), gone).toBe(false);
    }
    expect(only(after).get('_cell_length_a')).toBe(only(before).get('_cell_length_a'));
    expect(notes.join('\n')).toMatch(/refine the inverted model again/u);
  });

  it('comes back to the last digit when mirrored twice', () => {
    const twice = only(mirrorCif(after).text);
    for (const axis of ['x', 'y', 'z']) {
      expect(twice.all(`_atom_site_fract_${axis}`)).toEqual(only(before).all(`_atom_site_fract_${axis}`));
    }
    expect(twice.all('_geom_torsion')).toEqual(only(before).all('_geom_torsion'));
    expect(twice.get('_space_group_name_h-m_alt')).toBe(options.symbol);
  });
});

describe('symmetry codes', () => {
  it('name the inverted image in every group', () => {
    const point: [number, number, number] = [0.137, 0.281, 0.413];
    fc.assert(
      fc.property(
        fc.constantFrom(...STANDARD_SETTINGS),
        fc.nat(),
        fc.array(fc.integer({ min: 4, max: 6 }), { minLength: 3, maxLength: 3 }),
        (setting, pick, cells) => {
          const operators = operatorsFromHall(setting.hall)!;
          const inversion = findInversion(operators);
          const n = pick % operators.length;
          const code = `${n + 1}_${cells.join('')}`;
          const next = invertedCode(code, operators, inversion);
          expect(next).not.toBeNull();
          const [row = '1', digits = '555'] = next!.split('_');
          const shift = inversion.shift;
          const mirror = (x: readonly number[]): [number, number, number] => [
            shift[0] - x[0]!,
            shift[1] - x[1]!,
            shift[2] - x[2]!,
          ];
          const old = applyOperator(operators[n]!, point).map((x, k) => x + cells[k]! - 5);
          const made = applyOperator(inversion.operators[Number(row) - 1]!, mirror(point)).map(
            (x, k) => x + Number(digits[k]) - 5,
          );
          made.forEach((x, k) => expect(x).toBeCloseTo(mirror(old)[k]!, 6));
        },
      ),
      { numRuns: 60 },
    );
  });

  it('are rewritten in the geometry tables and come back', () => {
    const extra = `loop_
_geom_hbond_atom_site_label_D
_geom_hbond_atom_site_label_H
_geom_hbond_atom_site_label_A
_geom_hbond_site_symmetry_A
O1 H3 F1 3_656
O1 H3 F1 2
O1 H3 F1 .
O1 H3 F1 99_555`;
    const before = inventedCif({ ...CASES[0]!, extra });
    const after = mirrorCif(before);
    const codes = only(after.text).all('_geom_hbond_site_symmetry_a');
    expect(codes?.[2]).toBeNull();
    expect(codes?.[3]).toBeNull();
    expect(after.notes.join('\n')).toMatch(/1 symmetry codes? could not/u);
    expect(only(mirrorCif(after.text).text).all('_geom_hbond_site_symmetry_a')?.[0]).toBe('3_656');
  });

  it('satisfy the conjugation from which they are worked out', () => {
    const operators = operatorsFromHall('I 4bw')!;
    const { shift } = findInversion(operators);
    for (const operator of operators) {
      const inverted = invertedOperator(operator, shift);
      const partner = operators.some(
        each =>
          each.rotation.join() === inverted.rotation.join() &&
          isIntegral(minus(each.translation, inverted.translation)),
      );
      expect(partner).toBe(true);
    }
  });
});

describe('figures', () => {
  it('are mirrored digit for digit', () => {
    expect(mirroredFigure('0.34443(14)', 0)).toBe('-0.34443(14)');
    expect(mirroredFigure('0.34443(14)', 0.25)).toBe('-0.09443(14)');
    expect(mirroredFigure('-.0970', 0)).toBe('.0970');
    expect(mirroredFigure('.57(2)', 0.5)).toBe('-.07(2)');
    expect(mirroredFigure('0.5', 0.25)).toBe('-0.25');
    expect(mirroredFigure('0.3(1)', 0.25)).toBe('-0.05(10)');
    expect(mirroredFigure('0.0000', 0)).toBe('0.0000');
    expect(mirroredFigure('1', 0)).toBe('-1');
    expect(mirroredFigure('?', 0)).toBeNull();
    expect(mirroredFigure('1.2e3', 0)).toBeNull();
  });

  it('come back from a second mirror', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -99_999_999, max: 99_999_999 }),
        fc.integer({ min: 3, max: 6 }),
        fc.constantFrom(0, 0.25, 0.5, 0.75, 0.125),
        (digits, places, shift) => {
          const text = (digits / 10 ** places).toFixed(places);
          if (Number(text) === 0) return;
          const once = mirroredFigure(text, shift);
          expect(Number(once)).toBeCloseTo(shift - Number(text), places);
          const twice = mirroredFigure(once!, shift);
          expect(twice!.replace(/^-(?=[0.]*$)/u, '')).toBe(text);
        },
      ),
    );
  });
});

describe('plain models', () => {
  it('PDB: columns stay, coordinates change sign, twice gives the file', () => {
    const text = [
      'CRYST1   50.000   50.000   80.000  90.00  90.00  90.00 P 41 21 2     8',
      'ATOM      1  N   ALA A   1      11.104  -6.134   0.000  1.00 10.00           N  ',
      'ATOM      2  CA  ALA A   1     -11.639   6.071 -15.147  1.00 10.00           C  ',
      'END',
      '',
    ].join('\r\n');
    const once = mirrorPdb(text);
    expect(once.text).toContain('P 43 21 2  ');
    expect(once.text).toContain(' -11.104   6.134   0.000  1.00');
    expect(once.text).toHaveLength(text.length);
    expect(mirrorPdb(once.text).text).toBe(text);
    expect(once.notes[0]).toMatch(/L residues are now D/u);
    expect(() => mirrorPdb('ATOM      1  N   ALA A   1      11.104  -6.1x4   0.000\n')).toThrow(/-6\.1x4/u);
    expect(() => mirrorPdb('ATOM      1  N   ALA A   1    1111.104  -6.114   0.000\n')).toThrow(
      /does not fit/u,
    );
  });

  it('SDF: a model by its coordinates, a drawing by its wedges', () => {
    const molfile = (z: string, mark: number): string =>
      [
        'invented',
        '',
        '',
        '  2  1  0  0  1  0            999 V2000',
        `    0.1000    0.2000${z} C   0  0  1  0  0  0  0  0  0  0  0  0`,
        `    1.0000   -0.2000${z} N   0  0  0  0  0  0  0  0  0  0  0  0`,
        `  1  2  1  ${mark}  0  0  0`,
        'M  END',
        '$$$$',
        '',
      ].join('\n');
    const model = molfile('    0.3000', 0);
    const mirrored = mirrorSdf(model).text;
    expect(mirrored).toContain('   -0.1000   -0.2000   -0.3000 C   0  0  2');
    expect(mirrorSdf(mirrored).text).toBe(model);
    const drawing = molfile('    0.0000', 1);
    expect(mirrorSdf(drawing).text).toContain('  1  2  1  6');
    expect(mirrorSdf(drawing).text).toContain('    0.1000    0.2000    0.0000 C');
    expect(mirrorSdf(mirrorSdf(drawing).text).text).toBe(drawing);
  });

  it('XYZ: every frame, twice gives the file', () => {
    const text = '2\nfirst\nC 0.1 -0.2 0.3\nN 1.0 2.0 -3.0 extra\n1\nsecond\nO 0.5 0.25 0.125\n';
    const once = mirrorXyz(text).text;
    expect(once).toContain('C -0.1 0.2 -0.3\nN -1.0 -2.0 3.0 extra');
    expect(mirrorXyz(once).text).toBe(text);
    expect(() => mirrorXyz('2\n\nC 0 0 0\n')).toThrow(/2 atoms are announced/u);
  });
});
