/**
 * A macromolecular model from its atom records: one location of each atom chosen, bonds from residue templates, from
 * component definitions in the file, and from the coordinates for the rest.
 *
 * Alternate locations: in each residue the identifier with the highest mean occupancy is taken, at equal occupancy the
 * first in the file; atoms without an identifier belong to all. The others are offered as alternatives.
 */
import { isMetal } from '../chemistry/elements.ts';
import { assembleMolecule, type Molecule, type ResidueAtom } from '../chemistry/molecule.ts';
import { defaultHydrogens } from '../chemistry/valence.ts';
import { bondOrders } from '../perception/bond-orders.ts';
import { bondsFromCoordinates } from '../perception/bonds-from-coordinates.ts';
import type { StructureAlternative } from '../formats/format.ts';
import { currentAtomName, type ResidueTemplate, templateOf } from './templates.ts';

/** One atom as a file lists it. */
export interface AtomRecord {
  readonly name: string;
  readonly element: number;
  readonly isotope: number;
  readonly charge: number;
  readonly residue: string;
  readonly chain: string;
  /** Residue number with insertion code. */
  readonly number: string;
  /** Alternate location identifier; empty for none. */
  readonly location: string;
  readonly occupancy: number;
  readonly x: number;
  readonly y: number;
  readonly z: number;
  /** HETATM: not part of a polymer. */
  readonly hetero: boolean;
  /** Number of the atom in the file. */
  readonly serial: number;
}

/** A bond that the file states between two atoms of its list (by index): links, disulfides, CONECT. */
export interface StatedBond {
  readonly first: number;
  readonly second: number;
  /** `link`: stated as a covalent link; `connect`: CONECT, believed where the distance allows it; `metal`: coordination, which makes no bond between residues. */
  readonly kind: 'link' | 'connect' | 'metal';
}

/** Bonds of a residue by atom name, from a component definition. */
export interface ComponentBonds {
  readonly bonds: readonly { readonly first: string; readonly second: string; readonly order: 1 | 2 | 3 }[];
  readonly charges: ReadonlyMap<string, number>;
}

export interface ModelInput {
  readonly name: string;
  readonly atoms: readonly AtomRecord[];
  readonly stated: readonly StatedBond[];
  readonly components: ReadonlyMap<string, ComponentBonds>;
}

export interface BuiltModel {
  readonly molecule: Molecule;
  readonly alternatives: readonly StructureAlternative[];
  readonly warnings: readonly string[];
}

/** Most alternatives that are offered. */
const MOST_ALTERNATIVES = 12;

/** Builds the model. */
export function buildModel(input: ModelInput): BuiltModel {
  const warnings: string[] = [];
  const residues = residueSpans(input.atoms);
  const choice = chooseLocations(input.atoms, residues);
  if (choice.residues > 0) {
    warnings.push(
      `alternate locations in ${choice.residues} ${choice.residues === 1 ? 'residue' : 'residues'}: the one with the highest occupancy is taken (${choice.example})`,
    );
  }
  const molecule = assemble(input, choice.kept(null), warnings);
  const alternatives: StructureAlternative[] = choice.letters.slice(0, MOST_ALTERNATIVES).map(letter => ({
    name: `alternate location ${letter}`,
    molecule: assemble(input, choice.kept(letter), null),
  }));
  return { molecule, alternatives, warnings };
}

interface Span {
  readonly from: number;
  readonly to: number;
}

/** Runs of records that belong to one residue (microheterogeneity: several names at one number) . */
function residueSpans(atoms: readonly AtomRecord[]): Span[] {
  const spans: Span[] = [];
  let from = 0;
  for (let i = 1; i <= atoms.length; i++) {
    const a = atoms[i - 1]!;
    const b = atoms[i];
    if (b && a.chain === b.chain && a.number === b.number) continue;
    spans.push({ from, to: i });
    from = i;
  }
  return spans;
}

