/**
 * Torsions of MMFF94: types, parameters with the empirical rules, energy and gradient
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eq. 7; 1996, 17, 616, rules a to h).
 */
import { type Molecule, bondBetween } from '../../chemistry/molecule.ts';
import { rowOf, TORSION_U, TORSION_V, TORSION_W } from './empirical.ts';
import { key, type Mmff94Parameters, type TypeProperties } from './parameters.ts';
import type { Typing } from './typing.ts';

export interface TorsionTerms {
  readonly count: number;
  readonly atoms: Int32Array;
  /** V1, V2, V3 of each torsion, kcal/mol. */
  readonly constants: Float64Array;
}

/** Parameters of every torsion that is not zero throughout. */
export function torsionTerms(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  parameters: Mmff94Parameters,
): TorsionTerms {
  const atoms: number[] = [];
  const constants: number[] = [];
  const { neighbourStart, neighbours, neighbourBonds, bondAtoms } = molecule;
  for (let b = 0; b < molecule.bondCount; b++) {
    const j = bondAtoms[2 * b]!;
    const k = bondAtoms[2 * b + 1]!;
    if (parameters.properties[typing.types[j]!]!.linear || parameters.properties[typing.types[k]!]!.linear)
      continue;
    for (let p = neighbourStart[j]!; p < neighbourStart[j + 1]!; p++) {
      const i = neighbours[p]!;
      if (i === k) continue;
      for (let q = neighbourStart[k]!; q < neighbourStart[k + 1]!; q++) {
        const l = neighbours[q]!;
        if (l === j || l === i) continue;
        const type = torsionType(
          molecule,
          typing,
          bondTypes,
          [i, j, k, l],
          [neighbourBonds[p]!, b, neighbourBonds[q]!],
        );
        const row = lookUp(molecule, typing, parameters, type, [i, j, k, l], b);
        if (row[0] === 0 && row[1] === 0 && row[2] === 0) continue;
        atoms.push(i, j, k, l);
        constants.push(row[0]!, row[1]!, row[2]!);
      }
    }
  }
  return { count: atoms.length / 4, atoms: Int32Array.from(atoms), constants: Float64Array.from(constants) };
}

type Four = readonly [number, number, number, number];

/** The torsion type and the one to fall back on. */
function torsionType(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  atoms: Four,
  bonds: readonly [number, number, number],
): readonly [number, number] {
  const [i, j, k, l] = atoms;
  let plain = 0;
  if (bondTypes[bonds[1]] === 1) plain = 1;
  else if (
    molecule.bondOrders[bonds[1]] === 1 &&
    typing.aromatic.bonds[bonds[1]] === 0 &&
    (bondTypes[bonds[0]] === 1 || bondTypes[bonds[2]] === 1)
  ) {
    plain = 2;
  }
  // Torsions of rings of four, that no bond crosses.
  const crossed = bondBetween(molecule, i, k) >= 0 || bondBetween(molecule, j, l) >= 0;
  if (!crossed && bondBetween(molecule, i, l) >= 0) return [4, plain];
  if (plain === 0 && !crossed && inSaturatedFive(molecule, typing, atoms)) return [5, 0];
  return [plain, plain === 2 ? 0 : plain];
}

/** All four atoms in one ring of five that is not aromatic, one at least an alkyl carbon (type 1). */
function inSaturatedFive(molecule: Molecule, typing: Typing, atoms: Four): boolean {
  const [i, j, k, l] = atoms;
  if (!atoms.some(atom => typing.types[atom] === 1)) return false;
  for (let a = molecule.neighbourStart[i]!; a < molecule.neighbourStart[i + 1]!; a++) {
    const m = molecule.neighbours[a]!;
    if (m === j || m === k || m === l || bondBetween(molecule, m, l) < 0) continue;
    if (bondBetween(molecule, m, j) < 0 && bondBetween(molecule, m, k) < 0) return true;
  }
  return false;
}

/** Columns of the equivalence table for i, l at each step; -1 is any type. */
const STEPS = [
  [0, 0, 0],
  [1, 1, 1],
  [2, 1, -1],
  [-1, 1, 2],
  [-1, 1, -1],
] as const;

function lookUp(
  molecule: Molecule,
  typing: Typing,
  parameters: Mmff94Parameters,
  types: readonly [number, number],
  atoms: Four,
  bond: number,
): readonly number[] {
  const e = atoms.map(atom => parameters.equivalents[typing.types[atom]!]!);
  for (const type of types[0] === types[1] ? [types[0]] : types) {
    for (const [ci, cj, cl] of STEPS) {
      const i = ci < 0 ? 0 : e[0]![ci]!;
      const l = cl < 0 ? 0 : e[3]![cl]!;
      const j = e[1]![cj]!;
      const k = e[2]![cj]!;
      const found =
        parameters.torsions.get(key(type, i, j, k, l)) ?? parameters.torsions.get(key(type, l, k, j, i));
      if (found) return found;
    }
  }
  return empirical(molecule, typing, parameters, atoms[1], atoms[2], bond);
}

