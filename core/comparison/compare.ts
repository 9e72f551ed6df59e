/** Comparison of one entry with its intention: molecules matched one to one, a verdict for each unit, a relation for each molecule. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { Descriptor, Docket, Relation, Verdict } from '../docket.ts';
import type { StereoUnit, UnitKind } from '../perception/unit.ts';
import { supplyBonding } from './bonding.ts';
import {
  type Fragment,
  type FragmentOptions,
  type Fragments,
  fragmentsOf,
  PLAIN_FRAGMENTS,
} from './fragment.ts';
import type { Intention } from './intention.ts';
import {
  type FragmentMatch,
  firstDifference,
  fragmentCuts,
  type IntendedFragment,
  matchInside,
  matchPart,
  matchWhole,
  searchMatch,
  skeletonSignature,
} from './mapping.ts';
import { invertedUnits, type MappingSearch, mixedGroups, relationOf } from './relation.ts';
import { type NodeUnit, nodeUnit, unitTable } from './units.ts';
import { Arrangement, modelUnitOf } from './verdict.ts';

/** A model with its docket. */
export interface Examined {
  readonly molecule: Molecule;
  readonly docket: Docket;
}

/** What the comparison says of one unit of the model's docket, or of an intended unit that has none there. */
export interface UnitVerdict {
  /** Index in the docket of the model, null for an intended unit without one. */
  readonly unit: number | null;
  readonly kind: UnitKind;
  readonly verdict: Verdict;
  /** Index in the docket of the intention, null when nothing was asked for. */
  readonly intendedUnit: number | null;
  readonly intended: Descriptor | null;
  /** Atoms (0-based) of the unit in the intention. */
  readonly intendedAtoms: readonly number[] | null;
  /** What the intention calls these atoms. */
  readonly intendedLabels: readonly string[] | null;
  /** Atoms (0-based) of the unit in the model as far as they are mapped; for units without a docket entry. */
  readonly modelAtoms: readonly number[] | null;
  /** "&1", "o2": the stereo group with which it is judged. */
  readonly group: string | null;
}

/** What the comparison says of one molecule of the model. */
export interface MoleculeRelation {
  /** Atoms (0-based) other than counted hydrogens. */
  readonly atoms: Int32Array;
  /** Null for a molecule that the intention does not ask about. */
  readonly relation: Relation | null;
}

export interface EntryComparison {
  /** The model as it was judged: with the intention's bond orders where its own were missing or wrong. */
  readonly examined: Examined;
  readonly relation: Relation;
  readonly units: readonly UnitVerdict[];
  readonly molecules: readonly MoleculeRelation[];
  /** Model atom to intended atom, -1 for none; null when nothing was mapped. */
  readonly mapping: Int32Array | null;
  /** Mappings that differ where it matters and leave as few inverted units. */
  readonly equivalentMappings: number;
  /** Where symmetry leaves a choice: each set of units that may be called inverted, as the model atoms of each unit. */
  readonly choices: readonly (readonly (readonly number[])[])[];
  /** The first difference when the compound is another one. */
  readonly difference: string | null;
  readonly warnings: readonly string[];
}

interface Pairing {
  readonly cut: FragmentOptions;
  readonly fragments: Fragments;
  /** Index of the model fragment, -1 for a union of several. */
  readonly matches: readonly { readonly model: number; readonly candidates: readonly FragmentMatch[] }[];
}

/** Compares a model with an intention. `examine` is called again when bond orders must be supplied. */
export function compareEntry(
  examined: Examined,
  intention: Intention,
  examine: (molecule: Molecule) => Examined,
): EntryComparison {
  const cuts = fragmentCuts(intention.molecule, examined.molecule);
  let firstProblem: string | null = null;
  for (const cut of cuts) {
    const pairing = pairWhole(examined.molecule, intention, cut);
    if ('problem' in pairing) firstProblem ??= pairing.problem;
    else return judge(examined, intention, pairing, examine);
  }
  for (const cut of [...cuts].reverse()) {
    const pairing = pairPart(examined.molecule, intention, cut);
    if (pairing) return judge(examined, intention, pairing, examine);
  }
  return otherCompound(examined, intention, firstProblem ?? 'the intention holds no atoms');
}

