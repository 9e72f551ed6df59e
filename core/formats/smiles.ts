/**
 * SMILES and lists of SMILES: the OpenSMILES specification (version 1.0, 2016) with the tail of CXSMILES.
 *
 * Read by our own reader because the stereochemistry of allenes and cumulenes must not be lost. Aromatic atoms are
 * kekulised; what the notation states of configuration is kept in the terms of `StatedStereo`.
 */
import { elementNumber, elementSymbol } from '../chemistry/elements.ts';
import { perfectMatching } from '../chemistry/kekule.ts';
import {
  adjacencyOf,
  type AtomInput,
  type BondOrder,
  buildMolecule,
  IMPLICIT_HYDROGEN,
  LONE_PAIR,
  type Molecule,
  type StatedStereo,
} from '../chemistry/molecule.ts';
import { ringBonds } from '../chemistry/rings.ts';
import { defaultHydrogens, smilesHydrogens, valenceProblem } from '../chemistry/valence.ts';
import { type CxTail, NO_TAIL, readCxTail } from './cxsmiles.ts';
import type { Entry, EntryError, Format } from './format.ts';
import { decodeText, splitLines } from './lines.ts';

/** What is wrong with a SMILES, and where: `column` is 1-based. */
export class SmilesError extends Error {
  readonly column: number;

  constructor(message: string, column: number) {
    super(`column ${column}: ${message}`);
    this.name = 'SmilesError';
    this.column = column;
  }
}

const AROMATIC_BOND = 5;
/** `~`, a bond of any order (not in OpenSMILES, common practice): kept without a localised order. */
const ANY_BOND = 6;
const UNSET = -1;

interface SmilesAtom {
  element: number;
  charge: number;
  isotope: number;
  /** Stated number of hydrogens of a bracket atom, `UNSET` outside brackets. */
  hydrogens: number;
  aromatic: boolean;
  chirality: string;
  column: number;
  /** Neighbours in the order in which the notation lists them; an implicit hydrogen in its place. */
  order: number[];
}

interface SmilesBond {
  first: number;
  second: number;
  /** 0 not written, 1 to 4, `AROMATIC_BOND`. */
  order: number;
  /** `/` is 1, `\` -1, read from `first` to `second`; 0 for none. */
  direction: number;
}

interface RingOpening {
  atom: number;
  /** Place held for the other atom in `order`. */
  slot: number;
  order: number;
  direction: number;
  column: number;
}

/** Organic subset and aromatic symbols, longest first. */
const ORGANIC = /^(?:Cl|Br|[BCNOPSFI]|[bcnops]|\*)/u;
const BRACKET =
  /^\[(\d{0,4})(\*|[A-Z][a-z]?|as|se|te|[bcnops])(@(?:@|TH[12]|AL[12]|SP[1-3]|TB\d{1,2}|OH\d{1,2})?)?(H\d?)?(\+\+|--|[+-]\d{0,2}|\+\+\+|---)?(?::(\d+))?\]/u;

class Reader {
  readonly atoms: SmilesAtom[] = [];
  readonly bonds: SmilesBond[] = [];
  readonly warnings: string[] = [];
  private readonly text: string;
  private readonly limit: number;

  constructor(text: string, atomLimit: number) {
    this.text = text;
    this.limit = atomLimit;
  }

