/** The signed volume of a centre, its firmness, and their first-order uncertainty. */
import type { CoordinateUncertainty } from '../chemistry/molecule.ts';

/** |V| on unit bond vectors at ideal tetrahedral angles: 4/(3√3). */
export const IDEAL_UNIT_VOLUME = 4 / (3 * Math.sqrt(3));

/** (a − o) · [(b − o) × (c − o)] in Å³ for four points given by atom index. */
export function tripleProduct(r: Float64Array, o: number, a: number, b: number, c: number): number {
  const ox = r[3 * o]!;
  const oy = r[3 * o + 1]!;
  const oz = r[3 * o + 2]!;
  const ax = r[3 * a]! - ox;
  const ay = r[3 * a + 1]! - oy;
  const az = r[3 * a + 2]! - oz;
  const bx = r[3 * b]! - ox;
  const by = r[3 * b + 1]! - oy;
  const bz = r[3 * b + 2]! - oz;
  const cx = r[3 * c]! - ox;
  const cy = r[3 * c + 1]! - oy;
  const cz = r[3 * c + 2]! - oz;
  return ax * (by * cz - bz * cy) + ay * (bz * cx - bx * cz) + az * (bx * cy - by * cx);
}

/**
 * Signed volume in Å³ of a centre with three ligands (V = r1 · r2 × r3 about the centre) or four
 * (V = ¼ (r1 − r4) · [(r2 − r4) × (r3 − r4)], equal to the first for an ideal centre).
 */
export function signedVolume(r: Float64Array, centre: number, ligands: readonly number[]): number {
  const [a, b, c, d] = ligands;
  return d === undefined ? tripleProduct(r, centre, a!, b!, c!) : tripleProduct(r, d, a!, b!, c!) / 4;
}

/** The same on unit bond vectors, over its value at ideal tetrahedral angles: signed, ±1 for an ideal centre, 0 when flat. Not capped. */
export function relativeVolume(r: Float64Array, centre: number, ligands: readonly number[]): number {
  const u = new Float64Array(15);
  for (let k = 0; k < ligands.length; k++) {
    let length = 0;
    for (let x = 0; x < 3; x++) {
      const d = r[3 * ligands[k]! + x]! - r[3 * centre + x]!;
      u[3 * k + 3 + x] = d;
      length += d * d;
    }
    length = Math.sqrt(length);
    if (length === 0) return 0;
    for (let x = 0; x < 3; x++) u[3 * k + 3 + x]! /= length;
  }
  return signedVolume(u, 0, ligands.length === 3 ? [1, 2, 3] : [1, 2, 3, 4]) / IDEAL_UNIT_VOLUME;
}

/** Gradient of the signed volume: for each of `atoms` (see the result) three components, Å². */
export function signedVolumeGradient(
  r: Float64Array,
  centre: number,
  ligands: readonly number[],
): { atoms: readonly number[]; gradient: Float64Array } {
  const origin = ligands[3] ?? centre;
  const factor = ligands[3] === undefined ? 1 : 0.25;
  const [a, b, c] = ligands as [number, number, number];
  const atoms = [origin, a, b, c];
  const d = (i: number, x: number): number => r[3 * i + x]! - r[3 * origin + x]!;
  const gradient = new Float64Array(12);
  const cross = (p: number, q: number, at: number): void => {
    gradient[at] = factor * (d(p, 1) * d(q, 2) - d(p, 2) * d(q, 1));
    gradient[at + 1] = factor * (d(p, 2) * d(q, 0) - d(p, 0) * d(q, 2));
    gradient[at + 2] = factor * (d(p, 0) * d(q, 1) - d(p, 1) * d(q, 0));
  };
  cross(b, c, 3);
  cross(c, a, 6);
  cross(a, b, 9);
  for (let x = 0; x < 3; x++) gradient[x] = -gradient[3 + x]! - gradient[6 + x]! - gradient[9 + x]!;
  return { atoms, gradient };
}

/** Standard uncertainty of a function of the coordinates from its gradient, by first-order propagation, cell errors included. */
export function propagated(
  uncertainty: CoordinateUncertainty,
  atoms: readonly number[],
  gradient: Float64Array,
): number {
  const { covariances, modes } = uncertainty;
  let variance = 0;
  atoms.forEach((atom, k) => {
    const gx = gradient[3 * k]!;
    const gy = gradient[3 * k + 1]!;
    const gz = gradient[3 * k + 2]!;
    const c = 6 * atom;
    variance +=
      gx * gx * covariances[c]! +
      gy * gy * covariances[c + 1]! +
      gz * gz * covariances[c + 2]! +
      2 * (gx * gy * covariances[c + 3]! + gx * gz * covariances[c + 4]! + gy * gz * covariances[c + 5]!);
  });
  for (const { sigma, displacement } of modes) {
    let slope = 0;
    atoms.forEach((atom, k) => {
      for (let x = 0; x < 3; x++) slope += gradient[3 * k + x]! * displacement[3 * atom + x]!;
    });
    variance += (sigma * slope) ** 2;
  }
  return Math.sqrt(Math.max(0, variance));
}
