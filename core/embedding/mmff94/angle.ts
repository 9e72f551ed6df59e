/**
 * Angle bending of MMFF94, also near 180°: angle types, parameters with the empirical rule, energy and gradient
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eqs 3 and 4; 1996, 17, 616, eq. 5).
 */
import { type Molecule, bondBetween } from '../../chemistry/molecule.ts';
import { type BondTerms, MDYNE_PER_A } from './bond.ts';
import { ANGLE_CENTRE, ANGLE_OUTER } from './empirical.ts';
import { key, type Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';

/** md Å rad⁻² to kcal mol⁻¹ deg⁻². */
export const MDYNE_A_PER_DEGREE = 0.043844;
/** Cubic bending constant, deg⁻¹. */
const CUBIC = -0.006981317;
const DEGREES = 180 / Math.PI;
const LEAST_SINE = 1e-6;

export interface AngleTerms {
  readonly count: number;
  /** i, j (centre), k of each angle. */
  readonly atoms: Int32Array;
  /** MMFF94 angle type, 0 to 8. */
  readonly types: Uint8Array;
  /** ka, md Å rad⁻². */
  readonly force: Float64Array;
  /** θ0, degrees. */
  readonly ideal: Float64Array;
  readonly linear: Uint8Array;
}

/** Parameters of every angle, centres in order. */
export function angleTerms(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  bonds: BondTerms,
  parameters: Mmff94Parameters,
): AngleTerms {
  const { neighbourStart, neighbours, neighbourBonds } = molecule;
  const atoms: number[] = [];
  const types: number[] = [];
  const force: number[] = [];
  const ideal: number[] = [];
  const linear: number[] = [];
  for (let j = 0; j < molecule.atomCount; j++) {
    for (let a = neighbourStart[j]!; a < neighbourStart[j + 1]!; a++) {
      for (let b = a + 1; b < neighbourStart[j + 1]!; b++) {
        const i = neighbours[a]!;
        const k = neighbours[b]!;
        const ring = smallRing(molecule, i, j, k);
        const delocalised = bondTypes[neighbourBonds[a]!]! + bondTypes[neighbourBonds[b]!]!;
        const type =
          ring === 3 ? [3, 5, 6][delocalised]! : ring === 4 ? [4, 7, 8][delocalised]! : delocalised;
        const centre = parameters.properties[typing.types[j]!];
        let row = lookUp(parameters, type, typing.types[i]!, typing.types[j]!, typing.types[k]!);
        if (!row || row[0] === 0) {
          const angle = row?.[1] ?? defaultAngle(parameters, typing.types[j]!, ring);
          const lengths = [bonds.length[neighbourBonds[a]!]!, bonds.length[neighbourBonds[b]!]!] as const;
          row = [empiricalForce(molecule, i, j, k, lengths, angle, ring), angle];
        }
        atoms.push(i, j, k);
        types.push(type);
        force.push(row[0]!);
        ideal.push(row[1]!);
        linear.push(centre?.linear ? 1 : 0);
      }
    }
  }
  return {
    count: types.length,
    atoms: Int32Array.from(atoms),
    types: Uint8Array.from(types),
    force: Float64Array.from(force),
    ideal: Float64Array.from(ideal),
    linear: Uint8Array.from(linear),
  };
}

/** 3 or 4 when the angle lies in a ring of that size, else 0. */
function smallRing(molecule: Molecule, i: number, j: number, k: number): 0 | 3 | 4 {
  if (bondBetween(molecule, i, k) >= 0) return 3;
  for (let a = molecule.neighbourStart[i]!; a < molecule.neighbourStart[i + 1]!; a++) {
    const m = molecule.neighbours[a]!;
    if (m !== j && bondBetween(molecule, m, k) >= 0) return 4;
  }
  return 0;
}

/** Step-down of the outer atoms from their own type to any type; the centre keeps its type. */
function lookUp(
  parameters: Mmff94Parameters,
  type: number,
  i: number,
  j: number,
  k: number,
): readonly number[] | undefined {
  const ei = parameters.equivalents[i]!;
  const ej = parameters.equivalents[j]!;
  const ek = parameters.equivalents[k]!;
  for (const column of OUTER) {
    const a = ei[column]!;
    const c = ek[column]!;
    const found = parameters.angles.get(key(type, Math.min(a, c), ej[CENTRE]!, Math.max(a, c)));
    if (found) return found;
  }
  return undefined;
}

/** Columns of the equivalence table in the order of the step-down; the last is any type. */
const OUTER = [0, 2, 3, 4] as const;
const CENTRE = 1;

/** θ0 where no table gives one (1996, 17, 616, table V). */
function defaultAngle(parameters: Mmff94Parameters, type: number, ring: 0 | 3 | 4): number {
  if (ring === 3) return 60;
  if (ring === 4) return 90;
  const centre = parameters.properties[type]!;
  if (centre.coordination === 4) return 109.45;
  if (centre.coordination === 2) {
    if (centre.element === 8) return 105;
    if (centre.element > 10) return 95;
    if (centre.linear) return 180;
  }
  if (centre.coordination === 3 && centre.valence === 3 && centre.multiple === 0)
    return centre.element === 7 ? 107 : 92;
  return 120;
}

function empiricalForce(
  molecule: Molecule,
  i: number,
  j: number,
  k: number,
  lengths: readonly [number, number],
  angle: number,
  ring: 0 | 3 | 4,
): number {
  const zi = ANGLE_OUTER[molecule.elements[i]!] ?? 0;
  const zk = ANGLE_OUTER[molecule.elements[k]!] ?? 0;
  const c = ANGLE_CENTRE[molecule.elements[j]!] ?? 0;
  const beta = 1.75 * (ring === 4 ? 0.85 : ring === 3 ? 0.05 : 1);
  const sum = lengths[0] + lengths[1];
  const d = ((lengths[0] - lengths[1]) / sum) ** 2;
  const radians = angle / DEGREES;
  return (beta * zi * c * zk * Math.exp(-2 * d)) / (sum * radians * radians);
}

/** Energy in kcal/mol; adds the gradient to `g`. */
export function angleEnergy(terms: AngleTerms, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { count, atoms, force, ideal, linear } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[3 * t]!;
    const j = 3 * atoms[3 * t + 1]!;
    const k = 3 * atoms[3 * t + 2]!;
    const ax = x[i]! - x[j]!;
    const ay = x[i + 1]! - x[j + 1]!;
    const az = x[i + 2]! - x[j + 2]!;
    const bx = x[k]! - x[j]!;
    const by = x[k + 1]! - x[j + 1]!;
    const bz = x[k + 2]! - x[j + 2]!;
    const ra = 1 / Math.max(Math.sqrt(ax * ax + ay * ay + az * az), 1e-8);
    const rb = 1 / Math.max(Math.sqrt(bx * bx + by * by + bz * bz), 1e-8);
    let cosine = (ax * bx + ay * by + az * bz) * ra * rb;
    cosine = cosine > 1 ? 1 : cosine < -1 ? -1 : cosine;
    // Slope with respect to the cosine.
    let slope: number;
    if (linear[t] === 1) {
      energy += MDYNE_PER_A * force[t]! * (1 + cosine);
      slope = MDYNE_PER_A * force[t]!;
    } else {
      const d = Math.acos(cosine) * DEGREES - ideal[t]!;
      const f = 0.5 * MDYNE_A_PER_DEGREE * force[t]!;
      energy += f * d * d * (1 + CUBIC * d);
      const sine = Math.max(Math.sqrt(1 - cosine * cosine), LEAST_SINE);
      slope = (-f * d * (2 + 3 * CUBIC * d) * DEGREES) / sine;
    }
    const sa = slope * ra;
    const sb = slope * rb;
    const gax = sa * (bx * rb - cosine * ax * ra);
    const gay = sa * (by * rb - cosine * ay * ra);
    const gaz = sa * (bz * rb - cosine * az * ra);
    const gbx = sb * (ax * ra - cosine * bx * rb);
    const gby = sb * (ay * ra - cosine * by * rb);
    const gbz = sb * (az * ra - cosine * bz * rb);
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