  read(): void {
    const { text } = this;
    const openings = new Map<number, RingOpening>();
    const branches: { atom: number; column: number }[] = [];
    let previous = -1;
    let order = 0;
    let direction = 0;
    let bondColumn = 0;
    let at = 0;
    const fail = (message: string, where = at): never => {
      throw new SmilesError(message, where + 1);
    };
    const attach = (atom: SmilesAtom): void => {
      if (this.atoms.length >= this.limit) fail(`more than ${this.limit} atoms`);
      const index = this.atoms.length;
      this.atoms.push(atom);
      if (previous >= 0) {
        this.bonds.push({ first: previous, second: index, order, direction });
        this.atoms[previous]!.order.push(index);
        atom.order.push(previous);
      } else if (order !== 0 || direction !== 0) fail('a bond without an atom before it', bondColumn);
      for (let h = 0; h < Math.max(0, atom.hydrogens); h++) atom.order.push(IMPLICIT_HYDROGEN);
      previous = index;
      order = 0;
      direction = 0;
    };
    while (at < text.length) {
      const c = text[at]!;
      switch (c) {
        case '(':
          if (previous < 0) fail('a branch without an atom to hang on');
          if (order !== 0 || direction !== 0)
            fail('a bond before a branch; it belongs inside the parenthesis');
          branches.push({ atom: previous, column: at });
          at++;
          continue;
        case ')': {
          const branch = branches.pop();
          if (branch === undefined) return fail('a closing parenthesis without an opening one');
          if (order !== 0 || direction !== 0) fail('a bond that leads nowhere', bondColumn);
          if (text[at - 1] === '(') fail('an empty branch');
          previous = branch.atom;
          at++;
          continue;
        }
        case '.':
          if (order !== 0 || direction !== 0) fail('a bond that leads nowhere', bondColumn);
          if (previous < 0) fail('a dot without an atom before it');
          if (branches.length === 0 || text[at + 1] !== ')') previous = -1;
          at++;
          continue;
        case '-':
        case '=':
        case '#':
        case '$':
        case ':':
        case '~':
        case '/':
        case '\\':
          if (order !== 0 || direction !== 0) fail('two bonds in a row');
          bondColumn = at;
          if (c === '/') direction = 1;
          else if (c === '\\') direction = -1;
          else
            order =
              c === '-'
                ? 1
                : c === '='
                  ? 2
                  : c === '#'
                    ? 3
                    : c === '$'
                      ? 4
                      : c === '~'
                        ? ANY_BOND
                        : AROMATIC_BOND;
          at++;
          continue;
        default:
      }
      if (c === '%' || (c >= '0' && c <= '9')) {
        const digits = /^(?:%\((\d{1,5})\)|%(\d\d)|(\d))/u.exec(text.slice(at, at + 9));
        if (digits === null) return fail('a ring closure needs two digits after %, as in %12');
        if (previous < 0) fail('a ring closure without an atom before it');
        const number = Number(digits[1] ?? digits[2] ?? digits[3]);
        const opening = openings.get(number);
        if (opening === undefined) {
          const atom = this.atoms[previous]!;
          openings.set(number, { atom: previous, slot: atom.order.length, order, direction, column: at });
          atom.order.push(UNSET - 8);
        } else {
          openings.delete(number);
          this.closeRing(opening, previous, order, direction, at);
        }
        order = 0;
        direction = 0;
        at += digits[0].length;
        continue;
      }
      if (c === '[') {
        const match = BRACKET.exec(text.slice(at, at + 48));
        if (match === null) {
          const close = text.indexOf(']', at);
          return fail(
            close < 0
              ? 'a bracket that is not closed'
              : `${text.slice(at, Math.min(close + 1, at + 40))} is not a bracket atom; the order is isotope, symbol, chirality, hydrogens, charge, class`,
          );
        }
        attach(this.bracketAtom(match, at));
        at += match[0].length;
        continue;
      }
      const match = ORGANIC.exec(text.slice(at, at + 2));
      if (match === null) {
        return fail(`"${c}" is no atom, bond, branch or ring closure; other elements stand in brackets`);
      }
      const symbol = match[0];
      const element = symbol === '*' ? 0 : elementNumber(symbol[0]!.toUpperCase() + symbol.slice(1))!;
      attach({
        element,
        charge: 0,
        isotope: 0,
        hydrogens: UNSET,
        aromatic: symbol !== '*' && symbol === symbol.toLowerCase(),
        chirality: '',
        column: at + 1,
        order: [],
      });
      at += symbol.length;
    }
    if (order !== 0 || direction !== 0) fail('a bond that leads nowhere', bondColumn);
    const branch = branches.pop();
    if (branch !== undefined) fail('a branch that is not closed', branch.column);
    for (const [number, opening] of openings) {
      fail(`ring closure ${number} is opened and never closed`, opening.column);
    }
  }