interface LocationChoice {
  /** Residues that have a choice. */
  readonly residues: number;
  readonly example: string;
  /** Identifiers that were not taken somewhere. */
  readonly letters: readonly string[];
  /** Indices of the atoms kept, with identifier `letter` wherever a residue has it; null for the rule's own choice. */
  kept(letter: string | null): number[];
}

function chooseLocations(atoms: readonly AtomRecord[], spans: readonly Span[]): LocationChoice {
  const picks = new Map<Span, { pick: string; all: string[] }>();
  const letters = new Set<string>();
  let example = '';
  for (const span of spans) {
    const sums = new Map<string, { sum: number; count: number }>();
    for (let i = span.from; i < span.to; i++) {
      const { location, occupancy } = atoms[i]!;
      if (location === '') continue;
      const entry = sums.get(location) ?? { sum: 0, count: 0 };
      entry.sum += occupancy;
      entry.count++;
      sums.set(location, entry);
    }
    if (sums.size === 0) continue;
    let pick = '';
    let best = -Infinity;
    for (const [location, { sum, count }] of sums) {
      const mean = sum / count;
      if (mean > best + 1e-6) {
        best = mean;
        pick = location;
      }
    }
    picks.set(span, { pick, all: [...sums.keys()] });
    if (sums.size > 1) {
      const { chain, residue, number } = atoms[span.from]!;
      if (example === '') {
        const others = [...sums].filter(([location]) => location !== pick);
        const said = others
          .map(([location, { sum, count }]) => `${location} ${(sum / count).toFixed(2)}`)
          .join(', ');
        example = `${chain}/${residue}/${number}: ${pick} ${best.toFixed(2)}, not ${said}`;
      }
      for (const location of sums.keys()) if (location !== pick) letters.add(location);
    }
  }
  let residues = 0;
  for (const { all } of picks.values()) if (all.length > 1) residues++;
  return {
    residues,
    example,
    letters: [...letters].sort(),
    kept(letter) {
      const kept: number[] = [];
      for (const span of spans) {
        const choice = picks.get(span);
        const wanted = choice && letter !== null && choice.all.includes(letter) ? letter : choice?.pick;
        for (let i = span.from; i < span.to; i++) {
          const { location } = atoms[i]!;
          if (location === '' || location === wanted) kept.push(i);
        }
      }
      return kept;
    },
  };
}

/** Atoms that a residue gives up when it is linked, or has only at the end of a chain. */
const LEAVING_ATOMS: ReadonlySet<string> = new Set(['OXT', 'OP3', 'P', 'OP1', 'OP2', 'O1']);

/** Longest distances, Å, up to which bonds of a template, a peptide, a phosphodiester and a disulfide are believed. */
const TEMPLATE_REACH = 2.6;
const PEPTIDE_REACH = 2;
const PHOSPHODIESTER_REACH = 2.4;
const DISULFIDE_REACH = 2.6;
const LINK_REACH = 3;

