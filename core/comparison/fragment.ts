/**
 * The comparison graph of one connected molecule: its atoms other than plain hydrogens, as local nodes.
 *
 * Hydrogens are counted on the atom that carries them, so that a model with hydrogens and one without compare alike.
 */
import { isMetal } from '../chemistry/elements.ts';
import type { Molecule } from '../chemistry/molecule.ts';

/** Ligand of a unit that is a hydrogen, listed or implicit. */
export const HYDROGEN_NODE = -1;
/** Ligand of a unit that is a lone pair. */
export const LONE_PAIR_NODE = -2;
/** Ligand of a unit that lies outside the fragment (an attachment point, a polymer atom). */
export const OUTSIDE_NODE = -3;

export interface FragmentOptions {
  /** Deuterium and tritium are nodes of the graph rather than counted hydrogens. */
  readonly isotopicHydrogens: boolean;
  /** Bonds between a metal and a nonmetal are left out, whatever their order. */
  readonly withoutMetalBonds: boolean;
  /** Dummy atoms and polymer residues are left out; bonds to them become attachment points. */
  readonly withoutAttachments: boolean;
}

export const PLAIN_FRAGMENTS: FragmentOptions = {
  isotopicHydrogens: true,
  withoutMetalBonds: false,
  withoutAttachments: false,
};

/** A connected molecule of an entry as a graph of nodes; all arrays are indexed by node. */
export interface Fragment {
  readonly molecule: Molecule;
  /** 1-based number of the connected molecule within the entry (its first atom decides the order). */
  readonly id: number;
  readonly count: number;
  /** Node to atom index. */
  readonly atoms: Int32Array;
  readonly start: Int32Array;
  readonly adjacent: Int32Array;
  /** Bond index of each entry of `adjacent`. */
  readonly bonds: Int32Array;
  readonly elements: Uint8Array;
  readonly isotopes: Uint16Array;
  /** Hydrogens counted on the node, listed ones and implicit ones. */
  readonly hydrogens: Uint8Array;
  /** Listed hydrogens alone. */
  readonly listedHydrogens: Uint8Array;
  /** π bonds at a carbon (0, 1, 2); 0 for other elements, whose share in π bonds moves with tautomerism. */
  readonly pi: Uint8Array;
  /** Bonds to left-out attachment atoms. */
  readonly attachments: Uint8Array;
}

/** The fragments of an entry, with the way back from atoms to nodes. */
export interface Fragments {
  readonly options: FragmentOptions;
  readonly list: readonly Fragment[];
  /** Atom to node of its fragment; `HYDROGEN_NODE` for a counted hydrogen, `OUTSIDE_NODE` for one left out. */
  readonly nodeOf: Int32Array;
  /** Atom to index in `list`; the carrier's for a counted hydrogen; -1 for one left out. */
  readonly fragmentOf: Int32Array;
}

function attached(molecule: Molecule, atom: number): boolean {
  if (molecule.elements[atom] === 0) return true;
  const residue = molecule.residues?.[atom];
  return residue !== undefined && !residue.hetero;
}

/** Cuts a molecule into its connected fragments. */
export function fragmentsOf(molecule: Molecule, options: FragmentOptions = PLAIN_FRAGMENTS): Fragments {
  const n = molecule.atomCount;
  const { elements, neighbourStart, neighbours, neighbourBonds, bondOrders } = molecule;
  const nodeOf = new Int32Array(n);
  const fragmentOf = new Int32Array(n).fill(-1);
  const isLink = (atom: number, at: number): boolean => {
    if (bondOrders[neighbourBonds[at]!] === 0) return false;
    if (!options.withoutMetalBonds) return true;
    return isMetal(elements[atom]!) === isMetal(elements[neighbours[at]!]!);
  };
  const carrier = new Int32Array(n).fill(-1);
  for (let i = 0; i < n; i++) {
    if (options.withoutAttachments && attached(molecule, i)) {
      nodeOf[i] = OUTSIDE_NODE;
      continue;
    }
    if (elements[i] !== 1 || (options.isotopicHydrogens && molecule.isotopes[i]! > 1)) continue;
    let only = -1;
    let links = 0;
    for (let k = neighbourStart[i]!; k < neighbourStart[i + 1]!; k++) {
      if (bondOrders[neighbourBonds[k]!] === 0) continue;
      links++;
      only = neighbours[k]!;
    }
    if (links === 1 && elements[only] !== 1 && elements[only] !== 0) {
      nodeOf[i] = HYDROGEN_NODE;
      carrier[i] = only;
    }
  }
  const list: Fragment[] = [];
  const queue = new Int32Array(n);
  for (let first = 0; first < n; first++) {
    if (nodeOf[first]! < 0 || fragmentOf[first] !== -1) continue;
    const id = list.length;
    let count = 0;
    queue[count++] = first;
    fragmentOf[first] = id;
    for (let head = 0; head < count; head++) {
      const atom = queue[head]!;
      for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
        const other = neighbours[k]!;
        if (nodeOf[other]! < 0 || fragmentOf[other] !== -1 || !isLink(atom, k)) continue;
        fragmentOf[other] = id;
        queue[count++] = other;
      }
    }
    const atoms = queue.slice(0, count).sort();
    for (let v = 0; v < count; v++) nodeOf[atoms[v]!] = v;
    list.push(buildFragment(molecule, id, atoms, nodeOf, isLink));
  }
  for (let i = 0; i < n; i++) if (carrier[i] !== -1) fragmentOf[i] = fragmentOf[carrier[i]!]!;
  return { options, list, nodeOf, fragmentOf };
}

