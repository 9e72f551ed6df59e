/** What both versions of the Molfile share: symbols, aromatic bonds, hydrogens, the dimension of the coordinates. */
import { elementNumber } from '../chemistry/elements.ts';
import { DoubleBondNeed, kekulise } from '../chemistry/kekule.ts';
import { assembleMolecule, type Molecule, type StereoGroup } from '../chemistry/molecule.ts';
import { molfileHydrogens, valenceProblem } from '../chemistry/valence.ts';
import { EntryProblem } from './errors.ts';

/** Bond types of the format that stand for no localised order. */
export const AROMATIC_TYPE = 4;

/** Arrays that a Molfile reader fills. */
export class MolfileDraft {
  readonly elements: Uint8Array;
  readonly charges: Int8Array;
  readonly isotopes: Uint16Array;
  readonly radicals: Uint8Array;
  /** Stated valence: -1 default, 0 none (written 15), else the number. */
  readonly valences: Int8Array;
  readonly coordinates: Float64Array;
  readonly bondAtoms: Uint32Array;
  readonly bondTypes: Uint8Array;
  readonly bondMarks: Uint8Array;
  readonly labels: (string | undefined)[] = [];
  readonly groups: StereoGroup[] = [];

  constructor(atoms: number, bonds: number) {
    this.elements = new Uint8Array(atoms);
    this.charges = new Int8Array(atoms);
    this.isotopes = new Uint16Array(atoms);
    this.radicals = new Uint8Array(atoms);
    this.valences = new Int8Array(atoms).fill(-1);
    this.coordinates = new Float64Array(3 * atoms);
    this.bondAtoms = new Uint32Array(2 * bonds);
    this.bondTypes = new Uint8Array(bonds);
    this.bondMarks = new Uint8Array(bonds);
  }
}

const DUMMIES: ReadonlySet<string> = new Set([
  'A',
  'Q',
  '*',
  'L',
  'LP',
  'R',
  'R#',
  'X',
  'M',
  'AH',
  'QH',
  'XH',
  'MH',
  'Du',
  'Pol',
  'Mod',
]);

/** Reads an atom symbol into a draft. @throws EntryProblem for a symbol that is no element. */
export function setSymbol(draft: MolfileDraft, atom: number, symbol: string, at: number): void {
  if (symbol === 'D' || symbol === 'T') {
    draft.elements[atom] = 1;
    draft.isotopes[atom] = symbol === 'D' ? 2 : 3;
    return;
  }
  const usual =
    symbol.length > 1 ? symbol[0]!.toUpperCase() + symbol.slice(1).toLowerCase() : symbol.toUpperCase();
  const z = elementNumber(symbol) ?? (DUMMIES.has(symbol) ? 0 : elementNumber(usual));
  if (z === undefined) {
    if (!/^R\d*$/u.test(symbol)) {
      throw new EntryProblem('unknown-element', `atom ${atom + 1}: "${symbol}" is no element symbol`, at);
    }
    draft.elements[atom] = 0;
    return;
  }
  draft.elements[atom] = z;
}

/** Checks the ends of bond `bond` as it is read. @throws EntryProblem */
export function setBond(draft: MolfileDraft, bond: number, first: number, second: number, at: number): void {
  const atoms = draft.elements.length;
  for (const end of [first, second]) {
    if (!(end >= 1 && end <= atoms)) {
      throw new EntryProblem(
        'bond-atom-missing',
        `bond ${bond + 1} names atom ${end}, the entry has ${atoms}`,
        at,
      );
    }
  }
  if (first === second) {
    throw new EntryProblem('bond-to-itself', `bond ${bond + 1} joins atom ${first} to itself`, at);
  }
  draft.bondAtoms[2 * bond] = first - 1;
  draft.bondAtoms[2 * bond + 1] = second - 1;
}

