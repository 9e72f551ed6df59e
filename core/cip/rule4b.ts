/**
 * Sequence Rule 4b (P-92.5.2): like descriptor pairs precede unlike descriptor pairs.
 *
 * In each ligand the descriptor of its highest-ranked stereogenic unit is the reference; where several units share
 * that rank, the descriptor that most of them carry, and both where they are as many. Every descriptor of the
 * ligand, in order of rank, forms a pair with the reference: like when both are of {R, M, z} or both of {S, P, e}.
 */
import type { Digraph } from './digraph.ts';
import { side } from './letter.ts';
import type { NodeRule } from './rule.ts';

/** The side of the chiral descriptor at a node, 0 where there is none. */
export function sideAt(digraph: Digraph, node: number): 1 | -1 | 0 {
  const own = side(digraph.auxiliary[node]!);
  return own === 0 ? side(digraph.auxiliaryBond[node]!) : own;
}

/** Like (2) before unlike (1) before none (0), against a reference on the given side. */
export function rule4bAgainst(reference: 1 | -1): NodeRule {
  return {
    name: '4b',
    key(digraph, node) {
      const here = sideAt(digraph, node);
      if (here === 0) return 0;
      return here === reference ? 2 : 1;
    },
  };
}

/** The references that a set of units of one rank gives: none, the majority, or both sides where they are equal in number. */
export function referencesOf(right: number, left: number): readonly (1 | -1)[] {
  if (right === 0 && left === 0) return [];
  if (right > left) return [1];
  return left > right ? [-1] : [1, -1];
}
