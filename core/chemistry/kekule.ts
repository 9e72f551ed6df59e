/**
 * Kekulé structures: single and double bonds for what a notation calls aromatic.
 *
 * Every atom that must carry a double bond is covered by a matching in the graph of aromatic bonds (J. Edmonds, Canad. J.
 * Math. 1965, 17, 449). Bonds in rings of five to seven are used first, so that a bond that only joins two aromatic rings
 * stays single wherever it can.
 */

/** Whether an atom takes a double bond among the aromatic bonds. */
export const DoubleBondNeed = {
  /** It cannot. */
  none: 0,
  /** It may: it is covered where that is possible without leaving a required atom uncovered. */
  optional: 1,
  /** It must. */
  required: 2,
} as const;
export type DoubleBondNeed = (typeof DoubleBondNeed)[keyof typeof DoubleBondNeed];

export interface AromaticGraph {
  readonly atomCount: number;
  /** Two atoms an edge: the aromatic bonds only. */
  readonly edges: Uint32Array;
  /** A `DoubleBondNeed` for each atom. */
  readonly needs: Uint8Array;
  /** Whether bonds outside rings may become double bonds too: so in a Molfile, where each aromatic bond is marked by itself. */
  readonly chains: boolean;
}

export interface KekuleResult {
  /** 1 for each edge that becomes a double bond. */
  readonly doubled: Uint8Array;
  /** Required atoms that no double bond reaches; empty when the structure could be resolved. */
  readonly uncovered: readonly number[];
}

const RING_LEAST = 5;
const RING_MOST = 7;

/** Chooses the double bonds among the aromatic bonds. Deterministic for a given numbering. */
export function kekulise(graph: AromaticGraph): KekuleResult {
  const usable = new Adjacency(graph);
  const sizes = usable.ringSizes();
  const inAnyRing = new Uint8Array(graph.atomCount);
  for (let e = 0; e < sizes.length; e++) {
    if (sizes[e] === 0) continue;
    inAnyRing[graph.edges[2 * e]!] = 1;
    inAnyRing[graph.edges[2 * e + 1]!] = 1;
  }
  const stages: ((edge: number) => boolean)[] = [
    edge => sizes[edge]! >= RING_LEAST && sizes[edge]! <= RING_MOST,
    edge => sizes[edge]! > 0,
    // Aromatic atoms written outside rings, or every marked bond.
    edge =>
      sizes[edge]! > 0 ||
      graph.chains ||
      !inAnyRing[graph.edges[2 * edge]!] ||
      !inAnyRing[graph.edges[2 * edge + 1]!],
  ];
  const matching = new Matching(usable, graph.needs);
  let settled = false;
  for (const allowed of stages) {
    matching.allow(allowed);
    if (!settled) matching.cover(DoubleBondNeed.required);
    settled ||= matching.uncovered().length === 0;
    if (settled) matching.cover(DoubleBondNeed.optional);
  }
  if (!settled) matching.cover(DoubleBondNeed.optional);
  const doubled = new Uint8Array(graph.edges.length / 2);
  for (let e = 0; e < doubled.length; e++) {
    if (matching.mate[graph.edges[2 * e]!] === graph.edges[2 * e + 1]!) doubled[e] = 1;
  }
  return { doubled, uncovered: matching.uncovered() };
}

/** Edges between atoms that can carry a double bond, by atom. */
class Adjacency {
  readonly start: Uint32Array;
  readonly others: Uint32Array;
  readonly edgeOf: Uint32Array;
  readonly graph: AromaticGraph;

  constructor(graph: AromaticGraph) {
    this.graph = graph;
    const { edges, atomCount } = graph;
    this.start = new Uint32Array(atomCount + 1);
    for (const atom of edges) this.start[atom + 1]!++;
    for (let i = 0; i < atomCount; i++) this.start[i + 1]! += this.start[i]!;
    const fill = this.start.slice(0, atomCount);
    this.others = new Uint32Array(edges.length);
    this.edgeOf = new Uint32Array(edges.length);
    for (let e = 0; 2 * e < edges.length; e++) {
      const first = edges[2 * e]!;
      const second = edges[2 * e + 1]!;
      this.others[fill[first]!] = second;
      this.edgeOf[fill[first]!++] = e;
      this.others[fill[second]!] = first;
      this.edgeOf[fill[second]!++] = e;
    }
  }