  private bracketAtom(match: RegExpExecArray, at: number): SmilesAtom {
    const [, isotope, symbol, chirality, hydrogens, charge] = match;
    const lower = symbol !== '*' && symbol === symbol!.toLowerCase();
    const element = symbol === '*' ? 0 : elementNumber(symbol![0]!.toUpperCase() + symbol!.slice(1));
    if (element === undefined || symbol === 'D' || symbol === 'T') {
      throw new SmilesError(
        `${symbol} is not an element${symbol === 'D' || symbol === 'T' ? '; deuterium is [2H], tritium [3H]' : ''}`,
        at + 1,
      );
    }
    let q = 0;
    if (charge) {
      const sign = charge[0] === '-' ? -1 : 1;
      q = /\d/u.test(charge) ? sign * Number(charge.slice(1)) : sign * charge.length;
    }
    return {
      element,
      charge: q,
      isotope: isotope ? Number(isotope) : 0,
      hydrogens: hydrogens ? (hydrogens.length > 1 ? Number(hydrogens.slice(1)) : 1) : 0,
      aromatic: lower,
      chirality: chirality ?? '',
      column: at + 1,
      order: [],
    };
  }

  private closeRing(opening: RingOpening, atom: number, order: number, direction: number, at: number): void {
    if (opening.atom === atom) throw new SmilesError('a ring closure on the same atom', at + 1);
    if (order !== 0 && opening.order !== 0 && order !== opening.order) {
      throw new SmilesError('the two ends of a ring closure have different bonds', at + 1);
    }
    if (this.atoms[atom]!.order.includes(opening.atom)) {
      throw new SmilesError('a ring closure between two atoms that are bonded already', at + 1);
    }
    this.atoms[opening.atom]!.order[opening.slot] = atom;
    this.atoms[atom]!.order.push(opening.atom);
    this.bonds.push({
      first: opening.atom,
      second: atom,
      order: opening.order !== 0 ? opening.order : order,
      direction: opening.direction !== 0 ? opening.direction : -direction,
    });
  }
}

/** Fixes bond orders: unwritten bonds, and the Kekulé structure of aromatic parts. */
function settleOrders(reader: Reader): void {
  const { atoms, bonds } = reader;
  for (const bond of bonds) {
    if (bond.order !== 0) continue;
    const both = atoms[bond.first]!.aromatic && atoms[bond.second]!.aromatic;
    bond.order = both && bond.direction === 0 ? AROMATIC_BOND : 1;
  }
  const fixed = new Float64Array(atoms.length);
  // Only bonds between two aromatic atoms need to be known to lie in a ring.
  const rings = bonds.some(bond => bond.order === AROMATIC_BOND) ? ringMembership(atoms.length, bonds) : null;
  const edges: [number, number][] = [];
  bonds.forEach((bond, b) => {
    // An unwritten bond between two aromatic rings (biphenyl) is single.
    if (bond.order === AROMATIC_BOND && rings?.[b] === 0) bond.order = 1;
    const order = bond.order === AROMATIC_BOND ? 1 : bond.order === ANY_BOND ? 0 : bond.order;
    fixed[bond.first]! += order;
    fixed[bond.second]! += order;
    if (bond.order === AROMATIC_BOND) edges.push([bond.first, bond.second]);
  });
  if (edges.length === 0 && !atoms.some(atom => atom.aromatic)) return;
  const needs = new Uint8Array(atoms.length);
  atoms.forEach((atom, i) => {
    if (atom.aromatic && needsDoubleBond(atom, fixed[i]!)) needs[i] = 1;
  });
  const { partner, unmatched } = perfectMatching(atoms.length, needs, edges);
  if (unmatched.length > 0) {
    const named = unmatched.map(
      i => `${elementSymbol(atoms[i]!.element).toLowerCase()} at column ${atoms[i]!.column}`,
    );
    throw new SmilesError(
      `no Kekulé structure for the aromatic atoms: ${named.join(', ')} can have no double bond; a nitrogen with hydrogen is written [nH]`,
      atoms[unmatched[0]!]!.column,
    );
  }
  for (const bond of bonds) {
    if (bond.order === AROMATIC_BOND) bond.order = partner[bond.first] === bond.second ? 2 : 1;
  }
}