function otherCompound(examined: Examined, intention: Intention, difference: string): EntryComparison {
  const chief = principalIntended(intention.cut(PLAIN_FRAGMENTS).list);
  const likeliest = nearest(fragmentsOf(examined.molecule).list, chief?.fragment.count ?? 0);
  return {
    examined,
    relation: 'other compound',
    units: examined.docket.units.map(({ unit }, u) => openUnit(u, unit.kind)),
    molecules: likeliest ? [{ atoms: likeliest.atoms, relation: 'other compound' }] : [],
    mapping: null,
    equivalentMappings: 0,
    choices: [],
    difference,
    warnings: [],
  };
}

/** A unit for which nothing was asked. */
export function openUnit(unit: number, kind: UnitKind): UnitVerdict {
  return {
    unit,
    kind,
    verdict: 'open',
    intendedUnit: null,
    intended: null,
    intendedAtoms: null,
    intendedLabels: null,
    modelAtoms: null,
    group: null,
  };
}

function principal<T extends { readonly count: number }>(list: readonly T[]): T | null {
  let largest: T | null = null;
  for (const fragment of list) if (!largest || fragment.count > largest.count) largest = fragment;
  return largest;
}

/** The molecule whose size is nearest to what is looked for: the one of which a difference is worth naming. */
function nearest(list: readonly Fragment[], count: number): Fragment | null {
  let best: Fragment | null = null;
  for (const fragment of list) {
    if (!best || Math.abs(fragment.count - count) < Math.abs(best.count - count)) best = fragment;
  }
  return best;
}

function principalIntended(list: readonly IntendedFragment[]): IntendedFragment | null {
  let largest: IntendedFragment | null = null;
  for (const each of list) if (!largest || each.fragment.count > largest.fragment.count) largest = each;
  return largest;
}

/** Pairs whole molecules of equal skeleton; a problem when the principal intended molecule has no counterpart. */
function pairWhole(
  model: Molecule,
  intention: Intention,
  cut: FragmentOptions,
): Pairing | { problem: string } {
  const fragments = fragmentsOf(model, cut);
  const intended = intention.cut(cut);
  const chief = principalIntended(intended.list);
  if (!chief) return { problem: 'the intention holds no atoms' };
  const wanted = intended.list.map(each => skeletonSignature(each.fragment));
  const matches: { model: number; candidates: FragmentMatch[] }[] = [];
  let problem: string | null = null;
  let chiefMatched = false;
  fragments.list.forEach((fragment, f) => {
    const signature = skeletonSignature(fragment);
    const candidates: FragmentMatch[] = [];
    intended.list.forEach((each, d) => {
      if (wanted[d] !== signature) return;
      const result = matchWhole(each, fragment);
      if (result.match) {
        candidates.push(result.match);
        if (each === chief) chiefMatched = true;
      } else if (each === chief) problem ??= result.difference;
    });
    if (candidates.length > 0) matches.push({ model: f, candidates });
  });
  if (chiefMatched) return { cut, fragments, matches };
  const likeliest = nearest(fragments.list, chief.fragment.count);
  return {
    problem: problem ?? (likeliest ? firstDifference(chief.fragment, likeliest) : 'the model holds no atoms'),
  };
}

/** Pairs the principal intended molecule with a model of which part is missing, or that hangs on something else. */
function pairPart(model: Molecule, intention: Intention, cut: FragmentOptions): Pairing | null {
  const fragments = fragmentsOf(model, cut);
  const chief = principalIntended(intention.cut(cut).list);
  const largest = principal(fragments.list);
  if (!chief || !largest) return null;
  const inside = matchInside(chief, largest);
  if (inside.match) return { cut, fragments, matches: [{ model: -1, candidates: [inside.match] }] };
  const pieces = fragments.list.filter(fragment => fragment.count > 1);
  const attempts = pieces.length > 1 ? [pieces, [largest]] : [[largest]];
  for (const attempt of attempts) {
    const result = matchPart(chief, attempt, fragments);
    if (result.match) return { cut, fragments, matches: [{ model: -1, candidates: [result.match] }] };
  }
  return null;
}

