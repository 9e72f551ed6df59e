/**
 * InChI, one identifier a line with an optional name after white space: a molecule without coordinates.
 *
 * The identifier leaves bond orders and the place of mobile hydrogens open; one Kekulé structure that fits is chosen.
 * Source: InChI Technical Manual (InChI Trust) and S. R. Heller et al., J. Cheminform. 2015, 7, 23.
 */
import { elementNumber, elementSymbol } from '../chemistry/elements.ts';
import {
  type AtomInput,
  type BondOrder,
  buildMolecule,
  IMPLICIT_HYDROGEN,
  LONE_PAIR,
  type Molecule,
  type StatedStereo,
  type StereoGroup,
} from '../chemistry/molecule.ts';
import type { Entry, Format, Limits, RawEntry } from './format.ts';

/** What is wrong with an identifier. */
export class InchiError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'InchiError';
  }
}

interface Component {
  /** Atomic numbers in canonical order, hydrogens left out (unless there is nothing else). */
  readonly elements: number[];
  readonly hydrogens: Uint8Array;
  readonly bonds: [number, number][];
  readonly isotopes: Uint16Array;
  charge: number;
  /** Hydrogens and negative charges shared among atoms: how many, and among which. */
  readonly mobile: { readonly count: number; readonly negative: boolean; readonly atoms: number[] }[];
  /** Positive charges that bonds may imply beyond what the connections show. */
  positives: number;
  readonly parities: { readonly atom: number; readonly sign: 1 | -1 }[];
  readonly doubleBonds: { readonly atoms: [number, number]; readonly sign: 1 | -1 }[];
  inverted: boolean;
}

/** Splits a layer at semicolons; `3*` repeats what follows. */
function componentsOf(layer: string, multiplied: (text: string) => RegExpExecArray | null): string[] {
  const parts: string[] = [];
  for (const part of layer.split(';')) {
    const match = multiplied(part);
    const times = match?.[1] ? Number(match[1]) : 1;
    if (times > 10_000) throw new InchiError(`a component repeated ${times} times`);
    for (let k = 0; k < times; k++) parts.push(match?.[2] ?? '');
  }
  return parts;
}

const starred = (text: string): RegExpExecArray | null => /^(?:(\d+)\*)?(.*)$/s.exec(text);

function parseFormula(formula: string): Component[] {
  const components: Component[] = [];
  for (const part of formula.split('.')) {
    const match = /^(\d+)?(.*)$/.exec(part);
    const times = match?.[1] ? Number(match[1]) : 1;
    for (let k = 0; k < times; k++) components.push(emptyComponent(match?.[2] ?? ''));
  }
  return components;
}

function emptyComponent(formula: string): Component {
  const elements: number[] = [];
  let hydrogens = 0;
  let read = 0;
  for (const match of formula.matchAll(/([A-Z][a-z]?)(\d*)/g)) {
    read += match[0].length;
    const z = elementNumber(match[1]!);
    if (z === undefined) throw new InchiError(`no element ${match[1]} (formula ${formula})`);
    const count = match[2] === '' ? 1 : Number(match[2]);
    if (z === 1) hydrogens += count;
    else for (let k = 0; k < count; k++) elements.push(z);
  }
  if (read !== formula.length) throw new InchiError(`the formula ${formula} cannot be read`);
  if (elements.length === 0) for (let k = 0; k < hydrogens; k++) elements.push(1);
  return {
    elements,
    hydrogens: new Uint8Array(elements.length),
    bonds: [],
    isotopes: new Uint16Array(elements.length),
    charge: 0,
    mobile: [],
    positives: 0,
    parities: [],
    doubleBonds: [],
    inverted: false,
  };
}

function atomIndex(text: string, component: Component): number {
  const atom = Number(text) - 1;
  if (!Number.isInteger(atom) || atom < 0 || atom >= component.elements.length) {
    throw new InchiError(`atom ${text} of ${component.elements.length}`);
  }
  return atom;
}

