/** Sequence Rule 4c (P-92.5.3): r precedes s and m precedes p. */
import { Letter } from './letter.ts';
import type { NodeRule } from './rule.ts';

function standing(letter: number): number {
  if (letter === Letter.r || letter === Letter.m) return 2;
  return letter === Letter.s || letter === Letter.p ? 1 : 0;
}

export const rule4c: NodeRule = {
  name: '4c',
  key: (digraph, node) => standing(digraph.auxiliary[node]!),
};
