/**
 * Writes isomeric SMILES (OpenSMILES 1.0) in Kekulé form from the configuration a molecule states.
 *
 * Not canonical: the string follows the numbering of the atoms, and is the same for the same numbering.
 */
import { elementSymbol } from '../chemistry/elements.ts';
import { IMPLICIT_HYDROGEN, type Molecule, neighboursOf, type StatedStereo } from '../chemistry/molecule.ts';
import { ringInfo } from '../chemistry/rings.ts';
import { organicSubsetHydrogens } from '../chemistry/valence.ts';

export interface WrittenSmiles {
  readonly smiles: string;
  /** Atoms of the molecule (0-based) in the order in which the string lists them; `IMPLICIT_HYDROGEN` for a hydrogen that had to be written out. */
  readonly order: readonly number[];
  /** Stated configuration that the notation could not carry; empty as a rule. */
  readonly dropped: readonly StatedStereo[];
}

/** Isomeric SMILES of a molecule. */
export function writeSmiles(molecule: Molecule): string {
  return smilesOf(molecule).smiles;
}

/** Isomeric SMILES with the stereo groups in a CXSMILES tail where there are any. */
export function writeCxsmiles(molecule: Molecule): string {
  const { smiles, order } = smilesOf(molecule);
  const place = new Map(order.map((atom, at) => [atom, at]));
  const fields = molecule.stereoGroups.map(({ kind, number, atoms }) => {
    const key = kind === 'absolute' ? 'a' : kind === 'and' ? `&${number}` : `o${number}`;
    return `${key}:${atoms.map(atom => place.get(atom)).join(',')}`;
  });
  return fields.length === 0 ? smiles : `${smiles} |${fields.join(',')}|`;
}

/** Isomeric SMILES and the order of the atoms in it. */
export function smilesOf(molecule: Molecule): WrittenSmiles {
  const tree = spanningTree(molecule);
  const marks = directionMarks(molecule);
  const { chirality, dropped } = chiralityMarks(molecule, tree);
  const writer = new Emission(molecule, tree, marks, chirality);
  return { smiles: writer.text(), order: writer.order, dropped: [...marks.dropped, ...dropped] };
}

/** A depth-first spanning forest: bonds outside it become ring closures between an atom and one before it. */
interface SpanningTree {
  readonly roots: readonly number[];
  /** Atom before each atom, -1 for a root. */
  readonly parents: Int32Array;
  readonly children: readonly (readonly number[])[];
  /** Bond to the atom before each atom, -1 for a root. */
  readonly bondsBefore: Int32Array;
  /** Bonds closed by digits at each atom, in the order of the digits. */
  readonly closures: readonly (readonly number[])[];
}

function spanningTree(molecule: Molecule): SpanningTree {
  const { atomCount, neighbourStart, neighbours, neighbourBonds } = molecule;
  const parents = new Int32Array(atomCount).fill(-1);
  const bondsBefore = new Int32Array(atomCount).fill(-1);
  const children: number[][] = Array.from({ length: atomCount }, () => []);
  const closures: number[][] = Array.from({ length: atomCount }, () => []);
  const visited = new Uint8Array(atomCount);
  const used = new Uint8Array(molecule.bondCount);
  const next = neighbourStart.slice(0, atomCount);
  const roots: number[] = [];
  const stack: number[] = [];
  for (let root = 0; root < atomCount; root++) {
    if (visited[root]) continue;
    roots.push(root);
    visited[root] = 1;
    stack.push(root);
    for (let atom = stack.at(-1); atom !== undefined; atom = stack.at(-1)) {
      const k = next[atom]!;
      if (k === neighbourStart[atom + 1]!) {
        stack.pop();
        continue;
      }
      next[atom] = k + 1;
      const bond = neighbourBonds[k]!;
      if (used[bond]) continue;
      used[bond] = 1;
      const other = neighbours[k]!;
      if (visited[other]) {
        closures[other]!.push(bond);
        closures[atom]!.push(bond);
        continue;
      }
      visited[other] = 1;
      parents[other] = atom;
      bondsBefore[other] = bond;
      children[atom]!.push(other);
      stack.push(other);
    }
  }
  return { roots, parents, children, bondsBefore, closures };
}

