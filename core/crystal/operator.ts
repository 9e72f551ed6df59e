/** Symmetry operators x' = W x + w: reading and writing their triplets, combining them, what a set of them says of handedness. */
import type { Matrix, Vector } from './cell.ts';

export interface SymmetryOperator {
  /** Nine integers, row by row. */
  readonly rotation: Matrix;
  /** In fractions of the cell. */
  readonly translation: Vector;
}

export const IDENTITY: SymmetryOperator = {
  rotation: [1, 0, 0, 0, 1, 0, 0, 0, 1],
  translation: [0, 0, 0],
};

/** Translations of space groups are multiples of 1/24; decimals are rounded to these. */
const DENOMINATOR = 24;
/** Two translations differ when they differ by more than this fraction of the cell. */
const TOLERANCE = 1e-3;

function snapped(value: number): number {
  const nearest = Math.round(value * DENOMINATOR) / DENOMINATOR;
  return Math.abs(nearest - value) < 2e-3 ? nearest : value;
}

/** Reads a triplet such as `-x, y+1/2, -z+1/2`; null where the text is none. */
export function parseOperator(text: string): SymmetryOperator | null {
  const parts = text
    .trim()
    .replace(/^['"]|['"]$/gu, '')
    .toLowerCase()
    .split(',');
  if (parts.length !== 3) return null;
  const rotation: number[] = [];
  const translation: number[] = [];
  for (const part of parts) {
    const row = [0, 0, 0];
    let shift = 0;
    const compact = part.replace(/\s+/gu, '');
    const terms = /([+-]?)(?:(\d+(?:\.\d*)?|\.\d+)(?:\/(\d+))?\*?)?([xyz])?/gu;
    let at = 0;
    while (at < compact.length) {
      terms.lastIndex = at;
      const match = terms.exec(compact);
      if (!match || match.index !== at || match[0].length === 0) return null;
      const [whole, sign, number, divisor, axis] = match;
      if (number === undefined && axis === undefined) return null;
      if (at > 0 && sign === '') return null;
      const value =
        (sign === '-' ? -1 : 1) * (number === undefined ? 1 : Number(number) / Number(divisor ?? 1));
      if (!Number.isFinite(value)) return null;
      if (axis === undefined) shift += value;
      else row['xyz'.indexOf(axis)]! += value;
      at += whole.length;
    }
    if (!row.every(value => Number.isInteger(value))) return null;
    rotation.push(...row);
    translation.push(snapped(shift));
  }
  if (Math.abs(determinant(rotation)) !== 1) return null;
  return { rotation, translation: translation as [number, number, number] };
}

function fraction(value: number): string {
  for (const divisor of [1, 2, 3, 4, 6, 8, 12, 24]) {
    const top = value * divisor;
    if (Math.abs(top - Math.round(top)) < 1e-6) {
      return divisor === 1 ? String(Math.round(top)) : `${Math.round(top)}/${divisor}`;
    }
  }
  return String(Number(value.toFixed(6)));
}

/** Writes a triplet: `-x, y+1/2, -z+1/2`. */
export function formatOperator(operator: SymmetryOperator): string {
  const rows: string[] = [];
  for (let i = 0; i < 3; i++) {
    let text = '';
    for (let j = 0; j < 3; j++) {
      const factor = operator.rotation[3 * i + j]!;
      if (factor === 0) continue;
      const size = Math.abs(factor) === 1 ? '' : String(Math.abs(factor));
      text += `${factor < 0 ? '-' : text === '' ? '' : '+'}${size}${'xyz'[j]}`;
    }
    const shift = operator.translation[i]!;
    if (Math.abs(shift) > 1e-9) text += `${shift < 0 ? '-' : '+'}${fraction(Math.abs(shift))}`;
    rows.push(text);
  }
  return rows.join(', ');
}

export function determinant(m: Matrix): number {
  return (
    m[0]! * (m[4]! * m[8]! - m[5]! * m[7]!) -
    m[1]! * (m[3]! * m[8]! - m[5]! * m[6]!) +
    m[2]! * (m[3]! * m[7]! - m[4]! * m[6]!)
  );
}

export function applyOperator(
  { rotation: w, translation: t }: SymmetryOperator,
  x: Vector,
): [number, number, number] {
  return [
    w[0]! * x[0] + w[1]! * x[1] + w[2]! * x[2] + t[0],
    w[3]! * x[0] + w[4]! * x[1] + w[5]! * x[2] + t[1],
    w[6]! * x[0] + w[7]! * x[1] + w[8]! * x[2] + t[2],
  ];
}

export function multiplyRotations(a: Matrix, b: Matrix): number[] {
  const product: number[] = [];
  for (let i = 0; i < 3; i++) {
    for (let j = 0; j < 3; j++) {
      product.push(a[3 * i]! * b[j]! + a[3 * i + 1]! * b[3 + j]! + a[3 * i + 2]! * b[6 + j]!);
    }
  }
  return product;
}

/** First `second`, then `first`. */
export function compose(first: SymmetryOperator, second: SymmetryOperator): SymmetryOperator {
  return {
    rotation: multiplyRotations(first.rotation, second.rotation),
    translation: applyOperator(first, second.translation),
  };
}

/** Value in [0, 1), numbers within the tolerance of 1 taken as 0. */
export function fractionalPart(value: number): number {
  const part = value - Math.floor(value);
  return part > 1 - TOLERANCE ? 0 : part;
}

/** The operator with its translation brought into [0, 1). */
export function normalised(operator: SymmetryOperator): SymmetryOperator {
  return {
    rotation: operator.rotation,
    translation: operator.translation.map(value => fractionalPart(snapped(value))) as [
      number,
      number,
      number,
    ],
  };
}

export function sameRotation(a: SymmetryOperator, b: SymmetryOperator): boolean {
  return a.rotation.every((value, k) => value === b.rotation[k]);
}

/** Whether a vector is a whole number of cell edges. */
export function isIntegral(v: Vector): boolean {
  return v.every(value => Math.abs(value - Math.round(value)) < TOLERANCE);
}

export function minus(a: Vector, b: Vector): [number, number, number] {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

/** Whether two operators are one up to whole cell edges. */
export function sameOperator(a: SymmetryOperator, b: SymmetryOperator): boolean {
  return sameRotation(a, b) && isIntegral(minus(a.translation, b.translation));
}

/** Text that is the same for operators that are one up to whole cell edges. */
export function operatorKey(operator: SymmetryOperator): string {
  const { rotation, translation } = normalised(operator);
  return `${rotation.join(' ')} ${translation.map(value => Math.round(value * 1000)).join(' ')}`;
}

/** Most operators of a space group in its cell (Fm-3m and its kin). */
const MOST_OPERATORS = 192;

/** The group that some operators generate, the identity first; null where it would exceed 192 and is no space group in this cell. */
export function generateGroup(generators: readonly SymmetryOperator[]): SymmetryOperator[] | null {
  const group: SymmetryOperator[] = [IDENTITY];
  const keys = new Set([operatorKey(IDENTITY)]);
  for (let at = 0; at < group.length; at++) {
    for (const generator of generators) {
      const next = normalised(compose(generator, group[at]!));
      const key = operatorKey(next);
      if (keys.has(key)) continue;
      if (group.length >= MOST_OPERATORS) return null;
      keys.add(key);
      group.push(next);
    }
  }
  return group;
}

/** Whether a list of operators is closed: a group up to whole cell edges. */
export function isClosed(operators: readonly SymmetryOperator[]): boolean {
  const keys = new Set(operators.map(operatorKey));
  return (
    keys.has(operatorKey(IDENTITY)) &&
    operators.every(a => operators.every(b => keys.has(operatorKey(compose(a, b)))))
  );
}

/** Whether the operators keep handedness (a Sohncke group): none is an inversion, a reflection, a glide or a rotoinversion. */
export function isSohncke(operators: readonly SymmetryOperator[]): boolean {
  return operators.every(({ rotation }) => determinant(rotation) > 0);
}

export function isCentrosymmetric(operators: readonly SymmetryOperator[]): boolean {
  return operators.some(({ rotation }) => rotation.every((value, k) => value === (k % 4 === 0 ? -1 : 0)));
}
