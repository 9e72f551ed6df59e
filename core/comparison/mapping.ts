/** Mapping of an intended molecule onto one of a model: the closest level of agreement at which their graphs are the same. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { Docket } from '../docket.ts';
import {
  bondingCost,
  geometricPi,
  hasDoubtfulBonding,
  hasMultipleBonds,
  listsHydrogens,
  protonBalance,
} from './bonding.ts';
import {
  type Fragment,
  type FragmentOptions,
  type Fragments,
  fragmentsOf,
  hasAttachments,
  hasIsotopes,
  hasMetalBonds,
  PLAIN_FRAGMENTS,
} from './fragment.ts';
import { firstIsomorphism, type Plan, placements, planOf } from './isomorphism.ts';
import { initialColours, type Level, refine, refineRounds, sameColours } from './refinement.ts';
import { type BondingEvidence, type MappingSearch, searchImages, searchMappings } from './relation.ts';
import { type Symmetry, symmetryOf } from './symmetry.ts';
import { type IntendedUnit, isAskedFor, isChiralKind, nodeUnit, type UnitTable, unitTable } from './units.ts';
import { nodesOf } from './verdict.ts';

/** Least share of the intended atoms that a model must have to be taken for part of the compound. Ours, no source. */
const LEAST_PART = 0.5;
/** Most placements of a partial model that are compared. */
const PARTIAL_LIMIT = 2000;
/** Most ways of supplying bond orders that are tried when the model's geometry leaves a choice. */
const SUPPLY_LIMIT = 8;

interface LevelData {
  readonly colours: Int32Array;
  readonly rounds: number;
  readonly plan: Plan;
  symmetry: Symmetry | null;
}

/** One molecule of an intention with what the comparison needs of it, worked out once. */
export class IntendedFragment {
  readonly fragment: Fragment;
  readonly units: readonly IntendedUnit[];
  readonly balance: number | null;
  readonly #levels = new Map<Level, LevelData>();
  /** Carbons that the graph without bond orders confuses with others of different bonding. */
  #confusable: number[] | null = null;

  constructor(fragment: Fragment, units: readonly IntendedUnit[]) {
    this.fragment = fragment;
    this.units = units;
    this.balance = protonBalance(fragment);
  }

  level(level: Level): LevelData {
    let data = this.#levels.get(level);
    if (!data) {
      const refined = refine(this.fragment, initialColours(this.fragment, level));
      data = { ...refined, plan: planOf(this.fragment, refined.colours), symmetry: null };
      this.#levels.set(level, data);
    }
    return data;
  }

  symmetry(level: Level): Symmetry {
    const data = this.level(level);
    if (!data.symmetry) {
      const base = this.units.flatMap(nodesOf);
      if (level === 'skeletal') base.push(...this.confusable());
      data.symmetry = symmetryOf(this.fragment, data.colours, base);
    }
    return data.symmetry;
  }