/** Searches every pair, supplying bond orders first where they are wanting. */
function judge(
  examined: Examined,
  intention: Intention,
  pairing: Pairing,
  examine: (molecule: Molecule) => Examined,
): EntryComparison {
  const alternatives = Math.max(...pairing.matches.map(({ candidates }) => candidates[0]!.supply.length));
  if (alternatives === 0) return judgeAsItStands(examined, intention, pairing, []);
  let best: EntryComparison | null = null;
  for (let a = 0; a < alternatives; a++) {
    let molecule = examined.molecule;
    const warnings = new Set<string>();
    for (const { candidates } of pairing.matches) {
      const { supply, intended, model, warnings: said } = candidates[0]!;
      if (supply.length === 0) continue;
      const image = supply[Math.min(a, supply.length - 1)]!;
      molecule = supplyBonding(intended.fragment, { ...model, molecule }, image);
      for (const warning of said) warnings.add(warning);
    }
    const again = examine(molecule);
    const partial = pairing.matches.some(({ candidates }) => candidates[0]!.placements !== null);
    const pairs = partial
      ? pairPart(molecule, intention, pairing.cut)
      : pairWhole(molecule, intention, pairing.cut);
    const result =
      !pairs || 'problem' in pairs
        ? otherCompound(
            again,
            intention,
            pairs?.problem ?? 'the intention does not fit once its bond orders are supplied',
          )
        : judgeAsItStands(again, intention, pairs, [...warnings]);
    if (!best || wrongCount(result) < wrongCount(best)) best = result;
  }
  return best!;
}

function wrongCount(comparison: EntryComparison): number {
  if (comparison.relation === 'other compound') return Number.MAX_SAFE_INTEGER;
  return comparison.units.filter(({ verdict }) => verdict === 'inverted').length;
}

interface Judged {
  readonly match: FragmentMatch;
  readonly search: MappingSearch;
  /** Docket index of each unit of the table, -1 for a mere candidate. */
  readonly docketIndex: readonly number[];
  readonly table: ReturnType<typeof unitTable>;
}