function assemble(input: ModelInput, kept: readonly number[], warnings: string[] | null): Molecule {
  const n = kept.length;
  const atoms = kept.map(index => input.atoms[index]!);
  const elements = Uint8Array.from(atoms, atom => atom.element);
  const coordinates = new Float64Array(3 * n);
  atoms.forEach((atom, i) => {
    coordinates[3 * i] = atom.x;
    coordinates[3 * i + 1] = atom.y;
    coordinates[3 * i + 2] = atom.z;
  });
  const apart = (i: number, j: number): number =>
    Math.hypot(
      coordinates[3 * i]! - coordinates[3 * j]!,
      coordinates[3 * i + 1]! - coordinates[3 * j + 1]!,
      coordinates[3 * i + 2]! - coordinates[3 * j + 2]!,
    );
  const spans = residueSpans(atoms);
  const residueOf = new Int32Array(n);
  const templates: (ResidueTemplate | null)[] = [];
  const described: (ComponentBonds | null)[] = [];
  const names: ReadonlyMap<string, number>[] = [];
  const fixed = new Uint8Array(n);
  const known = new Map<number, 1 | 2 | 3>();
  const key = (i: number, j: number): number => Math.min(i, j) * 2 ** 24 + Math.max(i, j);
  const charges = Int8Array.from(atoms, atom => atom.charge);
  let stretched = 0;
  let stretchedExample = '';
  const overlapping = new Set<string>();
  /** Valences that atoms missing from the file would take. */
  const lacking = new Uint8Array(n);
  let incomplete = 0;

  spans.forEach((span, r) => {
    const residue = atoms[span.from]!.residue;
    const component = input.components.get(residue) ?? null;
    const template = templateOf(residue);
    templates.push(template);
    described.push(component);
    const table = new Map<string, number>();
    for (let i = span.from; i < span.to; i++) {
      residueOf[i] = r;
      const name = component
        ? atoms[i]!.name
        : currentAtomName(atoms[i]!.name, template?.residueClass ?? null);
      if (table.has(name)) overlapping.add(`${atoms[i]!.chain}/${residue}/${atoms[i]!.number} ${name}`);
      table.set(name, i);
    }
    names.push(table);
    const bonds = component?.bonds ?? template?.bonds;
    if (!bonds) return;
    const covered = new Set<string>();
    for (const { first, second } of bonds) {
      covered.add(first);
      covered.add(second);
    }
    let whole = true;
    for (const { first, second, order } of bonds) {
      const i = table.get(first);
      const j = table.get(second);
      if (i === undefined || j === undefined) {
        const there = i ?? j;
        const absent = i === undefined ? first : second;
        if (there !== undefined && !component && !LEAVING_ATOMS.has(absent)) {
          lacking[there]! += order;
          whole = false;
        }
        continue;
      }
      if (apart(i, j) > TEMPLATE_REACH) {
        stretched++;
        if (stretchedExample === '') {
          stretchedExample = `${atoms[i]!.chain}/${residue}/${atoms[i]!.number} ${first}–${second}, ${apart(i, j).toFixed(2)} Å`;
        }
        continue;
      }
      known.set(key(i, j), order);
    }
    for (const [name, i] of table) {
      if (covered.has(name) && elements[i] !== 1) {
        fixed[i] = 1;
        const charge = component ? component.charges.get(name) : template?.charges.get(name);
        if (charge !== undefined) charges[i] = charge;
      }
    }
    if (!whole) incomplete++;
    // A residue of water, or a lone CA trace: no bonds to know, nothing to guess.
    if (template && bonds.length === 0)
      for (let i = span.from; i < span.to; i++) if (elements[i] !== 1) fixed[i] = 1;
  });

  const indexOf = new Map<number, number>();
  kept.forEach((index, i) => indexOf.set(index, i));
  const linked = new Set<number>();
  for (const { first, second, kind } of input.stated) {
    const i = indexOf.get(first);
    const j = indexOf.get(second);
    if (i === undefined || j === undefined || i === j) continue;
    if (kind === 'link' && apart(i, j) <= LINK_REACH) linked.add(key(i, j));
  }

  const found = bondsFromCoordinates({ elements, coordinates });
  const pairs: number[] = [];
  const orders: number[] = [];
  const taken = new Set<number>();
  const add = (i: number, j: number, order: number): void => {
    const k = key(i, j);
    if (taken.has(k)) return;
    taken.add(k);
    pairs.push(Math.min(i, j), Math.max(i, j));
    orders.push(order);
  };
  for (const [k, order] of known) add(Math.floor(k / 2 ** 24), k % 2 ** 24, order);
  let refused = 0;
  let refusedExample = '';
  for (let b = 0; b < found.pairs.length; b += 2) {
    const i = found.pairs[b]!;
    const j = found.pairs[b + 1]!;
    if (taken.has(key(i, j))) continue;
    const sameResidue = residueOf[i] === residueOf[j];
    const hydrogen = elements[i] === 1 || elements[j] === 1;
    if (hydrogen) {
      if (sameResidue || !(templates[residueOf[i]!] && templates[residueOf[j]!])) add(i, j, 1);
      continue;
    }
    if (sameResidue) {
      // Within a residue whose bonds are known, other contacts are none.
      if (!(fixed[i] && fixed[j])) add(i, j, isMetal(elements[i]!) || isMetal(elements[j]!) ? 0 : 1);
      continue;
    }
    // Coordination from one residue to another has no bearing on what a residue is, and would tell its ligands apart.
    if (isMetal(elements[i]!) || isMetal(elements[j]!)) continue;
    if (
      linked.has(key(i, j)) ||
      isPolymerBond(atoms, i, j, templates, residueOf, apart(i, j)) ||
      (!isWater(templates[residueOf[i]!]!) &&
        !isWater(templates[residueOf[j]!]!) &&
        !(isPolymer(templates[residueOf[i]!]!) && isPolymer(templates[residueOf[j]!]!)))
    ) {
      add(i, j, 1);
      continue;
    }
    refused++;
    if (refusedExample === '') {
      const said = (at: number): string =>
        `${atoms[at]!.chain}/${atoms[at]!.residue}/${atoms[at]!.number} ${atoms[at]!.name}`;
      refusedExample = `${said(i)} and ${said(j)}, ${apart(i, j).toFixed(2)} Å`;
    }
  }
  // Links of the polymer that are longer than a distance criterion allows.
  for (let r = 0; r + 1 < spans.length; r++) {
    const a = names[r]!;
    const b = names[r + 1]!;
    if (atoms[spans[r]!.from]!.chain !== atoms[spans[r + 1]!.from]!.chain) continue;
    const link = (x: number | undefined, y: number | undefined, reach: number): void => {
      if (x !== undefined && y !== undefined && apart(x, y) <= reach) add(x, y, 1);
    };
    if (templates[r]?.residueClass === 'amino acid' && templates[r + 1]?.residueClass === 'amino acid') {
      link(a.get('C'), b.get('N'), PEPTIDE_REACH);
    }
    link(a.get("O3'") ?? a.get('O3*'), b.get('P'), PHOSPHODIESTER_REACH);
  }
  for (const k of linked) add(Math.floor(k / 2 ** 24), k % 2 ** 24, 1);
  for (const { first, second, kind } of input.stated) {
    if (kind !== 'connect') continue;
    const i = indexOf.get(first);
    const j = indexOf.get(second);
    if (i === undefined || j === undefined || i === j || taken.has(key(i, j))) continue;
    const d = apart(i, j);
    const metal = isMetal(elements[i]!) || isMetal(elements[j]!);
    if (!metal && warnings && d > 0.5 && d < TEMPLATE_REACH && elements[i] !== 1 && elements[j] !== 1) {
      warnings.push(
        `CONECT joins ${atoms[i]!.name} and ${atoms[j]!.name} of ${atoms[i]!.chain}/${atoms[i]!.residue}/${atoms[i]!.number}, which are ${d.toFixed(2)} Å apart; no bond is made`,
      );
    }
  }

  const bondTotal = pairs.length / 2;
  const pairArray = Uint32Array.from(pairs);
  const knownOrders = Uint8Array.from({ length: bondTotal }, (_, b) => orders[b]!);
  const result = bondOrders({ elements, coordinates, pairs: pairArray, fixed, knownOrders });
  const sums = new Float64Array(n);
  for (let b = 0; b < bondTotal; b++) {
    const i = pairArray[2 * b]!;
    const j = pairArray[2 * b + 1]!;
    // Known orders stand; bonds that leave a known residue are single.
    if (fixed[i] && fixed[j] && result.orders[b] === 0 && !isMetal(elements[i]!) && !isMetal(elements[j]!)) {
      result.orders[b] = 1;
    }
    sums[i]! += result.orders[b]!;
    sums[j]! += result.orders[b]!;
  }
  const hydrogens = result.hydrogens;
  for (let i = 0; i < n; i++) {
    if (!fixed[i]) {
      if (charges[i] === 0) charges[i] = result.charges[i]!;
      continue;
    }
    hydrogens[i] = Math.max(0, defaultHydrogens(elements[i]!, charges[i]!, sums[i]!) - lacking[i]!);
    // Flat nitrogens that carry four bonds in all, such as N-alkylated or protonated ones.
    if (elements[i] === 7 && charges[i] === 0 && sums[i] === 4) {
      charges[i] = 1;
      hydrogens[i] = 0;
    }
  }
  const doubtful = result.doubtful;
  for (let i = 0; i < n; i++) {
    if (fixed[i]) doubtful[i] = 0;
    else if (found.doubtful[i]) doubtful[i] = 1;
  }
  if (warnings) {
    if (stretched > 0) {
      warnings.push(
        `${stretched} ${stretched === 1 ? 'bond' : 'bonds'} of standard residues would be longer than ${TEMPLATE_REACH} Å and ${stretched === 1 ? 'is' : 'are'} left out (${stretchedExample})`,
      );
    }
    if (refused > 0) {
      warnings.push(
        `${refused} ${refused === 1 ? 'contact' : 'contacts'} between polymer residues as short as a bond ${refused === 1 ? 'is' : 'are'} taken for a clash (${refusedExample})`,
      );
    }
    if (incomplete > 0) {
      warnings.push(
        `${incomplete} ${incomplete === 1 ? 'residue lacks' : 'residues lack'} atoms; no hydrogens are put in their place`,
      );
    }
    if (overlapping.size > 0) {
      warnings.push(`atom names that stand twice in a residue: ${[...overlapping].slice(0, 3).join(', ')}`);
    }
  }
  const occupancies = Float32Array.from(atoms, atom => atom.occupancy);
  const residues = atoms.map(
    (atom): ResidueAtom => ({
      chain: atom.chain,
      residue: atom.residue,
      number: atom.number,
      atomName: atom.name,
      hetero: atom.hetero,
    }),
  );
  return assembleMolecule({
    name: input.name,
    elements,
    charges,
    isotopes: Uint16Array.from(atoms, atom => atom.isotope),
    radicals: new Uint8Array(n),
    hydrogens,
    bondAtoms: pairArray,
    bondOrders: result.orders,
    bondMarks: new Uint8Array(bondTotal),
    coordinates,
    dimension: 3,
    labels: atoms.map(atom => atom.name),
    stated: [],
    stereoGroups: [],
    residues,
    uncertainty: null,
    occupancies: occupancies.some(value => value !== 1) ? occupancies : null,
    doubtfulBonding: doubtful.some(value => value !== 0) ? doubtful : null,
  });
}