function parseConnections(text: string, component: Component): void {
  let previous = -1;
  const open: number[] = [];
  for (const [token] of text.matchAll(/\d+|[^\d]/g)) {
    if (token === '(') open.push(previous);
    else if (token === ')') previous = open.pop() ?? -1;
    else if (token === ',') previous = open.at(-1) ?? -1;
    else if (token !== '-') {
      const atom = atomIndex(token, component);
      if (previous !== -1) component.bonds.push([previous, atom]);
      previous = atom;
    }
  }
}

function parseHydrogens(text: string, component: Component): void {
  const fixed = text.replace(
    /\(H(\d*)(-\d*)?((?:,\d+)+)\)/g,
    (_, count: string, minus: string | undefined, list: string) => {
      const atoms = list
        .slice(1)
        .split(',')
        .map(atom => atomIndex(atom, component));
      component.mobile.push({ count: count === '' ? 1 : Number(count), negative: false, atoms });
      if (minus !== undefined) {
        const charges = minus === '-' ? 1 : Number(minus.slice(1));
        component.mobile.push({ count: charges, negative: true, atoms });
        component.positives += charges;
      }
      return '';
    },
  );
  let waiting: number[] = [];
  for (const part of fixed.split(',')) {
    if (part === '') continue;
    const match = /^(\d+)(?:-(\d+))?(H(\d*))?$/.exec(part);
    if (!match) throw new InchiError(`the hydrogen layer cannot be read at "${part}"`);
    const first = atomIndex(match[1]!, component);
    const last = match[2] === undefined ? first : atomIndex(match[2], component);
    for (let atom = first; atom <= last; atom++) waiting.push(atom);
    if (match[3] === undefined) continue;
    const count = match[4] === '' || match[4] === undefined ? 1 : Number(match[4]);
    for (const atom of waiting) component.hydrogens[atom] = count;
    waiting = [];
  }
}

/** Mass number that an isotopic shift counts from: the rounded standard atomic weight. */
const BASE_MASS: ReadonlyMap<number, number> = new Map([
  [6, 12],
  [7, 14],
  [8, 16],
  [9, 19],
  [15, 31],
  [16, 32],
  [17, 35],
  [34, 79],
  [35, 80],
  [53, 127],
]);

function parseIsotopes(text: string, component: Component, hydrogenIsotopes: [number, number][]): void {
  for (const part of text.split(',')) {
    if (part === '') continue;
    const match = /^(\d+)([+-]\d+)?((?:[DT]\d*)*)$/.exec(part);
    if (!match) continue;
    const atom = atomIndex(match[1]!, component);
    const base = BASE_MASS.get(component.elements[atom]!);
    if (match[2] !== undefined) {
      if (base === undefined) {
        throw new InchiError(`isotopes of ${elementSymbol(component.elements[atom]!)} are not read`);
      }
      component.isotopes[atom] = base + Number(match[2]);
    }
    for (const [, letter, count] of match[3]!.matchAll(/([DT])(\d*)/g)) {
      const times = count === '' ? 1 : Number(count);
      for (let k = 0; k < times; k++) hydrogenIsotopes.push([atom, letter === 'D' ? 2 : 3]);
    }
  }
}

interface Layers {
  readonly components: Component[];
  readonly hydrogenIsotopes: [number, number][][];
  kind: string | null;
}

function signed(text: string): { name: string; sign: 1 | -1 } | null {
  const match = /^(.+?)([+-])$/.exec(text);
  return match ? { name: match[1]!, sign: match[2] === '+' ? 1 : -1 } : null;
}

