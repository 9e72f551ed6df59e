/**
 * Operators of a space group from its Hall symbol (S. R. Hall, Acta Cryst. 1981, A37, 517; International Tables B, 2010,
 * appendix 1.4.2).
 */
import type { Matrix, Vector } from './cell.ts';
import { compose, generateGroup, multiplyRotations, type SymmetryOperator } from './operator.ts';

const LATTICES: Readonly<Record<string, readonly Vector[]>> = {
  P: [],
  A: [[0, 1 / 2, 1 / 2]],
  B: [[1 / 2, 0, 1 / 2]],
  C: [[1 / 2, 1 / 2, 0]],
  I: [[1 / 2, 1 / 2, 1 / 2]],
  R: [
    [2 / 3, 1 / 3, 1 / 3],
    [1 / 3, 2 / 3, 2 / 3],
  ],
  F: [
    [0, 1 / 2, 1 / 2],
    [1 / 2, 0, 1 / 2],
    [1 / 2, 1 / 2, 0],
  ],
};

const TRANSLATIONS: Readonly<Record<string, Vector>> = {
  a: [1 / 2, 0, 0],
  b: [0, 1 / 2, 0],
  c: [0, 0, 1 / 2],
  n: [1 / 2, 1 / 2, 1 / 2],
  u: [1 / 4, 0, 0],
  v: [0, 1 / 4, 0],
  w: [0, 0, 1 / 4],
  d: [1 / 4, 1 / 4, 1 / 4],
};

const UNIT: Matrix = [1, 0, 0, 0, 1, 0, 0, 0, 1];

/** Rotations about z. */
const ABOUT_Z: Readonly<Record<string, Matrix>> = {
  1: UNIT,
  2: [-1, 0, 0, 0, -1, 0, 0, 0, 1],
  3: [0, -1, 0, 1, -1, 0, 0, 0, 1],
  4: [0, -1, 0, 1, 0, 0, 0, 0, 1],
  6: [1, -1, 0, 1, 0, 0, 0, 0, 1],
};
/** Twofold axes along a − b and a + b, and the threefold one along a + b + c. */
const DIAGONAL_MINUS: Matrix = [0, -1, 0, -1, 0, 0, 0, 0, -1];
const DIAGONAL_PLUS: Matrix = [0, 1, 0, 1, 0, 0, 0, 0, -1];
const BODY_DIAGONAL: Matrix = [0, 0, 1, 1, 0, 0, 0, 1, 0];

/** The same rotation with the axes x, y, z taken cyclically, so that z becomes `axis`. */
function turned(m: Matrix, axis: 'x' | 'y' | 'z'): Matrix {
  if (axis === 'z') return m;
  const cyclic = BODY_DIAGONAL;
  const back: Matrix = [0, 1, 0, 0, 0, 1, 1, 0, 0];
  const once = multiplyRotations(multiplyRotations(cyclic, m), back);
  return axis === 'x' ? once : multiplyRotations(multiplyRotations(cyclic, once), back);
}

/** Operators of a Hall symbol; null where it cannot be read. */
export function operatorsFromHall(symbol: string): SymmetryOperator[] | null {
  const clean = symbol.trim().replace(/_/gu, ' ');
  const shiftMatch = /\(\s*(-?\d+)\s+(-?\d+)\s+(-?\d+)\s*\)\s*$/u.exec(clean);
  const words = (shiftMatch ? clean.slice(0, shiftMatch.index) : clean).trim().split(/\s+/u);
  const lattice = /^(-?)([PABCIRF])$/iu.exec(words[0] ?? '');
  if (!lattice) return null;
  const generators: SymmetryOperator[] = LATTICES[lattice[2]!.toUpperCase()]!.map(translation => ({
    rotation: UNIT,
    translation,
  }));
  if (lattice[1] === '-')
    generators.push({ rotation: UNIT.map(value => -value || 0), translation: [0, 0, 0] });
  let before = 0;
  let beforeAxis: 'x' | 'y' | 'z' = 'z';
  for (let position = 1; position < words.length; position++) {
    const match = /^(-?)([12346])([1-5]?)([xyz'"*=]?)([abcnuvwd]*)$/u.exec(words[position]!);
    if (!match) return null;
    const [, improper, order, screw, mark, letters] = match as unknown as [
      string,
      string,
      string,
      string,
      string,
      string,
    ];
    const fold = Number(order);
    let rotation: Matrix;
    let axis: 'x' | 'y' | 'z' = 'z';
    if (mark === '*' || (mark === '' && position === 3 && fold === 3)) rotation = BODY_DIAGONAL;
    else if (mark === "'" || mark === '"') {
      rotation = turned(mark === "'" ? DIAGONAL_MINUS : DIAGONAL_PLUS, beforeAxis);
    } else if (mark === 'x' || mark === 'y' || mark === 'z') {
      axis = mark;
      rotation = turned(ABOUT_Z[order]!, axis);
    } else if (position === 2 && fold === 2 && (before === 2 || before === 4)) {
      axis = 'x';
      rotation = turned(ABOUT_Z[order]!, 'x');
    } else if (position === 2 && fold === 2 && (before === 3 || before === 6)) rotation = DIAGONAL_MINUS;
    else rotation = ABOUT_Z[order]!;
    const translation: [number, number, number] = [0, 0, 0];
    for (const letter of letters) TRANSLATIONS[letter]!.forEach((value, k) => (translation[k]! += value));
    if (screw !== '') translation['xyz'.indexOf(axis)]! += Number(screw) / fold;
    generators.push({
      rotation: improper === '-' ? rotation.map(value => -value || 0) : rotation,
      translation,
    });
    before = fold;
    if (position === 1) beforeAxis = axis;
  }
  if (!shiftMatch) return generateGroup(generators);
  const shift = [1, 2, 3].map(k => Number(shiftMatch[k]) / 12) as [number, number, number];
  const forward: SymmetryOperator = { rotation: UNIT, translation: shift };
  const backward: SymmetryOperator = {
    rotation: UNIT,
    translation: shift.map(value => -value) as [number, number, number],
  };
  return generateGroup(generators.map(each => compose(compose(forward, each), backward)));
}