/** Whether an aromatic atom must be given a double bond: its valence has room for one beside its single bonds. */
function needsDoubleBond(atom: SmilesAtom, sum: number): boolean {
  const used = sum + Math.max(0, atom.hydrogens);
  switch (atom.element) {
    case 5:
      return atom.charge === -1 ? used < 4 : atom.charge === 0 && used < 3;
    case 6:
      // A cation has three bonds and an empty orbital, an anion three and a lone pair.
      return atom.charge === 0 ? used < 4 : used < 3;
    case 7:
      return atom.charge === 1 ? used < 4 : atom.charge === 0 && (used < 3 || used === 4);
    case 15:
    case 33:
      return atom.charge === 1 ? used < 4 : atom.charge === 0 && (used < 3 || used === 4);
    case 8:
    case 16:
    case 34:
    case 52:
      // Neutral: a pair of electrons, no double bond, except with three bonds, as in an S-oxide that is still short of one.
      return atom.charge === 1 ? used < 3 : atom.element !== 8 && used === 3;
    default:
      return false;
  }
}

/** 1 for bonds in rings: a bond is in one unless removing it parts its ends. */
function ringMembership(atomCount: number, bonds: readonly SmilesBond[]): Uint8Array {
  const bondAtoms = new Uint32Array(2 * bonds.length);
  for (let b = 0; b < bonds.length; b++) {
    bondAtoms[2 * b] = bonds[b]!.first;
    bondAtoms[2 * b + 1] = bonds[b]!.second;
  }
  return ringBonds({ atomCount, bondCount: bonds.length, ...adjacencyOf(atomCount, bondAtoms) });
}

/** Stated configuration of centres, allenes and double bonds. */
function statedStereo(reader: Reader, hydrogens: readonly number[]): StatedStereo[] {
  const { atoms, bonds } = reader;
  const stated: StatedStereo[] = [];
  const doubles: number[][] = atoms.map(() => []);
  for (const bond of bonds) {
    if (bond.order !== 2) continue;
    doubles[bond.first]!.push(bond.second);
    doubles[bond.second]!.push(bond.first);
  }
  atoms.forEach((atom, i) => {
    if (atom.chirality === '') return;
    const kind = /^@(SP|TB|OH)/u.exec(atom.chirality);
    if (kind !== null) {
      reader.warnings.push(`column ${atom.column}: ${atom.chirality} is read and not judged`);
      return;
    }
    const turn = atom.chirality === '@@' || atom.chirality.endsWith('2') ? 'clockwise' : 'anticlockwise';
    if (doubles[i]!.length === 2 && atom.order.length === 2) {
      const allene = alleneLigands(atoms, doubles, hydrogens, i);
      if (allene === null)
        reader.warnings.push(`column ${atom.column}: chirality on an atom that has none is ignored`);
      else stated.push({ kind: 'allene', ...allene, turn });
      return;
    }
    const ligands = [...atom.order];
    if (ligands.length === 3)
      ligands.splice(ligands[0] !== undefined && precedes(ligands[0], i) ? 1 : 0, 0, LONE_PAIR);
    const [a, b, c, d] = ligands;
    if (ligands.length !== 4 || a === undefined || b === undefined || c === undefined || d === undefined) {
      reader.warnings.push(
        `column ${atom.column}: chirality on an atom with ${ligands.length} neighbours is ignored`,
      );
      return;
    }
    stated.push({ kind: 'centre', atom: i, ligands: [a, b, c, d], turn });
  });
  stated.push(...statedDoubleBonds(reader, doubles));
  return stated;
}

/** Whether the first-listed neighbour stands before the atom in the string. */
function precedes(first: number, index: number): boolean {
  return first >= 0 && first < index;
}