function otherEnd(molecule: Molecule, bond: number, atom: number): number {
  const first = molecule.bondAtoms[2 * bond]!;
  return first === atom ? molecule.bondAtoms[2 * bond + 1]! : first;
}

/** The ligands of an atom in the order in which the string lists them; `virtual` is the hydrogen or lone pair that has no symbol of its own. */
function writtenOrder(
  molecule: Molecule,
  tree: SpanningTree,
  atom: number,
  virtual: number | null,
): number[] {
  const order: number[] = [];
  if (tree.parents[atom]! >= 0) order.push(tree.parents[atom]!);
  if (virtual !== null) order.push(virtual);
  for (const bond of tree.closures[atom]!) order.push(otherEnd(molecule, bond, atom));
  order.push(...tree.children[atom]!);
  return order;
}

/** Whether the permutation from one order to another of the same four ligands is even; null when they are not the same. */
function isEven(from: readonly number[], to: readonly number[]): boolean | null {
  const places = from.map(ligand => to.indexOf(ligand));
  if (from.length !== to.length || places.includes(-1) || new Set(places).size !== places.length) return null;
  let even = true;
  for (let i = 0; i < places.length; i++) {
    for (let j = i + 1; j < places.length; j++) if (places[i]! > places[j]!) even = !even;
  }
  return even;
}

interface ChiralityMarks {
  readonly chirality: ReadonlyMap<number, '@' | '@@'>;
  readonly dropped: readonly StatedStereo[];
}

function chiralityMarks(molecule: Molecule, tree: SpanningTree): ChiralityMarks {
  const chirality = new Map<number, '@' | '@@'>();
  const dropped: StatedStereo[] = [];
  for (const stereo of molecule.stated) {
    if (stereo.kind === 'double-bond') continue;
    const placed =
      stereo.kind === 'centre' ? centreOrders(molecule, tree, stereo) : alleneOrders(molecule, tree, stereo);
    const even = placed === null ? null : isEven(placed.stated, placed.written);
    if (placed === null || even === null) dropped.push(stereo);
    else chirality.set(placed.atom, (stereo.turn === 'clockwise') === even ? '@@' : '@');
  }
  return { chirality, dropped };
}

interface Orders {
  readonly atom: number;
  readonly stated: readonly number[];
  readonly written: readonly number[];
}

function centreOrders(
  molecule: Molecule,
  tree: SpanningTree,
  stereo: StatedStereo & { kind: 'centre' },
): Orders {
  const virtual = stereo.ligands.find(ligand => ligand < 0) ?? null;
  return {
    atom: stereo.atom,
    stated: stereo.ligands,
    written: writtenOrder(molecule, tree, stereo.atom, virtual),
  };
}

/** Stands for the ligand without a symbol at each end of an allene. */
const END_VIRTUAL = [-10, -20] as const;

function alleneOrders(
  molecule: Molecule,
  tree: SpanningTree,
  stereo: StatedStereo & { kind: 'allene' },
): Orders | null {
  const chain = doubleBondChain(molecule, stereo.ends);
  if (chain === null || chain.length % 2 === 0) return null;
  const middle = chain[(chain.length - 1) / 2]!;
  const before = chain[(chain.length - 3) / 2];
  const inner = [chain[1]!, chain.at(-2)!] as const;
  const stated = stereo.ligands.map((ligand, k) => (ligand < 0 ? END_VIRTUAL[k < 2 ? 0 : 1] : ligand));
  const ligandsOf = (end: 0 | 1): number[] => {
    const virtual = stated.includes(END_VIRTUAL[end]) ? END_VIRTUAL[end] : null;
    return writtenOrder(molecule, tree, stereo.ends[end], virtual).filter(ligand => ligand !== inner[end]);
  };
  const aroundMiddle = writtenOrder(molecule, tree, middle, null);
  const written =
    aroundMiddle[0] === before ? [...ligandsOf(0), ...ligandsOf(1)] : [...ligandsOf(1), ...ligandsOf(0)];
  return { atom: middle, stated, written };
}

