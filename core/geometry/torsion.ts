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

/**
 * Gradient of a torsion, degrees per Å, three components for each of the four atoms a, b, c, d (A. Blondel, M. Karplus,
 * J. Comput. Chem. 1996, 17, 1132). Zero where the torsion is not defined.
 */
export function torsionGradient(
  r: Float64Array,
  atoms: readonly [number, number, number, number],
): Float64Array {
  const [a, b, c, d] = atoms;
  const gradient = new Float64Array(12);
  const f = difference(r, a, b);
  const g = difference(r, b, c);
  const h = difference(r, d, c);
  const m = cross(f, g);
  const n = cross(h, g);
  const mm = dot(m, m);
  const nn = dot(n, n);
  const length = Math.sqrt(dot(g, g));
  if (mm < 1e-12 || nn < 1e-12) return gradient;
  const fg = dot(f, g) / (mm * length);
  const hg = dot(h, g) / (nn * length);
  for (let x = 0; x < 3; x++) {
    const atA = (-length / mm) * m[x]!;
    const atD = (length / nn) * n[x]!;
    const shared = fg * m[x]! - hg * n[x]!;
    gradient[x] = DEGREES * atA;
    gradient[3 + x] = DEGREES * (shared - atA);
    gradient[6 + x] = DEGREES * (-shared - atD);
    gradient[9 + x] = DEGREES * atD;
  }
  return gradient;
}

type Vector = readonly [number, number, number];

function difference(r: Float64Array, p: number, q: number): Vector {
  return [r[3 * p]! - r[3 * q]!, r[3 * p + 1]! - r[3 * q + 1]!, r[3 * p + 2]! - r[3 * q + 2]!];
}

function cross(p: Vector, q: Vector): Vector {
  return [p[1] * q[2] - p[2] * q[1], p[2] * q[0] - p[0] * q[2], p[0] * q[1] - p[1] * q[0]];
}

function dot(p: Vector, q: Vector): number {
  return p[0] * q[0] + p[1] * q[1] + p[2] * q[2];
}