/** Ends of the row of double bonds whose middle is `centre`, and the ligands of both in the order of the string. */
function alleneLigands(
  atoms: readonly SmilesAtom[],
  doubles: readonly (readonly number[])[],
  hydrogens: readonly number[],
  centre: number,
): { ends: [number, number]; ligands: [number, number, number, number] } | null {
  const walk = (next: number): { end: number; inner: number; steps: number } => {
    let inner = centre;
    let end = next;
    let steps = 1;
    while (doubles[end]!.length === 2 && steps <= atoms.length) {
      const following = doubles[end]![0] === inner ? doubles[end]![1]! : doubles[end]![0]!;
      inner = end;
      end = following;
      steps++;
    }
    return { end, inner, steps };
  };
  const inOrder = atoms[centre]!.order.filter(neighbour => doubles[centre]!.includes(neighbour));
  const [one, two] = inOrder;
  if (one === undefined || two === undefined) return null;
  const first = walk(one);
  const second = walk(two);
  if (first.steps !== second.steps) return null;
  const endLigands = (end: number, inner: number): number[] => {
    const { order, hydrogens: bracketed } = atoms[end]!;
    const ligands = order.filter(neighbour => neighbour !== inner);
    // An implicit hydrogen outside brackets follows whatever stands before the atom.
    if (bracketed === UNSET && hydrogens[end] === 1) {
      const before = order[0] !== undefined && order[0] < end && order[0] !== inner && order[0] >= 0;
      ligands.splice(before ? 1 : 0, 0, IMPLICIT_HYDROGEN);
    }
    return ligands;
  };
  const ligands = [...endLigands(first.end, first.inner), ...endLigands(second.end, second.inner)];
  const [a, b, c, d] = ligands;
  if (ligands.length !== 4 || a === undefined || b === undefined || c === undefined || d === undefined)
    return null;
  return { ends: [first.end, second.end], ligands: [a, b, c, d] };
}

/** Double bonds and odd rows of them with a directed bond at both ends. */
function statedDoubleBonds(reader: Reader, doubles: readonly (readonly number[])[]): StatedStereo[] {
  const { atoms, bonds } = reader;
  const directed: { other: number; up: number }[][] = atoms.map(() => []);
  for (const bond of bonds) {
    if (bond.direction === 0) continue;
    // F/C: C lies above F; read from the other atom, F lies below.
    directed[bond.first]!.push({ other: bond.second, up: bond.direction });
    directed[bond.second]!.push({ other: bond.first, up: -bond.direction });
  }
  const stated: StatedStereo[] = [];
  for (let start = 0; start < atoms.length; start++) {
    if (doubles[start]!.length !== 1 || directed[start]!.length === 0) continue;
    let inner = start;
    let end = doubles[start]![0]!;
    let steps = 1;
    while (doubles[end]!.length === 2 && steps <= atoms.length) {
      const following = doubles[end]![0] === inner ? doubles[end]![1]! : doubles[end]![0]!;
      inner = end;
      end = following;
      steps++;
    }
    if (end < start || steps % 2 === 0 || doubles[end]!.length !== 1 || directed[end]!.length === 0) continue;
    if (contradicts(directed[start]!) || contradicts(directed[end]!)) {
      reader.warnings.push(
        `column ${atoms[start]!.column}: the directed bonds at one end of a double bond contradict each other; it counts as unspecified`,
      );
      continue;
    }
    const first = directed[start]![0]!;
    const second = directed[end]![0]!;
    stated.push({
      kind: 'double-bond',
      ends: [start, end],
      references: [first.other, second.other],
      side: first.up === second.up ? 'same' : 'opposite',
    });
  }
  return stated;
}

function contradicts(marks: readonly { up: number }[]): boolean {
  return marks.length > 1 && marks[0]!.up === marks[1]!.up;
}

/** Reads one SMILES, with or without the tail of CXSMILES between bars. @throws SmilesError */
export function parseSmiles(
  text: string,
  atomLimit = 1_000_000,
): { readonly molecule: Molecule; readonly warnings: readonly string[] } {
  const trimmed = text.trim();
  const match = /^(\S*)(?:\s+(\|.*\|))?/u.exec(trimmed);
  return readSmiles(match?.[1] ?? '', match?.[2] ?? null, '', atomLimit);
}

