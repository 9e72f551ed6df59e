/**
 * Sequence Rule 6 (J. Chem. Inf. Model. 2018, 58, 1755; cases of P-93.5.3.2): an undifferentiated reference node has
 * priority over any other undifferentiated node.
 *
 * Where symmetry leaves two pairs, or three or four, of the ligands tied, one of them is taken as the reference; the
 * others are ranked by how soon that atom occurs in them. The descriptor stands only if each choice gives the same.
 */
import type { NodeRule } from './rule.ts';

export function rule6With(referenceAtom: number): NodeRule {
  return { name: '6', key: (digraph, node) => (digraph.atom[node] === referenceAtom ? 1 : 0) };
}
