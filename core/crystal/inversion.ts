/**
 * The point in which a crystal structure is inverted, found from its operators.
 *
 * Inversion in the point q/2 takes x to q − x and the operator (W, w) to (W, (1 − W) q − w). A group that is its own mirror
 * image has a q for which these are its own operators again; the origin of the unit cell need not be such a point. The
 * eleven pairs of enantiomorphic groups have none: their operators are rewritten.
 */
import type { Vector } from './cell.ts';
import {
  fractionalPart,
  isClosed,
  isIntegral,
  minus,
  operatorKey,
  sameRotation,
  type SymmetryOperator,
} from './operator.ts';

export interface Inversion {
  /** x becomes shift − x. */
  readonly shift: Vector;
  /** Operators after inversion, in the order of the old ones. */
  readonly operators: readonly SymmetryOperator[];
  /** Whether the group changes into the other of its enantiomorphic pair. */
  readonly changesGroup: boolean;
}

/** The operator after inversion, its translation as it comes. */
export function invertedOperator(
  { rotation: w, translation: t }: SymmetryOperator,
  q: Vector,
): SymmetryOperator {
  const moved = [0, 1, 2].map(
    i => q[i]! - w[3 * i]! * q[0] - w[3 * i + 1]! * q[1] - w[3 * i + 2]! * q[2] - t[i]!,
  ) as [number, number, number];
  return { rotation: w, translation: moved };
}

function isOwnImage(operators: readonly SymmetryOperator[], keys: ReadonlySet<string>, q: Vector): boolean {
  return operators.every(operator => keys.has(operatorKey(invertedOperator(operator, q))));
}

/** Steps of the cell edge at which a point is sought: 1/4, then 1/8, then 1/24. */
const DIVISIONS = [4, 8, 24] as const;

/** Shifts of one division, those with the fewest components first. */
function shifts(division: number): [number, number, number][] {
  const list: [number, number, number][] = [];
  for (let x = 0; x < division; x++) {
    for (let y = 0; y < division; y++) {
      for (let z = 0; z < division; z++) list.push([x / division, y / division, z / division]);
    }
  }
  const components = (q: readonly number[]): number => q.filter(value => value !== 0).length;
  const sum = (q: readonly number[]): number => q[0]! + q[1]! + q[2]!;
  return list.sort((a, b) => components(a) - components(b) || sum(a) - sum(b));
}

/** Finds the inversion of a group. @throws RangeError when the operators are no group. */
export function findInversion(operators: readonly SymmetryOperator[]): Inversion {
  if (!isClosed(operators)) throw new RangeError('the symmetry operators are no group');
  const keys = new Set(operators.map(operatorKey));
  for (const division of DIVISIONS) {
    for (const shift of shifts(division)) {
      if (isOwnImage(operators, keys, shift)) return { shift, operators, changesGroup: false };
    }
  }
  const inverted = operators.map(operator => {
    const { rotation, translation } = invertedOperator(operator, [0, 0, 0]);
    return { rotation, translation: translation.map(fractionalPart) as [number, number, number] };
  });
  if (!isClosed(inverted)) throw new RangeError('the inverted operators are no group');
  return { shift: [0, 0, 0], operators: inverted, changesGroup: true };
}

/**
 * The symmetry code of an image after inversion: `code` is n_klm (or n) of the old operators.
 *
 * @returns null where the code cannot be read or no operator of the new list makes the image.
 */
export function invertedCode(
  code: string,
  old: readonly SymmetryOperator[],
  inversion: Inversion,
): string | null {
  const match = /^(\d+)(?:_(\d)(\d)(\d))?$/u.exec(code);
  if (!match) return null;
  const operator = old[Number(match[1]) - 1];
  if (!operator) return null;
  const cells = [2, 3, 4].map(k => (match[k] === undefined ? 0 : Number(match[k]) - 5)) as [
    number,
    number,
    number,
  ];
  const image = invertedOperator(
    {
      rotation: operator.rotation,
      translation: operator.translation.map((value, k) => value + cells[k]!) as [number, number, number],
    },
    inversion.shift,
  );
  for (let n = 0; n < inversion.operators.length; n++) {
    const each = inversion.operators[n]!;
    if (!sameRotation(each, image)) continue;
    const difference = minus(image.translation, each.translation);
    if (!isIntegral(difference)) continue;
    const digits = difference.map(value => 5 + Math.round(value));
    if (digits.some(digit => digit < 0 || digit > 9)) return null;
    return `${n + 1}_${digits.join('')}`;
  }
  return null;
}
