/**
 * Sequence Rule 1b (P-92.2.2), in the wording that J. Chem. Inf. Model. 2018, 58, 1755 proposes: lower root distance
 * precedes higher root distance.
 *
 * The root distance of a ring duplicate is the sphere of the atom it duplicates; of a multiple-bond duplicate the
 * sphere of the atom it is attached to, so that the choice of a Kekulé structure has no influence; of any other
 * node its own sphere.
 *
 * The root is that of the digraph, also while an auxiliary descriptor is determined in it: there is one digraph and one
 * root (P-92.1.4.1), and "closer to the root" of P-92.2.2 means it. No entry of the 2018 suite depends on this.
 */
import { type Digraph, Nature } from './digraph.ts';
import type { NodeRule } from './rule.ts';

/** Root distance of a node that lies in sphere `depth` as it is seen now. */
export function rootDistance(digraph: Digraph, node: number, depth: number): number {
  switch (digraph.nature[node]) {
    case Nature.ringDuplicate:
      return digraph.depth[digraph.original[node]!]!;
    case Nature.bondDuplicate:
      return digraph.depth[digraph.parent[node]!]!;
    default:
      return depth;
  }
}

export const rule1b: NodeRule = {
  name: '1b',
  key: (digraph, node, depth) => -rootDistance(digraph, node, depth),
};
