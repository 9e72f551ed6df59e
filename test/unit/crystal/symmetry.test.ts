/** Operators, Hall symbols and the table of space groups against International Tables A. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { operatorsFromHall } from '../../../core/crystal/hall.ts';
import { findInversion } from '../../../core/crystal/inversion.ts';
import {
  compose,
  formatOperator,
  isCentrosymmetric,
  isClosed,
  isSohncke,
  operatorKey,
  parseOperator,
  type SymmetryOperator,
} from '../../../core/crystal/operator.ts';
import {
  ENANTIOMORPHIC_PAIRS,
  enantiomorphOf,
  settingNamed,
  STANDARD_SETTINGS,
} from '../../../core/crystal/space-groups.ts';

const groups = STANDARD_SETTINGS.map(setting => {
  const operators = operatorsFromHall(setting.hall);
  if (!operators) throw new Error(`${setting.hall} cannot be read`);
  return { ...setting, operators };
});

/** International Tables A (2016), table 2.1.2.1: the Sohncke groups by number. */
const SOHNCKE = [
  1, 3, 4, 5, 16, 17, 18, 19, 20, 21, 22, 23, 24, 75, 76, 77, 78, 79, 80, 89, 90, 91, 92, 93, 94, 95, 96, 97,
  98, 143, 144, 145, 146, 149, 150, 151, 152, 153, 154, 155, 168, 169, 170, 171, 172, 173, 177, 178, 179, 180,
  181, 182, 195, 196, 197, 198, 199, 207, 208, 209, 210, 211, 212, 213, 214,
];

describe('space groups', () => {
  it('are 230 closed sets of operators, no two alike', () => {
    expect(groups).toHaveLength(230);
    expect(groups.every(({ operators }) => isClosed(operators))).toBe(true);
    const keys = groups.map(({ operators }) => operators.map(operatorKey).sort().join('|'));
    expect(new Set(keys).size).toBe(230);
  });

  it('are Sohncke groups 65 times, told by the operators (International Tables A)', () => {
    expect(SOHNCKE).toHaveLength(65);
    expect(groups.filter(({ operators }) => isSohncke(operators)).map(({ number }) => number)).toEqual(
      SOHNCKE,
    );
  });

  it('are centrosymmetric 92 times (International Tables A)', () => {
    expect(groups.filter(({ operators }) => isCentrosymmetric(operators))).toHaveLength(92);
  });

  it('have general multiplicities of International Tables A', () => {
    // Numbers of the general position, International Tables A.
    const known: readonly (readonly [number, number])[] = [
      [1, 1],
      [4, 2],
      [14, 4],
      [19, 4],
      [43, 16],
      [80, 8],
      [146, 9],
      [166, 36],
      [198, 12],
      [213, 24],
      [214, 48],
      [225, 192],
      [227, 192],
      [230, 96],
    ];
    for (const [number, order] of known) expect(groups[number - 1]?.operators).toHaveLength(order);
  });

  it('change into their enantiomorph under inversion in exactly the eleven pairs (International Tables A)', () => {
    const changing = groups
      .filter(({ operators }) => findInversion(operators).changesGroup)
      .map(({ number }) => number);
    expect(changing).toEqual(ENANTIOMORPHIC_PAIRS.flat().sort((a, b) => a - b));
    for (const { number, operators } of groups) {
      const { changesGroup, operators: after } = findInversion(operators);
      const other = groups[enantiomorphOf(number) - 1];
      const keys = (list: readonly SymmetryOperator[]): string[] => list.map(operatorKey).sort();
      if (changesGroup) expect(keys(after), String(number)).toEqual(keys(other?.operators ?? []));
    }
  });

  it('invert about a point other than the origin in seven groups, each confirmed by conjugation', () => {
    const moved = groups.flatMap(({ number, operators }) => {
      const { shift } = findInversion(operators);
      return shift.some(value => value !== 0) ? [[number, shift] as const] : [];
    });
    // The groups whose standard origin is no such point: worked out here from the operators; the same list as in
    // G. Bernardinelli & H. D. Flack, Acta Cryst. 1985, A41, 500 (from memory).
    expect(moved.map(([number]) => number)).toEqual([43, 80, 98, 109, 110, 122, 210]);
  });

  it('are found by name in the spellings of files', () => {
    const numbers = [
      'P212121',
      'P 21 21 21',
      'P 1 21/c 1',
      'P21/n',
      'C2/c',
      'Pna21',
      'F d d 2',
      'R -3 c :H',
      'P 41 21 2',
    ];
    expect(numbers.map(name => settingNamed(name)?.number)).toEqual([19, 19, 14, 14, 15, 33, 43, 167, 92]);
    expect(settingNamed('P 7')).toBeNull();
  });
});

describe('operator triplets', () => {
  it('are read as files write them', () => {
    const read = (text: string): string | null => {
      const operator = parseOperator(text);
      return operator && formatOperator(operator);
    };
    expect(read('+X,+Y,+Z')).toBe('x, y, z');
    expect(read('-X,1/2+Y,-Z')).toBe('-x, y+1/2, -z');
    expect(read('x-y, x, z+1/6')).toBe('x-y, x, z+1/6');
    expect(read('0.3333+x,2/3+y,z')).toBe('x+1/3, y+2/3, z');
    expect(read('-x+y,-x,z-1/3')).toBe('-x+y, -x, z-1/3');
    for (const bad of ['x,y', 'x,y,w', 'x,y,', 'x+,y,z', '2x,y,z', 'x,x,z', 'x,y,z,t', ''])
      expect(read(bad), bad).toBeNull();
  });

  it('come back from their own text, and compose within the group', () => {
    const anyGroup = fc.constantFrom(...groups);
    fc.assert(
      fc.property(anyGroup, fc.nat(), fc.nat(), ({ operators }, i, j) => {
        const a = operators[i % operators.length]!;
        const b = operators[j % operators.length]!;
        const back = parseOperator(formatOperator(a));
        expect(back && operatorKey(back)).toBe(operatorKey(a));
        expect(operators.map(operatorKey)).toContain(operatorKey(compose(a, b)));
      }),
    );
  });
});
