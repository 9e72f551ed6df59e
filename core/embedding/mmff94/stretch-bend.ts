/**
 * Stretch-bend coupling of MMFF94: types, parameters with the defaults by rows of the periodic table, energy and gradient
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eq. 5).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import { bondBetween } from '../../chemistry/molecule.ts';
import type { AngleTerms } from './angle.ts';
import type { BondTerms } from './bond.ts';
import { rowOf } from './empirical.ts';
import { key, type Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';

/** md rad⁻¹ to kcal mol⁻¹ Å⁻¹ deg⁻¹. */
const MDYNE_PER_DEGREE = 2.5121;
const DEGREES = 180 / Math.PI;
const LEAST_SINE = 1e-6;

export interface StretchBendTerms {
  readonly count: number;
  readonly atoms: Int32Array;
  /** Six numbers a term: kba for i-j, for k-j, r0 of i-j and k-j, θ0 in degrees, unused. */
  readonly constants: Float64Array;
}

const STRIDE = 6;

/** Parameters of every angle that is not linear. */
export function stretchBendTerms(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  bonds: BondTerms,
  angles: AngleTerms,
  parameters: Mmff94Parameters,
): StretchBendTerms {
  const atoms: number[] = [];
  const constants: number[] = [];
  for (let t = 0; t < angles.count; t++) {
    if (angles.linear[t] === 1) continue;
    const i = angles.atoms[3 * t]!;
    const j = angles.atoms[3 * t + 1]!;
    const k = angles.atoms[3 * t + 2]!;
    const ij = bondBetween(molecule, i, j);
    const jk = bondBetween(molecule, j, k);
    const forward = coupling(angles.types[t]!, bondTypes[ij]!, bondTypes[jk]!);
    const backward = coupling(angles.types[t]!, bondTypes[jk]!, bondTypes[ij]!);
    const ti = typing.types[i]!;
    const tj = typing.types[j]!;
    const tk = typing.types[k]!;
    const [first, second] = lookUp(molecule, parameters, [ti, tj, tk], [i, j, k], forward, backward);
    if (first === 0 && second === 0) continue;
    atoms.push(i, j, k);
    constants.push(first, second, bonds.length[ij]!, bonds.length[jk]!, angles.ideal[t]!, 0);
  }
  return { count: atoms.length / 3, atoms: Int32Array.from(atoms), constants: Float64Array.from(constants) };
}

/** Stretch-bend type from the angle type and the types of both bonds. */
function coupling(angle: number, first: number, second: number): number {
  switch (angle) {
    case 1:
      return first === 1 ? 1 : second === 1 ? 2 : 0;
    case 2:
      return 3;
    case 3:
      return 5;
    case 4:
      return 4;
    case 5:
      return first === 1 ? 6 : 7;
    case 6:
      return 8;
    case 7:
      return first === 1 ? 9 : 10;
    case 8:
      return 11;
    default:
      return 0;
  }
}

function lookUp(
  molecule: Molecule,
  parameters: Mmff94Parameters,
  types: readonly [number, number, number],
  atoms: readonly [number, number, number],
  forward: number,
  backward: number,
): readonly [number, number] {
  const [i, j, k] = types;
  if (i <= k) {
    const found = parameters.stretchBends.get(key(forward, i, j, k));
    if (found) return [found[0]!, found[1]!];
  }
  if (k <= i) {
    const found = parameters.stretchBends.get(key(backward, k, j, i));
    if (found) return [found[1]!, found[0]!];
  }
  const rows = atoms.map(atom => rowOf(molecule.elements[atom]!)) as [number, number, number];
  const byRow = parameters.stretchBendDefaults.get(key(rows[0], rows[1], rows[2]));
  if (byRow) return [byRow[0]!, byRow[1]!];
  const swapped = parameters.stretchBendDefaults.get(key(rows[2], rows[1], rows[0]));
  return swapped ? [swapped[1]!, swapped[0]!] : [0, 0];
}

/** Energy in kcal/mol; adds the gradient to `g`. */
export function stretchBendEnergy(terms: StretchBendTerms, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { count, atoms, constants } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[3 * t]!;
    const j = 3 * atoms[3 * t + 1]!;
    const k = 3 * atoms[3 * t + 2]!;
    const c = STRIDE * t;
    const ax = x[i]! - x[j]!;
    const ay = x[i + 1]! - x[j + 1]!;
    const az = x[i + 2]! - x[j + 2]!;
    const bx = x[k]! - x[j]!;
    const by = x[k + 1]! - x[j + 1]!;
    const bz = x[k + 2]! - x[j + 2]!;
    const la = Math.max(Math.sqrt(ax * ax + ay * ay + az * az), 1e-8);
    const lb = Math.max(Math.sqrt(bx * bx + by * by + bz * bz), 1e-8);
    const ra = 1 / la;
    const rb = 1 / lb;
    let cosine = (ax * bx + ay * by + az * bz) * ra * rb;
    cosine = cosine > 1 ? 1 : cosine < -1 ? -1 : cosine;
    const d = Math.acos(cosine) * DEGREES - constants[c + 4]!;
    const ka = MDYNE_PER_DEGREE * constants[c]!;
    const kb = MDYNE_PER_DEGREE * constants[c + 1]!;
    const stretch = ka * (la - constants[c + 2]!) + kb * (lb - constants[c + 3]!);
    energy += stretch * d;
    const sine = Math.max(Math.sqrt(1 - cosine * cosine), LEAST_SINE);
    const slope = (-stretch * DEGREES) / sine;
    const pa = ka * d * ra;
    const pb = kb * d * rb;
    const sa = slope * ra;
    const sb = slope * rb;
    const gax = pa * ax + sa * (bx * rb - cosine * ax * ra);
    const gay = pa * ay + sa * (by * rb - cosine * ay * ra);
    const gaz = pa * az + sa * (bz * rb - cosine * az * ra);
    const gbx = pb * bx + sb * (ax * ra - cosine * bx * rb);
    const gby = pb * by + sb * (ay * ra - cosine * by * rb);
    const gbz = pb * bz + sb * (az * ra - cosine * bz * rb);
    g[i]! += gax;
    g[i + 1]! += gay;
    g[i + 2]! += gaz;
    g[k]! += gbx;
    g[k + 1]! += gby;
    g[k + 2]! += gbz;
    g[j]! -= gax + gbx;
    g[j + 1]! -= gay + gby;
    g[j + 2]! -= gaz + gbz;
  }
  return energy;
}