/** The atoms of a row of double bonds from one end to the other, or null. */
function doubleBondChain(molecule: Molecule, ends: readonly [number, number]): number[] | null {
  const { neighbourStart, neighbours, neighbourBonds, bondOrders } = molecule;
  const walk = (first: number): number[] | null => {
    const chain = [ends[0], first];
    for (let atom = first; atom !== ends[1]; ) {
      const before = chain[chain.length - 2]!;
      let following = -1;
      for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
        if (bondOrders[neighbourBonds[k]!] === 2 && neighbours[k] !== before) following = neighbours[k]!;
      }
      if (following < 0 || chain.includes(following)) return null;
      chain.push(following);
      atom = following;
    }
    return chain;
  };
  for (let k = neighbourStart[ends[0]]!; k < neighbourStart[ends[0] + 1]!; k++) {
    if (bondOrders[neighbourBonds[k]!] !== 2) continue;
    const chain = walk(neighbours[k]!);
    if (chain !== null) return chain;
  }
  return null;
}

/** Directions of bonds beside double bonds. */
interface DirectionMarks {
  /** 1 where the second atom of a bond lies above the first, -1 below, 0 unmarked. */
  readonly bonds: Int8Array;
  /** 1 where a hydrogen that has to be written out lies above its atom, -1 below. */
  readonly hydrogens: ReadonlyMap<number, 1 | -1>;
  readonly dropped: readonly StatedStereo[];
}

/** Marks that hold or exclude each other: a union-find whose links carry whether two marks are equal or opposite. */
class Parities {
  private readonly parent = new Map<number, { to: number; opposite: boolean }>();

  copy(): Parities {
    const fresh = new Parities();
    for (const [key, link] of this.parent) fresh.parent.set(key, link);
    return fresh;
  }

  has(mark: number): boolean {
    return this.parent.has(mark);
  }

  find(mark: number): { root: number; opposite: boolean } {
    let opposite = false;
    let at = mark;
    for (;;) {
      const link = this.parent.get(at);
      if (link === undefined) {
        this.parent.set(at, { to: at, opposite: false });
        return { root: at, opposite };
      }
      if (link.to === at) return { root: at, opposite };
      opposite = opposite !== link.opposite;
      at = link.to;
    }
  }

  /** Links two marks; false when they are linked already in the other sense. */
  link(first: number, second: number, opposite: boolean): boolean {
    const a = this.find(first);
    const b = this.find(second);
    const between = (a.opposite !== b.opposite) !== opposite;
    if (a.root === b.root) return !between;
    this.parent.set(b.root, { to: a.root, opposite: between });
    return true;
  }

  marks(): number[] {
    return [...this.parent.keys()];
  }
}

type StatedDoubleBond = StatedStereo & { readonly kind: 'double-bond' };

/**
 * Chooses the bonds that carry `/` and `\`. A mark between two double bonds serves both; where that would say something
 * of a double bond that is left open, or contradict another, a hydrogen is written out to carry the mark.
 */
