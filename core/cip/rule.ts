/** What a sequence rule is to the comparison: a number for each node, higher first. */
import type { RuleName } from '../docket.ts';
import type { Digraph } from './digraph.ts';

/** A rule that compares node with node; 4b and 5, which look at whole branches, provide one for each choice they make. */
export interface NodeRule {
  readonly name: RuleName;
  /** The number that is compared, higher precedes lower. `depth` is the sphere of the node as counted from `root`, the node from which the digraph is seen. */
  key(digraph: Digraph, node: number, depth: number, root: number): number;
}
