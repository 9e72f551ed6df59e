/**
 * Sequence Rule 4a (P-92.5.1): chiral stereogenic units precede pseudoasymmetric ones, and these precede units that
 * are not stereogenic.
 */
import { type Digraph } from './digraph.ts';
import { Letter, side } from './letter.ts';
import type { NodeRule } from './rule.ts';

function standing(letter: number): number {
  if (letter === Letter.none || letter === Letter.E || letter === Letter.Z) return 0;
  return side(letter) !== 0 ? 2 : 1;
}

export const rule4a: NodeRule = {
  name: '4a',
  key: (digraph: Digraph, node: number) =>
    Math.max(standing(digraph.auxiliary[node]!), standing(digraph.auxiliaryBond[node]!)),
};
