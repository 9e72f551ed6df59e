/**
 * Colour refinement: nodes of two graphs get the same colour only if their surroundings agree to every distance
 * (one-dimensional Weisfeiler-Leman, in the form of B. Weisfeiler, A. Leman, Nauchno-Tekhn. Inform. 1968, 2(9), 12).
 *
 * Colours are 32-bit hashes, so those of different graphs compare directly; a collision makes a class too large,
 * which the search that follows puts right, and never too small.
 */
import type { Fragment } from './fragment.ts';

/** How closely atoms must agree to be exchanged for one another. */
export type Level =
  /** Element, mass number, and for carbon its hydrogens and π bonds. */
  | 'isotopic'
  /** Element, and for carbon its hydrogens and π bonds: tolerates protonation and tautomers between heteroatoms. */
  | 'bonded'
  /** Element alone: tolerates missing and wrong bond orders. */
  | 'skeletal';

/** Mixes a value into a hash (the finaliser of the 32-bit MurmurHash3, public domain). */
export function mix(hash: number, value: number): number {
  let h = Math.imul(hash ^ value, 0x85ebca6b);
  h ^= h >>> 13;
  h = Math.imul(h, 0xc2b2ae35);
  return h ^ (h >>> 16);
}

/** Colours before any refinement. */
export function initialColours(fragment: Fragment, level: Level): Int32Array {
  const colours = new Int32Array(fragment.count);
  for (let v = 0; v < fragment.count; v++) {
    let colour = mix(0x2545f491, fragment.elements[v]!);
    if (level !== 'skeletal' && fragment.elements[v] === 6) {
      colour = mix(colour, 1 + fragment.pi[v]! * 16 + fragment.hydrogens[v]!);
    }
    if (level === 'isotopic') colour = mix(colour, 0x5000 + fragment.isotopes[v]!);
    colours[v] = colour;
  }
  return colours;
}

/** Number of distinct colours. */
export function countColours(colours: Int32Array): number {
  const sorted = colours.slice().sort();
  let count = sorted.length > 0 ? 1 : 0;
  for (let v = 1; v < sorted.length; v++) if (sorted[v] !== sorted[v - 1]) count++;
  return count;
}

function refineOnce(fragment: Fragment, colours: Int32Array, out: Int32Array): void {
  const { start, adjacent, count } = fragment;
  for (let v = 0; v < count; v++) {
    let sum = 0;
    for (let k = start[v]!; k < start[v + 1]!; k++) sum = (sum + mix(0x1b873593, colours[adjacent[k]!]!)) | 0;
    out[v] = mix(mix(0x7feb352d, colours[v]!), sum);
  }
}

/** Refines for a given number of rounds; the input is left alone. */
export function refineRounds(fragment: Fragment, colours: Int32Array, rounds: number): Int32Array {
  let current = colours.slice();
  let next = new Int32Array(fragment.count);
  for (let round = 0; round < rounds; round++) {
    refineOnce(fragment, current, next);
    [current, next] = [next, current];
  }
  return current;
}

/** Refines until no class splits any more; `rounds` brings another graph to comparable colours. */
export function refine(fragment: Fragment, colours: Int32Array): { colours: Int32Array; rounds: number } {
  let current = colours.slice();
  let next = new Int32Array(fragment.count);
  let classes = countColours(current);
  let rounds = 0;
  while (classes < fragment.count) {
    refineOnce(fragment, current, next);
    rounds++;
    [current, next] = [next, current];
    const now = countColours(current);
    if (now <= classes) break;
    classes = now;
  }
  return { colours: current, rounds };
}

/** Whether both colourings hold the same colours equally often. */
export function sameColours(first: Int32Array, second: Int32Array): boolean {
  if (first.length !== second.length) return false;
  const a = first.slice().sort();
  const b = second.slice().sort();
  for (let v = 0; v < a.length; v++) if (a[v] !== b[v]) return false;
  return true;
}
