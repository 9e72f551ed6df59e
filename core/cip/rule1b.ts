/**
 * Sequence Rule 1b (P-92.2.2), in the wording that J. Chem. Inf. Model. 2018, 58, 1755 proposes: lower root distance
 * precedes higher root distance.
 *
 * The root distance of a ring duplicate is the sphere of the atom it duplicates; of a multiple-bond duplicate the
 * sphere of the atom it is attached to, so that the choice of a Kekulé structure has no influence; of any other
 * node its own sphere.
 */
import { type Digraph, Nature } from './digraph.ts';
import type { NodeRule } from './rule.ts';

/** Root distance of a node that lies in sphere `depth` of the digraph seen from `root`. */
export function rootDistance(digraph: Digraph, node: number, depth: number, root: number): number {
  switch (digraph.nature[node]) {
    case Nature.ringDuplicate:
      return digraph.distance(root, digraph.original[node]!);
    case Nature.bondDuplicate:
      return depth - 1;
    default:
      return depth;
  }
}

export const rule1b: NodeRule = {
  name: '1b',
  key: (digraph, node, depth, root) => -rootDistance(digraph, node, depth, root),
};
