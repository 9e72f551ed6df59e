/**
 * Which atoms are bonded, from the distances between them alone.
 *
 * Two atoms bond when they are no further apart than the sum of their covalent radii and a tolerance. Hydrogen keeps its
 * nearest partner only; an atom with more partners than its element can have loses those that are relatively longest.
 * The tolerance is common practice, no source; the radii are those of Cordero et al. (covalent-radii.ts).
 */
import { isMetal } from '../chemistry/elements.ts';
import { covalentRadius } from './covalent-radii.ts';

/** Added to the sum of the radii, Å. */
export const BOND_TOLERANCE = 0.4;
/** The same between two atoms of the second period (the longest C–C bonds known are 1.8 Å), and between two halogens. */
export const SECOND_PERIOD_TOLERANCE = 0.3;
export const HALOGEN_TOLERANCE = 0.2;
/** The same where one partner is a metal. */
export const METAL_TOLERANCE = 0.3;
/** Atoms nearer than this fraction of the sum of their radii are one atom in two places, not a bond. */
export const OVERLAP_FRACTION = 0.55;

/** Longest bond between two elements, Å; 0 where they never bond (H–H aside from H2, the metals of groups 1 and 2 that form ions). */
export function longestBond(z1: number, z2: number): number {
  if (z1 === 0 || z2 === 0 || isIonic(z1) || isIonic(z2) || isNoble(z1) || isNoble(z2)) return 0;
  return covalentRadius(z1) + covalentRadius(z2) + tolerance(z1, z2);
}

function tolerance(z1: number, z2: number): number {
  if (isMetal(z1) || isMetal(z2)) return METAL_TOLERANCE;
  const second = (z: number): boolean => z >= 6 && z <= 9;
  if (second(z1) && second(z2)) return SECOND_PERIOD_TOLERANCE;
  const halogen = (z: number): boolean => z === 17 || z === 35 || z === 53;
  return halogen(z1) && halogen(z2) ? HALOGEN_TOLERANCE : BOND_TOLERANCE;
}

/** Na, K, Rb, Cs, Ca, Sr, Ba and their heavier kin: contacts of their ions are no bonds. */
function isIonic(z: number): boolean {
  return (
    z === 11 || z === 19 || z === 37 || z === 55 || z === 87 || z === 20 || z === 38 || z === 56 || z === 88
  );
}

function isNoble(z: number): boolean {
  return z === 2 || z === 10 || z === 18;
}

export interface BondSearch {
  readonly elements: Uint8Array;
  /** Å, three an atom; atoms with NaN have no bonds. */
  readonly coordinates: Float64Array;
  /** Atoms of two different numbers other than 0 never bond (alternative locations); null where there are none. */
  readonly groups?: Int32Array | null;
}

export interface FoundBonds {
  /** Two atoms a bond, the lower index first, in ascending order. */
  readonly pairs: Uint32Array;
  /** Atoms at which a partner within reach was dropped, or that overlap another. */
  readonly doubtful: Uint8Array;
}

/** Most partners an atom may have; larger numbers are not judged. */
function mostPartners(z: number): number {
  switch (z) {
    case 1:
      return 1;
    case 6:
    case 7:
      return 4;
    case 8:
      return 3;
    case 9:
      return 1;
    case 14:
    case 15:
    case 16:
      return 6;
    default:
      return 12;
  }
}

/** Finds the bonds of a set of atoms; a grid of cells keeps the time proportional to their number. */
export function bondsFromCoordinates(search: BondSearch): FoundBonds {
  const { elements, coordinates: r } = search;
  const groups = search.groups ?? null;
  const n = elements.length;
  const doubtful = new Uint8Array(n);
  const present = new Set(elements);
  let reach = 0;
  const table = new Float64Array(128 * 128);
  for (const a of present) {
    for (const b of present) {
      const longest = longestBond(a, b);
      table[a * 128 + b] = longest;
      reach = Math.max(reach, longest);
    }
  }
  const raw = closePairs(r, n, reach, (i, j, squared) => {
    const longest = table[elements[i]! * 128 + elements[j]!]!;
    return (
      squared <= longest * longest &&
      !(groups && groups[i] !== groups[j] && groups[i] !== 0 && groups[j] !== 0)
    );
  });
  return prune(elements, r, raw, doubtful);
}

