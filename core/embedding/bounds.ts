/**
 * Bounds on all distances from the graph: bonds, angles, torsions and contacts (G. M. Crippen and T. F. Havel, Distance
 * Geometry and Molecular Conformation, 1988; knowledge of amides and esters: common practice, no source).
 */
import type { Molecule } from '../chemistry/molecule.ts';
import type { RingInfo } from '../chemistry/rings.ts';
import { angleAt, type IdealGeometry } from './ideal-geometry.ts';
import { vanDerWaalsRadius } from './radii.ts';
import type { Bounds } from './smoothing.ts';

/** Arrangement about a bond of two atoms, seen as cis (0°) or trans (180°), or free. */
export type BondShape = 'free' | 'planar';

export interface BoundsInput {
  readonly molecule: Molecule;
  readonly rings: RingInfo;
  readonly geometry: IdealGeometry;
  /** 1 for bonds about which all torsions are 0° or 180°. */
  readonly planarBonds: Uint8Array;
  /** For i-j-k-l about a planar bond: true cis, false trans, null undecided; key from `torsionKey`. */
  readonly cis: ReadonlyMap<number, boolean>;
}

const BOND_SLACK = 0.01;
/** Slack of 1-3 distances by the size of the smallest ring of the middle atom, Å (ours, no source). */
const ANGLE_SLACK = 0.04;
const RING_SLACK: Readonly<Record<number, number>> = { 3: 0.22, 4: 0.25, 5: 0.12, 6: 0.06 };
const SHARED_SLACK = 0.08;
const TORSION_SLACK = 0.08;
const FREE_SLACK = 0.06;
const FAR = 1000;
/** Share of the sum of van der Waals radii that atoms four bonds apart, and further, keep. */
const NEAR_SHARE = 0.7;
const FAR_SHARE = 0.82;
/** Largest torsion within a ring of each size, degrees; larger rings are free (common practice, no source). */
const RING_TORSION: Readonly<Record<number, number>> = { 4: 35, 5: 50, 6: 70, 7: 100, 8: 130 };

/** Key of a pair of end atoms. */
export function torsionKey(n: number, i: number, l: number): number {
  return i < l ? i * n + l : l * n + i;
}

/** Sets bounds for all pairs; nothing is smoothed yet. `sep` receives the number of bonds between atoms, up to 5. */
export function distanceBounds(input: BoundsInput, sep: Uint8Array): Bounds {
  const { molecule, rings, geometry } = input;
  const n = molecule.atomCount;
  const { neighbourStart, neighbours, neighbourBonds, elements } = molecule;
  const lower = new Float64Array(n * n);
  const upper = new Float64Array(n * n).fill(FAR);
  for (let i = 0; i < n; i++) upper[i * n + i] = 0;
  separations(molecule, sep);
  const set = (i: number, j: number, l: number, u: number): void => {
    lower[i * n + j] = lower[j * n + i] = l;
    upper[i * n + j] = upper[j * n + i] = u;
  };
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const d = sep[i * n + j]!;
      if (d > 0 && d < 4) continue;
      const share = d === 4 ? NEAR_SHARE : FAR_SHARE;
      let contact = share * (vanDerWaalsRadius(elements[i]!) + vanDerWaalsRadius(elements[j]!));
      // A hydrogen bond brings H and its acceptor closer than the radii say.
      if ((elements[i] === 1) !== (elements[j] === 1) && d > 4) contact = Math.min(contact, 1.8);
      set(i, j, contact, FAR);
    }
  }
  for (let b = 0; b < molecule.bondCount; b++) {
    const length = geometry.lengths[b]!;
    set(molecule.bondAtoms[2 * b]!, molecule.bondAtoms[2 * b + 1]!, length - BOND_SLACK, length + BOND_SLACK);
  }
  for (let j = 0; j < n; j++) {
    const start = neighbourStart[j]!;
    const count = neighbourStart[j + 1]! - start;
    let slack = rings.atomInRing[j] === 1 ? (RING_SLACK[rings.atomRingSize[j]!] ?? ANGLE_SLACK) : ANGLE_SLACK;
    if (rings.ringsAt[j]!.length > 1) slack += SHARED_SLACK;
    for (let a = 0; a < count; a++) {
      for (let b = a + 1; b < count; b++) {
        const i = neighbours[start + a]!;
        const k = neighbours[start + b]!;
        if (sep[i * n + k] !== 2) continue;
        const angle = angleAt(geometry, j, count, a, b);
        const p = geometry.lengths[neighbourBonds[start + a]!]!;
        const q = geometry.lengths[neighbourBonds[start + b]!]!;
        const d = Math.sqrt(Math.max(p * p + q * q - 2 * p * q * Math.cos(angle), 0));
        let l = d - slack;
        let u = Math.min(d + slack, p + q);
        const old = upper[i * n + k]!;
        if (old !== FAR) {
          // Rings of four: both paths; the union leaves room.
          l = Math.min(l, lower[i * n + k]!);
          u = Math.max(u, old);
        }
        set(i, k, l, u);
      }
    }
  }
  torsionBounds(input, sep, lower, upper);
  return { n, lower, upper };
}