  /** Size of the smallest ring of aromatic bonds through each edge: 3 to 7, 8 for larger ones, 0 for none. */
  ringSizes(): Uint8Array {
    const { edges, atomCount } = this.graph;
    const cyclic = this.cyclicEdges();
    const sizes = new Uint8Array(edges.length / 2);
    const distance = new Int32Array(atomCount).fill(-1);
    const queue: number[] = [];
    for (let e = 0; e < sizes.length; e++) {
      if (!cyclic[e]) continue;
      const target = edges[2 * e + 1]!;
      queue.length = 0;
      queue.push(edges[2 * e]!);
      distance[queue[0]!] = 0;
      sizes[e] = RING_MOST + 1;
      search: for (let at = 0; at < queue.length; at++) {
        const atom = queue[at]!;
        if (distance[atom]! >= RING_MOST - 1) break;
        for (let k = this.start[atom]!; k < this.start[atom + 1]!; k++) {
          const other = this.others[k]!;
          if (this.edgeOf[k] === e || distance[other]! >= 0) continue;
          distance[other] = distance[atom]! + 1;
          if (other === target) {
            sizes[e] = distance[other] + 1;
            queue.push(other);
            break search;
          }
          queue.push(other);
        }
      }
      for (const atom of queue) distance[atom] = -1;
    }
    return sizes;
  }

  /** 1 for each edge that lies in a cycle: all but the bridges (depth-first search with low points, without recursion). */
  private cyclicEdges(): Uint8Array {
    const { atomCount, edges } = this.graph;
    const cyclic = new Uint8Array(edges.length / 2).fill(1);
    const order = new Int32Array(atomCount).fill(-1);
    const low = new Int32Array(atomCount);
    const via = new Int32Array(atomCount).fill(-1);
    const next = this.start.slice(0, atomCount);
    let clock = 0;
    const stack: number[] = [];
    for (let root = 0; root < atomCount; root++) {
      if (order[root]! >= 0 || this.start[root] === this.start[root + 1]) continue;
      stack.push(root);
      order[root] = low[root] = clock++;
      while (stack.length > 0) {
        const atom = stack[stack.length - 1]!;
        const k = next[atom]!;
        if (k < this.start[atom + 1]!) {
          next[atom] = k + 1;
          const other = this.others[k]!;
          if (this.edgeOf[k] === via[atom]) continue;
          if (order[other]! >= 0) low[atom] = Math.min(low[atom]!, order[other]!);
          else {
            via[other] = this.edgeOf[k]!;
            order[other] = low[other] = clock++;
            stack.push(other);
          }
          continue;
        }
        stack.pop();
        const parent = stack[stack.length - 1];
        if (parent === undefined) continue;
        low[parent] = Math.min(low[parent]!, low[atom]!);
        if (low[atom]! > order[parent]!) cyclic[via[atom]!] = 0;
      }
    }
    return cyclic;
  }
}

/** A matching that grows by alternating paths; blossoms are contracted by their base. */
class Matching {
  readonly mate: Int32Array;
  private readonly usable: Adjacency;
  private readonly needs: Uint8Array;
  private allowed: (edge: number) => boolean = () => true;
  private readonly parent: Int32Array;
  private readonly base: Int32Array;
  private readonly outer: Uint8Array;
  private readonly inBlossom: Uint8Array;
  private readonly seen: Uint8Array;
  /** Atoms that the last search reached: all others are as they were at first. */
  private readonly touched: number[] = [];

  constructor(usable: Adjacency, needs: Uint8Array) {
    const n = usable.graph.atomCount;
    this.usable = usable;
    this.needs = needs;
    this.mate = new Int32Array(n).fill(-1);
    this.parent = new Int32Array(n).fill(-1);
    this.base = Int32Array.from({ length: n }, (_, i) => i);
    this.outer = new Uint8Array(n);
    this.inBlossom = new Uint8Array(n);
    this.seen = new Uint8Array(n);
  }

  allow(allowed: (edge: number) => boolean): void {
    this.allowed = allowed;
  }

  uncovered(): number[] {
    const list: number[] = [];
    for (let atom = 0; atom < this.mate.length; atom++) {
      if (this.needs[atom] === DoubleBondNeed.required && this.mate[atom]! < 0) list.push(atom);
    }
    return list;
  }

  /** Covers as many atoms of one need as can be, without uncovering atoms of equal or higher need. */
  cover(need: DoubleBondNeed): void {
    const { start, others, edgeOf } = this.usable;
    const atomCount = this.mate.length;
    for (let atom = 0; atom < atomCount; atom++) {
      if (this.needs[atom] !== need || this.mate[atom]! >= 0) continue;
      for (let k = start[atom]!; k < start[atom + 1]!; k++) {
        const other = others[k]!;
        if (this.mate[other]! >= 0 || this.needs[other] === DoubleBondNeed.none) continue;
        if (this.needs[other] !== need || !this.allowed(edgeOf[k]!)) continue;
        this.mate[atom] = other;
        this.mate[other] = atom;
        break;
      }
    }
    for (let atom = 0; atom < atomCount; atom++) {
      if (this.needs[atom] === need && this.mate[atom]! < 0) this.augment(atom, need);
    }
  }