function readLayers(identifier: string): Layers {
  const [head, formula, ...layers] = identifier.split('/');
  if (!/^InChI=1S?$/.test(head ?? '')) throw new InchiError('version 1 (InChI=1S/ or InChI=1/) is wanted');
  if (!formula || !/^[A-Z0-9.]/i.test(formula)) throw new InchiError('the formula is missing');
  const components = parseFormula(formula);
  const result: Layers = { components, hydrogenIsotopes: components.map(() => []), kind: null };
  let isotopic = false;
  for (const layer of layers) {
    const letter = layer[0];
    const body = layer.slice(1);
    if (letter === 'f' || letter === 'r') break;
    if (letter === 'i') isotopic = true;
    if (letter === 'm') {
      Array.from(body).forEach((digit, c) => {
        const component = components[c];
        if (component) component.inverted = digit === '1';
      });
      continue;
    }
    if (letter === 's') {
      result.kind = body;
      continue;
    }
    if (letter === 'p') {
      for (const component of components) component.positives += Math.max(0, Number(body) || 0);
      continue;
    }
    // In the isotopic part a layer that is given replaces the one of the main part.
    const parts = componentsOf(body, starred);
    for (const [c, component] of components.entries()) {
      const part = parts[c] ?? '';
      if (part === '') continue;
      if (letter === 'c') parseConnections(part, component);
      else if (letter === 'h' && !isotopic) parseHydrogens(part, component);
      else if (letter === 'q') {
        component.charge = Number(part);
        component.positives += Math.max(0, component.charge);
      } else if (letter === 'i') parseIsotopes(part, component, result.hydrogenIsotopes[c]!);
      else if (letter === 't' && part !== 'm') {
        component.parities.length = 0;
        for (const item of part.split(',')) {
          const parity = signed(item);
          if (parity) component.parities.push({ atom: atomIndex(parity.name, component), sign: parity.sign });
        }
      } else if (letter === 'b' && part !== 'm') {
        component.doubleBonds.length = 0;
        for (const item of part.split(',')) {
          const parity = signed(item);
          const [first, second] = parity?.name.split('-') ?? [];
          if (!parity || first === undefined || second === undefined) continue;
          component.doubleBonds.push({
            atoms: [atomIndex(first, component), atomIndex(second, component)],
            sign: parity.sign,
          });
        }
      }
    }
  }
  return result;
}

/** Valences that uncharged atoms of the elements take, smallest first. */
const VALENCES: ReadonlyMap<number, readonly number[]> = new Map([
  [1, [1]],
  [5, [3]],
  [6, [4]],
  [7, [3, 5]],
  [8, [2]],
  [9, [1]],
  [14, [4]],
  [15, [3, 5]],
  [16, [2, 4, 6]],
  [17, [1, 3, 5, 7]],
  [32, [4]],
  [33, [3, 5]],
  [34, [2, 4, 6]],
  [35, [1, 3, 5, 7]],
  [52, [2, 4, 6]],
  [53, [1, 3, 5, 7]],
]);

/** Most steps of the search for bond orders. */
const ORDER_STEPS = 200_000;

