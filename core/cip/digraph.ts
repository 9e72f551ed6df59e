/**
 * The hierarchical digraph of a stereogenic unit: the tree of all paths that start at the root atom (P-92.1.4).
 *
 * A path ends in a duplicate atom where it would meet an atom it has already passed (ring duplicate) and carries
 * one for each extra bond of a multiple bond (multiple-bond duplicate). Phantom atoms of atomic number 0 are not
 * stored: a node without children is followed by nothing but phantoms. Nodes live in typed arrays, are created only
 * when a comparison reaches them, and the same arrays serve one root after the other.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import { IMPLICIT_HYDROGEN } from '../chemistry/molecule.ts';
import type { RankingGraph } from './ranking-graph.ts';

/** What a node of the digraph stands for. */
export const Nature = { real: 0, bondDuplicate: 1, ringDuplicate: 2, implicitHydrogen: 3 } as const;
export type Nature = (typeof Nature)[keyof typeof Nature];

/** Thrown when a digraph outgrows its limit; the unit then gets no letter. */
export class DigraphLimitError extends Error {
  readonly limit: number;

  constructor(limit: number) {
    super(`the hierarchical digraph has more than ${limit} nodes`);
    this.name = 'DigraphLimitError';
    this.limit = limit;
  }
}

/** Nodes the arrays hold at first: most centres need a dozen or two. */
const FIRST_CAPACITY = 128;

export class Digraph {
  readonly molecule: Molecule;
  readonly graph: RankingGraph;
  readonly limit: number;
  /** Number of nodes in use. */
  count = 0;
  /** Largest number of nodes any root has needed so far. */
  peak = 0;
  /** Atom of each node; `IMPLICIT_HYDROGEN` for a hydrogen that is not in the list of atoms. */
  atom = new Int32Array(FIRST_CAPACITY);
  /** The node nearer to the root, -1 for the root. */
  parent = new Int32Array(FIRST_CAPACITY);
  /** Sphere of each node, 0 for the root. */
  depth = new Int32Array(FIRST_CAPACITY);
  /** First child, -1 while the node has not been expanded; children are consecutive. */
  firstChild = new Int32Array(FIRST_CAPACITY);
  childCount = new Int32Array(FIRST_CAPACITY);
  nature = new Uint8Array(FIRST_CAPACITY);
  /** For a duplicate, the node of the atom that it duplicates; otherwise -1. */
  original = new Int32Array(FIRST_CAPACITY);
  /** What Rule 1a compares: the atomic number, averaged for duplicates in mancude rings. */
  atomicNumber = new Float64Array(FIRST_CAPACITY);
  /** Auxiliary descriptor of the centre (or axis) at this node, a `Letter`; 0 for none. */
  auxiliary = new Uint8Array(FIRST_CAPACITY);
  /** Auxiliary descriptor of the double bond whose farther end is this node, a `Letter`; 0 for none. */
  auxiliaryBond = new Uint8Array(FIRST_CAPACITY);

  constructor(molecule: Molecule, graph: RankingGraph, limit: number) {
    this.molecule = molecule;
    this.graph = graph;
    this.limit = limit;
  }

  /** Starts a new digraph at an atom; returns the root node, 0. */
  reset(rootAtom: number): number {
    this.count = 0;
    this.add(rootAtom, -1, 0, Nature.real, -1, this.molecule.elements[rootAtom]!);
    return 0;
  }

