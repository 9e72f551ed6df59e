/**
 * Rings: which atoms and bonds are in one, the smallest through each bond, and the fused systems.
 *
 * The ring list holds a shortest ring through every ring bond, each ring once: what perception needs of ring size and
 * membership. It contains every smallest set of smallest rings' sizes but is not meant as a basis.
 */
import type { Adjacency, Molecule } from './molecule.ts';

export interface RingInfo {
  /** 1 for atoms and bonds in any ring. */
  readonly atomInRing: Uint8Array;
  readonly bondInRing: Uint8Array;
  /** Size of the smallest ring, 0 for none. */
  readonly atomRingSize: Uint16Array;
  readonly bondRingSize: Uint16Array;
  /** Atoms of each ring in ring order. */
  readonly rings: readonly Int32Array[];
  /** Rings (indices into `rings`) at each atom. */
  readonly ringsAt: readonly (readonly number[])[];
  /** Number of the ring system of each bond: rings that share bonds or spiro atoms are one; -1 outside rings. */
  readonly system: Int32Array;
}

const NONE: readonly number[] = [];

/** Perceives rings. */
export function ringInfo(molecule: Molecule): RingInfo {
  const { atomCount, bondCount, bondAtoms } = molecule;
  const bondInRing = ringBonds(molecule);
  const atomInRing = new Uint8Array(atomCount);
  for (let b = 0; b < bondCount; b++) {
    if (bondInRing[b] === 0) continue;
    atomInRing[bondAtoms[2 * b]!] = 1;
    atomInRing[bondAtoms[2 * b + 1]!] = 1;
  }
  const bondRingSize = new Uint16Array(bondCount);
  const atomRingSize = new Uint16Array(atomCount);
  const rings: Int32Array[] = [];
  const ringsAt: (readonly number[])[] = Array.from({ length: atomCount }, () => NONE);
  const member = new Int32Array(atomCount).fill(-1);
  const search = new RingSearch(molecule, bondInRing);
  for (let b = 0; b < bondCount; b++) {
    if (bondInRing[b] === 0 || bondRingSize[b] !== 0) continue;
    const ring = search.shortest(b);
    spread(molecule, bondInRing, bondRingSize, b, ring.length);
    for (const atom of ring) member[atom] = b;
    if (ringsAt[ring[0]!]!.some(index => isSameRing(rings[index]!, ring, member, b))) continue;
    for (const atom of ring) {
      if (atomRingSize[atom] === 0 || ring.length < atomRingSize[atom]!) atomRingSize[atom] = ring.length;
      ringsAt[atom] = [...ringsAt[atom]!, rings.length];
    }
    rings.push(ring);
  }
  return {
    atomInRing,
    bondInRing,
    atomRingSize,
    bondRingSize,
    rings,
    ringsAt,
    system: ringSystems(molecule, bondInRing),
  };
}

/** Whether a known ring has the atoms of another, those that `member` marks with `mark`. */
function isSameRing(known: Int32Array, ring: Int32Array, member: Int32Array, mark: number): boolean {
  if (known.length !== ring.length) return false;
  for (let k = 0; k < known.length; k++) if (member[known[k]!] !== mark) return false;
  return true;
}

/** Gives a ring size to all bonds of the chain through a bond: past an atom of two ring bonds the same rings go on. */
function spread(
  molecule: Molecule,
  inRing: Uint8Array,
  bondRingSize: Uint16Array,
  bond: number,
  size: number,
): void {
  const { bondAtoms, neighbourStart, neighbourBonds } = molecule;
  bondRingSize[bond] = size;
  for (let side = 0; side < 2; side++) {
    let through = bond;
    let atom = bondAtoms[2 * bond + side]!;
    for (;;) {
      let onward = -1;
      let ringBondCount = 0;
      for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
        const next = neighbourBonds[k]!;
        if (inRing[next] === 0) continue;
        ringBondCount++;
        if (next !== through) onward = next;
      }
      if (ringBondCount !== 2 || bondRingSize[onward] !== 0) break;
      bondRingSize[onward] = size;
      through = onward;
      const near = bondAtoms[2 * onward]!;
      const far = bondAtoms[2 * onward + 1]!;
      atom = near === atom ? far : near;
    }
  }
}

