/**
 * Sequence Rule 5 (P-92.6): a ligand with descriptor R, M or z precedes its enantiomorph with S, P or e.
 *
 * The mirror image of a molecule is ranked with the sides exchanged. Where that reverses an odd number of pairs of
 * ligands, reflection leaves the descriptor as it is: the unit is pseudoasymmetric, its letter lower case.
 */
import type { NodeRule } from './rule.ts';
import { sideAt } from './rule4b.ts';

/** Rule 5 as it stands (`preferred` 1), or as it ranks the mirror image (-1). */
export function rule5Preferring(preferred: 1 | -1): NodeRule {
  return { name: '5', key: (digraph, node) => preferred * sideAt(digraph, node) };
}
