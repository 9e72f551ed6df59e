/** The torsion angle a–b–c–d in degrees, positive clockwise from the front to the rear, and its gradient. */

const DEGREES = 180 / Math.PI;

/** Torsion a–b–c–d, degrees, −180 to 180 (IUPAC 1996, Basic Terminology of Stereochemistry: torsion angle). NaN where three of the atoms are in line. */
export function torsion(r: Float64Array, a: number, b: number, c: number, d: number): number {
  const b1x = r[3 * b]! - r[3 * a]!;
  const b1y = r[3 * b + 1]! - r[3 * a + 1]!;
  const b1z = r[3 * b + 2]! - r[3 * a + 2]!;
  const b2x = r[3 * c]! - r[3 * b]!;
  const b2y = r[3 * c + 1]! - r[3 * b + 1]!;
  const b2z = r[3 * c + 2]! - r[3 * b + 2]!;
  const b3x = r[3 * d]! - r[3 * c]!;
  const b3y = r[3 * d + 1]! - r[3 * c + 1]!;
  const b3z = r[3 * d + 2]! - r[3 * c + 2]!;
  const mx = b1y * b2z - b1z * b2y;
  const my = b1z * b2x - b1x * b2z;
  const mz = b1x * b2y - b1y * b2x;
  const nx = b2y * b3z - b2z * b3y;
  const ny = b2z * b3x - b2x * b3z;
  const nz = b2x * b3y - b2y * b3x;
  const mm = mx * mx + my * my + mz * mz;
  const nn = nx * nx + ny * ny + nz * nz;
  if (mm < 1e-12 || nn < 1e-12) return Number.NaN;
  const length = Math.sqrt(b2x * b2x + b2y * b2y + b2z * b2z);
  return DEGREES * Math.atan2(length * (b1x * nx + b1y * ny + b1z * nz), mx * nx + my * ny + mz * nz);
}

/** Step of the central difference by which the torsion gradient is taken, Å. */
const STEP = 1e-4;

/** Gradient of a torsion, degrees per Å, three components for each of the four atoms (central differences). */
export function torsionGradient(
  r: Float64Array,
  atoms: readonly [number, number, number, number],
): Float64Array {
  const four = new Float64Array(12);
  atoms.forEach((atom, k) => {
    for (let x = 0; x < 3; x++) four[3 * k + x] = r[3 * atom + x]!;
  });
  const gradient = new Float64Array(12);
  for (let i = 0; i < 12; i++) {
    const kept = four[i]!;
    four[i] = kept + STEP;
    const plus = torsion(four, 0, 1, 2, 3);
    four[i] = kept - STEP;
    const minus = torsion(four, 0, 1, 2, 3);
    four[i] = kept;
    let difference = plus - minus;
    if (difference > 180) difference -= 360;
    else if (difference < -180) difference += 360;
    gradient[i] = difference / (2 * STEP);
  }
  return gradient;
}
