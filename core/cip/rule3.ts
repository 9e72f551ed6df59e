/**
 * Sequence Rule 3 (P-92.4): among double bonds and extended cis-trans cumulenes, Z precedes E, and E precedes a
 * bond that is not stereogenic.
 *
 * The descriptors are auxiliary: determined within the digraph of the unit under examination.
 */
import { Letter } from './letter.ts';
import type { NodeRule } from './rule.ts';

export const rule3: NodeRule = {
  name: '3',
  key(digraph, node) {
    const letter = digraph.auxiliaryBond[node];
    if (letter === Letter.Z) return 2;
    return letter === Letter.E ? 1 : 0;
  },
};
