/**
 * Out-of-plane bending of MMFF94 at centres with three neighbours, as Wilson angles
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eq. 6).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import { MDYNE_A_PER_DEGREE } from './angle.ts';
import { key, type Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';

const DEGREES = 180 / Math.PI;

export interface OutOfPlaneTerms {
  readonly count: number;
  /** i, j (centre), k, l: the angle of j-l with the plane i-j-k. */
  readonly atoms: Int32Array;
  /** koop, md Å rad⁻². */
  readonly force: Float64Array;
}

/** Columns of the equivalence table for the outer atoms in the order of the step-down; the last is any type. */
const OUTER = [0, 2, 3, 4] as const;

/** Three Wilson angles for each centre whose constant is not zero. */
export function outOfPlaneTerms(
  molecule: Molecule,
  typing: Typing,
  parameters: Mmff94Parameters,
): OutOfPlaneTerms {
  const atoms: number[] = [];
  const force: number[] = [];
  const { neighbourStart, neighbours } = molecule;
  for (let j = 0; j < molecule.atomCount; j++) {
    if (neighbourStart[j + 1]! - neighbourStart[j]! !== 3) continue;
    const [a, b, c] = neighbours.subarray(neighbourStart[j], neighbourStart[j + 1]) as unknown as [
      number,
      number,
      number,
    ];
    let constant = 0;
    for (const column of OUTER) {
      const level = (atom: number): number => parameters.equivalents[typing.types[atom]!]![column]!;
      const outer = [level(a), level(b), level(c)].sort((p, q) => p - q);
      const centre = parameters.equivalents[typing.types[j]!]![1]!;
      const found = parameters.outOfPlanes.get(key(outer[0]!, centre, outer[1]!, outer[2]));
      if (found) {
        constant = found[0]!;
        break;
      }
    }
    if (constant === 0) continue;
    atoms.push(a, j, b, c, a, j, c, b, b, j, c, a);
    force.push(constant, constant, constant);
  }
  return { count: force.length, atoms: Int32Array.from(atoms), force: Float64Array.from(force) };
}

/** Energy in kcal/mol; adds the gradient to `g`. */
export function outOfPlaneEnergy(terms: OutOfPlaneTerms, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { count, atoms, force } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[4 * t]!;
    const j = 3 * atoms[4 * t + 1]!;
    const k = 3 * atoms[4 * t + 2]!;
    const l = 3 * atoms[4 * t + 3]!;
    const jx = x[j]!;
    const jy = x[j + 1]!;
    const jz = x[j + 2]!;
    const ax = x[i]! - jx;
    const ay = x[i + 1]! - jy;
    const az = x[i + 2]! - jz;
    const bx = x[k]! - jx;
    const by = x[k + 1]! - jy;
    const bz = x[k + 2]! - jz;
    const cx = x[l]! - jx;
    const cy = x[l + 1]! - jy;
    const cz = x[l + 2]! - jz;
    const nx = ay * bz - az * by;
    const ny = az * bx - ax * bz;
    const nz = ax * by - ay * bx;
    const nn = Math.max(nx * nx + ny * ny + nz * nz, 1e-12);
    const cc = Math.max(cx * cx + cy * cy + cz * cz, 1e-12);
    const scale = 1 / Math.sqrt(nn * cc);
    let sine = (nx * cx + ny * cy + nz * cz) * scale;
    sine = sine > 1 ? 1 : sine < -1 ? -1 : sine;
    const chi = Math.asin(sine) * DEGREES;
    const f = MDYNE_A_PER_DEGREE * force[t]!;
    energy += 0.5 * f * chi * chi;
    const slope = (f * chi * DEGREES) / Math.max(Math.sqrt(1 - sine * sine), 1e-6);
    const p = slope * scale;
    const q = (slope * sine) / nn;
    const s = (slope * sine) / cc;
    const gax = p * (by * cz - bz * cy) - q * (by * nz - bz * ny);
    const gay = p * (bz * cx - bx * cz) - q * (bz * nx - bx * nz);
    const gaz = p * (bx * cy - by * cx) - q * (bx * ny - by * nx);
    const gbx = p * (cy * az - cz * ay) - q * (ny * az - nz * ay);
    const gby = p * (cz * ax - cx * az) - q * (nz * ax - nx * az);
    const gbz = p * (cx * ay - cy * ax) - q * (nx * ay - ny * ax);
    const gcx = p * nx - s * cx;
    const gcy = p * ny - s * cy;
    const gcz = p * nz - s * cz;
    g[i]! += gax;
    g[i + 1]! += gay;
    g[i + 2]! += gaz;
    g[k]! += gbx;
    g[k + 1]! += gby;
    g[k + 2]! += gbz;
    g[l]! += gcx;
    g[l + 1]! += gcy;
    g[l + 2]! += gcz;
    g[j]! -= gax + gbx + gcx;
    g[j + 1]! -= gay + gby + gcy;
    g[j + 2]! -= gaz + gbz + gcz;
  }
  return energy;
}