function directionMarks(molecule: Molecule): DirectionMarks {
  const { bondCount, bondAtoms } = molecule;
  const stated = molecule.stated.filter(
    (stereo): stereo is StatedDoubleBond => stereo.kind === 'double-bond',
  );
  const dropped: StatedStereo[] = [];
  let parities = new Parities();
  const ends = new Set(stated.flatMap(stereo => [...stereo.ends]));
  const open = openDoubleBondEnds(molecule, ends);
  const hydrogenMark = (atom: number): number => bondCount + atom;
  /** Whether the mark reads the other way round from `atom`: from its far end. */
  const reversed = (mark: number, atom: number): boolean => mark < bondCount && bondAtoms[2 * mark] !== atom;
  const marksAt = (atom: number): number[] => {
    const list: number[] = [];
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const bond = molecule.neighbourBonds[k]!;
      if (molecule.bondOrders[bond] === 1) list.push(bond);
    }
    if (molecule.hydrogens[atom] === 1) list.push(hydrogenMark(atom));
    return list;
  };
  /** Adds a mark beside those that its atoms carry: two at one end of a stated double bond are opposite. */
  const add = (to: Parities, mark: number): boolean => {
    if (to.has(mark)) return true;
    to.find(mark);
    const atoms = mark < bondCount ? [bondAtoms[2 * mark]!, bondAtoms[2 * mark + 1]!] : [mark - bondCount];
    return atoms.every(
      atom =>
        !ends.has(atom) ||
        marksAt(atom).every(
          other =>
            other === mark ||
            !to.has(other) ||
            to.link(mark, other, reversed(mark, atom) === reversed(other, atom)),
        ),
    );
  };
  /** Candidates at one end, the best first: not beside an open double bond, a written atom before a hydrogen. */
  const candidates = (atom: number): number[] => {
    const rank = (mark: number): number => {
      if (mark >= bondCount) return 2;
      if (open.has(otherEnd(molecule, mark, atom))) return 3;
      return parities.has(mark) ? 0 : 1;
    };
    return marksAt(atom).sort((a, b) => rank(a) - rank(b));
  };
  for (const stereo of stated) {
    const [a, b] = stereo.ends;
    let placed: Parities | null = null;
    search: for (const first of candidates(a)) {
      for (const second of candidates(b)) {
        const attempt = parities.copy();
        if (!add(attempt, first) || !add(attempt, second)) continue;
        const isReference = (mark: number, k: 0 | 1): boolean =>
          mark < bondCount
            ? otherEnd(molecule, mark, stereo.ends[k]) === stereo.references[k]
            : stereo.references[k] < 0;
        let opposite = stereo.side === 'opposite';
        for (const flips of [
          !isReference(first, 0),
          !isReference(second, 1),
          reversed(first, a),
          reversed(second, b),
        ]) {
          if (flips) opposite = !opposite;
        }
        if (!attempt.link(first, second, opposite)) continue;
        placed = attempt;
        break search;
      }
    }
    if (placed === null) dropped.push(stereo);
    else parities = placed;
  }
  const bonds = new Int8Array(bondCount);
  const hydrogens = new Map<number, 1 | -1>();
  for (const mark of parities.marks()) {
    const direction = parities.find(mark).opposite ? -1 : 1;
    if (mark < bondCount) bonds[mark] = direction;
    else hydrogens.set(mark - bondCount, direction);
  }
  return { bonds, hydrogens, dropped };
}

/** Rings smaller than this hold their double bonds in one configuration (IUPAC 2013, P-93.5.1.4.1). */
const SMALLEST_OPEN_RING = 8;

/** Ends of double bonds whose configuration could be stated and is not. */
function openDoubleBondEnds(molecule: Molecule, stated: ReadonlySet<number>): ReadonlySet<number> {
  const { bondAtoms, bondOrders } = molecule;
  const open = new Set<number>();
  if (stated.size === 0) return open;
  const { bondRingSize } = ringInfo(molecule);
  for (let bond = 0; bond < molecule.bondCount; bond++) {
    const size = bondRingSize[bond]!;
    if (bondOrders[bond] !== 2 || (size > 0 && size < SMALLEST_OPEN_RING)) continue;
    const ends = [bondAtoms[2 * bond]!, bondAtoms[2 * bond + 1]!];
    // Marks at one end only say nothing of the double bond.
    if (!ends.every(atom => neighboursOf(molecule, atom).some(other => stated.has(other)))) continue;
    for (const atom of ends) if (!stated.has(atom)) open.add(atom);
  }
  return open;
}

const BOND_SYMBOLS = ['~', '', '=', '#', '$'] as const;

/** Writes the string from left to right. */
class Emission {
  readonly order: number[] = [];
  private readonly molecule: Molecule;
  private readonly tree: SpanningTree;
  private readonly marks: DirectionMarks;
  private readonly chirality: ReadonlyMap<number, '@' | '@@'>;
  private readonly sums: Uint16Array;
  private readonly digitOf = new Map<number, number>();
  private readonly freeDigits: number[] = [];
  private highestDigit = 0;

