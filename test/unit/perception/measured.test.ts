/** How units are measured: in space, in a drawing, and where there is too little to decide from. */
import { describe, expect, it } from 'vitest';
import {
  type AtomInput,
  BondMark,
  type BondOrder,
  buildMolecule,
  type Molecule,
} from '../../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';

type Bond = readonly [number, number, BondOrder, BondMark?];

const CARBON = 6;
const ELEMENTS: Readonly<Record<string, number>> = {
  H: 1,
  C: 6,
  N: 7,
  O: 8,
  F: 9,
  P: 15,
  S: 16,
  Cl: 17,
  Br: 35,
};

/** "C 0 0 0" and the like, hydrogens left out given as "C2 …" for two. */
function atoms(lines: readonly string[]): AtomInput[] {
  return lines.map(line => {
    const [symbol, x, y, z] = line.split(' ') as [string, string, string, string?];
    const [, name, hydrogens] = /^([A-Z][a-z]?)(\d?)$/u.exec(symbol)!;
    return {
      element: ELEMENTS[name!] ?? CARBON,
      hydrogens: hydrogens === '' ? 0 : Number(hydrogens),
      x: Number(x),
      y: Number(y),
      ...(z === undefined ? {} : { z: Number(z) }),
    };
  });
}

const model = (lines: readonly string[], bonds: readonly Bond[], dimension: 2 | 3 = 3): Molecule =>
  buildMolecule({ atoms: atoms(lines), bonds, dimension });

const units = (molecule: Molecule): readonly LabelledUnit[] => examine(molecule).units;
const only = (molecule: Molecule): LabelledUnit => {
  const all = units(molecule);
  expect(all).toHaveLength(1);
  return all[0]!;
};

const STAR: readonly Bond[] = [
  [0, 1, 1],
  [0, 2, 1],
  [0, 3, 1],
  [0, 4, 1],
];

describe('a centre in space', () => {
  const heavy = ['F 1.3 0 -0.5', 'Cl -0.8 1.5 -0.6', 'Br -0.9 -1.6 -0.6'];

  it('with an explicit hydrogen, and with it left out, is the same', () => {
    const explicit = only(model(['C 0 0 0', ...heavy, 'H 0 0 1.09'], STAR));
    const implicit = only(model(['C1 0 0 0', ...heavy], STAR.slice(0, 3)));
    // From H (above), F Cl Br run anticlockwise, so Br Cl F clockwise; from below anticlockwise: S.
    expect([explicit.descriptor, implicit.descriptor]).toEqual(['S', 'S']);
    expect(implicit.signedVolume).toBeCloseTo(explicit.signedVolume!, 10);
    expect(implicit.unit.firmness).toBe(explicit.unit.firmness);
    expect(explicit.signedVolume).toBeGreaterThan(0);
  });

  it('a hydrogen on the side of the other three: flat, with a warning, no letter', () => {
    const wrong = only(model(['C 0 0 0', ...heavy, 'H 0 0 -1.09'], STAR));
    expect([wrong.unit.state, wrong.descriptor]).toEqual(['flat', null]);
    expect(wrong.unit.warnings.join()).toMatch(/hydrogen lies on the side/u);
  });

  it('flat geometry has no letter', () => {
    const flat = only(
      model(['C1 0 0 0', 'F 1.3 0 0', 'Cl -0.8 1.5 0.02', 'Br -0.9 -1.6 -0.02'], STAR.slice(0, 3)),
    );
    expect([flat.unit.state, flat.descriptor]).toEqual(['flat', null]);
    expect(flat.unit.firmness).toBeLessThan(0.2);
  });

  it('fewer than three located neighbours: unspecified', () => {
    const missing = only(
      model(['C1 0 0 0', 'F 1.3 0 -0.5', 'Cl NaN NaN NaN', 'Br -0.9 -1.6 -0.6'], STAR.slice(0, 3)),
    );
    expect([missing.unit.state, missing.descriptor, missing.signedVolume]).toEqual([
      'unspecified',
      null,
      null,
    ]);
    const unplaced = only(model(['C1 NaN 0 0', ...heavy], STAR.slice(0, 3)));
    expect(unplaced.unit.state).toBe('unspecified');
  });

  it('one of four heavy neighbours not located: the other three decide, as if it were the fourth', () => {
    const four = ['F 1.3 0 -0.5', 'Cl -0.8 1.5 -0.6', 'Br -0.9 -1.6 -0.6', 'C3 0 0 1.5'];
    const whole = only(model(['C 0 0 0', ...four], STAR));
    const part = only(model(['C 0 0 0', ...four.slice(0, 3), 'C3 NaN NaN NaN'], STAR));
    expect(part.descriptor).toBe(whole.descriptor);
    const withoutBromine = only(model(['C 0 0 0', four[0]!, four[1]!, 'Br NaN NaN NaN', four[3]!], STAR));
    expect(withoutBromine.descriptor).toBe(whole.descriptor);
  });

  it('a sulfoxide: the lone pair is the fourth', () => {
    // S at the origin, lone pair up; O, ethyl, methyl anticlockwise from above, clockwise from below: R.
    const bonds: Bond[] = [
      [0, 1, 2],
      [0, 2, 1],
      [0, 3, 1],
      [2, 4, 1],
    ];
    const lines = ['S 0 0 0', 'O 1.3 0 -0.6', 'C2 -0.8 1.5 -0.6', 'C3 -0.8 -1.5 -0.6', 'C3 -2 2.4 0'];
    expect(only(model(lines, bonds)).descriptor).toBe('R');
  });
});