function empirical(
  molecule: Molecule,
  typing: Typing,
  parameters: Mmff94Parameters,
  j: number,
  k: number,
  bond: number,
): readonly [number, number, number] {
  const pj = parameters.properties[typing.types[j]!]!;
  const pk = parameters.properties[typing.types[k]!]!;
  const zj = molecule.elements[j]!;
  const zk = molecule.elements[k]!;
  const twofold = (beta: number, pi: number): readonly [number, number, number] => [
    0,
    beta * pi * Math.sqrt((TORSION_U[zj] ?? 0) * (TORSION_U[zk] ?? 0)),
    0,
  ];
  const threefold = (): readonly [number, number, number] => {
    const paths = (pj.coordination - 1) * (pk.coordination - 1);
    return [0, 0, paths > 0 ? Math.sqrt((TORSION_V[zj] ?? 0) * (TORSION_V[zk] ?? 0)) / paths : 0];
  };
  const none = [0, 0, 0] as const;
  if (pj.linear || pk.linear) return none;
  if (typing.aromatic.bonds[bond] === 1) {
    const beta = (pj.valence === 3 && pk.valence === 4) || (pj.valence === 4 && pk.valence === 3) ? 3 : 6;
    return twofold(beta, pj.lonePair || pk.lonePair ? 0.3 : 0.5);
  }
  if (molecule.bondOrders[bond] === 2) return twofold(6, pj.multiple === 2 && pk.multiple === 2 ? 1 : 0.4);
  if (pj.coordination === 4 && pk.coordination === 4) return threefold();
  if (pj.coordination === 4) return planarNeighbour(pk) ? none : threefold();
  if (pk.coordination === 4) return planarNeighbour(pj) ? none : threefold();
  if (
    (pj.multiple > 0 && pk.multiple > 0) ||
    (pj.lonePair && pk.multiple > 0) ||
    (pk.lonePair && pj.multiple > 0)
  ) {
    if (pj.lonePair && pk.lonePair) return none;
    const first = (p: TypeProperties): number =>
      p.multiple === 1 ? 0.5 : rowOf(zj) === 1 && rowOf(zk) === 1 ? 0.3 : 0.15;
    if (pj.lonePair && pk.multiple > 0) return twofold(6, first(pj));
    if (pk.lonePair && pj.multiple > 0) return twofold(6, first(pk));
    if ((pj.multiple === 1 || pk.multiple === 1) && (zj !== 6 || zk !== 6)) return twofold(6, 0.4);
    return twofold(6, 0.15);
  }
  const wj = TORSION_W[zj];
  const wk = TORSION_W[zk];
  if (wj !== undefined && wk !== undefined) return [0, -Math.sqrt(wj * wk), 0];
  return threefold();
}

/** Whether rotation of a saturated centre about the bond to such an atom has no barrier of its own (rules e and f). */
function planarNeighbour(p: TypeProperties): boolean {
  if (p.coordination === 3) return p.valence === 4 || p.valence === 34 || p.multiple > 0;
  if (p.coordination === 2) return p.valence === 3 || p.multiple > 0;
  return false;
}

/** Energy in kcal/mol; adds the gradient to `g` (A. Blondel and M. Karplus, J. Comput. Chem. 1996, 17, 1132). */
export function torsionEnergy(terms: TorsionTerms, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { count, atoms, constants } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[4 * t]!;
    const j = 3 * atoms[4 * t + 1]!;
    const k = 3 * atoms[4 * t + 2]!;
    const l = 3 * atoms[4 * t + 3]!;
    const fx = x[i]! - x[j]!;
    const fy = x[i + 1]! - x[j + 1]!;
    const fz = x[i + 2]! - x[j + 2]!;
    const gx = x[j]! - x[k]!;
    const gy = x[j + 1]! - x[k + 1]!;
    const gz = x[j + 2]! - x[k + 2]!;
    const hx = x[l]! - x[k]!;
    const hy = x[l + 1]! - x[k + 1]!;
    const hz = x[l + 2]! - x[k + 2]!;
    const ax = fy * gz - fz * gy;
    const ay = fz * gx - fx * gz;
    const az = fx * gy - fy * gx;
    const bx = hy * gz - hz * gy;
    const by = hz * gx - hx * gz;
    const bz = hx * gy - hy * gx;
    const aa = Math.max(ax * ax + ay * ay + az * az, 1e-10);
    const bb = Math.max(bx * bx + by * by + bz * bz, 1e-10);
    const gg = Math.max(Math.sqrt(gx * gx + gy * gy + gz * gz), 1e-8);
    const norm = 1 / Math.sqrt(aa * bb);
    const cosine = (ax * bx + ay * by + az * bz) * norm;
    const sine =
      (((by * az - bz * ay) * gx + (bz * ax - bx * az) * gy + (bx * ay - by * ax) * gz) * norm) / gg;
    const v1 = constants[3 * t]!;
    const v2 = constants[3 * t + 1]!;
    const v3 = constants[3 * t + 2]!;
    const cos2 = 2 * cosine * cosine - 1;
    energy += 0.5 * (v1 * (1 + cosine) + v2 * (1 - cos2) + v3 * (1 + cosine * (4 * cosine * cosine - 3)));
    const slope = 0.5 * sine * (-v1 + 4 * v2 * cosine - 3 * v3 * (4 * cosine * cosine - 1));
    const pa = (slope * gg) / aa;
    const pb = (slope * gg) / bb;
    const fg = (slope * (fx * gx + fy * gy + fz * gz)) / (aa * gg);
    const hg = (slope * (hx * gx + hy * gy + hz * gz)) / (bb * gg);
    g[i]! -= pa * ax;
    g[i + 1]! -= pa * ay;
    g[i + 2]! -= pa * az;
    g[l]! += pb * bx;
    g[l + 1]! += pb * by;
    g[l + 2]! += pb * bz;
    g[j]! += (pa + fg) * ax - hg * bx;
    g[j + 1]! += (pa + fg) * ay - hg * by;
    g[j + 2]! += (pa + fg) * az - hg * bz;
    g[k]! += (hg - pb) * bx - fg * ax;
    g[k + 1]! += (hg - pb) * by - fg * ay;
    g[k + 2]! += (hg - pb) * bz - fg * az;
  }
  return energy;
}