  constructor(
    molecule: Molecule,
    tree: SpanningTree,
    marks: DirectionMarks,
    chirality: ReadonlyMap<number, '@' | '@@'>,
  ) {
    this.molecule = molecule;
    this.tree = tree;
    this.marks = marks;
    this.chirality = chirality;
    this.sums = new Uint16Array(molecule.atomCount);
    for (let bond = 0; bond < molecule.bondCount; bond++) {
      for (const end of [2 * bond, 2 * bond + 1]) {
        this.sums[molecule.bondAtoms[end]!]! += molecule.bondOrders[bond]!;
      }
    }
    for (const atom of marks.hydrogens.keys()) this.sums[atom]!++;
  }

  text(): string {
    return this.tree.roots.map(root => this.component(root)).join('.');
  }

  private component(root: number): string {
    const parts: string[] = [];
    const pending: (number | string)[] = [root];
    for (let item = pending.pop(); item !== undefined; item = pending.pop()) {
      if (typeof item === 'string') {
        parts.push(item);
        continue;
      }
      this.order.push(item);
      parts.push(this.symbol(item));
      for (const bond of this.tree.closures[item]!) parts.push(this.closure(bond, item));
      const hydrogen = this.marks.hydrogens.get(item);
      if (hydrogen !== undefined) {
        parts.push(`(${hydrogen > 0 ? '/' : '\\'}[H])`);
        this.order.push(IMPLICIT_HYDROGEN);
      }
      const children = this.tree.children[item]!;
      for (let k = children.length - 1; k >= 0; k--) {
        const child = children[k]!;
        const bond = this.bondSymbol(this.tree.bondsBefore[child]!, item);
        if (k === children.length - 1) pending.push(child, bond);
        else pending.push(')', child, `(${bond}`);
      }
    }
    return parts.join('');
  }

  private bondSymbol(bond: number, from: number): string {
    const direction = this.marks.bonds[bond]!;
    if (direction === 0) return BOND_SYMBOLS[this.molecule.bondOrders[bond]!] ?? '';
    return direction > 0 === (this.molecule.bondAtoms[2 * bond] === from) ? '/' : '\\';
  }

  private closure(bond: number, atom: number): string {
    const open = this.digitOf.get(bond);
    if (open !== undefined) {
      this.digitOf.delete(bond);
      this.freeDigits.push(open);
      return digitText(open);
    }
    this.freeDigits.sort((a, b) => b - a);
    const digit = this.freeDigits.pop() ?? ++this.highestDigit;
    this.digitOf.set(bond, digit);
    return this.bondSymbol(bond, atom) + digitText(digit);
  }

  private symbol(atom: number): string {
    const { elements, charges, isotopes, hydrogens } = this.molecule;
    const z = elements[atom]!;
    const charge = charges[atom]!;
    const isotope = isotopes[atom]!;
    const chirality = this.chirality.get(atom) ?? '';
    const name = elementSymbol(z);
    const written = hydrogens[atom]! - (this.marks.hydrogens.has(atom) ? 1 : 0);
    const organic =
      z === 0
        ? written === 0
        : isOrganic(z) && organicSubsetHydrogens(z, this.sums[atom]!, false) === written;
    if (organic && charge === 0 && isotope === 0 && chirality === '') return name;
    const count = written === 0 ? '' : written === 1 ? 'H' : `H${written}`;
    const size = Math.abs(charge) > 1 ? String(Math.abs(charge)) : '';
    const sign = charge === 0 ? '' : (charge > 0 ? '+' : '-') + size;
    return `[${isotope || ''}${name}${chirality}${count}${sign}]`;
  }
}

const ORGANIC: ReadonlySet<number> = new Set([5, 6, 7, 8, 9, 15, 16, 17, 35, 53]);

function isOrganic(z: number): boolean {
  return ORGANIC.has(z);
}

function digitText(digit: number): string {
  if (digit < 10) return String(digit);
  return digit < 100 ? `%${digit}` : `%(${digit})`;
}