describe('a double bond in space', () => {
  const bonds: Bond[] = [
    [0, 1, 2],
    [0, 2, 1],
    [1, 3, 1],
  ];
  const at = (degrees: number): Molecule => {
    const t = (degrees * Math.PI) / 180;
    return model(
      ['C1 0 0 0', 'C1 0 0 1.34', 'F 0 1.2 -0.6', `Cl ${-1.5 * Math.sin(t)} ${1.5 * Math.cos(t)} 1.9`],
      bonds,
    );
  };

  it.each([
    [0, 'Z'],
    [15, 'Z'],
    [-60, 'Z'],
    [180, 'E'],
    [-150, 'E'],
    [120, 'E'],
  ])('torsion %d°: %s', (degrees, letter) => {
    const unit = only(at(degrees));
    expect(unit.descriptor).toBe(letter);
    expect(unit.torsion).toBeCloseTo(degrees, 6);
    expect(unit.unit.firmness).toBeCloseTo(Math.abs(Math.cos((degrees * Math.PI) / 180)), 6);
    expect(unit.torsionAtoms).toEqual([2, 0, 1, 3]);
  });

  it.each([85, 90, -95])('torsion %d°: flat, no letter', degrees => {
    const unit = only(at(degrees));
    expect([unit.unit.state, unit.descriptor]).toEqual(['flat', null]);
  });

  it('a ligand that is not located: unspecified', () => {
    const unit = only(model(['C1 0 0 0', 'C1 0 0 1.34', 'F 0 1.2 -0.6', 'Cl NaN NaN NaN'], bonds));
    expect([unit.unit.state, unit.descriptor]).toEqual(['unspecified', null]);
  });

  it('only hydrogens are located at one end: the other ligand is opposite', () => {
    const lines = ['C 0 0 0', 'C 0 0 1.34', 'F NaN NaN NaN', 'H 0 -0.9 -0.5', 'Cl 0 1.5 1.9', 'H 0 -0.9 1.9'];
    const all: Bond[] = [
      [0, 1, 2],
      [0, 2, 1],
      [0, 3, 1],
      [1, 4, 1],
      [1, 5, 1],
    ];
    expect(only(model(lines, all)).descriptor).toBe('Z');
  });
});

describe('an allene and an axis in space', () => {
  it('P when the rear group of the higher rank lies clockwise of the front one', () => {
    const bonds: Bond[] = [
      [0, 1, 2],
      [1, 2, 2],
      [0, 3, 1],
      [2, 4, 1],
    ];
    // Front group up; looking along +z with y up, x points to the left: -x is clockwise.
    const allene = (x: number): Molecule =>
      model(['C1 0 0 0', 'C 0 0 1.31', 'C1 0 0 2.62', 'Cl 0 1.5 -0.9', `Cl ${x} 0 3.5`], bonds);
    expect(only(allene(-1.5)).descriptor).toBe('P');
    expect(only(allene(1.5)).descriptor).toBe('M');
    expect(only(allene(-1.5)).torsion).toBeCloseTo(90, 6);
  });
});