  /** Creates the children of a node unless that has been done. @throws DigraphLimitError */
  expand(node: number): void {
    if (this.firstChild[node] !== -1) return;
    this.firstChild[node] = this.count;
    if (this.nature[node] !== Nature.real) return;
    const { molecule, graph } = this;
    const atom = this.atom[node]!;
    const parent = this.parent[node]!;
    const parentAtom = parent < 0 ? -1 : this.atom[parent]!;
    const depth = this.depth[node]! + 1;
    const end = molecule.neighbourStart[atom + 1]!;
    for (let k = molecule.neighbourStart[atom]!; k < end; k++) {
      const neighbour = molecule.neighbours[k]!;
      const bond = molecule.neighbourBonds[k]!;
      let original: number;
      if (neighbour === parentAtom) {
        original = parent;
      } else {
        const passed = this.passedAt(node, neighbour);
        const z = molecule.elements[neighbour]!;
        if (passed >= 0) {
          original = passed;
          this.add(neighbour, node, depth, Nature.ringDuplicate, passed, z);
        } else {
          original = this.add(neighbour, node, depth, Nature.real, -1, z);
        }
      }
      const duplicates = graph.duplicates[bond]!;
      if (duplicates > 0) {
        const shared = graph.mancudeBond[bond] === 1 ? graph.mancudeNumber[atom]! : 0;
        const z = shared > 0 ? shared : molecule.elements[neighbour]!;
        for (let i = 0; i < duplicates; i++) {
          this.add(neighbour, node, depth, Nature.bondDuplicate, original, z);
        }
      }
    }
    for (let i = molecule.hydrogens[atom]!; i > 0; i--) {
      this.add(IMPLICIT_HYDROGEN, node, depth, Nature.implicitHydrogen, -1, 1);
    }
    this.childCount[node] = this.count - this.firstChild[node];
  }

  /** The node through which a ligand of the atom at `node` is reached: its parent, a real child or a ring duplicate; -1 if there is none. */
  ligandNode(node: number, ligandAtom: number): number {
    const parent = this.parent[node]!;
    if (parent >= 0 && ligandAtom >= 0 && this.atom[parent] === ligandAtom) return parent;
    this.expand(node);
    const first = this.firstChild[node]!;
    const last = first + this.childCount[node]!;
    for (let child = first; child < last; child++) {
      if (this.atom[child] === ligandAtom && this.nature[child] !== Nature.bondDuplicate) return child;
    }
    return -1;
  }

  /** The node on the path from the root to `node` that stands for `atom`, or -1. */
  private passedAt(node: number, atom: number): number {
    for (let n = this.parent[node]!; n >= 0; n = this.parent[n]!) {
      if (this.atom[n] === atom) return n;
    }
    return -1;
  }

  private add(
    atom: number,
    parent: number,
    depth: number,
    nature: Nature,
    original: number,
    atomicNumber: number,
  ): number {
    const node = this.count;
    if (node >= this.limit) throw new DigraphLimitError(this.limit);
    if (node === this.atom.length) this.grow();
    this.count = node + 1;
    if (this.count > this.peak) this.peak = this.count;
    this.atom[node] = atom;
    this.parent[node] = parent;
    this.depth[node] = depth;
    this.nature[node] = nature;
    this.original[node] = original;
    this.atomicNumber[node] = atomicNumber;
    this.firstChild[node] = -1;
    this.childCount[node] = 0;
    this.auxiliary[node] = 0;
    this.auxiliaryBond[node] = 0;
    return node;
  }

  private grow(): void {
    this.atom = doubled(this.atom, new Int32Array(2 * this.atom.length));
    this.parent = doubled(this.parent, new Int32Array(2 * this.parent.length));
    this.depth = doubled(this.depth, new Int32Array(2 * this.depth.length));
    this.firstChild = doubled(this.firstChild, new Int32Array(2 * this.firstChild.length));
    this.childCount = doubled(this.childCount, new Int32Array(2 * this.childCount.length));
    this.nature = doubled(this.nature, new Uint8Array(2 * this.nature.length));
    this.original = doubled(this.original, new Int32Array(2 * this.original.length));
    this.atomicNumber = doubled(this.atomicNumber, new Float64Array(2 * this.atomicNumber.length));
    this.auxiliary = doubled(this.auxiliary, new Uint8Array(2 * this.auxiliary.length));
    this.auxiliaryBond = doubled(this.auxiliaryBond, new Uint8Array(2 * this.auxiliaryBond.length));
  }
}

function doubled<T extends Int32Array | Uint8Array | Float64Array>(old: T, larger: T): T {
  larger.set(old);
  return larger;
}