function judgeAsItStands(
  examined: Examined,
  intention: Intention,
  pairing: Pairing,
  warnings: readonly string[],
): EntryComparison {
  const judged = assign(
    pairing.matches.map(({ candidates }) => candidates.map(match => judgeMatch(examined, pairing, match))),
  );
  const said = new Set(warnings);
  const intended = intention.cut(pairing.cut);
  const chief = principalIntended(intended.list);
  const units: UnitVerdict[] = [];
  const settled = new Set<number>();
  const molecules: MoleculeRelation[] = [];
  const chiral: Relation[] = [];
  const mapping = new Int32Array(examined.molecule.atomCount).fill(-1);
  const choices: (readonly number[])[][] = [];
  let equivalentMappings = 1;
  for (const { match, search, docketIndex, table } of judged) {
    for (const warning of match.warnings) said.add(warning);
    if (!search.complete)
      said.add('more mappings than can be searched: the best of those searched is reported');
    const source = match.intended;
    equivalentMappings *= search.equivalent;
    for (let v = 0; v < source.fragment.count; v++) {
      const w = search.image[v]!;
      if (w >= 0) mapping[match.model.atoms[w]!] = source.fragment.atoms[v]!;
    }
    const wrong = new Set(invertedUnits(source.units, search.arrangements));
    const mixed = mixedGroups(source.units, search.arrangements);
    const atomsOf = (u: number): number[] =>
      source.units[u]!.ends.map(end => search.image[end]!)
        .filter(node => node >= 0)
        .map(node => match.model.atoms[node]!);
    source.units.forEach((unit, u) => {
      const at = modelUnitOf(unit, search.image, table);
      const index = at === -1 ? -1 : docketIndex[at]!;
      if (index !== -1) settled.add(index);
      const found = index === -1 ? null : examined.docket.units[index]!.descriptor;
      const whole = unit.group !== -1 && !mixed.has(unit.group);
      units.push({
        unit: index === -1 ? null : index,
        kind: unit.kind,
        verdict: verdictOf(search.arrangements[u]!, wrong.has(u), whole, unit.descriptor, found),
        intendedUnit: unit.index,
        intended: unit.descriptor,
        intendedAtoms: unit.unit.atoms,
        intendedLabels: unit.unit.atoms.map(atom => atomLabel(intention.molecule, atom, elementSymbol)),
        modelAtoms: atomsOf(u),
        group: unit.group === -1 ? null : intended.groupNames[unit.group]!,
      });
    });
    const relation = relationOf(source.units, search);
    const matters = source === chief || source.units.length > 0;
    molecules.push({ atoms: match.model.atoms, relation: matters ? relation : null });
    // A molecule that is its own mirror image and as intended goes with any relation of the others.
    if (matters && !(relation === 'same' && search.mirrored)) chiral.push(relation);
    if (search.choices.length > 1) {
      for (const { nodes } of search.choices)
        choices.push(nodes.map(ends => ends.map(node => match.model.atoms[node]!)));
    }
  }
  examined.docket.units.forEach(({ unit }, u) => {
    if (!settled.has(u)) units.push(openUnit(u, unit.kind));
  });
  units.sort((a, b) => (a.unit ?? Number.MAX_SAFE_INTEGER) - (b.unit ?? Number.MAX_SAFE_INTEGER));
  noteAbsent(pairing, intended.list, judged, said);
  const relations = new Set(chiral);
  const [only] = relations;
  return {
    examined,
    relation: relations.size > 1 ? 'mixed' : (only ?? 'same'),
    units,
    molecules,
    mapping,
    equivalentMappings,
    choices,
    difference: null,
    warnings: [...said],
  };
}

function verdictOf(
  arrangement: Arrangement,
  wrong: boolean,
  wholeGroup: boolean,
  intended: Descriptor | null,
  found: Descriptor | null,
): Verdict {
  if (arrangement === Arrangement.flat) return 'flat';
  if (arrangement === Arrangement.missing) return 'missing';
  if (wrong) return 'inverted';
  if (wholeGroup) return 'agrees';
  return intended !== null && found !== null && intended !== found ? 'relabelled' : 'agrees';
}

/** Says which intended molecules with units are not in the model (a counter-ion left out of a pose, say). */
function noteAbsent(
  pairing: Pairing,
  intended: readonly IntendedFragment[],
  judged: readonly Judged[],
  said: Set<string>,
): void {
  const used = new Set(judged.map(({ match }) => match.intended));
  const absent = intended.filter(each => !used.has(each));
  if (absent.length > 0)
    said.add(`${absent.length} of ${intended.length} intended molecules not in the model`);
  const extra = pairing.fragments.list.length - pairing.matches.length;
  const partial = pairing.matches.some(({ model }) => model === -1);
  if (extra > 0 && !partial) said.add(`${extra} molecules of the model not in the intention`);
}

/** Searches the mappings of one pair. */
function judgeMatch(examined: Examined, { fragments, matches }: Pairing, match: FragmentMatch): Judged {
  const several = matches.length > 1;
  const owned = new Set<number>();
  for (const atom of match.model.atoms) owned.add(atom);
  const units: NodeUnit[] = [];
  const docketIndex: number[] = [];
  const isUnion = match.placements !== null;
  const local = isUnion ? unionNodes(match.model, fragments) : fragments;
  const fragment = isUnion ? 0 : match.model.id - 1;
  const add = (unit: StereoUnit, index: number): void => {
    const first = unit.ends[0];
    if (!first || !owned.has(first.atom)) return;
    const node = nodeUnit(unit, local, fragment);
    if (!node) return;
    units.push(node);
    docketIndex.push(index);
  };
  examined.docket.units.forEach((labelled, u) => {
    add(labelled.unit, u);
  });
  let table = unitTable(units, match.model.count);
  let search = searchMatch(match, table, several);
  if (search.arrangements.includes(Arrangement.missing)) {
    // A unit that ranking found not stereogenic in the model may be so in the intention (meso against chiral).
    const key = (unit: StereoUnit): string => `${unit.kind} ${unit.atoms.join(' ')}`;
    const known = new Set(examined.docket.units.map(({ unit }) => key(unit)));
    for (const candidate of examined.docket.candidates) if (!known.has(key(candidate))) add(candidate, -1);
    table = unitTable(units, match.model.count, freeNodes(match.model, units, docketIndex));
    search = searchMatch(match, table, several);
  }
  return { match, search, docketIndex, table };
}