function separations(molecule: Molecule, sep: Uint8Array): void {
  const n = molecule.atomCount;
  const { neighbourStart, neighbours } = molecule;
  const queue: number[] = [];
  for (let i = 0; i < n; i++) {
    queue.length = 0;
    queue.push(i);
    let from = 0;
    for (let step = 1; step <= 5; step++) {
      const to = queue.length;
      for (; from < to; from++) {
        const atom = queue[from]!;
        for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
          const next = neighbours[k]!;
          if (next !== i && sep[i * n + next] === 0) {
            sep[i * n + next] = step;
            queue.push(next);
          }
        }
      }
    }
  }
}

/** Distance of the ends of i-j-k-l at a torsion, Å. */
function endDistance(p: number, q: number, r: number, first: number, second: number, cosine: number): number {
  const x = q - p * Math.cos(first) - r * Math.cos(second);
  const a = p * Math.sin(first);
  const b = r * Math.sin(second);
  return Math.sqrt(Math.max(x * x + a * a + b * b - 2 * a * b * cosine, 0));
}

function torsionBounds(input: BoundsInput, sep: Uint8Array, lower: Float64Array, upper: Float64Array): void {
  const { molecule, rings, geometry, planarBonds, cis } = input;
  const n = molecule.atomCount;
  const { neighbourStart, neighbours, neighbourBonds, bondAtoms } = molecule;
  for (let b = 0; b < molecule.bondCount; b++) {
    const j = bondAtoms[2 * b]!;
    const k = bondAtoms[2 * b + 1]!;
    const jStart = neighbourStart[j]!;
    const kStart = neighbourStart[k]!;
    const jCount = neighbourStart[j + 1]! - jStart;
    const kCount = neighbourStart[k + 1]! - kStart;
    const atK = neighbours.subarray(kStart, kStart + kCount).indexOf(j);
    const atJ = neighbours.subarray(jStart, jStart + jCount).indexOf(k);
    const q = geometry.lengths[b]!;
    for (let a = 0; a < jCount; a++) {
      if (a === atJ) continue;
      const i = neighbours[jStart + a]!;
      const first = angleAt(geometry, j, jCount, a, atJ);
      const p = geometry.lengths[neighbourBonds[jStart + a]!]!;
      for (let c = 0; c < kCount; c++) {
        if (c === atK) continue;
        const l = neighbours[kStart + c]!;
        if (l === i || sep[i * n + l] !== 3) continue;
        const second = angleAt(geometry, k, kCount, c, atK);
        const r = geometry.lengths[neighbourBonds[kStart + c]!]!;
        const shape = planarBonds[b] === 1 ? cis.get(torsionKey(n, i, l)) : undefined;
        const ring = ringOfFour(rings, i, j, k, l);
        let lowCosine = 1;
        let highCosine = -1;
        let slack = FREE_SLACK;
        if (shape !== undefined) {
          lowCosine = highCosine = shape ? 1 : -1;
          slack = TORSION_SLACK;
        } else if (ring > 0) {
          highCosine = Math.cos(((RING_TORSION[ring] ?? 180) * Math.PI) / 180);
          slack = 0.12;
        }
        // Rings strain their angles: more room there.
        if (rings.bondInRing[b] === 1 && rings.bondRingSize[b]! < 6) slack += 0.12;
        const low = endDistance(p, q, r, first, second, lowCosine) - slack;
        const high = endDistance(p, q, r, first, second, highCosine) + slack;
        const old = upper[i * n + l]!;
        const known = old !== FAR;
        const newLow = known ? Math.min(Math.max(low, lower[i * n + l]!), Math.min(old, high)) : low;
        const newHigh = known ? Math.max(Math.min(high, old), newLow) : high;
        lower[i * n + l] = lower[l * n + i] = newLow;
        upper[i * n + l] = upper[l * n + i] = newHigh;
      }
    }
  }
}

/** Size of the smallest ring (up to 8) that holds four atoms in a row, else 0. */
export function ringOfFour(rings: RingInfo, i: number, j: number, k: number, l: number): number {
  let best = 0;
  for (const r of rings.ringsAt[j]!) {
    const ring = rings.rings[r]!;
    if (ring.length > 8 || (best > 0 && ring.length >= best)) continue;
    if (ring.includes(i) && ring.includes(k) && ring.includes(l)) best = ring.length;
  }
  return best;
}