/** Bond orders and charges that satisfy the valences; null when none are found. */
function assignOrders(
  component: Component,
  hydrogens: Uint8Array,
  negative: Uint8Array,
  ionic: boolean,
): { orders: BondOrder[]; charges: Int8Array } | null {
  const { elements, bonds } = component;
  const n = elements.length;
  const degree = new Int32Array(n);
  const around: number[][] = Array.from({ length: n }, () => []);
  bonds.forEach(([a, b], at) => {
    degree[a]!++;
    degree[b]!++;
    around[a]!.push(at);
    around[b]!.push(at);
  });
  const charges = new Int8Array(n);
  for (let atom = 0; atom < n; atom++) charges[atom] = -negative[atom]!;
  /** Number of bonds and hydrogens at which an atom bears a positive charge; 0 for one that cannot. */
  const chargedAt = new Uint8Array(n);
  /** Free valences still to be used by π bonds; several values may do. */
  const choices: number[][] = elements.map((z, atom) => {
    const used = degree[atom]! + hydrogens[atom]! + negative[atom]!;
    const valences = VALENCES.get(z);
    if (!valences) return [0];
    if (z === 7 && used === 4) {
      charges[atom] = 1;
      return [0];
    }
    if ((z === 8 || z === 16) && used === 3 && !(z === 16 && degree[atom] === 3 && hydrogens[atom] === 0)) {
      charges[atom] = 1;
      return [0];
    }
    if (z === 5 && used === 4) {
      charges[atom] = -1;
      return [0];
    }
    if (z === 15 && used === 4 && component.charge > 0) {
      charges[atom] = 1;
      return [0];
    }
    const free = valences.map(valence => valence - used).filter(rest => rest >= 0);
    if ((z === 8 || z === 16) && used === 1 && ionic) free.push(0);
    if (z === 7 && used <= 3 && (component.positives > 0 || ionic)) {
      chargedAt[atom] = 4;
      free.push(4 - used);
    }
    if ((z === 16 || z === 34) && used === 3 && (component.positives > 0 || ionic)) {
      chargedAt[atom] = 3;
      free.push(0);
    }
    return free.length > 0 ? free : [0];
  });
  const extra = new Int32Array(bonds.length);
  const load = new Int32Array(n);
  const valenceOf = (atom: number): number =>
    degree[atom]! + hydrogens[atom]! + negative[atom]! + load[atom]!;
  let steps = 0;
  const order = Array.from({ length: n }, (_, atom) => atom).sort(
    (a, b) => choices[a]!.length - choices[b]!.length || around[a]!.length - around[b]!.length,
  );
  const most = (atom: number): number => Math.max(...choices[atom]!);
  /** Finds the atom that can be satisfied in the fewest ways and tries them. */
  const search = (): boolean => {
    if (++steps > ORDER_STEPS) return false;
    let tightest = -1;
    let fewest = Number.POSITIVE_INFINITY;
    for (const atom of order) {
      if (choices[atom]!.includes(load[atom]!)) continue;
      let ways = 0;
      for (const at of around[atom]!) {
        const other = bonds[at]![0] === atom ? bonds[at]![1] : bonds[at]![0];
        if (load[other]! < most(other) && extra[at]! < 2) ways++;
      }
      if (load[atom]! > most(atom) || ways === 0) return false;
      if (ways < fewest) {
        fewest = ways;
        tightest = atom;
      }
    }
    if (tightest === -1) {
      let positives = 0;
      for (let atom = 0; atom < n; atom++) {
        if (chargedAt[atom] !== 0 && valenceOf(atom) === chargedAt[atom]) positives++;
      }
      return ionic || positives <= component.positives;
    }
    for (const at of around[tightest]!) {
      const other = bonds[at]![0] === tightest ? bonds[at]![1] : bonds[at]![0];
      if (load[other]! >= most(other) || extra[at]! >= 2) continue;
      extra[at]!++;
      load[tightest]!++;
      load[other]!++;
      if (search()) return true;
      extra[at]!--;
      load[tightest]!--;
      load[other]!--;
    }
    return false;
  };
  if (!search()) return null;
  for (let atom = 0; atom < n; atom++) {
    if (chargedAt[atom] !== 0 && valenceOf(atom) === chargedAt[atom]) charges[atom] = 1;
  }
  for (let atom = 0; atom < n; atom++) {
    const used = valenceOf(atom);
    if (ionic && (elements[atom] === 8 || elements[atom] === 16) && used === 1) charges[atom] = -1;
  }
  return { orders: Array.from(extra, each => (each + 1) as BondOrder), charges };
}

/** Most ways of placing mobile hydrogens that are tried. */
const MOBILE_WAYS = 5000;

