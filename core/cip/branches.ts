/**
 * The branches of a digraph seen from one node, and their comparison sphere by sphere (P-92.1.4, P-92.2.1.1).
 *
 * Children of a node stand in order of rank; those that no rule has separated yet are marked as tied. A rule is
 * applied to one sphere after the other over all branches before the next rule is considered. Within a sphere the
 * sets are compared in the order of the nodes they hang on, and a set in the order of its members; where nodes are
 * tied, the arrangement that puts the higher sets first is the one that counts.
 */
import type { Digraph } from './digraph.ts';
import type { NodeRule } from './rule.ts';

/** Nodes the arrays hold at first: most centres need a dozen or two. */
const FIRST_CAPACITY = 128;

/** The number compared where a set is shorter than the other: a phantom atom. */
const PHANTOM = 0;

export class Branches {
  readonly digraph: Digraph;
  /** The node from which the digraph is seen. */
  root = 0;
  private stamp = new Int32Array(FIRST_CAPACITY);
  private generation = 0;
  private start = new Int32Array(FIRST_CAPACITY);
  private size = new Int32Array(FIRST_CAPACITY);
  private pool = new Int32Array(FIRST_CAPACITY);
  private tied = new Uint8Array(FIRST_CAPACITY);
  private used = 0;

  constructor(digraph: Digraph) {
    this.digraph = digraph;
  }

  /** Begins anew with `node` as the root; all children unordered and tied. */
  lookFrom(node: number): void {
    this.root = node;
    this.generation++;
    this.used = 0;
  }

  /** Orders the children of every node that lie in sphere `sphere` of a branch, by `rule`, deepest first. False when the branch has no node there. `from` is the node nearer to the root; `depth` the sphere of `node`. */
  arrange(node: number, from: number, depth: number, sphere: number, rule: NodeRule): boolean {
    this.open(node, from);
    const size = this.size[node]!;
    if (size === 0) return false;
    if (depth + 1 === sphere) {
      if (size > 1) this.sortTies(node, depth, sphere, rule);
      return true;
    }
    const start = this.start[node]!;
    let any = false;
    for (let k = 0; k < size; k++) {
      if (this.arrange(this.pool[start + k]!, node, depth + 1, sphere, rule)) any = true;
    }
    if (any && size > 1) this.sortTies(node, depth, sphere, rule);
    return any;
  }

  /** Compares what two branches hold in sphere `sphere`; positive when the first precedes. Both have been arranged to that sphere. */
  compare(first: number, second: number, depth: number, sphere: number, rule: NodeRule): number {
    if (depth === sphere) {
      return (
        rule.key(this.digraph, first, depth, this.root) - rule.key(this.digraph, second, depth, this.root)
      );
    }
    const sizeA = this.sizeOf(first);
    const sizeB = this.sizeOf(second);
    const startA = this.start[first]!;
    const startB = this.start[second]!;
    const common = Math.min(sizeA, sizeB);
    for (let k = 0; k < common; k++) {
      const order = this.compare(this.pool[startA + k]!, this.pool[startB + k]!, depth + 1, sphere, rule);
      if (order !== 0) return order;
    }
    if (sizeA === sizeB || depth + 1 !== sphere) return 0;
    const longer = sizeA > sizeB ? this.pool[startA + common]! : this.pool[startB + common]!;
    const excess = rule.key(this.digraph, longer, depth + 1, this.root) - PHANTOM;
    return sizeA > sizeB ? excess : -excess;
  }

  /** Number of children of a node in this view; 0 for a node that has not been opened. */
  sizeOf(node: number): number {
    return this.stamp[node] === this.generation ? this.size[node]! : 0;
  }

  /** Child `k` of a node, in the order reached so far. */
  child(node: number, k: number): number {
    return this.pool[this.start[node]! + k]!;
  }

  /** Whether child `k` is tied with child `k - 1`. */
  isTied(node: number, k: number): boolean {
    return this.tied[this.start[node]! + k] === 1;
  }

  /** The order and the ties of a branch, to come back to with `restore`. */
  save(): { pool: Int32Array; tied: Uint8Array } {
    return { pool: this.pool.slice(0, this.used), tied: this.tied.slice(0, this.used) };
  }

  restore(saved: { pool: Int32Array; tied: Uint8Array }): void {
    this.pool.set(saved.pool);
    this.tied.set(saved.tied);
  }

  /** Fetches the children of a node as seen when coming from `from`. */
  private open(node: number, from: number): void {
    if (node >= this.stamp.length) this.growNodes(node);
    if (this.stamp[node] === this.generation) return;
    const { digraph } = this;
    digraph.expand(node);
    const first = digraph.firstChild[node]!;
    const count = digraph.childCount[node]!;
    const parent = digraph.parent[node]!;
    if (this.used + count + 1 > this.pool.length) this.growPool(this.used + count + 1);
    this.stamp[node] = this.generation;
    this.start[node] = this.used;
    let size = 0;
    if (parent >= 0 && parent !== from) {
      this.pool[this.used] = parent;
      this.tied[this.used] = 0;
      size = 1;
    }
    for (let i = 0; i < count; i++) {
      const child = first + i;
      if (child === from) continue;
      this.pool[this.used + size] = child;
      this.tied[this.used + size] = size > 0 ? 1 : 0;
      size++;
    }
    this.size[node] = size;
    this.used += size;
  }

  /** Sorts each run of tied children by what they hold in sphere `sphere` and marks where they part. Insertion sort: runs are short. */
  private sortTies(node: number, depth: number, sphere: number, rule: NodeRule): void {
    const start = this.start[node]!;
    const end = start + this.size[node]!;
    const { pool, tied } = this;
    for (let run = start; run < end; ) {
      let stop = run + 1;
      while (stop < end && tied[stop] === 1) stop++;
      for (let i = run + 1; i < stop; i++) {
        const moving = pool[i]!;
        let j = i;
        while (j > run && this.compare(moving, pool[j - 1]!, depth + 1, sphere, rule) > 0) {
          pool[j] = pool[j - 1]!;
          j--;
        }
        pool[j] = moving;
      }
      for (let i = run + 1; i < stop; i++) {
        if (this.compare(pool[i - 1]!, pool[i]!, depth + 1, sphere, rule) !== 0) tied[i] = 0;
      }
      run = stop;
    }
  }

  private growNodes(node: number): void {
    const length = Math.max(2 * this.stamp.length, node + 1, this.digraph.atom.length);
    const stamp = new Int32Array(length);
    stamp.set(this.stamp);
    this.stamp = stamp;
    const start = new Int32Array(length);
    start.set(this.start);
    this.start = start;
    const size = new Int32Array(length);
    size.set(this.size);
    this.size = size;
  }

  private growPool(needed: number): void {
    const length = Math.max(2 * this.pool.length, needed);
    const pool = new Int32Array(length);
    pool.set(this.pool);
    this.pool = pool;
    const tied = new Uint8Array(length);
    tied.set(this.tied);
    this.tied = tied;
  }
}