/** Bonds that are in a ring: those that are not bridges (R. E. Tarjan, Inf. Process. Lett. 1974, 2, 160), without recursion. */
export function ringBonds(molecule: Adjacency & Pick<Molecule, 'atomCount' | 'bondCount'>): Uint8Array {
  const { atomCount, bondCount, neighbourStart, neighbours, neighbourBonds } = molecule;
  const inRing = new Uint8Array(bondCount).fill(1);
  // One allocation for five arrays of the length of the atom list.
  const scratch = new Int32Array(5 * atomCount);
  const order = scratch.subarray(0, atomCount);
  const low = scratch.subarray(atomCount, 2 * atomCount);
  const cursor = scratch.subarray(2 * atomCount, 3 * atomCount);
  const entry = scratch.subarray(3 * atomCount, 4 * atomCount).fill(-1);
  const stack = scratch.subarray(4 * atomCount);
  let clock = 0;
  for (let root = 0; root < atomCount; root++) {
    if (order[root] !== 0) continue;
    let top = 0;
    stack[0] = root;
    order[root] = low[root] = ++clock;
    cursor[root] = neighbourStart[root]!;
    while (top >= 0) {
      const atom = stack[top]!;
      const k = cursor[atom]!;
      if (k < neighbourStart[atom + 1]!) {
        cursor[atom] = k + 1;
        const bond = neighbourBonds[k]!;
        if (bond === entry[atom]) continue;
        const next = neighbours[k]!;
        if (order[next] === 0) {
          order[next] = low[next] = ++clock;
          entry[next] = bond;
          cursor[next] = neighbourStart[next]!;
          stack[++top] = next;
        } else if (order[next]! < low[atom]!) {
          low[atom] = order[next]!;
        }
        continue;
      }
      top--;
      if (top >= 0) {
        const parent = stack[top]!;
        if (low[atom]! < low[parent]!) low[parent] = low[atom]!;
        if (low[atom]! > order[parent]!) inRing[entry[atom]!] = 0;
      }
    }
  }
  return inRing;
}

/** Breadth-first search for the shortest ring through a bond, arrays reused. */
class RingSearch {
  private readonly from: Int32Array;
  private readonly mark: Int32Array;
  private readonly queue: Int32Array;
  private generation = 0;
  private readonly molecule: Molecule;
  private readonly inRing: Uint8Array;

  constructor(molecule: Molecule, inRing: Uint8Array) {
    this.molecule = molecule;
    this.inRing = inRing;
    this.from = new Int32Array(molecule.atomCount);
    this.mark = new Int32Array(molecule.atomCount);
    this.queue = new Int32Array(molecule.atomCount);
  }

  shortest(bond: number): Int32Array {
    const { bondAtoms, neighbourStart, neighbours, neighbourBonds } = this.molecule;
    const start = bondAtoms[2 * bond]!;
    const goal = bondAtoms[2 * bond + 1]!;
    const stamp = ++this.generation;
    let head = 0;
    let tail = 0;
    this.queue[tail++] = start;
    this.mark[start] = stamp;
    this.from[start] = -1;
    while (head < tail && this.mark[goal] !== stamp) {
      const atom = this.queue[head++]!;
      for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
        const through = neighbourBonds[k]!;
        const next = neighbours[k]!;
        if (through === bond || this.inRing[through] === 0 || this.mark[next] === stamp) continue;
        this.mark[next] = stamp;
        this.from[next] = atom;
        this.queue[tail++] = next;
      }
    }
    const ring: number[] = [];
    for (let atom = goal; atom !== -1; atom = this.from[atom]!) ring.push(atom);
    return Int32Array.from(ring);
  }
}

function ringSystems(molecule: Molecule, inRing: Uint8Array): Int32Array {
  const { bondCount, bondAtoms, neighbourStart, neighbourBonds } = molecule;
  const system = new Int32Array(bondCount).fill(-1);
  let count = 0;
  for (let b = 0; b < bondCount; b++) {
    if (inRing[b] === 0 || system[b] !== -1) continue;
    system[b] = count;
    const stack = [b];
    while (stack.length > 0) {
      const bond = stack.pop()!;
      for (const atom of [bondAtoms[2 * bond]!, bondAtoms[2 * bond + 1]!]) {
        for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
          const other = neighbourBonds[k]!;
          if (inRing[other] === 1 && system[other] === -1) {
            system[other] = count;
            stack.push(other);
          }
        }
      }
    }
    count++;
  }
  return system;
}