/** Places the mobile hydrogens so that bond orders can be assigned. */
function resolveBonding(component: Component): {
  hydrogens: Uint8Array;
  orders: BondOrder[];
  charges: Int8Array;
} {
  const hydrogens = component.hydrogens.slice();
  const negative = new Uint8Array(hydrogens.length);
  let ways = 0;
  let result: { orders: BondOrder[]; charges: Int8Array } | null = null;
  const place = (group: number, from: number, left: number): boolean => {
    const mobile = component.mobile[group];
    if (!mobile) {
      if (++ways > MOBILE_WAYS) return true;
      result = assignOrders(component, hydrogens, negative, false);
      return result !== null;
    }
    if (left === 0) return place(group + 1, 0, component.mobile[group + 1]?.count ?? 0);
    const placed = mobile.negative ? negative : hydrogens;
    for (let k = from; k < mobile.atoms.length; k++) {
      const atom = mobile.atoms[k]!;
      placed[atom]!++;
      if (place(group, k, left - 1)) return true;
      placed[atom]!--;
    }
    return false;
  };
  place(0, 0, component.mobile[0]?.count ?? 0);
  if (result === null) {
    for (const { count, negative: isCharge, atoms } of component.mobile) {
      const placed = isCharge ? negative : hydrogens;
      for (let k = 0; k < count; k++) placed[atoms[k % atoms.length]!]!++;
    }
    // Protons that the identifier moved between components (/p, salts) leave ions behind.
    result = assignOrders(component, hydrogens, negative, true);
  }
  if (result === null) {
    // Charged and odd species: connections and hydrogens hold, the orders stay single.
    return {
      hydrogens,
      orders: component.bonds.map(() => 1),
      charges: new Int8Array(component.elements.length),
    };
  }
  return { hydrogens, ...result };
}

function neighboursIn(component: Component, atom: number): number[] {
  const list: number[] = [];
  for (const [a, b] of component.bonds) {
    if (a === atom) list.push(b);
    if (b === atom) list.push(a);
  }
  return list.sort((a, b) => a - b);
}

/**
 * Reads one identifier.
 *
 * Parities (Technical Manual, section on stereochemistry): seen from the lowest neighbour, hydrogen or lone pair being
 * lowest of all, `-` is anticlockwise in rising canonical numbers; `/m1` inverts. A double bond is `-` when its
 * neighbours of highest number lie on the same side.
 *
 * @throws InchiError that says what cannot be read.
 */
