/**
 * Sequence Rule 1a (P-92.2.1): higher atomic number precedes lower.
 *
 * Duplicate atoms count with the atomic number of the atom they duplicate; in mancude rings with the mean over the
 * positions that the double bond can take (P-92.1.4.4); phantom atoms with 0.
 */
import type { NodeRule } from './rule.ts';

export const rule1a: NodeRule = {
  name: '1a',
  key: (digraph, node) => digraph.atomicNumber[node]!,
};
