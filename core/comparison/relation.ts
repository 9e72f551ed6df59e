/** The relation of a found molecule to the intended one, tested over all mappings that the symmetry of the molecule allows. */
import type { Relation } from '../docket.ts';
import type { Symmetry } from './symmetry.ts';
import type { IntendedUnit, NodeUnit, UnitTable } from './units.ts';
import { Arrangement, arrangementOf, nodesOf } from './verdict.ts';

/** Most mappings looked at in one search; symmetric molecules of ordinary size need far fewer. */
export const MAPPING_LIMIT = 50_000;
/** Most alternative choices of inverted units that are named. */
const CHOICES_LIMIT = 64;

/** Most equivalent mappings counted once nothing is left to improve. */
export const EQUIVALENT_LIMIT = 1000;

/** Nodes whose exchange for another costs when bond orders are wanting: 1 where the model shows otherwise. */
export interface BondingEvidence {
  readonly nodes: readonly number[];
  /** Cost of mapping an intended node to a model node. */
  cost(intended: number, model: number): number;
}

/** One set of units that may be called inverted. */
export interface InvertedChoice {
  /** Indices into the intended units. */
  readonly units: readonly number[];
  /** Model nodes of the ends of each. */
  readonly nodes: readonly (readonly number[])[];
}

export interface MappingSearch {
  /** Intended node to model node under the mapping that leaves the fewest inverted units. */
  readonly image: Int32Array;
  /** Arrangement of each intended unit under it. */
  readonly arrangements: readonly Arrangement[];
  /** Inverted units under it, groups judged whole. */
  readonly inverted: number;
  /** Units flat or missing under it. */
  readonly undecided: number;
  /** Mappings that differ where it matters and leave as few inverted. */
  readonly equivalent: number;
  /** The different sets of model units that such mappings call inverted. */
  readonly choices: readonly InvertedChoice[];
  /** Whether the mirrored intention is matched without exception; false where that was not looked for. */
  readonly mirrored: boolean;
  /** Smallest bonding cost. */
  readonly bondingCost: number;
  /** Whether the search ran to its end, so that nothing better exists. */
  readonly complete: boolean;
}

interface Tally {
  bonding: number;
  inverted: number;
  undecided: number;
}

function compareTallies(a: Tally, b: Tally): number {
  return a.bonding - b.bonding || a.inverted - b.inverted || a.undecided - b.undecided;
}

/** Walks all mappings level by level, giving up a branch as soon as it is worse than the bound. */
class Walk {
  readonly #units: readonly IntendedUnit[];
  readonly #symmetry: Symmetry;
  readonly #base: Int32Array;
  readonly #model: UnitTable;
  readonly #evidence: BondingEvidence | null;
  readonly #unitsAt: number[][];
  readonly #evidenceAt: number[][];
  readonly #groups: number;
  visited = 0;
  exhausted = false;

  constructor(
    units: readonly IntendedUnit[],
    symmetry: Symmetry,
    base: Int32Array,
    model: UnitTable,
    evidence: BondingEvidence | null,
  ) {
    this.#units = units;
    this.#symmetry = symmetry;
    this.#base = base;
    this.#model = model;
    this.#evidence = evidence;
    const depths = symmetry.levels.length + 1;
    this.#unitsAt = Array.from({ length: depths }, () => []);
    this.#evidenceAt = Array.from({ length: depths }, () => []);
    units.forEach((unit, u) => {
      let depth = 0;
      for (const node of nodesOf(unit)) depth = Math.max(depth, symmetry.settledAfter[node]!);
      this.#unitsAt[depth]!.push(u);
    });
    for (const node of evidence?.nodes ?? []) this.#evidenceAt[symmetry.settledAfter[node]!]!.push(node);
    let groups = 0;
    for (const unit of units) groups = Math.max(groups, unit.group + 1);
    this.#groups = groups;
  }