function buildFragment(
  molecule: Molecule,
  index: number,
  atoms: Int32Array,
  nodeOf: Int32Array,
  isLink: (atom: number, at: number) => boolean,
): Fragment {
  const { elements, neighbourStart, neighbours, neighbourBonds, bondOrders } = molecule;
  const count = atoms.length;
  const start = new Int32Array(count + 1);
  const hydrogens = new Uint8Array(count);
  const listedHydrogens = new Uint8Array(count);
  const pi = new Uint8Array(count);
  const attachments = new Uint8Array(count);
  let links = 0;
  for (let v = 0; v < count; v++) {
    const atom = atoms[v]!;
    links += neighbourStart[atom + 1]! - neighbourStart[atom]!;
  }
  const adjacent = new Int32Array(links);
  const bonds = new Int32Array(links);
  let fill = 0;
  for (let v = 0; v < count; v++) {
    const atom = atoms[v]!;
    start[v] = fill;
    hydrogens[v] = molecule.hydrogens[atom]!;
    for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
      const other = neighbours[k]!;
      const node = nodeOf[other]!;
      if (node === HYDROGEN_NODE) {
        hydrogens[v]!++;
        listedHydrogens[v]!++;
        continue;
      }
      // Isotopic hydrogens as nodes still count, so that the count does not depend on the option.
      if (elements[other] === 1) hydrogens[v]!++;
      if (node === OUTSIDE_NODE) {
        if (bondOrders[neighbourBonds[k]!] !== 0) attachments[v]!++;
        continue;
      }
      if (!isLink(atom, k)) continue;
      if (elements[atom] === 6) {
        const order = bondOrders[neighbourBonds[k]!]!;
        if (order > 1) pi[v]! += order - 1;
      }
      adjacent[fill] = node;
      bonds[fill++] = neighbourBonds[k]!;
    }
  }
  start[count] = fill;
  return {
    molecule,
    id: index + 1,
    count,
    atoms,
    start,
    adjacent: adjacent.subarray(0, fill),
    bonds: bonds.subarray(0, fill),
    elements: Uint8Array.from(atoms, atom => elements[atom]!),
    isotopes: Uint16Array.from(atoms, atom => molecule.isotopes[atom]!),
    hydrogens,
    listedHydrogens,
    pi,
    attachments,
  };
}

/** Whether two nodes of a fragment are neighbours. */
export function areAdjacent(fragment: Fragment, first: number, second: number): boolean {
  for (let k = fragment.start[first]!; k < fragment.start[first + 1]!; k++) {
    if (fragment.adjacent[k] === second) return true;
  }
  return false;
}

/** Whether any atom of the fragments carries a mass number. */
export function hasIsotopes(molecule: Molecule): boolean {
  for (let i = 0; i < molecule.atomCount; i++) if (molecule.isotopes[i] !== 0) return true;
  return false;
}

/** Whether the molecule has a bond between a metal and a nonmetal that a fragment would follow. */
export function hasMetalBonds(molecule: Molecule): boolean {
  for (let b = 0; b < molecule.bondCount; b++) {
    if (molecule.bondOrders[b] === 0) continue;
    const first = isMetal(molecule.elements[molecule.bondAtoms[2 * b]!]!);
    if (first !== isMetal(molecule.elements[molecule.bondAtoms[2 * b + 1]!]!)) return true;
  }
  return false;
}

/** Whether the molecule has dummy atoms, or both polymer residues and other atoms. */
export function hasAttachments(molecule: Molecule): boolean {
  for (let i = 0; i < molecule.atomCount; i++) if (attached(molecule, i)) return true;
  return false;
}