  private touch(atom: number): void {
    if (this.seen[atom]) return;
    this.seen[atom] = 1;
    this.touched.push(atom);
  }

  /** Forgets the last search: its cost is the part of the graph it reached, not the whole. */
  private reset(): void {
    for (const atom of this.touched) {
      this.seen[atom] = 0;
      this.parent[atom] = -1;
      this.base[atom] = atom;
      this.outer[atom] = 0;
      this.inBlossom[atom] = 0;
    }
    this.touched.length = 0;
  }

  /** Covers `root` by a path to an uncovered atom, or by uncovering an atom of lower need. */
  private augment(root: number, need: DoubleBondNeed): void {
    this.reset();
    const { mate, parent, base, outer, needs } = this;
    const { start, others, edgeOf } = this.usable;
    const queue = [root];
    this.touch(root);
    outer[root] = 1;
    for (let at = 0; at < queue.length; at++) {
      const atom = queue[at]!;
      for (let k = start[atom]!; k < start[atom + 1]!; k++) {
        const other = others[k]!;
        if (needs[other] === DoubleBondNeed.none || !this.allowed(edgeOf[k]!)) continue;
        if (base[atom] === base[other] || mate[atom] === other) continue;
        if (other === root || (mate[other]! >= 0 && parent[mate[other]!]! >= 0)) {
          const common = this.commonBase(atom, other, root);
          for (const member of this.touched) this.inBlossom[member] = 0;
          this.markPath(atom, common, other);
          this.markPath(other, common, atom);
          for (const member of this.touched) {
            if (!this.inBlossom[base[member]!]) continue;
            base[member] = common;
            if (outer[member]) continue;
            outer[member] = 1;
            queue.push(member);
          }
        } else if (parent[other] === -1) {
          this.touch(other);
          parent[other] = atom;
          if (mate[other]! < 0) {
            this.flip(other);
            return;
          }
          this.touch(mate[other]!);
          outer[mate[other]!] = 1;
          queue.push(mate[other]!);
        }
      }
    }
    for (const atom of queue) {
      if (atom === root || needs[atom]! >= need) continue;
      const before = mate[atom]!;
      mate[atom] = -1;
      this.flip(before);
      return;
    }
  }

  private flip(end: number): void {
    for (let atom = end; atom >= 0; ) {
      const before = this.parent[atom]!;
      const next = this.mate[before]!;
      this.mate[atom] = before;
      this.mate[before] = atom;
      atom = next;
    }
  }

  private commonBase(first: number, second: number, root: number): number {
    const seen = new Set<number>();
    for (let atom = first; ; ) {
      atom = this.base[atom]!;
      seen.add(atom);
      if (atom === root || this.mate[atom]! < 0) break;
      atom = this.parent[this.mate[atom]!]!;
    }
    for (let atom = second; ; ) {
      atom = this.base[atom]!;
      if (seen.has(atom)) return atom;
      atom = this.parent[this.mate[atom]!]!;
    }
  }

  private markPath(from: number, common: number, child: number): void {
    let below = child;
    for (let atom = from; this.base[atom] !== common; ) {
      const mate = this.mate[atom]!;
      this.inBlossom[this.base[atom]!] = 1;
      this.inBlossom[this.base[mate]!] = 1;
      this.parent[atom] = below;
      below = mate;
      atom = this.parent[mate]!;
    }
  }
}

/**
 * A matching along `edges` of the atoms whose `needs` are not 0: `partner` of each atom (-1 for none), and the atoms
 * that stay unmatched.
 */
export function perfectMatching(
  atomCount: number,
  needs: Uint8Array,
  edges: readonly (readonly [number, number])[],
): { readonly partner: Int32Array; readonly unmatched: readonly number[] } {
  const flat = Uint32Array.from(edges.flat());
  const required = needs.map(need => (need === 0 ? DoubleBondNeed.none : DoubleBondNeed.required));
  const { doubled, uncovered } = kekulise({ atomCount, edges: flat, needs: required, chains: true });
  const partner = new Int32Array(atomCount).fill(-1);
  doubled.forEach((double, e) => {
    if (!double) return;
    partner[flat[2 * e]!] = flat[2 * e + 1]!;
    partner[flat[2 * e + 1]!] = flat[2 * e]!;
  });
  return { partner, unmatched: uncovered };
}