  /** Calls `leaf` for every mapping whose tally is not above `bound()`. Stops when `leaf` returns true. */
  run(
    mirrored: boolean,
    bound: () => Tally,
    leaf: (tally: Tally, image: Int32Array, arrangements: Arrangement[]) => boolean,
  ): void {
    const n = this.#base.length;
    const arrangements: Arrangement[] = this.#units.map(() => Arrangement.missing);
    const agree = new Int32Array(this.#groups);
    const oppose = new Int32Array(this.#groups);
    this.visited = 0;
    this.exhausted = false;
    const descend = (depth: number, permutation: Int32Array | null, tally: Tally): boolean => {
      if (++this.visited > MAPPING_LIMIT) {
        this.exhausted = true;
        return true;
      }
      let image = this.#base;
      if (permutation) {
        image = new Int32Array(n);
        for (let v = 0; v < n; v++) image[v] = this.#base[permutation[v]!]!;
      }
      const now = { ...tally };
      for (const node of this.#evidenceAt[depth]!) now.bonding += this.#evidence!.cost(node, image[node]!);
      const undo: number[] = [];
      for (const u of this.#unitsAt[depth]!) {
        const unit = this.#units[u]!;
        const arrangement = arrangementOf(unit, image, this.#model);
        arrangements[u] = arrangement;
        if (arrangement === Arrangement.flat || arrangement === Arrangement.missing) {
          now.undecided++;
          continue;
        }
        const wrong = (arrangement === Arrangement.inverted) !== (mirrored && unit.chiral);
        if (unit.group === -1) {
          if (wrong) now.inverted++;
          continue;
        }
        // A group costs its smaller part: all as drawn or all inverted is no difference.
        const g = unit.group;
        const before = Math.min(agree[g]!, oppose[g]!);
        if (wrong) oppose[g]!++;
        else agree[g]!++;
        undo.push(wrong ? -1 - g : g);
        now.inverted += Math.min(agree[g]!, oppose[g]!) - before;
      }
      let stop = false;
      if (compareTallies(now, bound()) <= 0) {
        const level = this.#symmetry.levels[depth];
        if (!level) stop = leaf(now, image, arrangements);
        else {
          for (const element of level.elements) {
            let next = element;
            if (permutation) {
              next = new Int32Array(n);
              for (let v = 0; v < n; v++) next[v] = permutation[element[v]!]!;
            }
            if (descend(depth + 1, next, now)) {
              stop = true;
              break;
            }
          }
        }
      }
      for (const g of undo) {
        if (g < 0) oppose[-1 - g]!--;
        else agree[g]!--;
      }
      return stop;
    };
    descend(0, null, { bonding: 0, inverted: 0, undecided: 0 });
  }
}

/** Notes the units that a mapping calls inverted, once for each set of model atoms. */
function addChoice(
  choices: Map<string, InvertedChoice>,
  units: readonly IntendedUnit[],
  wrong: readonly number[],
  image: Int32Array,
): void {
  if (choices.size >= CHOICES_LIMIT) return;
  const nodes = wrong.map(u => units[u]!.ends.map(end => image[end]!).sort((a, b) => a - b));
  const key = nodes
    .map(ends => ends.join('-'))
    .sort()
    .join(' ');
  if (!choices.has(key)) choices.set(key, { units: wrong, nodes });
}

/** Chooses among given mappings, as `searchMappings` does among those of a symmetry; used where only part is mapped. */
export function searchImages(
  units: readonly IntendedUnit[],
  images: readonly Int32Array[],
  model: UnitTable,
): MappingSearch {
  let best: { tally: Tally; image: Int32Array; arrangements: Arrangement[] } | null = null;
  let keys = new Set<string>();
  let choices = new Map<string, InvertedChoice>();
  const nodes = [...new Set(units.flatMap(nodesOf))];
  for (const image of images) {
    const arrangements = units.map(unit => arrangementOf(unit, image, model));
    const wrong = invertedUnits(units, arrangements);
    const inGroups = wrong.filter(u => units[u]!.group !== -1).length;
    const tally: Tally = {
      bonding: 0,
      inverted: wrong.length - inGroups + mixedGroups(units, arrangements).size,
      undecided: arrangements.filter(a => a === Arrangement.flat || a === Arrangement.missing).length,
    };
    const order = best ? compareTallies(tally, best.tally) : -1;
    if (order > 0) continue;
    if (order < 0) {
      best = { tally, image, arrangements };
      keys = new Set();
      choices = new Map();
    }
    keys.add(nodes.map(node => image[node]).join(' '));
    if (wrong.length > 0) addChoice(choices, units, wrong, image);
  }
  if (!best) throw new RangeError('no mapping to choose from');
  return {
    image: best.image,
    arrangements: best.arrangements,
    inverted: best.tally.inverted,
    undecided: best.tally.undecided,
    equivalent: keys.size,
    choices: [...choices.values()],
    mirrored: false,
    bondingCost: 0,
    complete: true,
  };
}

/** The units that disagree under a mapping, in groups none when the group agrees as a whole. */
export function invertedUnits(
  units: readonly IntendedUnit[],
  arrangements: readonly Arrangement[],
): number[] {
  const mixed = mixedGroups(units, arrangements);
  const inverted: number[] = [];
  units.forEach((unit, u) => {
    if (unit.group === -1 ? arrangements[u] === Arrangement.inverted : mixed.has(unit.group))
      inverted.push(u);
  });
  return inverted;
}

/** Groups whose members are neither all as drawn nor all inverted. */
export function mixedGroups(
  units: readonly IntendedUnit[],
  arrangements: readonly Arrangement[],
): Set<number> {
  const seen = new Map<number, number>();
  units.forEach((unit, u) => {
    if (unit.group === -1) return;
    const arrangement = arrangements[u];
    if (arrangement === Arrangement.same) seen.set(unit.group, (seen.get(unit.group) ?? 0) | 1);
    if (arrangement === Arrangement.inverted) seen.set(unit.group, (seen.get(unit.group) ?? 0) | 2);
  });
  return new Set([...seen].filter(([, both]) => both === 3).map(([group]) => group));
}

/** The sense of a centre with its ligands in the order of their colours, and the colours; null where two are alike. */
function colouredSense(
  unit: NodeUnit,
  colourOf: (node: number) => number,
): { key: string; sense: number } | null {
  const [end] = unit.ends;
  const [ligands] = unit.ligands;
  if (unit.kind !== 'centre' || end === undefined || !ligands) return null;
  const colours = ligands.map(colourOf);
  let inversions = 0;
  for (let i = 0; i < colours.length; i++) {
    for (let j = i + 1; j < colours.length; j++) {
      if (colours[i] === colours[j]) return null;
      if (colours[i]! > colours[j]!) inversions++;
    }
  }
  return { key: `${colourOf(end)}`, sense: inversions % 2 === 0 ? unit.unit.sense : -unit.unit.sense };
}

/**
 * A number of inverted units below which no mapping can come: among centres that symmetry exchanges, each with four
 * different ligands, as many must be inverted as the counts of either hand differ.
 */
function leastInverted(
  units: readonly IntendedUnit[],
  colours: Int32Array,
  base: Int32Array,
  model: UnitTable,
  mirrored = false,
): number {
  const back = new Map<number, number>();
  base.forEach((w, v) => back.set(w, colours[v]!));
  const wanted = new Map<string, number>();
  const asked = new Map<string, number>();
  for (const unit of units) {
    const sense = unit.group === -1 ? colouredSense(unit, node => (node < 0 ? node : colours[node]!)) : null;
    if (!sense) continue;
    asked.set(sense.key, (asked.get(sense.key) ?? 0) + 1);
    wanted.set(sense.key, (wanted.get(sense.key) ?? 0) + (mirrored ? -sense.sense : sense.sense));
  }
  const found = new Map<string, number>();
  const present = new Map<string, number>();
  for (const unit of model.units) {
    const sense = colouredSense(unit, node => (node < 0 ? node : (back.get(node) ?? 0)));
    if (!sense || sense.sense === 0) continue;
    present.set(sense.key, (present.get(sense.key) ?? 0) + 1);
    found.set(sense.key, (found.get(sense.key) ?? 0) + sense.sense);
  }
  let least = 0;
  for (const [key, sum] of wanted) {
    if (asked.get(key) === present.get(key)) least += Math.abs(sum - (found.get(key) ?? 0)) / 2;
  }
  return least;
}

/**
 * Searches all mappings for the one that leaves the fewest inverted units and, where some are inverted or
 * `mirrorAlways` is set, for a match with the mirror image.
 */
export function searchMappings(
  units: readonly IntendedUnit[],
  symmetry: Symmetry,
  base: Int32Array,
  model: UnitTable,
  evidence: BondingEvidence | null,
  colours: Int32Array,
  mirrorAlways = false,
): MappingSearch {
  const walk = new Walk(units, symmetry, base, model, evidence);
  const unbounded = Number.POSITIVE_INFINITY;
  let best: Tally = { bonding: unbounded, inverted: unbounded, undecided: unbounded };
  let image: Int32Array | null = null;
  let arrangements: Arrangement[] = [];
  let equivalent = 0;
  let choices = new Map<string, InvertedChoice>();
  /** Looks for mappings no worse than `best`; `least` is a number of inverted units that is known to be the least. */
  const look = (least: number): boolean => {
    walk.run(
      false,
      () => best,
      (tally, found, outcome) => {
        if (image === null || compareTallies(tally, best) < 0) {
          best = { ...tally };
          image = found;
          arrangements = [...outcome];
          equivalent = 0;
          choices = new Map();
        }
        equivalent++;
        if (tally.inverted > 0) addChoice(choices, units, invertedUnits(units, outcome), found);
        return (
          equivalent >= EQUIVALENT_LIMIT && tally.bonding + tally.undecided === 0 && tally.inverted <= least
        );
      },
    );
    return image !== null;
  };
  let complete = true;
  if (evidence || symmetry.levels.length === 0) {
    look(0);
    complete = !walk.exhausted;
  } else {
    // Deepening: with a tight bound, branches are given up at once, however large the symmetry.
    for (let bound = leastInverted(units, colours, base, model); bound <= units.length; bound++) {
      best = { bonding: 0, inverted: bound, undecided: unbounded };
      if (look(bound)) break;
      // A search cut short that found nothing leaves open whether something was there.
      if (walk.exhausted) complete = false;
    }
  }
  let mirrored = false;
  const mayMirror =
    (best.inverted > 0 || mirrorAlways) &&
    best.undecided === 0 &&
    leastInverted(units, colours, base, model, true) === 0;
  if (mayMirror) {
    const bound = { bonding: best.bonding, inverted: 0, undecided: 0 };
    walk.run(
      true,
      () => bound,
      () => {
        mirrored = true;
        return true;
      },
    );
    if (walk.exhausted && !mirrored) complete = false;
  }
  return {
    image: image ?? base,
    arrangements,
    inverted: best.inverted,
    undecided: best.undecided,
    equivalent,
    choices: [...choices.values()],
    mirrored,
    bondingCost: best.bonding,
    complete,
  };
}

/** The relation a search amounts to, in the order of the definitions. */
export function relationOf(units: readonly IntendedUnit[], search: MappingSearch): Relation {
  if (search.undecided > 0) return 'undecided';
  if (search.inverted === 0) return 'same';
  if (!search.complete) return 'undecided';
  if (search.mirrored) return 'enantiomer';
  if (search.inverted === 1) {
    const centre = search.choices.some(choice => choice.units.every(u => units[u]!.kind === 'centre'));
    if (centre && units.filter(unit => unit.countsForEpimer).length >= 2) return 'epimer';
  }
  return 'diastereomer';
}