/** Pairs i < j within `reach` that `wanted` accepts. */
export function closePairs(
  r: Float64Array,
  n: number,
  reach: number,
  wanted: (i: number, j: number, squared: number) => boolean,
): number[] {
  const pairs: number[] = [];
  if (n === 0 || reach <= 0) return pairs;
  let [lowX, lowY, lowZ] = [Infinity, Infinity, Infinity];
  let [highX, highY, highZ] = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < n; i++) {
    const x = r[3 * i]!;
    const y = r[3 * i + 1]!;
    const z = r[3 * i + 2]!;
    if (!Number.isFinite(x + y + z)) continue;
    lowX = Math.min(lowX, x);
    lowY = Math.min(lowY, y);
    lowZ = Math.min(lowZ, z);
    highX = Math.max(highX, x);
    highY = Math.max(highY, y);
    highZ = Math.max(highZ, z);
  }
  if (lowX > highX) return pairs;
  // Larger cells where the atoms are far apart, so that the grid stays small.
  const most = 128;
  const side = Math.max(reach, (highX - lowX) / most, (highY - lowY) / most, (highZ - lowZ) / most);
  const nx = Math.floor((highX - lowX) / side) + 1;
  const ny = Math.floor((highY - lowY) / side) + 1;
  const nz = Math.floor((highZ - lowZ) / side) + 1;
  const cellOf = new Int32Array(n).fill(-1);
  const start = new Int32Array(nx * ny * nz + 1);
  for (let i = 0; i < n; i++) {
    if (!Number.isFinite(r[3 * i]! + r[3 * i + 1]! + r[3 * i + 2]!)) continue;
    const cx = Math.floor((r[3 * i]! - lowX) / side);
    const cy = Math.floor((r[3 * i + 1]! - lowY) / side);
    const cz = Math.floor((r[3 * i + 2]! - lowZ) / side);
    const cell = (cx * ny + cy) * nz + cz;
    cellOf[i] = cell;
    start[cell + 1]!++;
  }
  for (let c = 0; c < start.length - 1; c++) start[c + 1]! += start[c]!;
  const fill = start.slice();
  const order = new Int32Array(n);
  for (let i = 0; i < n; i++) if (cellOf[i]! >= 0) order[fill[cellOf[i]!]!++] = i;
  const limit = reach * reach;
  for (let i = 0; i < n; i++) {
    const cell = cellOf[i]!;
    if (cell < 0) continue;
    const cz = cell % nz;
    const cy = Math.floor(cell / nz) % ny;
    const cx = Math.floor(cell / (nz * ny));
    const from = pairs.length;
    for (let x = Math.max(0, cx - 1); x <= Math.min(nx - 1, cx + 1); x++) {
      for (let y = Math.max(0, cy - 1); y <= Math.min(ny - 1, cy + 1); y++) {
        const z0 = (x * ny + y) * nz + Math.max(0, cz - 1);
        const z1 = (x * ny + y) * nz + Math.min(nz - 1, cz + 1);
        for (let k = start[z0]!; k < start[z1 + 1]!; k++) {
          const j = order[k]!;
          if (j <= i) continue;
          const dx = r[3 * j]! - r[3 * i]!;
          const dy = r[3 * j + 1]! - r[3 * i + 1]!;
          const dz = r[3 * j + 2]! - r[3 * i + 2]!;
          const squared = dx * dx + dy * dy + dz * dz;
          if (squared <= limit && wanted(i, j, squared)) pairs.push(i, j);
        }
      }
    }
    sortPartners(pairs, from);
  }
  return pairs;
}

