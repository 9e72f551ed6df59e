/**
 * Rotation about a bond: energies along the torsion with the rest relaxed, the barrier between the two hands of an axis, its
 * class and half-life. A force-field energy is a rough stand-in for a free energy of activation.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import { torsion } from '../geometry/torsion.ts';
import { addHydrogens } from './hydrogens.ts';
import { Mmff94 } from './mmff94/energy.ts';
import { relax } from './restrained.ts';
import type { EmbeddingTables } from './resources.ts';

export interface TorsionScan {
  readonly points: readonly { readonly degrees: number; readonly energy: number }[];
  /** Lowest way from the best negative to the best positive torsion, through 0° or 180°, above the lowest minimum; where that lies in the plane, the whole turn; kcal/mol. */
  readonly barrier: number;
  /** The torsion of the top of that way, degrees. */
  readonly through: number;
  readonly laPlanteClass: 1 | 2 | 3;
  /** Half-life at 37 °C in seconds. */
  readonly halfLife: number;
  readonly warning: string;
}

/** kB / h in K⁻¹ s⁻¹ and R in kcal mol⁻¹ K⁻¹ (CODATA 2018). */
const BOLTZMANN_OVER_PLANCK = 2.083661912e10;
const GAS_CONSTANT = 1.987204259e-3;
/** 37 °C. */
const BODY_TEMPERATURE = 310.15;

/** Half-life in seconds of a first-order rotation over a free energy of activation in kcal/mol, by Eyring: ln 2 · h / (kB T) · exp(ΔG‡/RT). */
export function eyringHalfLife(barrier: number, kelvin = BODY_TEMPERATURE): number {
  return (Math.LN2 / (BOLTZMANN_OVER_PLANCK * kelvin)) * Math.exp(barrier / (GAS_CONSTANT * kelvin));
}

/** Class of an axis by its barrier: 1 below 20, 2 from 20 to 30, 3 above 30 kcal/mol (S. R. LaPlante et al., J. Med. Chem. 2011, 54, 7005). */
export function laPlanteClass(barrier: number): 1 | 2 | 3 {
  return barrier < 20 ? 1 : barrier <= 30 ? 2 : 3;
}

export const SCAN_WARNING =
  'a force-field energy without entropy or solvent stands in for a free energy of activation: take the barrier as an estimate, good to some kcal/mol at best';

/** Force that holds the torsion, kcal/mol. */
const HOLD = 600;

/** Scans the torsion of four atoms (0-based) of a model in space, both ways round, the lower energy kept. @throws RangeError without coordinates; TypingError where MMFF94 has no types. */
export function scanTorsion(
  molecule: Molecule,
  tables: EmbeddingTables,
  atoms: readonly [number, number, number, number],
  options: {
    readonly step?: number;
    readonly signal?: AbortSignal;
    readonly progress?: (done: number, all: number) => void;
  } = {},
): TorsionScan | null {
  if (molecule.dimension !== 3 || !molecule.coordinates)
    throw new RangeError('a scan needs coordinates in space');
  const full = addHydrogens(molecule);
  const field = new Mmff94(full, tables.mmff94);
  const step = options.step ?? 10;
  const count = Math.round(360 / step);
  const [i, j, k, l] = atoms;
  const start = full.coordinates!.slice();
  relax(field, start, null);
  const movable = farSide(full, j, k);
  const origin = Math.round(torsion(start, i, j, k, l) / step);
  const energies = new Float64Array(count).fill(Number.POSITIVE_INFINITY);
  let done = 0;
  for (const way of [1, -1]) {
    const x = start.slice();
    for (let s = 0; s <= count; s++) {
      if (options.signal?.aborted) return null;
      const slot = (((origin + way * s) % count) + count) % count;
      const target = slot * step;
      if (movable) turn(x, j, k, movable, target - torsion(x, i, j, k, l));
      const energy = relax(
        field,
        x,
        (at, g) => torsionRestraint(at, g, atoms, (target * Math.PI) / 180),
        400,
        0.05,
      );
      if (energy < energies[slot]!) energies[slot] = energy;
      options.progress?.(++done, 2 * (count + 1));
    }
  }
  const angle = (slot: number): number => (slot * step > 180 ? slot * step - 360 : slot * step);
  const floor = Math.min(...energies);
  const lowest = (side: number): number => {
    let best = -1;
    for (let s = 0; s < count; s++) {
      if (Math.sign(angle(s)) !== side || angle(s) === 180) continue;
      if (best < 0 || energies[s]! < energies[best]!) best = s;
    }
    return best;
  };
  const positive = lowest(1);
  const negative = lowest(-1);
  // Slots run from 0 to 360: one way goes down through 0, the other up through 180.
  const top = (from: number, to: number): number => {
    let best = from;
    for (let s = from; ; s = (s + 1) % count) {
      if (energies[s]! > energies[best]!) best = s;
      if (s === to) return best;
    }
  };
  const over180 = top(positive, negative);
  const over0 = top(negative, positive);
  // With the minimum in the plane there are no two hands: the whole turn counts.
  const bottom = energies.indexOf(floor);
  const planar = Math.abs(angle(bottom)) < 1.5 * step || Math.abs(angle(bottom)) > 180 - 1.5 * step;
  const whole = energies.indexOf(Math.max(...energies));
  const peak = planar ? whole : energies[over180]! < energies[over0]! ? over180 : over0;
  const barrier = energies[peak]! - floor;
  return {
    points: Array.from(energies, (energy, s) => ({ degrees: angle(s), energy: energy - floor })).sort(
      (a, b) => a.degrees - b.degrees,
    ),
    barrier,
    through: angle(peak),
    laPlanteClass: laPlanteClass(barrier),
    halfLife: eyringHalfLife(barrier),
    warning: SCAN_WARNING,
  };
}

