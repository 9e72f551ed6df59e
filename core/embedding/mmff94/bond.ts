/**
 * Bond stretching of MMFF94: bond types, parameters with the empirical rule for those not tabulated, energy and gradient
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eq. 2; 1996, 17, 616, eqs 1 to 3).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import { rowOf } from './empirical.ts';
import { key, type Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';

/** md/Å to kcal mol⁻¹ Å⁻². */
export const MDYNE_PER_A = 143.9325;
/** Cubic stretching constant, Å⁻¹. */
const CUBIC = -2;

export interface BondTerms {
  readonly count: number;
  readonly atoms: Int32Array;
  /** kb, md/Å. */
  readonly force: Float64Array;
  /** r0, Å. */
  readonly length: Float64Array;
}

/** 1 for a single bond between atoms that could be multiply bonded but here are not delocalised, else 0; for each bond. */
export function bondTypesOf(molecule: Molecule, typing: Typing, parameters: Mmff94Parameters): Uint8Array {
  const result = new Uint8Array(molecule.bondCount);
  for (let b = 0; b < molecule.bondCount; b++) {
    if (molecule.bondOrders[b] !== 1 || typing.aromatic.bonds[b] === 1) continue;
    const first = parameters.properties[typing.types[molecule.bondAtoms[2 * b]!]!];
    const second = parameters.properties[typing.types[molecule.bondAtoms[2 * b + 1]!]!];
    if (!first || !second) continue;
    if ((first.singleBetweenMultiple && second.singleBetweenMultiple) || (first.aromatic && second.aromatic))
      result[b] = 1;
  }
  return result;
}

/** Parameters of every bond. @throws Error when not even the empirical rule knows the elements. */
export function bondTerms(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  parameters: Mmff94Parameters,
): BondTerms {
  const count = molecule.bondCount;
  const force = new Float64Array(count);
  const length = new Float64Array(count);
  for (let b = 0; b < count; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    const low = Math.min(typing.types[i]!, typing.types[j]!);
    const high = Math.max(typing.types[i]!, typing.types[j]!);
    const row =
      parameters.bonds.get(key(bondTypes[b]!, low, high)) ?? empiricalBond(molecule, typing, b, parameters);
    force[b] = row[0]!;
    length[b] = row[1]!;
  }
  return { count, atoms: Int32Array.from(molecule.bondAtoms), force, length };
}

/** Schomaker and Stevenson's length with the corrections of 1996, 17, 616; force constant from the tabulated bond of the same elements, else Herschbach and Laurie. */
function empiricalBond(
  molecule: Molecule,
  typing: Typing,
  bond: number,
  parameters: Mmff94Parameters,
): number[] {
  const i = molecule.bondAtoms[2 * bond]!;
  const j = molecule.bondAtoms[2 * bond + 1]!;
  const zi = molecule.elements[i]!;
  const zj = molecule.elements[j]!;
  const pi = parameters.properties[typing.types[i]!]!;
  const pj = parameters.properties[typing.types[j]!]!;
  const [ri, xi] = parameters.radii.get(key(zi, 0, 0)) ?? [];
  const [rj, xj] = parameters.radii.get(key(zj, 0, 0)) ?? [];
  if (ri === undefined || xi === undefined || rj === undefined || xj === undefined) {
    throw new Error(`bond ${bond + 1}: MMFF94 has no radius for one of its elements`);
  }
  let order = molecule.bondOrders[bond]!;
  if (pi.multiple === 1 && pj.multiple === 1) order = 4;
  else if (pi.multiple + pj.multiple === 3 && pi.multiple * pj.multiple === 2) order = 5;
  else if (typing.aromatic.bonds[bond] === 1) order = pi.lonePair || pj.lonePair ? 5 : 4;
  const shrink = (z: number, multiple: number): number => {
    if (z === 1) return 0;
    switch (order) {
      case 5:
        return 0.04;
      case 4:
        return 0.075;
      case 3:
        return 0.17;
      case 2:
        return 0.1;
      default:
        return multiple === 2 ? 0.03 : multiple === 3 ? 0.08 : 0;
    }
  };
  const contraction = zi === 1 || zj === 1 ? 0.05 : 0.085;
  const r0 =
    ri - shrink(zi, pi.multiple) + (rj - shrink(zj, pj.multiple)) - contraction * Math.abs(xi - xj) ** 1.4;
  const reference = parameters.bondDefaults.get(key(Math.min(zi, zj), Math.max(zi, zj), 0));
  if (reference) return [reference[1]! * (reference[0]! / r0) ** 6, r0];
  const low = Math.min(rowOf(zi, true), rowOf(zj, true));
  const high = Math.max(rowOf(zi, true), rowOf(zj, true));
  const [a, d] = parameters.herschbachLaurie.get(key(low, high, 0)) ?? [];
  if (a === undefined || d === undefined)
    throw new Error(`bond ${bond + 1}: MMFF94 has no rule for its elements`);
  return [10 ** (-(r0 - a) / d), r0];
}

/** Energy in kcal/mol; adds the gradient (kcal mol⁻¹ Å⁻¹) to `g`. */
export function bondEnergy(terms: BondTerms, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { count, atoms, force, length } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[2 * t]!;
    const j = 3 * atoms[2 * t + 1]!;
    const dx = x[i]! - x[j]!;
    const dy = x[i + 1]! - x[j + 1]!;
    const dz = x[i + 2]! - x[j + 2]!;
    const r = Math.sqrt(dx * dx + dy * dy + dz * dz);
    const d = r - length[t]!;
    const k = 0.5 * MDYNE_PER_A * force[t]!;
    const quartic = (7 / 12) * CUBIC * CUBIC;
    energy += k * d * d * (1 + CUBIC * d + quartic * d * d);
    const slope = (k * d * (2 + 3 * CUBIC * d + 4 * quartic * d * d)) / Math.max(r, 1e-8);
    g[i]! += slope * dx;
    g[i + 1]! += slope * dy;
    g[i + 2]! += slope * dz;
    g[j]! -= slope * dx;
    g[j + 1]! -= slope * dy;
    g[j + 2]! -= slope * dz;
  }
  return energy;
}
