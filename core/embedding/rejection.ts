/** Tests that send a model back: double bonds on the wrong side, rings with a bond through them, atoms that collide. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { RingInfo } from '../chemistry/rings.ts';

/** Rings up to this size are tested for bonds through them. */
const PIERCED_LIMIT = 12;

/** Number of bonds that pass through rings of which they are no part. */
export function piercedRings(molecule: Molecule, rings: RingInfo, x: Float64Array): number {
  let count = 0;
  for (const ring of rings.rings) {
    if (ring.length > PIERCED_LIMIT) continue;
    const size = ring.length;
    let cx = 0;
    let cy = 0;
    let cz = 0;
    for (const atom of ring) {
      cx += x[3 * atom]! / size;
      cy += x[3 * atom + 1]! / size;
      cz += x[3 * atom + 2]! / size;
    }
    let radius = 0;
    for (const atom of ring) {
      radius = Math.max(radius, Math.hypot(x[3 * atom]! - cx, x[3 * atom + 1]! - cy, x[3 * atom + 2]! - cz));
    }
    for (let b = 0; b < molecule.bondCount; b++) {
      const p = molecule.bondAtoms[2 * b]!;
      const q = molecule.bondAtoms[2 * b + 1]!;
      const mx = (x[3 * p]! + x[3 * q]!) / 2 - cx;
      const my = (x[3 * p + 1]! + x[3 * q + 1]!) / 2 - cy;
      const mz = (x[3 * p + 2]! + x[3 * q + 2]!) / 2 - cz;
      if (mx * mx + my * my + mz * mz > (radius + 0.8) ** 2) continue;
      if (ring.includes(p) || ring.includes(q)) continue;
      for (let e = 0; e < size; e++) {
        const a = ring[e]!;
        const c = ring[(e + 1) % size]!;
        if (segmentThroughTriangle(x, p, q, cx, cy, cz, a, c)) {
          count++;
          break;
        }
      }
    }
  }
  return count;
}

/** Möller and Trumbore's test (J. Graphics Tools 1997, 2, 21) for the segment p-q and the triangle centre-a-c. */
function segmentThroughTriangle(
  x: Float64Array,
  p: number,
  q: number,
  cx: number,
  cy: number,
  cz: number,
  a: number,
  c: number,
): boolean {
  const dx = x[3 * q]! - x[3 * p]!;
  const dy = x[3 * q + 1]! - x[3 * p + 1]!;
  const dz = x[3 * q + 2]! - x[3 * p + 2]!;
  const e1x = x[3 * a]! - cx;
  const e1y = x[3 * a + 1]! - cy;
  const e1z = x[3 * a + 2]! - cz;
  const e2x = x[3 * c]! - cx;
  const e2y = x[3 * c + 1]! - cy;
  const e2z = x[3 * c + 2]! - cz;
  const hx = dy * e2z - dz * e2y;
  const hy = dz * e2x - dx * e2z;
  const hz = dx * e2y - dy * e2x;
  const det = e1x * hx + e1y * hy + e1z * hz;
  if (Math.abs(det) < 1e-9) return false;
  const f = 1 / det;
  const sx = x[3 * p]! - cx;
  const sy = x[3 * p + 1]! - cy;
  const sz = x[3 * p + 2]! - cz;
  const u = f * (sx * hx + sy * hy + sz * hz);
  if (u < 0 || u > 1) return false;
  const qx = sy * e1z - sz * e1y;
  const qy = sz * e1x - sx * e1z;
  const qz = sx * e1y - sy * e1x;
  const v = f * (dx * qx + dy * qy + dz * qz);
  if (v < 0 || u + v > 1) return false;
  const t = f * (e2x * qx + e2y * qy + e2z * qz);
  return t > 0 && t < 1;
}

/** Shortest allowed distance of atoms four bonds apart or more, Å: below it the model is a collision (ours, no source). */
const LEAST_CONTACT = { heavy: 2.2, withHydrogen: 1.5, hydrogens: 1.3 } as const;

/** Number of pairs four or more bonds apart that are closer than any real contact; hydrogen bonds are allowed. */
export function collisions(molecule: Molecule, sep: Uint8Array, x: Float64Array): number {
  const n = molecule.atomCount;
  let count = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const d = sep[i * n + j]!;
      if (d > 0 && d < 4) continue;
      const h = (molecule.elements[i] === 1 ? 1 : 0) + (molecule.elements[j] === 1 ? 1 : 0);
      const least =
        h === 2 ? LEAST_CONTACT.hydrogens : h === 1 ? LEAST_CONTACT.withHydrogen : LEAST_CONTACT.heavy;
      const dx = x[3 * i]! - x[3 * j]!;
      const dy = x[3 * i + 1]! - x[3 * j + 1]!;
      const dz = x[3 * i + 2]! - x[3 * j + 2]!;
      if (dx * dx + dy * dy + dz * dz < least * least) count++;
    }
  }
  return count;
}

/** Bonds longer or shorter than their ideal length by more than this share are broken. */
const BOND_SHARE = 0.18;

/** Number of bonds stretched or squeezed beyond belief. */
export function brokenBonds(molecule: Molecule, lengths: Float64Array, x: Float64Array): number {
  let count = 0;
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = 3 * molecule.bondAtoms[2 * b]!;
    const j = 3 * molecule.bondAtoms[2 * b + 1]!;
    const d = Math.hypot(x[i]! - x[j]!, x[i + 1]! - x[j + 1]!, x[i + 2]! - x[j + 2]!);
    if (Math.abs(d / lengths[b]! - 1) > BOND_SHARE) count++;
  }
  return count;
}