export function readInchi(identifier: string, name = ''): { molecule: Molecule; warnings: string[] } {
  const { components, hydrogenIsotopes, kind } = readLayers(identifier);
  const atoms: AtomInput[] = [];
  const bonds: [number, number, BondOrder][] = [];
  const stated: StatedStereo[] = [];
  const groups: StereoGroup[] = [];
  const warnings: string[] = [];
  components.forEach((component, c) => {
    const offset = atoms.length;
    const { hydrogens, orders, charges } = resolveBonding(component);
    const isotopic = hydrogenIsotopes[c]!;
    component.elements.forEach((element, atom) => {
      const labelled = isotopic.filter(([carrier]) => carrier === atom).length;
      atoms.push({
        element,
        charge: charges[atom]!,
        isotope: component.isotopes[atom]!,
        hydrogens: Math.max(0, hydrogens[atom]! - labelled),
      });
    });
    component.bonds.forEach(([a, b], at) => {
      bonds.push([a + offset, b + offset, orders[at]!]);
    });
    const isotopeAtoms: [number, number][] = [];
    for (const [carrier, isotope] of isotopic) {
      isotopeAtoms.push([carrier, atoms.length]);
      bonds.push([carrier + offset, atoms.length, 1]);
      atoms.push({ element: 1, isotope });
    }
    const placed: number[] = [];
    for (const { atom, sign } of component.parities) {
      const heavy = neighboursIn(component, atom).map(other => other + offset);
      const labelled = isotopeAtoms.filter(([carrier]) => carrier === atom).map(([, at]) => at);
      const ligands = [...labelled, ...heavy];
      if (ligands.length === 3)
        ligands.unshift(hydrogens[atom]! > labelled.length ? IMPLICIT_HYDROGEN : LONE_PAIR);
      if (heavy.length === 2 && labelled.length === 0) {
        warnings.push(`the configuration of the cumulene at atom ${atom + 1} is not read`);
        continue;
      }
      const [p, q, r, s] = ligands;
      if (p === undefined || q === undefined || r === undefined || s === undefined || ligands.length > 4)
        continue;
      const anticlockwise = (sign === -1) !== component.inverted;
      stated.push({
        kind: 'centre',
        atom: atom + offset,
        ligands: [p, q, r, s],
        turn: anticlockwise ? 'anticlockwise' : 'clockwise',
      });
      placed.push(atom + offset);
    }
    if (placed.length > 0 && (kind === '2' || kind === '3')) {
      groups.push({ kind: kind === '3' ? 'and' : 'or', number: groups.length + 1, atoms: placed });
    }
    for (const { atoms: ends, sign } of component.doubleBonds) {
      const references = ends.map((end, k) => {
        const others = neighboursIn(component, end).filter(other => other !== ends[1 - k]);
        return others.at(-1);
      });
      const [first, second] = references;
      if (first === undefined || second === undefined) continue;
      stated.push({
        kind: 'double-bond',
        ends: [ends[0] + offset, ends[1] + offset],
        references: [first + offset, second + offset],
        side: sign === -1 ? 'same' : 'opposite',
      });
    }
  });
  return { molecule: buildMolecule({ name, atoms, bonds, stated, stereoGroups: groups }), warnings };
}

const LINE_FEED = 10;

async function* splitLines(chunks: AsyncIterable<Uint8Array>, limits: Limits): AsyncGenerator<RawEntry> {
  let rest = new Uint8Array(0);
  let line = 1;
  let entry = 1;
  const cut = (bytes: Uint8Array): RawEntry | null => {
    const at = line++;
    return new TextDecoder().decode(bytes).trim() === '' ? null : { entry: entry++, line: at, bytes };
  };
  for await (const chunk of chunks) {
    let buffer = new Uint8Array(rest.length + chunk.length);
    buffer.set(rest);
    buffer.set(chunk, rest.length);
    for (let end = buffer.indexOf(LINE_FEED); end !== -1; end = buffer.indexOf(LINE_FEED)) {
      const raw = cut(buffer.slice(0, end + 1));
      if (raw) yield raw;
      buffer = buffer.subarray(end + 1);
    }
    if (buffer.length > limits.lineLength)
      throw new InchiError(`line ${line} is longer than ${limits.lineLength} bytes`);
    rest = buffer.slice();
  }
  const last = rest.length > 0 ? cut(rest) : null;
  if (last) yield last;
}

export const inchiFormat: Format = {
  name: 'InChI',
  extensions: ['inchi'],
  sniff: head => (new TextDecoder().decode(head.subarray(0, 64)).trimStart().startsWith('InChI=1') ? 1 : 0),
  split: splitLines,
  parse: raw => {
    const text = new TextDecoder().decode(raw.bytes).trim();
    const match = /^(\S+)(?:\s+([^\t]*))?/.exec(text);
    const name = match?.[2]?.trim() ?? '';
    const plain: Omit<Entry, 'molecule' | 'warnings' | 'error'> = {
      entry: raw.entry,
      line: raw.line,
      name,
      data: [],
    };
    try {
      const { molecule, warnings } = readInchi(match?.[1] ?? '', name);
      return [{ ...plain, molecule, warnings, error: null }];
    } catch (error) {
      if (!(error instanceof InchiError)) throw error;
      return [
        {
          ...plain,
          molecule: null,
          warnings: [],
          error: { code: 'bad-inchi', message: `InChI: ${error.message}`, line: raw.line },
        },
      ];
    }
  },
};
