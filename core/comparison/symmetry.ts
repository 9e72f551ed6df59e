/**
 * The symmetry of a coloured graph as far as chosen nodes are concerned: a stabiliser chain.
 *
 * Every automorphism is, on the base nodes, a product of one element from each level (C. C. Sims, in Computational
 * Problems in Abstract Algebra, 1970, 169), so that thousands of permutations of methyl and phenyl groups that move
 * no base node cost nothing, and the rest can be searched level by level.
 */
import type { Fragment } from './fragment.ts';
import { firstIsomorphism, planOf } from './isomorphism.ts';
import { mix, refine, refineRounds, sameColours } from './refinement.ts';

export interface SymmetryLevel {
  /** Base node of the level. */
  readonly node: number;
  /** Automorphisms that fix the base nodes of all earlier levels, one for each node of this node's orbit; the identity first. */
  readonly elements: readonly Int32Array[];
}

export interface Symmetry {
  readonly levels: readonly SymmetryLevel[];
  /** For each node: the number of levels after which its image is settled; -1 for a node that is not in the base. */
  readonly settledAfter: Int32Array;
}

/** Builds the chain for the base nodes in the given order. `colours` must be refined. */
export function symmetryOf(fragment: Fragment, colours: Int32Array, base: readonly number[]): Symmetry {
  const { count } = fragment;
  const settledAfter = new Int32Array(count).fill(-1);
  const levels: SymmetryLevel[] = [];
  const identity = Int32Array.from({ length: count }, (_, v) => v);
  let current = colours;
  let individual = 1;
  for (const node of base) {
    if (settledAfter[node] !== -1) continue;
    const cell: number[] = [];
    for (let v = 0; v < count; v++) if (current[v] === current[node]) cell.push(v);
    if (cell.length > 1) {
      const marked = current.slice();
      marked[node] = mix(marked[node]!, individual);
      const fixed = refine(fragment, marked);
      const plan = planOf(fragment, fixed.colours);
      const elements: Int32Array[] = [identity];
      for (const other of cell) {
        if (other === node) continue;
        const moved = current.slice();
        moved[other] = mix(moved[other]!, individual);
        const target = refineRounds(fragment, moved, fixed.rounds);
        if (!sameColours(fixed.colours, target)) continue;
        const element = firstIsomorphism(fragment, plan, fixed.colours, fragment, target);
        if (element) elements.push(element);
      }
      if (elements.length > 1) levels.push({ node, elements });
      current = fixed.colours;
      individual++;
    }
    settledAfter[node] = levels.length;
  }
  return { levels, settledAfter };
}