/** Orders the pairs from `from` on by their second atom (few at a time: insertion). */
function sortPartners(pairs: number[], from: number): void {
  for (let k = from + 2; k < pairs.length; k += 2) {
    const value = pairs[k + 1]!;
    let at = k - 2;
    while (at >= from && pairs[at + 1]! > value) {
      pairs[at + 3] = pairs[at + 1]!;
      at -= 2;
    }
    pairs[at + 3] = value;
  }
}

function distance(r: Float64Array, i: number, j: number): number {
  return Math.hypot(r[3 * i]! - r[3 * j]!, r[3 * i + 1]! - r[3 * j + 1]!, r[3 * i + 2]! - r[3 * j + 2]!);
}

/** Removes what cannot be a bond though the distance would allow it. */
function prune(elements: Uint8Array, r: Float64Array, raw: number[], doubtful: Uint8Array): FoundBonds {
  const n = elements.length;
  const count = raw.length / 2;
  const kept = new Uint8Array(count).fill(1);
  const relative = new Float64Array(count);
  const partners: number[][] = Array.from({ length: n }, () => []);
  for (let b = 0; b < count; b++) {
    const i = raw[2 * b]!;
    const j = raw[2 * b + 1]!;
    const sum = covalentRadius(elements[i]!) + covalentRadius(elements[j]!);
    relative[b] = distance(r, i, j) / sum;
    if (relative[b]! < OVERLAP_FRACTION) {
      kept[b] = 0;
      doubtful[i] = doubtful[j] = 1;
      continue;
    }
    partners[i]!.push(b);
    partners[j]!.push(b);
  }
  const other = (b: number, i: number): number => (raw[2 * b] === i ? raw[2 * b + 1]! : raw[2 * b]!);
  // Hydrogen: the nearest atom that is no hydrogen and no metal, then the nearest of all.
  for (let i = 0; i < n; i++) {
    if (elements[i] !== 1) continue;
    const list = partners[i]!.filter(b => kept[b]);
    if (list.length < 2) continue;
    const cost = (b: number): number => {
      const z = elements[other(b, i)]!;
      return relative[b]! + (z === 1 ? 20 : isMetal(z) ? 10 : 0);
    };
    list.sort((a, b) => cost(a) - cost(b));
    for (const b of list.slice(1)) kept[b] = 0;
  }
  for (let i = 0; i < n; i++) {
    const z = elements[i]!;
    if (isMetal(z)) continue;
    let list = partners[i]!.filter(b => kept[b]);
    // A metal beside a nitrogen, carbon or boron that has all its partners already is a contact, as at a chelating nitrate.
    const metals = list.filter(b => isMetal(elements[other(b, i)]!));
    if (metals.length > 0) {
      const rest = list.filter(b => !metals.includes(b));
      const oxo = rest.filter(b => elements[other(b, i)] === 8).length;
      const full = (z === 6 && (rest.length >= 4 || oxo >= 2)) || (z === 7 && (rest.length >= 4 || oxo >= 2));
      if (full) {
        for (const b of metals) kept[b] = 0;
        list = rest;
      }
    }
    const boron = list.some(b => elements[other(b, i)] === 5);
    const most = mostPartners(z);
    if (list.length <= most || boron || metals.length > 0) continue;
    list.sort((a, b) => relative[a]! - relative[b]!);
    for (const b of list.slice(most)) {
      kept[b] = 0;
      doubtful[i] = 1;
      doubtful[other(b, i)] = 1;
    }
  }
  let total = 0;
  for (let b = 0; b < count; b++) total += kept[b]!;
  const pairs = new Uint32Array(2 * total);
  let at = 0;
  for (let b = 0; b < count; b++) {
    if (!kept[b]) continue;
    pairs[at++] = raw[2 * b]!;
    pairs[at++] = raw[2 * b + 1]!;
  }
  return { pairs, doubtful };
}
