/** Descriptors as small numbers, for the arrays of the digraph, and what the sequence rules see in each. */
import type { Descriptor } from '../docket.ts';

export const Letter = {
  none: 0,
  R: 1,
  S: 2,
  r: 3,
  s: 4,
  M: 5,
  P: 6,
  m: 7,
  p: 8,
  E: 9,
  Z: 10,
  e: 11,
  z: 12,
} as const;
export type Letter = (typeof Letter)[keyof typeof Letter];

const NAMES: readonly (Descriptor | null)[] = [
  null,
  'R',
  'S',
  'r',
  's',
  'M',
  'P',
  'm',
  'p',
  'E',
  'Z',
  'e',
  'z',
];

/** The descriptor a letter stands for; null for none. */
export function descriptorOf(letter: number): Descriptor | null {
  return NAMES[letter] ?? null;
}

/**
 * The side a chiral descriptor takes in Rules 4b and 5: 1 for R, M and z (seqcis, reflection-variant), -1 for S, P
 * and e, 0 for all others. Rule 5 ranks 1 over -1 (P-92.6); two descriptors of one side are like (P-92.5.2).
 */
export function side(letter: number): 1 | -1 | 0 {
  switch (letter) {
    case Letter.R:
    case Letter.M:
    case Letter.z:
      return 1;
    case Letter.S:
    case Letter.P:
    case Letter.e:
      return -1;
    default:
      return 0;
  }
}

/** Whether a letter of a chiral kind of unit stays the same on reflection: r, s, m, p. */
export function isReflectionInvariant(letter: number): boolean {
  return letter === Letter.r || letter === Letter.s || letter === Letter.m || letter === Letter.p;
}
