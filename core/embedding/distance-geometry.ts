/**
 * Coordinates from bounds: random distances, embedding in four dimensions, and refinement against distances, chirality and
 * planarity (T. F. Havel, I. D. Kuntz and G. M. Crippen, Bull. Math. Biol. 1983, 45, 665; four-dimensional start: S. Riniker and
 * G. A. Landrum, J. Chem. Inf. Model. 2015, 55, 2562).
 */
import type { VolumeConstraints } from './chirality.ts';
import { minimise } from './minimise.ts';
import { type Bounds, smooth } from './smoothing.ts';

const DIMENSIONS = 4;
const POWER_ROUNDS = 60;
/** Atoms whose distances are drawn one by one with smoothing in between (partial metrisation: J. Kuszewski, M. Nilges and A. T. Brünger, J. Biomol. NMR 1992, 2, 33). */
const METRISED = 4;

/** Bounds as pairs, squared, for refinement. */
export interface PairBounds {
  readonly count: number;
  readonly atoms: Int32Array;
  /** Lower and upper bound, squared. */
  readonly squares: Float64Array;
}

export function pairBounds(bounds: Bounds): PairBounds {
  const { n, lower, upper } = bounds;
  const count = (n * (n - 1)) / 2;
  const atoms = new Int32Array(2 * count);
  const squares = new Float64Array(2 * count);
  let t = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      atoms[2 * t] = i;
      atoms[2 * t + 1] = j;
      squares[2 * t] = lower[i * n + j]! ** 2;
      squares[2 * t + 1] = upper[i * n + j]! ** 2;
      t++;
    }
  }
  return { count, atoms, squares };
}

/** Coordinates in four dimensions (four numbers an atom) from distances drawn between the bounds. */
export function startCoordinates(bounds: Bounds, random: () => number, metrise: boolean): Float64Array {
  const { n } = bounds;
  const distances = new Float64Array(n * n);
  const drawn: Bounds = metrise ? { n, lower: bounds.lower.slice(), upper: bounds.upper.slice() } : bounds;
  if (metrise) {
    for (let m = 0; m < Math.min(METRISED, n); m++) {
      const i = Math.floor(random() * n);
      for (let j = 0; j < n; j++) {
        if (i === j) continue;
        const l = drawn.lower[i * n + j]!;
        const u = drawn.upper[i * n + j]!;
        const d = l + (u - l) * random();
        fix(drawn, i, j, d);
      }
    }
  }
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const l = drawn.lower[i * n + j]!;
      const u = drawn.upper[i * n + j]!;
      const d = l + (Math.max(u, l) - l) * random();
      distances[i * n + j] = distances[j * n + i] = d * d;
    }
  }
  // Metric matrix about the centroid.
  const centre = new Float64Array(n);
  let total = 0;
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += distances[i * n + j]!;
    centre[i] = sum / n;
    total += sum;
  }
  total /= 2 * n * n;
  for (let i = 0; i < n; i++) centre[i]! -= total;
  const metric = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) metric[i * n + j] = 0.5 * (centre[i]! + centre[j]! - distances[i * n + j]!);
  }
  const x = new Float64Array(DIMENSIONS * n);
  let v = new Float64Array(n);
  let w = new Float64Array(n);
  for (let d = 0; d < DIMENSIONS; d++) {
    for (let i = 0; i < n; i++) v[i] = random() - 0.5;
    let value = 0;
    for (let round = 0; round < POWER_ROUNDS; round++) {
      let norm = 0;
      for (let i = 0; i < n; i++) norm += v[i]! * v[i]!;
      norm = 1 / Math.sqrt(norm || 1);
      for (let i = 0; i < n; i++) v[i]! *= norm;
      value = 0;
      for (let i = 0; i < n; i++) {
        let sum = 0;
        const row = i * n;
        for (let j = 0; j < n; j++) sum += metric[row + j]! * v[j]!;
        w[i] = sum;
        value += sum * v[i]!;
      }
      [v, w] = [w, v];
    }
    let norm = 0;
    for (let i = 0; i < n; i++) norm += v[i]! * v[i]!;
    norm = 1 / Math.sqrt(norm || 1);
    if (value > 0) {
      const scale = Math.sqrt(value);
      for (let i = 0; i < n; i++) {
        v[i]! *= norm;
        x[DIMENSIONS * i + d] = scale * v[i]!;
      }
    } else {
      for (let i = 0; i < n; i++) {
        v[i]! *= norm;
        x[DIMENSIONS * i + d] = 2 * (random() - 0.5);
      }
    }
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) metric[i * n + j]! -= value * v[i]! * v[j]!;
    }
  }
  return x;
}