function isPolymer(template: ResidueTemplate | null): boolean {
  return template?.residueClass === 'amino acid' || template?.residueClass === 'nucleotide';
}

function isWater(template: ResidueTemplate | null): boolean {
  return template?.residueClass === 'water';
}

/** Peptide, phosphodiester and disulfide bonds between residues. */
function isPolymerBond(
  atoms: readonly AtomRecord[],
  i: number,
  j: number,
  templates: readonly (ResidueTemplate | null)[],
  residueOf: Int32Array,
  distance: number,
): boolean {
  const a = atoms[i]!.name;
  const b = atoms[j]!.name;
  const pair = (x: string, y: string): boolean => (a === x && b === y) || (a === y && b === x);
  if (distance <= PEPTIDE_REACH && pair('C', 'N')) {
    // Neighbours in the chain, or the ends of a ring; not two backbones that clash.
    return (
      atoms[i]!.chain === atoms[j]!.chain ||
      templates[residueOf[i]!] === null ||
      templates[residueOf[j]!] === null
    );
  }
  if (distance <= PHOSPHODIESTER_REACH && (pair("O3'", 'P') || pair('O3*', 'P'))) return true;
  return (
    distance <= DISULFIDE_REACH &&
    ((a === 'SG' && b === 'SG') || pair('SG', 'SE') || (a === 'SE' && b === 'SE'))
  );
}