/** Saturated carbons of a notation or drawing at which ranking finds nothing stereogenic. */
function freeNodes(model: Fragment, units: readonly NodeUnit[], docketIndex: readonly number[]): Set<number> {
  const free = new Set<number>();
  if (model.molecule.dimension === 3) return free;
  for (let w = 0; w < model.count; w++) {
    const degree = model.start[w + 1]! - model.start[w]!;
    if (
      model.elements[w] === 6 &&
      model.pi[w] === 0 &&
      4 - degree === model.hydrogens[w] &&
      model.hydrogens[w]! < 2
    ) {
      free.add(w);
    }
  }
  // Those with an arrangement of their own, or stereogenic without one, are judged by it.
  units.forEach((unit, u) => {
    if (unit.kind === 'centre' && (docketIndex[u] !== -1 || unit.unit.sense !== 0))
      free.delete(unit.ends[0]!);
  });
  return free;
}

/** The node numbering of a union of fragments. */
function unionNodes(union: Fragment, fragments: Fragments): Fragments {
  const nodeOf = fragments.nodeOf.slice();
  const fragmentOf = new Int32Array(nodeOf.length).fill(-1);
  for (let i = 0; i < nodeOf.length; i++) if (nodeOf[i]! >= 0) nodeOf[i] = -3;
  union.atoms.forEach((atom, v) => {
    nodeOf[atom] = v;
    fragmentOf[atom] = 0;
  });
  return { options: fragments.options, list: [union], nodeOf, fragmentOf };
}

/**
 * Gives each model molecule one intended molecule: one to one where the intention has several of the same compound,
 * the assignment that leaves the fewest inverted units; more copies in the model than intended share in turn.
 */
function assign(options: readonly (readonly Judged[])[]): Judged[] {
  const chosen: (Judged | undefined)[] = options.map(list => (list.length === 1 ? list[0] : undefined));
  const pairs: { model: number; judged: Judged; cost: number }[] = [];
  options.forEach((list, model) => {
    if (list.length < 2) return;
    for (const judged of list) {
      pairs.push({ model, judged, cost: judged.search.inverted * 1000 + judged.search.undecided });
    }
  });
  if (pairs.length === 0) return chosen.filter(each => each !== undefined);
  const contested = [...new Set(pairs.map(({ model }) => model))];
  const times = new Map<IntendedFragment, number>();
  const sources = new Set(pairs.map(({ judged }) => judged.match.intended));
  const rounds = Math.max(1, Math.ceil(contested.length / sources.size));
  let best = Number.POSITIVE_INFINITY;
  let bestChoice: Judged[] = [];
  let steps = 0;
  const current: Judged[] = [];
  const descend = (at: number, cost: number): void => {
    if (cost >= best || steps++ > 20_000) return;
    if (at === contested.length) {
      best = cost;
      bestChoice = [...current];
      return;
    }
    const rows = pairs.filter(({ model }) => model === contested[at]).sort((a, b) => a.cost - b.cost);
    for (const { judged, cost: extra } of rows) {
      const used = times.get(judged.match.intended) ?? 0;
      if (used >= rounds) continue;
      times.set(judged.match.intended, used + 1);
      current.push(judged);
      descend(at + 1, cost + extra);
      current.pop();
      times.set(judged.match.intended, used);
    }
  };
  descend(0, 0);
  contested.forEach((model, at) => {
    chosen[model] = bestChoice[at] ?? options[model]![0];
  });
  return chosen.filter(each => each !== undefined);
}