/** Fixes one distance and tightens what it touches. */
function fix(bounds: Bounds, i: number, j: number, d: number): void {
  const { n, lower, upper } = bounds;
  lower[i * n + j] = lower[j * n + i] = d;
  upper[i * n + j] = upper[j * n + i] = d;
  for (let k = 0; k < n; k++) {
    if (k === i || k === j) continue;
    tighten(bounds, i, k, Math.max(d - upper[j * n + k]!, lower[j * n + k]! - d), d + upper[j * n + k]!);
    tighten(bounds, j, k, Math.max(d - upper[i * n + k]!, lower[i * n + k]! - d), d + upper[i * n + k]!);
  }
}

function tighten(bounds: Bounds, i: number, k: number, least: number, most: number): void {
  const { n, lower, upper } = bounds;
  if (most < upper[i * n + k]!) upper[i * n + k] = upper[k * n + i] = Math.max(most, lower[i * n + k]!);
  if (least > lower[i * n + k]!) lower[i * n + k] = lower[k * n + i] = Math.min(least, upper[i * n + k]!);
}

/** Weights of the terms of the refinement. */
export interface RefineWeights {
  readonly volume: number;
  /** Penalty on the fourth coordinate; unused in three dimensions. */
  readonly fourth: number;
  readonly flat: number;
}

/** Error of coordinates against bounds, chirality and planarity; adds the gradient. `stride` is 3 or 4. */
export function refinementError(
  pairs: PairBounds,
  volumes: VolumeConstraints,
  flatAtoms: Int32Array,
  weights: RefineWeights,
  stride: 3 | 4,
): (x: Float64Array, g: Float64Array) => number {
  const { count, atoms, squares } = pairs;
  const four = stride === 4;
  return (x, g) => {
    let error = 0;
    for (let t = 0; t < count; t++) {
      const i = stride * atoms[2 * t]!;
      const j = stride * atoms[2 * t + 1]!;
      const dx = x[i]! - x[j]!;
      const dy = x[i + 1]! - x[j + 1]!;
      const dz = x[i + 2]! - x[j + 2]!;
      const dw = four ? x[i + 3]! - x[j + 3]! : 0;
      const d2 = dx * dx + dy * dy + dz * dz + dw * dw;
      const u2 = squares[2 * t + 1]!;
      let slope: number;
      if (d2 > u2) {
        const v = d2 / u2 - 1;
        error += v * v;
        slope = (4 * v) / u2;
      } else {
        const l2 = squares[2 * t]!;
        if (d2 >= l2) continue;
        const sum = l2 + d2;
        const v = (2 * l2) / sum - 1;
        error += v * v;
        slope = (-8 * v * l2) / (sum * sum);
      }
      g[i]! += slope * dx;
      g[i + 1]! += slope * dy;
      g[i + 2]! += slope * dz;
      g[j]! -= slope * dx;
      g[j + 1]! -= slope * dy;
      g[j + 2]! -= slope * dz;
      if (four) {
        g[i + 3]! += slope * dw;
        g[j + 3]! -= slope * dw;
      }
    }
    for (let t = 0; t < volumes.count; t++) {
      error += volumeTerm(
        volumes.atoms,
        4 * t,
        x,
        g,
        stride,
        weights.volume,
        volumes.sign[t]!,
        1.6 * volumes.least[t]!,
      );
    }
    if (weights.flat > 0) {
      for (let t = 0; t < flatAtoms.length; t += 4)
        error += volumeTerm(flatAtoms, t, x, g, stride, weights.flat, 0, 0);
    }
    if (four) {
      for (let i = 3; i < x.length; i += 4) {
        error += weights.fourth * x[i]! * x[i]!;
        g[i]! += 2 * weights.fourth * x[i]!;
      }
    }
    return error;
  };
}