function readSmiles(
  text: string,
  tail: string | null,
  name: string,
  atomLimit: number,
): { molecule: Molecule; warnings: readonly string[] } {
  if (text === '') throw new SmilesError('the SMILES is empty', 1);
  const reader = new Reader(text, atomLimit);
  reader.read();
  settleOrders(reader);
  const { atoms, bonds } = reader;
  const sums = new Int32Array(atoms.length);
  for (const bond of bonds) {
    if (bond.order === ANY_BOND) bond.order = 0;
    sums[bond.first]! += bond.order;
    sums[bond.second]! += bond.order;
  }
  const hydrogens = atoms.map((atom, i) =>
    atom.hydrogens === UNSET ? smilesHydrogens(atom.element, sums[i]!) : atom.hydrogens,
  );
  atoms.forEach((atom, i) => {
    const problem = valenceProblem(atom.element, atom.charge, 0, sums[i]! + hydrogens[i]!, i);
    if (problem !== null) reader.warnings.push(problem);
  });
  const cx: CxTail = tail === null ? NO_TAIL : readCxTail(tail, atoms.length);
  const stated = statedStereo(reader, hydrogens).filter(
    stereo => stereo.kind !== 'centre' || !cx.unspecified.has(stereo.atom),
  );
  const inputs: AtomInput[] = atoms.map((atom, i) => ({
    element: atom.element,
    charge: atom.charge,
    isotope: atom.isotope,
    hydrogens: hydrogens[i]!,
    // What a bracket atom lacks of its valence are unpaired electrons: [CH3] is methyl, [CH2] carbene.
    radical:
      cx.radicals.get(i) ??
      (atom.hydrogens === UNSET ? 0 : defaultHydrogens(atom.element, atom.charge, sums[i]! + hydrogens[i]!)),
    ...(cx.labels?.[i] ? { label: cx.labels[i] } : {}),
  }));
  const molecule = buildMolecule({
    name,
    atoms: inputs,
    bonds: bonds.map(bond => [bond.first, bond.second, bond.order as BondOrder]),
    stated,
    stereoGroups: cx.groups,
  });
  return { molecule, warnings: [...reader.warnings, ...cx.warnings] };
}

/** A list of SMILES, one a line: SMILES, white space, the name up to the next tab. */
export const smilesFormat: Format = {
  name: 'SMILES',
  extensions: ['smi', 'smiles', 'ism', 'cxsmiles'],

  sniff(head) {
    const text = decodeText(head.subarray(0, 4096));
    const lines = text.split(/\r\n|\n|\r/u).filter(line => line.trim() !== '');
    const first = lines[0];
    if (first === undefined) return 0;
    const words = first.trim().split(/\s/u);
    if (!/^[A-Za-z0-9@+\-[\]()=#$:/\\.%*]+$/u.test(words[0] ?? '')) return 0;
    try {
      parseSmiles(words[0]!);
      return 0.6;
    } catch {
      // Not a SMILES in the first line; a header may stand there.
      try {
        parseSmiles((lines[1] ?? '').trim().split(/\s/u)[0]!);
        return 0.4;
      } catch {
        return 0.05;
      }
    }
  },

  async *split(chunks, limits) {
    let entry = 0;
    for await (const { bytes, line } of splitLines(chunks, limits)) {
      if (isBlank(bytes) || bytes[0] === 0x23) continue;
      if (entry === 0 && isHeader(bytes)) continue;
      entry++;
      yield { entry, line, bytes };
    }
  },

  parse(raw, limits) {
    const text = decodeText(raw.bytes).replace(/[\r\n]+$/u, '');
    const match = /^\s*(\S+)(?:\s+(\|[^|]*\|))?\s*([^\t]*)/u.exec(text);
    const base = { entry: raw.entry, line: raw.line, data: [], name: match?.[3]?.trim() ?? '' };
    try {
      const { molecule, warnings } = readSmiles(
        match?.[1] ?? '',
        match?.[2] ?? null,
        base.name,
        limits.atoms,
      );
      return [{ ...base, molecule, warnings, error: null } satisfies Entry];
    } catch (error) {
      if (!(error instanceof SmilesError)) throw error;
      const problem: EntryError = { code: 'bad-smiles', message: error.message, line: raw.line };
      return [{ ...base, molecule: null, warnings: [], error: problem }];
    }
  },
};

function isBlank(bytes: Uint8Array): boolean {
  return bytes.every(byte => byte === 0x20 || byte === 0x09 || byte === 0x0a || byte === 0x0d);
}

/** A first line such as "smiles name": words that no SMILES could be. */
function isHeader(bytes: Uint8Array): boolean {
  return /^\s*(?:can_?|iso_?|canonical_?|isomeric_?)?smiles\b/iu.test(decodeText(bytes));
}