  confusable(): readonly number[] {
    if (this.#confusable) return this.#confusable;
    const skeletal = this.level('skeletal').colours;
    const bonded = initialColours(this.fragment, 'bonded');
    const seen = new Map<number, Set<number>>();
    for (let v = 0; v < this.fragment.count; v++) {
      const kinds = seen.get(skeletal[v]!) ?? new Set<number>();
      kinds.add(bonded[v]!);
      seen.set(skeletal[v]!, kinds);
    }
    this.#confusable = [];
    for (let v = 0; v < this.fragment.count; v++) {
      if (this.fragment.elements[v] === 6 && seen.get(skeletal[v]!)!.size > 1) this.#confusable.push(v);
    }
    return this.#confusable;
  }
}

/** An intention cut into molecules under one set of options. */
export interface IntendedFragments {
  readonly fragments: Fragments;
  readonly list: readonly IntendedFragment[];
  /** "&1", "o2": the stereo groups, by the index that `IntendedUnit.group` holds. */
  readonly groupNames: readonly string[];
}

/** Puts the asked-for units of a docket on the fragments of its molecule. */
export function intendedFragments(
  molecule: Molecule,
  docket: Docket,
  options: FragmentOptions,
): IntendedFragments {
  const fragments = fragmentsOf(molecule, options);
  const groupOf = new Map<number, number>();
  const groupNames: string[] = [];
  for (const group of molecule.stereoGroups) {
    if (group.kind === 'absolute') continue;
    for (const atom of group.atoms) groupOf.set(atom, groupNames.length);
    groupNames.push(`${group.kind === 'and' ? '&' : 'o'}${group.number}`);
  }
  const units: IntendedUnit[][] = fragments.list.map(() => []);
  docket.units.forEach((labelled, index) => {
    if (!isAskedFor(labelled)) return;
    const first = labelled.unit.ends[0];
    if (!first) return;
    const at = fragments.fragmentOf[first.atom]!;
    if (at === -1) return;
    const unit = nodeUnit(labelled.unit, fragments, at);
    if (!unit) return;
    const chiral = isChiralKind(labelled.unit);
    units[at]!.push({
      ...unit,
      index,
      descriptor: labelled.descriptor,
      chiral,
      countsForEpimer: labelled.descriptor === 'R' || labelled.descriptor === 'S',
      group: chiral ? (groupOf.get(first.atom) ?? groupOf.get(labelled.unit.ends[1]?.atom ?? -1) ?? -1) : -1,
    });
  });
  return {
    fragments,
    list: fragments.list.map((fragment, f) => new IntendedFragment(fragment, units[f]!)),
    groupNames,
  };
}

/** The cuts to try for a pair of molecules, closest first. */
export function fragmentCuts(intended: Molecule, model: Molecule): FragmentOptions[] {
  const cuts: FragmentOptions[] = [PLAIN_FRAGMENTS];
  if (hasIsotopes(intended) || hasIsotopes(model))
    cuts.push({ ...PLAIN_FRAGMENTS, isotopicHydrogens: false });
  if (hasMetalBonds(intended) || hasMetalBonds(model)) {
    cuts.push({ ...PLAIN_FRAGMENTS, isotopicHydrogens: false, withoutMetalBonds: true });
  }
  if (hasAttachments(intended) || hasAttachments(model)) {
    cuts.push({ isotopicHydrogens: false, withoutMetalBonds: true, withoutAttachments: true });
  }
  return cuts;
}

/** How a model molecule was recognised as the intended one. */
export interface FragmentMatch {
  readonly intended: IntendedFragment;
  readonly model: Fragment;
  readonly level: Level;
  /** One mapping, intended node to model node, -1 where the model lacks the atom. */
  readonly base: Int32Array;
  /** All placements considered when only part is mapped; null when the whole is. */
  readonly placements: readonly Int32Array[] | null;
  /** Mappings along which the intention's bond orders replace missing or wrong ones; empty when the model's own serve. */
  readonly supply: readonly Int32Array[];
  readonly evidence: BondingEvidence | null;
  readonly warnings: readonly string[];
}

export type MatchResult =
  | { readonly match: FragmentMatch; readonly difference: null }
  | { readonly match: null; readonly difference: string };

function labelOf(fragment: Fragment, node: number): string {
  return atomLabel(fragment.molecule, fragment.atoms[node]!, elementSymbol);
}

/** Colours of a model fragment for a level, refined as often as the intention's. */
class ModelColours {
  readonly #fragment: Fragment;
  readonly #cache = new Map<string, Int32Array>();
  constructor(fragment: Fragment) {
    this.#fragment = fragment;
  }
  get(level: Level, rounds: number): Int32Array {
    const key = `${level} ${rounds}`;
    let colours = this.#cache.get(key);
    if (!colours) {
      colours = refineRounds(this.#fragment, initialColours(this.#fragment, level), rounds);
      this.#cache.set(key, colours);
    }
    return colours;
  }
}

function isomorphism(
  intended: IntendedFragment,
  model: Fragment,
  colours: ModelColours,
  level: Level,
): Int32Array | null {
  if (intended.fragment.count !== model.count) return null;
  const data = intended.level(level);
  const target = colours.get(level, data.rounds);
  if (!sameColours(data.colours, target)) return null;
  return firstIsomorphism(intended.fragment, data.plan, data.colours, model, target);
}

/** Number of rounds for a signature: distance in bonds to which surroundings are told apart. */
const SIGNATURE_ROUNDS = 6;

/** A number that is the same for molecules of the same skeleton (elements and connections alone). */
export function skeletonSignature(fragment: Fragment): number {
  const colours = refineRounds(fragment, initialColours(fragment, 'skeletal'), SIGNATURE_ROUNDS);
  let sum = fragment.count;
  for (const colour of colours) sum = (sum + Math.imul(colour, 0x9e3779b1)) | 0;
  return sum;
}

/** Matches a whole intended molecule with a whole model molecule. */
export function matchWhole(intended: IntendedFragment, model: Fragment): MatchResult {
  const colours = new ModelColours(model);
  const doubtful = hasDoubtfulBonding(model);
  const modelBalance = protonBalance(model);
  const balanced =
    intended.balance === null ||
    modelBalance === null ||
    intended.balance === modelBalance ||
    hasAttachmentPoints(intended.fragment) ||
    hasAttachmentPoints(model);
  const isotopic = isomorphism(intended, model, colours, 'isotopic');
  const bonded = isotopic ?? isomorphism(intended, model, colours, 'bonded');
  const level = isotopic ? 'isotopic' : 'bonded';
  if (bonded && !doubtful && balanced) {
    const warnings: string[] = [];
    const planar = unexpectedlyPlanar(intended.fragment, model, bonded);
    if (planar.length > 0) {
      warnings.push(
        `the geometry at ${planar.join(', ')} is that of multiple bonds, which neither file nor intention has`,
      );
    }
    if (!isotopic) warnings.push('the isotopes of the model are not those of the intention');
    if (!sameProtons(intended.fragment, model, bonded)) {
      warnings.push('the protonation or tautomer of the model is not that of the intention');
    }
    return {
      match: { intended, model, level, base: bonded, placements: null, supply: [], evidence: null, warnings },
      difference: null,
    };
  }
  const skeletal = bonded ?? isomorphism(intended, model, colours, 'skeletal');
  if (!skeletal) return { match: null, difference: firstDifference(intended.fragment, model) };
  return matchSkeletons(intended, model, skeletal, doubtful, balanced);
}

/**
 * Carbons that a model without hydrogens and multiple bonds shows as unsaturated though the intention has them saturated:
 * its bond orders may be missing and the compound another one.
 */
function unexpectedlyPlanar(intended: Fragment, model: Fragment, image: Int32Array): string[] {
  if (model.molecule.dimension !== 3 || hasMultipleBonds(model) || listsHydrogens(model)) return [];
  const labels: string[] = [];
  for (let v = 0; v < intended.count; v++) {
    if (intended.elements[v] === 6 && intended.pi[v] === 0 && geometricPi(model, image[v]!) === 1) {
      labels.push(labelOf(model, image[v]!));
    }
  }
  return labels;
}

function hasAttachmentPoints(fragment: Fragment): boolean {
  return fragment.attachments.some(count => count > 0);
}

function sameProtons(intended: Fragment, model: Fragment, image: Int32Array): boolean {
  for (let v = 0; v < intended.count; v++) {
    const w = image[v]!;
    if (w < 0) continue;
    if (intended.elements[v] !== 1 && intended.hydrogens[v] !== model.hydrogens[w]) return false;
  }
  return true;
}

/** Decides, for equal skeletons whose bonding differs, between a tautomer, wrong bond orders and another compound. */
function matchSkeletons(
  intended: IntendedFragment,
  model: Fragment,
  base: Int32Array,
  doubtful: boolean,
  balanced: boolean,
): MatchResult {
  const wanting = doubtful || !hasMultipleBonds(model) || !listsHydrogens(model);
  const evidence: BondingEvidence = {
    nodes: intended.confusable(),
    cost: (node, modelNode) =>
      bondingCost(intended.fragment, node, model, modelNode, wanting && model.molecule.dimension === 3),
  };
  const symmetry = intended.symmetry('skeletal');
  const empty = unitTable([], model.count);
  const likeliest = searchMappings([], symmetry, base, empty, evidence, intended.level('skeletal').colours);
  const mapping = likeliest.image;
  const plain = (warnings: string[]): MatchResult => ({
    match: { intended, model, level: 'skeletal', base, placements: null, supply: [], evidence, warnings },
    difference: null,
  });
  const different = firstBondingDifference(intended.fragment, model, mapping);
  if (different === null && balanced && !doubtful) return plain([]);
  if (model.molecule.dimension === 3 && wanting && maySupply(intended.fragment, model, mapping, doubtful)) {
    const images = distinctBondings(intended, model, symmetry, base, evidence, likeliest.bondingCost);
    const warnings = ['bond orders taken from the intention'];
    if (images.length > 1)
      warnings.push('the geometry does not tell which part of the model carries which bond orders');
    return {
      match: {
        intended,
        model,
        level: 'bonded',
        base: mapping,
        placements: null,
        supply: images,
        evidence: null,
        warnings,
      },
      difference: null,
    };
  }
  if (balanced && !doubtful) return plain(['the model is another tautomer of the intention']);
  return {
    match: null,
    difference: different ?? hydrogenDifference(intended.fragment, model),
  };
}

/** Whether taking over the intention's orders contradicts neither the listed hydrogens nor, on the whole, the geometry. */
function maySupply(intended: Fragment, model: Fragment, image: Int32Array, doubtful: boolean): boolean {
  let forIntention = 0;
  let against = 0;
  for (let v = 0; v < intended.count; v++) {
    const w = image[v]!;
    const extra = model.listedHydrogens[w]! - intended.hydrogens[v]!;
    if (intended.elements[v] === 6 ? extra > 0 : extra > 1) return false;
    if (intended.elements[v] !== 6 || model.attachments[w]! > 0) continue;
    if (intended.pi[v] === model.pi[w]) continue;
    const seen = geometricPi(model, w);
    if (seen === -1) continue;
    if (seen === Number(intended.pi[v]! > 0)) forIntention++;
    else against++;
  }
  return doubtful ? against <= Math.max(2, forIntention) : against < Math.max(1, forIntention);
}

/** The mappings of least bonding cost that put different bond orders on the model, the first few. */
function distinctBondings(
  intended: IntendedFragment,
  model: Fragment,
  symmetry: Symmetry,
  base: Int32Array,
  evidence: BondingEvidence,
  cost: number,
): Int32Array[] {
  const bonded = initialColours(intended.fragment, 'bonded');
  const found = new Map<string, Int32Array>();
  const signature = (image: Int32Array): string => {
    const back = new Int32Array(model.count);
    for (const v of evidence.nodes) back[image[v]!] = bonded[v]!;
    return back.join(' ');
  };
  // Walk products of one element a level; bounded, since all that is wanted is whether a choice exists.
  const walk = (depth: number, permutation: Int32Array | null): void => {
    if (found.size >= SUPPLY_LIMIT || walked++ > 5000) return;
    const level = symmetry.levels[depth];
    if (!level) {
      const image = permutation ? base.map((_, v) => base[permutation[v]!]!) : base;
      let total = 0;
      for (const node of evidence.nodes) total += evidence.cost(node, image[node]!);
      if (total > cost) return;
      const key = signature(image);
      if (!found.has(key)) found.set(key, image);
      return;
    }
    for (const element of level.elements) {
      walk(depth + 1, permutation ? element.map(v => permutation[v]!) : element);
    }
  };
  let walked = 0;
  walk(0, null);
  return [...found.values()];
}

/** Matches a model of which part is missing, or which hangs on something else, with an intended molecule. */
export function matchPart(
  intended: IntendedFragment,
  models: readonly Fragment[],
  fragments: Fragments,
): MatchResult {
  const { fragment } = intended;
  const union = models.length === 1 ? models[0]! : joinFragments(models, fragments);
  const refuse = { match: null, difference: firstDifference(fragment, union) } as const;
  if (union.molecule.dimension !== 3) return refuse;
  if (union.count >= fragment.count || union.count < LEAST_PART * fragment.count) return refuse;
  const pattern = initialColours(union, 'skeletal');
  const target = initialColours(fragment, 'skeletal');
  const complete = listsHydrogens(union);
  const images: Int32Array[] = [];
  placements(union, planOf(union, pattern), pattern, fragment, target, image => {
    const back = new Int32Array(fragment.count).fill(-1);
    for (let w = 0; w < union.count; w++) back[image[w]!] = w;
    let edges = 0;
    for (let v = 0; v < fragment.count; v++) {
      const w = back[v]!;
      if (w === -1) continue;
      let beyond = 0;
      for (let k = fragment.start[v]!; k < fragment.start[v + 1]!; k++) {
        if (back[fragment.adjacent[k]!] === -1) beyond++;
        else edges++;
      }
      // Listed hydrogens must be the intended ones, and must not fill the places of the missing atoms.
      const listed = union.listedHydrogens[w]!;
      const wanted = fragment.hydrogens[v]!;
      if (complete && (listed > wanted || (beyond === 0 && fragment.elements[v] === 6 && listed < wanted)))
        return false;
    }
    if (edges === union.adjacent.length) images.push(back);
    return images.length >= PARTIAL_LIMIT;
  });
  if (images.length === 0) return refuse;
  const absent = fragment.count - union.count;
  return {
    match: {
      intended,
      model: union,
      level: 'skeletal',
      base: images[0]!,
      placements: images,
      supply: [images[0]!],
      evidence: null,
      warnings: [`${absent} of ${fragment.count} intended atoms other than hydrogen are not in the model`],
    },
    difference: null,
  };
}

/** Matches an intended molecule with attachment points with a model in which something hangs on these. */
export function matchInside(intended: IntendedFragment, model: Fragment): MatchResult {
  const { fragment } = intended;
  const pattern = initialColours(fragment, 'skeletal');
  const images: Int32Array[] = [];
  if (fragment.attachments.some(count => count > 0) && model.count > fragment.count) {
    placements(
      fragment,
      planOf(fragment, pattern),
      pattern,
      model,
      initialColours(model, 'skeletal'),
      image => {
        const back = new Int32Array(model.count).fill(-1);
        for (let v = 0; v < fragment.count; v++) back[image[v]!] = v;
        let edges = 0;
        for (let v = 0; v < fragment.count; v++) {
          const w = image[v]!;
          let beyond = 0;
          for (let k = model.start[w]!; k < model.start[w + 1]!; k++) {
            if (back[model.adjacent[k]!] === -1) beyond++;
            else edges++;
          }
          if (beyond > fragment.attachments[v]!) return false;
          if (fragment.elements[v] === 6 && fragment.pi[v] !== model.pi[w]) return false;
        }
        if (edges === fragment.adjacent.length) images.push(image.slice());
        return images.length >= PARTIAL_LIMIT;
      },
    );
  }
  const [base] = images;
  if (!base) return { match: null, difference: firstDifference(fragment, model) };
  return {
    match: {
      intended,
      model,
      level: 'skeletal',
      base,
      placements: images,
      supply: [],
      evidence: null,
      warnings: ['what hangs on the attachment points of the intention is not compared'],
    },
    difference: null,
  };
}

/** Several fragments as one disconnected graph. */
function joinFragments(parts: readonly Fragment[], fragments: Fragments): Fragment {
  const atoms = Int32Array.from(parts.flatMap(part => [...part.atoms])).sort();
  const place = new Map<number, number>();
  atoms.forEach((atom, v) => {
    place.set(atom, v);
  });
  const start = new Int32Array(atoms.length + 1);
  const adjacent: number[] = [];
  const bonds: number[] = [];
  const pick = (read: (part: Fragment, node: number) => number): number[] =>
    Array.from(atoms, atom => {
      const part = parts.find(each => each.id - 1 === fragments.fragmentOf[atom])!;
      return read(part, fragments.nodeOf[atom]!);
    });
  atoms.forEach((atom, v) => {
    const part = parts.find(each => each.id - 1 === fragments.fragmentOf[atom])!;
    const node = fragments.nodeOf[atom]!;
    for (let k = part.start[node]!; k < part.start[node + 1]!; k++) {
      adjacent.push(place.get(part.atoms[part.adjacent[k]!]!)!);
      bonds.push(part.bonds[k]!);
    }
    start[v + 1] = adjacent.length;
  });
  const first = parts[0]!;
  return {
    molecule: first.molecule,
    id: first.id,
    count: atoms.length,
    atoms,
    start,
    adjacent: Int32Array.from(adjacent),
    bonds: Int32Array.from(bonds),
    elements: Uint8Array.from(pick((part, node) => part.elements[node]!)),
    isotopes: Uint16Array.from(pick((part, node) => part.isotopes[node]!)),
    hydrogens: Uint8Array.from(pick((part, node) => part.hydrogens[node]!)),
    listedHydrogens: Uint8Array.from(pick((part, node) => part.listedHydrogens[node]!)),
    pi: Uint8Array.from(pick((part, node) => part.pi[node]!)),
    attachments: Uint8Array.from(pick((part, node) => part.attachments[node]!)),
  };
}

/** Chooses the mapping of a match that leaves the fewest inverted units. */
export function searchMatch(match: FragmentMatch, model: UnitTable, mirrorAlways: boolean): MappingSearch {
  const { intended, level, base, evidence } = match;
  if (match.placements) return searchImages(intended.units, match.placements, model);
  return searchMappings(
    intended.units,
    intended.symmetry(level),
    base,
    model,
    level === 'skeletal' ? evidence : null,
    intended.level(level).colours,
    mirrorAlways,
  );
}

function elementCounts(fragment: Fragment): Map<number, number> {
  const counts = new Map<number, number>();
  for (const z of fragment.elements) counts.set(z, (counts.get(z) ?? 0) + 1);
  return counts;
}

/** Names the first difference between two molecules that are not the same compound: elements, then surroundings. */
export function firstDifference(intended: Fragment, model: Fragment): string {
  const wanted = elementCounts(intended);
  const found = elementCounts(model);
  const order = [...new Set([6, ...wanted.keys(), ...found.keys()])];
  for (const z of order) {
    const w = wanted.get(z) ?? 0;
    const f = found.get(z) ?? 0;
    if (z !== 1 && w !== f) return `the model has ${f} ${elementSymbol(z)}, the intention ${w}`;
  }
  let a = initialColours(intended, 'skeletal');
  let b = initialColours(model, 'skeletal');
  for (let round = 0; round <= Math.max(intended.count, model.count); round++) {
    const free = new Map<number, number>();
    for (const colour of a) free.set(colour, (free.get(colour) ?? 0) + 1);
    for (let w = 0; w < model.count; w++) {
      const left = free.get(b[w]!) ?? 0;
      if (left === 0) {
        const neighbours: string[] = [];
        for (let k = model.start[w]!; k < model.start[w + 1]!; k++)
          neighbours.push(labelOf(model, model.adjacent[k]!));
        return `atom ${labelOf(model, w)} of the model, bonded to ${neighbours.join(', ') || 'nothing'}, has no counterpart in the intention within ${round} bonds`;
      }
      free.set(b[w]!, left - 1);
    }
    a = refineRounds(intended, a, 1);
    b = refineRounds(model, b, 1);
  }
  return 'the atoms are connected otherwise than intended';
}

/** Names the first carbon whose π bonds or hydrogens differ under a mapping; null when none does. */
function firstBondingDifference(intended: Fragment, model: Fragment, image: Int32Array): string | null {
  for (let v = 0; v < intended.count; v++) {
    const w = image[v]!;
    if (intended.elements[v] !== 6 || w < 0) continue;
    if (intended.attachments[v]! > 0 || model.attachments[w]! > 0) continue;
    if (intended.pi[v] === model.pi[w] && intended.hydrogens[v] === model.hydrogens[w]) continue;
    const say = (fragment: Fragment, node: number): string =>
      `${fragment.hydrogens[node]} H and ${fragment.pi[node]} π ${fragment.pi[node] === 1 ? 'bond' : 'bonds'}`;
    return `atom ${labelOf(model, w)} of the model has ${say(model, w)}, the intention ${say(intended, v)} at ${labelOf(intended, v)}`;
  }
  return null;
}

function hydrogenDifference(intended: Fragment, model: Fragment): string {
  const say = (balance: number | null): string => (balance === null ? 'unknown' : String(balance));
  return `hydrogens less charge: ${say(protonBalance(model))} in the model, ${say(protonBalance(intended))} in the intention`;
}