/** Completes a molecule from a draft: Kekulé structure, hydrogens, dimension; problems of valence become warnings. `firstBondLine` names the lines of duplicate bonds. */
export function finish(
  draft: MolfileDraft,
  name: string,
  firstBondLine: number,
  warnings: string[],
): Molecule {
  const { elements, charges, radicals, bondAtoms } = draft;
  const atoms = elements.length;
  const bonds = draft.bondTypes.length;
  const seen = new Set<number>();
  for (let b = 0; b < bonds; b++) {
    const i = bondAtoms[2 * b]!;
    const j = bondAtoms[2 * b + 1]!;
    const key = Math.min(i, j) * atoms + Math.max(i, j);
    if (seen.has(key)) {
      throw new EntryProblem(
        'duplicate-bond',
        `bond ${b + 1} joins atoms ${i + 1} and ${j + 1}, which are bonded already`,
        firstBondLine + b,
      );
    }
    seen.add(key);
  }
  const bondOrders = orders(draft);
  const sums = new Int32Array(atoms);
  for (let b = 0; b < bonds; b++) {
    sums[bondAtoms[2 * b]!]! += bondOrders[b]!;
    sums[bondAtoms[2 * b + 1]!]! += bondOrders[b]!;
  }
  const hydrogens = new Uint8Array(atoms);
  for (let i = 0; i < atoms; i++) {
    const stated = draft.valences[i]!;
    hydrogens[i] =
      stated >= 0
        ? Math.max(0, stated - sums[i]!)
        : molfileHydrogens(elements[i]!, charges[i]!, radicals[i]!, sums[i]!);
    const problem = stated >= 0 ? null : valenceProblem(elements[i]!, charges[i]!, radicals[i]!, sums[i]!, i);
    if (problem !== null) warnings.push(problem);
  }
  const dimension = dimensionOf(draft.coordinates, warnings);
  return assembleMolecule({
    name,
    elements,
    charges,
    isotopes: draft.isotopes,
    radicals,
    hydrogens,
    bondAtoms,
    bondOrders,
    bondMarks: draft.bondMarks,
    coordinates: dimension === 0 ? null : draft.coordinates,
    dimension,
    labels:
      draft.labels.length > 0
        ? Array.from({ length: atoms }, (_, i) => draft.labels[i] ?? String(i + 1))
        : null,
    stated: [],
    stereoGroups: draft.groups,
    residues: null,
    uncertainty: null,
    occupancies: null,
    doubtfulBonding: null,
  });
}

function dimensionOf(coordinates: Float64Array, warnings: string[]): 0 | 2 | 3 {
  let plane = false;
  for (let k = 0; k < coordinates.length; k += 3) {
    if (coordinates[k + 2] !== 0) return 3;
    if (coordinates[k] !== 0 || coordinates[k + 1] !== 0) plane = true;
  }
  if (plane) return 2;
  if (coordinates.length > 3) {
    warnings.push('all coordinates are zero: there is no geometry from which configuration could be read');
  }
  return 0;
}

/** Kekulé orders for the bond types; bonds of type 4 are given alternating double bonds. @throws EntryProblem */
function orders(draft: MolfileDraft): Uint8Array {
  const { bondTypes, bondAtoms, elements, charges } = draft;
  const result = new Uint8Array(bondTypes.length);
  const edges: number[] = [];
  const edgeBonds: number[] = [];
  const used = new Int32Array(elements.length);
  const aromatic = new Uint8Array(elements.length);
  for (let b = 0; b < bondTypes.length; b++) {
    const type = bondTypes[b]!;
    const i = bondAtoms[2 * b]!;
    const j = bondAtoms[2 * b + 1]!;
    if (type === AROMATIC_TYPE) {
      edges.push(i, j);
      edgeBonds.push(b);
      aromatic[i] = 1;
      aromatic[j] = 1;
      result[b] = 1;
    } else result[b] = type <= 3 ? type : type >= 8 ? 0 : 1;
    used[i]! += result[b]!;
    used[j]! += result[b]!;
  }
  if (edges.length === 0) return result;
  // Which N, P bear hydrogen is not stated: carbon must have a double bond, nitrogen may.
  const needs = new Uint8Array(elements.length);
  for (let i = 0; i < elements.length; i++) {
    if (aromatic[i] === 0) continue;
    const z = elements[i]!;
    const charge = charges[i]!;
    if (z === 6 && charge === 0 && used[i]! < 4) needs[i] = DoubleBondNeed.required;
    else if ((z === 8 || z === 16 || z === 34) && charge === 1 && used[i]! < 3)
      needs[i] = DoubleBondNeed.required;
    else if (z === 7 || z === 15 || z === 33) {
      if (charge === 1 && used[i]! < 4) needs[i] = DoubleBondNeed.required;
      else if (charge === 0 && used[i]! < 3) needs[i] = DoubleBondNeed.optional;
    }
  }
  const { doubled, uncovered } = kekulise({
    atomCount: elements.length,
    edges: Uint32Array.from(edges),
    needs,
    chains: true,
  });
  if (uncovered.length > 0) {
    const named = uncovered.map(i => i + 1).join(', ');
    throw new EntryProblem(
      'no-kekule-structure',
      `no Kekulé structure fits the bonds of type 4 (aromatic): atoms ${named} would be left without a double bond`,
      null,
    );
  }
  doubled.forEach((double, e) => {
    if (double === 1) result[edgeBonds[e]!] = 2;
  });
  return result;
}