describe('a drawing', () => {
  const star = (
    marks: readonly BondMark[],
    order: readonly string[] = ['F 0 1', 'Cl -0.87 -0.5', 'Br 0.87 -0.5'],
  ): Molecule =>
    model(
      ['C1 0 0', ...order],
      marks.map((mark, i) => [0, i + 1, 1, mark] as const),
      2,
    );

  it('a wedge raises its ligand, a hash lowers it', () => {
    // Cl lower left, Br lower right, F up: Br → Cl → F runs clockwise; F towards the reader, so H away: R.
    expect(only(star([BondMark.wedge, 0, 0])).descriptor).toBe('R');
    expect(only(star([BondMark.hash, 0, 0])).descriptor).toBe('S');
    expect(only(star([0, BondMark.wedge, 0])).descriptor).toBe('R');
    expect(only(star([0, 0, BondMark.wedge])).descriptor).toBe('R');
    expect(only(star([BondMark.wedge, BondMark.wedge, BondMark.wedge])).descriptor).toBe('R');
  });

  it('no mark, a wavy bond, or the narrow end elsewhere: unspecified', () => {
    for (const marks of [
      [0, 0, 0],
      [BondMark.wavy, 0, 0],
      [BondMark.wavy, BondMark.wedge, 0],
    ] as const) {
      const unit = only(star(marks));
      expect([unit.unit.state, unit.descriptor]).toEqual(['unspecified', null]);
      expect(unit.unit.basis).toBe('drawing');
    }
    const reversed = model(
      ['C1 0 0', 'F 0 1', 'Cl -0.87 -0.5', 'Br 0.87 -0.5'],
      [
        [1, 0, 1, BondMark.wedge],
        [0, 2, 1],
        [0, 3, 1],
      ],
      2,
    );
    expect(only(reversed).descriptor).toBeNull();
  });

  it('four neighbours, two of them marked', () => {
    const four = model(
      ['C 0 0', 'F -1 0', 'Cl 0.5 0.87', 'Br 0.6 -0.8', 'H 0.9 -0.2'],
      [
        [0, 1, 1],
        [0, 2, 1],
        [0, 3, 1, BondMark.wedge],
        [0, 4, 1, BondMark.hash],
      ],
      2,
    );
    // H away: Br at 4 to 5 o'clock, Cl at 1, F at 9: Br → Cl → F anticlockwise: S.
    expect(only(four).descriptor).toBe('S');
  });

  it('opposite wedges that cancel are ambiguous, with a warning', () => {
    // A planar cross with one wedge and one hash side by side decides; two wedges opposite each other too; wedge against hash at 180° does not.
    const cross = model(
      ['C 0 0', 'F 0 1', 'Cl 0 -1', 'Br 1 0', 'H -1 0'],
      [
        [0, 1, 1, BondMark.wedge],
        [0, 2, 1, BondMark.hash],
        [0, 3, 1],
        [0, 4, 1],
      ],
      2,
    );
    const unit = only(cross);
    expect([unit.unit.state, unit.descriptor]).toEqual(['unspecified', null]);
    expect(unit.unit.warnings.join()).toMatch(/either way/u);
  });

  it('a double bond goes by its geometry; crossed, or with a wavy bond at an end, it is unspecified', () => {
    const bond = (mark: BondMark, ligand: BondMark, y = 1): Molecule =>
      model(
        ['C1 0 0', 'C1 1.3 0', 'F -0.7 1', `Cl 2 ${y}`],
        [
          [0, 1, 2, mark],
          [0, 2, 1, ligand],
          [1, 3, 1],
        ],
        2,
      );
    expect(only(bond(0, 0)).descriptor).toBe('Z');
    expect(only(bond(0, 0, -1)).descriptor).toBe('E');
    expect(only(bond(BondMark.crossed, 0)).descriptor).toBeNull();
    expect(only(bond(0, BondMark.wavy)).descriptor).toBeNull();
    const inLine = only(
      model(
        ['C1 0 0', 'C1 1.3 0', 'F -1 0', 'Cl 2 1'],
        [
          [0, 1, 2],
          [0, 2, 1],
          [1, 3, 1],
        ],
        2,
      ),
    );
    expect(inLine.descriptor).toBeNull();
    expect(inLine.unit.warnings.join()).toMatch(/in line/u);
  });

  it('an allene with a wedge at one end', () => {
    const allene = (mark: BondMark): Molecule =>
      model(
        ['C1 0 0', 'C 1.3 0', 'C1 2.6 0', 'Cl -0.7 1', 'F 3.3 1'],
        [
          [0, 1, 2],
          [1, 2, 2],
          [0, 3, 1],
          [2, 4, 1, mark],
        ],
        2,
      );
    const one = only(allene(BondMark.wedge)).descriptor;
    const other = only(allene(BondMark.hash)).descriptor;
    // From the left end: Cl up (y), F towards the reader; looking along +x with y up, the reader's side is to the right: clockwise, P.
    expect([one, other]).toEqual(['P', 'M']);
    expect(only(allene(BondMark.none)).descriptor).toBeNull();
  });
});