/** w (least - sign V)² where it is short; with sign 0 w V². */
function volumeTerm(
  list: Int32Array,
  at: number,
  x: Float64Array,
  g: Float64Array,
  stride: number,
  weight: number,
  sign: number,
  least: number,
): number {
  const a = stride * list[at]!;
  const b = stride * list[at + 1]!;
  const c = stride * list[at + 2]!;
  const d = stride * list[at + 3]!;
  const ax = x[a]! - x[d]!;
  const ay = x[a + 1]! - x[d + 1]!;
  const az = x[a + 2]! - x[d + 2]!;
  const bx = x[b]! - x[d]!;
  const by = x[b + 1]! - x[d + 1]!;
  const bz = x[b + 2]! - x[d + 2]!;
  const cx = x[c]! - x[d]!;
  const cy = x[c + 1]! - x[d + 1]!;
  const cz = x[c + 2]! - x[d + 2]!;
  const px = by * cz - bz * cy;
  const py = bz * cx - bx * cz;
  const pz = bx * cy - by * cx;
  const volume = ax * px + ay * py + az * pz;
  let value: number;
  let slope: number;
  if (sign === 0) {
    value = weight * volume * volume;
    slope = 2 * weight * volume;
  } else {
    const short = least - sign * volume;
    if (short <= 0) return 0;
    value = weight * short * short;
    slope = -2 * weight * short * sign;
  }
  const qx = cy * az - cz * ay;
  const qy = cz * ax - cx * az;
  const qz = cx * ay - cy * ax;
  const rx = ay * bz - az * by;
  const ry = az * bx - ax * bz;
  const rz = ax * by - ay * bx;
  g[a]! += slope * px;
  g[a + 1]! += slope * py;
  g[a + 2]! += slope * pz;
  g[b]! += slope * qx;
  g[b + 1]! += slope * qy;
  g[b + 2]! += slope * qz;
  g[c]! += slope * rx;
  g[c + 1]! += slope * ry;
  g[c + 2]! += slope * rz;
  g[d]! -= slope * (px + qx + rx);
  g[d + 1]! -= slope * (py + qy + ry);
  g[d + 2]! -= slope * (pz + qz + rz);
  return value;
}

/** Coordinates in three dimensions that satisfy the bounds as far as they go; `error` is what is left. */
export function embedOnce(
  bounds: Bounds,
  pairs: PairBounds,
  volumes: VolumeConstraints,
  flatAtoms: Int32Array,
  random: () => number,
  metrise: boolean,
): { readonly x: Float64Array; readonly error: number } {
  const { n } = bounds;
  const x4 = startCoordinates(bounds, random, metrise);
  minimise(refinementError(pairs, volumes, flatAtoms, { volume: 1, fourth: 0.1, flat: 0 }, 4), x4, {
    iterations: 150,
    gradient: 2e-3,
    step: 1,
    stall: 1e-3,
  });
  minimise(refinementError(pairs, volumes, flatAtoms, { volume: 0.3, fourth: 1, flat: 0.05 }, 4), x4, {
    iterations: 200,
    gradient: 1e-3,
    step: 0.5,
    stall: 1e-4,
  });
  const x = new Float64Array(3 * n);
  for (let i = 0; i < n; i++) {
    x[3 * i] = x4[4 * i]!;
    x[3 * i + 1] = x4[4 * i + 1]!;
    x[3 * i + 2] = x4[4 * i + 2]!;
  }
  const { value } = minimise(
    refinementError(pairs, volumes, flatAtoms, { volume: 0.3, fourth: 0, flat: 0.1 }, 3),
    x,
    {
      iterations: 200,
      gradient: 1e-3,
      step: 0.3,
      stall: 1e-4,
    },
  );
  return { x, error: value };
}

/** Smooths bounds; where they contradict, the contacts yield step by step. Returns null when even that fails. */
export function smoothed(raw: Bounds, sep: Uint8Array): Bounds | null {
  const { n } = raw;
  for (const [slack, share] of [
    [0.02, 1],
    [0.1, 0.6],
    [0.5, 0.3],
  ] as const) {
    const lower = raw.lower.slice();
    if (share < 1) for (let t = 0; t < n * n; t++) if (sep[t] === 0 || sep[t]! > 3) lower[t]! *= share;
    const bounds: Bounds = { n, lower, upper: raw.upper.slice() };
    if (smooth(bounds, slack) === null) return bounds;
  }
  return null;
}
