/**
 * Non-bonded pairs of MMFF94, three bonds apart or more: buffered 14-7 van der Waals and buffered Coulomb terms in one pass, no cut-off
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, eqs 8 and 13).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import type { Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';
import { pairParameters } from './van-der-waals.ts';

/** kcal Å mol⁻¹ e⁻². */
const COULOMB = 332.0716;
/** Electrostatic buffering, Å. */
const BUFFER = 0.05;
/** Scale of electrostatics three bonds apart. */
const SCALE_14 = 0.75;

export interface PairTerms {
  readonly count: number;
  readonly atoms: Uint16Array | Uint32Array;
  /** R*, ε and 332.0716 · q · q (1-4 scaled), three numbers a pair. */
  readonly constants: Float64Array;
}

/** Every pair three bonds apart or more, and pairs of different molecules. */
export function pairTerms(
  molecule: Molecule,
  typing: Typing,
  charges: Float64Array,
  parameters: Mmff94Parameters,
): PairTerms {
  const n = molecule.atomCount;
  const { neighbourStart, neighbours } = molecule;
  const atoms: number[] = [];
  const constants: number[] = [];
  const distance = new Uint8Array(n);
  const near: number[] = [];
  const cache = new Map<number, readonly [number, number]>();
  for (let i = 0; i < n; i++) {
    near.length = 0;
    near.push(i);
    distance[i] = 1;
    let from = 0;
    for (let step = 2; step <= 4; step++) {
      const to = near.length;
      for (; from < to; from++) {
        const atom = near[from]!;
        for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
          const next = neighbours[k]!;
          if (distance[next] === 0) {
            distance[next] = step;
            near.push(next);
          }
        }
      }
    }
    for (let j = i + 1; j < n; j++) {
      const d = distance[j]!;
      if (d !== 0 && d < 4) continue;
      const ti = typing.types[i]!;
      const tj = typing.types[j]!;
      let pair = cache.get(100 * ti + tj);
      if (!pair) {
        pair = pairParameters(parameters, ti, tj);
        cache.set(100 * ti + tj, pair);
      }
      atoms.push(i, j);
      constants.push(pair[0], pair[1], COULOMB * charges[i]! * charges[j]! * (d === 4 ? SCALE_14 : 1));
    }
    for (const atom of near) distance[atom] = 0;
  }
  return {
    count: atoms.length / 2,
    atoms: n < 65536 ? Uint16Array.from(atoms) : Uint32Array.from(atoms),
    constants: Float64Array.from(constants),
  };
}

/** Energies in kcal/mol into `out` (van der Waals, electrostatic); adds the gradient to `g`. */
export function pairEnergy(terms: PairTerms, x: Float64Array, g: Float64Array, out: Float64Array): void {
  let dispersion = 0;
  let coulomb = 0;
  const { count, atoms, constants } = terms;
  for (let t = 0; t < count; t++) {
    const i = 3 * atoms[2 * t]!;
    const j = 3 * atoms[2 * t + 1]!;
    const dx = x[i]! - x[j]!;
    const dy = x[i + 1]! - x[j + 1]!;
    const dz = x[i + 2]! - x[j + 2]!;
    let r = Math.sqrt(dx * dx + dy * dy + dz * dz);
    if (r < 1e-4) r = 1e-4;
    const radius = constants[3 * t]!;
    const q = r / radius;
    const q2 = q * q;
    const q6 = q2 * q2 * q2;
    const q7 = q6 * q;
    const s = 1.07 / (q + 0.07);
    const s2 = s * s;
    const s7 = s2 * s2 * s2 * s;
    const u = 1 / (q7 + 0.12);
    const depth = constants[3 * t + 1]!;
    const e = depth * s7;
    const w = 1.12 * u - 2;
    dispersion += e * w;
    // d/dq of s^7 is -7 s^7 / (q + 0.07); of the bracket -1.12 · 7 q^6 u².
    let slope = (-7 * e * ((w * s) / 1.07 + 1.12 * q6 * u * u)) / radius;
    const c = constants[3 * t + 2]!;
    const buffered = 1 / (r + BUFFER);
    const ec = c * buffered;
    coulomb += ec;
    slope -= ec * buffered;
    slope /= r;
    const px = slope * dx;
    const py = slope * dy;
    const pz = slope * dz;
    g[i]! += px;
    g[i + 1]! += py;
    g[i + 2]! += pz;
    g[j]! -= px;
    g[j + 1]! -= py;
    g[j + 2]! -= pz;
  }
  out[0] = dispersion;
  out[1] = coulomb;
}