/** Atoms on the side of `k`, or null when the bond is in a ring. */
function farSide(molecule: Molecule, j: number, k: number): number[] | null {
  const seen = new Set([k]);
  const queue = [k];
  for (const atom of queue) {
    for (let p = molecule.neighbourStart[atom]!; p < molecule.neighbourStart[atom + 1]!; p++) {
      const next = molecule.neighbours[p]!;
      if (atom === k && next === j) continue;
      if (next === j) return null;
      if (!seen.has(next)) {
        seen.add(next);
        queue.push(next);
      }
    }
  }
  return queue;
}

/** Turns atoms about the axis j-k so that the torsion grows by `degrees`. */
function turn(x: Float64Array, j: number, k: number, atoms: readonly number[], degrees: number): void {
  const phi = (degrees * Math.PI) / 180;
  const ux = x[3 * k]! - x[3 * j]!;
  const uy = x[3 * k + 1]! - x[3 * j + 1]!;
  const uz = x[3 * k + 2]! - x[3 * j + 2]!;
  const norm = Math.hypot(ux, uy, uz);
  const [a, b, c] = [ux / norm, uy / norm, uz / norm];
  const cos = Math.cos(phi);
  const sin = Math.sin(phi);
  for (const atom of atoms) {
    const px = x[3 * atom]! - x[3 * k]!;
    const py = x[3 * atom + 1]! - x[3 * k + 1]!;
    const pz = x[3 * atom + 2]! - x[3 * k + 2]!;
    const along = (a * px + b * py + c * pz) * (1 - cos);
    x[3 * atom] = x[3 * k]! + px * cos + (b * pz - c * py) * sin + a * along;
    x[3 * atom + 1] = x[3 * k + 1]! + py * cos + (c * px - a * pz) * sin + b * along;
    x[3 * atom + 2] = x[3 * k + 2]! + pz * cos + (a * py - b * px) * sin + c * along;
  }
}

/** HOLD (1 - cos(τ - target)); adds the gradient (A. Blondel and M. Karplus, J. Comput. Chem. 1996, 17, 1132). */
function torsionRestraint(
  x: Float64Array,
  gradient: Float64Array,
  atoms: readonly [number, number, number, number],
  target: number,
): number {
  const [i, j, k, l] = atoms.map(atom => 3 * atom) as [number, number, number, number];
  const f = [x[i]! - x[j]!, x[i + 1]! - x[j + 1]!, x[i + 2]! - x[j + 2]!];
  const g = [x[j]! - x[k]!, x[j + 1]! - x[k + 1]!, x[j + 2]! - x[k + 2]!];
  const h = [x[l]! - x[k]!, x[l + 1]! - x[k + 1]!, x[l + 2]! - x[k + 2]!];
  const cross = (p: number[], q: number[]): number[] => [
    p[1]! * q[2]! - p[2]! * q[1]!,
    p[2]! * q[0]! - p[0]! * q[2]!,
    p[0]! * q[1]! - p[1]! * q[0]!,
  ];
  const dot = (p: number[], q: number[]): number => p[0]! * q[0]! + p[1]! * q[1]! + p[2]! * q[2]!;
  const a = cross(f, g);
  const b = cross(h, g);
  const aa = Math.max(dot(a, a), 1e-10);
  const bb = Math.max(dot(b, b), 1e-10);
  const gg = Math.max(Math.sqrt(dot(g, g)), 1e-8);
  const cosine = dot(a, b) / Math.sqrt(aa * bb);
  const sine = dot(cross(b, a), g) / (Math.sqrt(aa * bb) * gg);
  const off = Math.atan2(sine, cosine) - target;
  const slope = HOLD * Math.sin(off);
  const pa = (slope * gg) / aa;
  const pb = (slope * gg) / bb;
  const fg = (slope * dot(f, g)) / (aa * gg);
  const hg = (slope * dot(h, g)) / (bb * gg);
  for (let c = 0; c < 3; c++) {
    gradient[i + c]! -= pa * a[c]!;
    gradient[l + c]! += pb * b[c]!;
    gradient[j + c]! += (pa + fg) * a[c]! - hg * b[c]!;
    gradient[k + c]! += (hg - pb) * b[c]! - fg * a[c]!;
  }
  return HOLD * (1 - Math.cos(off));
}
