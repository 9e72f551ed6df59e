/** The rigid movement that lays one set of points on another with the least root mean square deviation. */
import { EigenvalueDecomposition, Matrix } from 'ml-matrix';

export interface Superposition {
  /** Proper rotation, nine numbers row by row: a point p goes to rotation · p + translation. */
  readonly rotation: Float64Array;
  /** Å. */
  readonly translation: Float64Array;
  /** Root mean square deviation after the movement, Å, weighted as the fit. */
  readonly rmsd: number;
}

/**
 * Superposes `moving` on `fixed` (x, y, z of paired points, Å), never by reflection: mirror images stay apart.
 *
 * The rotation is the eigenvector of the largest eigenvalue of the quaternion matrix (B. K. P. Horn, J. Opt. Soc. Am. A
 * 1987, 4, 629). One point, or none to weigh, gives the identity rotation.
 *
 * @throws RangeError when the sets differ in length, are empty, or the weights are negative, all zero or too few.
 */
export function superpose(moving: Float64Array, fixed: Float64Array, weights?: Float64Array): Superposition {
  const count = moving.length / 3;
  if (moving.length !== fixed.length || !Number.isInteger(count) || count === 0) {
    throw new RangeError(
      `superposition of ${moving.length} on ${fixed.length} numbers: pairs of points are wanted`,
    );
  }
  if (weights !== undefined && weights.length !== count) {
    throw new RangeError(`${weights.length} weights for ${count} points`);
  }
  const weight = (i: number): number => weights?.[i] ?? 1;
  let total = 0;
  const from = new Float64Array(3);
  const to = new Float64Array(3);
  for (let i = 0; i < count; i++) {
    const w = weight(i);
    if (!(w >= 0)) throw new RangeError(`weight ${i + 1} is ${w}: weights are zero or positive`);
    total += w;
    for (let x = 0; x < 3; x++) {
      from[x]! += w * moving[3 * i + x]!;
      to[x]! += w * fixed[3 * i + x]!;
    }
  }
  if (!(total > 0)) throw new RangeError('all weights are zero');
  for (let x = 0; x < 3; x++) {
    from[x]! /= total;
    to[x]! /= total;
  }
  // Correlation of the centred points, moving by row and fixed by column.
  const s = new Float64Array(9);
  for (let i = 0; i < count; i++) {
    for (let a = 0; a < 3; a++) {
      const moved = weight(i) * (moving[3 * i + a]! - from[a]!);
      for (let b = 0; b < 3; b++) s[3 * a + b]! += moved * (fixed[3 * i + b]! - to[b]!);
    }
  }
  const rotation = rotationOf(leadingQuaternion(s));
  const translation = new Float64Array(3);
  for (let a = 0; a < 3; a++) {
    translation[a] = to[a]!;
    for (let b = 0; b < 3; b++) translation[a]! -= rotation[3 * a + b]! * from[b]!;
  }
  let squares = 0;
  for (let i = 0; i < count; i++) {
    for (let a = 0; a < 3; a++) {
      let at = translation[a]! - fixed[3 * i + a]!;
      for (let b = 0; b < 3; b++) at += rotation[3 * a + b]! * moving[3 * i + b]!;
      squares += weight(i) * at * at;
    }
  }
  return { rotation, translation, rmsd: Math.sqrt(squares / total) };
}

/** The points of `source` after a superposition, in a new array. */
export function moved(source: Float64Array, { rotation, translation }: Superposition): Float64Array {
  const result = new Float64Array(source.length);
  for (let i = 0; i < source.length; i += 3) {
    for (let a = 0; a < 3; a++) {
      let at = translation[a]!;
      for (let b = 0; b < 3; b++) at += rotation[3 * a + b]! * source[i + b]!;
      result[i + a] = at;
    }
  }
  return result;
}

type Quaternion = readonly [number, number, number, number];

function leadingQuaternion(s: Float64Array): Quaternion {
  const [xx, xy, xz, yx, yy, yz, zx, zy, zz] = s as unknown as readonly [
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  const matrix = new Matrix([
    [xx + yy + zz, yz - zy, zx - xz, xy - yx],
    [yz - zy, xx - yy - zz, xy + yx, zx + xz],
    [zx - xz, xy + yx, yy - xx - zz, yz + zy],
    [xy - yx, zx + xz, yz + zy, zz - xx - yy],
  ]);
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(matrix, {
    assumeSymmetric: true,
  });
  let best = 0;
  for (let k = 1; k < 4; k++) if (realEigenvalues[k]! > realEigenvalues[best]!) best = k;
  // Without any correlation every rotation fits alike: keep the points as they are.
  if (realEigenvalues.every(value => value === 0)) return [1, 0, 0, 0];
  return [0, 1, 2, 3].map(row => eigenvectorMatrix.get(row, best)) as unknown as Quaternion;
}

function rotationOf([w, x, y, z]: Quaternion): Float64Array {
  return Float64Array.of(
    w * w + x * x - y * y - z * z,
    2 * (x * y - w * z),
    2 * (x * z + w * y),
    2 * (x * y + w * z),
    w * w - x * x + y * y - z * z,
    2 * (y * z - w * x),
    2 * (x * z - w * y),
    2 * (y * z + w * x),
    w * w - x * x - y * y + z * z,
  );
}
