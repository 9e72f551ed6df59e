/**
 * Ranking the ligands of one atom of the digraph: the sequence rules in their order, each exhausted over all spheres
 * before the next (P-92.1.3).
 */
import type { RuleName } from '../docket.ts';
import type { Branches } from './branches.ts';
import type { NodeRule } from './rule.ts';
import { rule1a } from './rule1a.ts';
import { rule1b } from './rule1b.ts';
import { rule2 } from './rule2.ts';
import { rule3 } from './rule3.ts';
import { rule4a } from './rule4a.ts';
import { referencesOf, rule4bAgainst, sideAt } from './rule4b.ts';
import { rule4c } from './rule4c.ts';
import { rule5Preferring } from './rule5.ts';
import { rule6With } from './rule6.ts';

/** A node that stands for no atom: a lone pair, below everything else. */
export const NO_NODE = -1;

const AGAINST: Readonly<Record<'1' | '-1', NodeRule>> = { '1': rule4bAgainst(1), '-1': rule4bAgainst(-1) };
const against = (reference: 1 | -1): NodeRule => (reference === 1 ? AGAINST['1'] : AGAINST['-1']);
const RULE_5 = rule5Preferring(1);
const RULE_5_MIRRORED = rule5Preferring(-1);

/** The order of the ligands of one atom, highest first, and what made it. */
export interface Ranking {
  /** Indices into the list of ligands. */
  readonly order: number[];
  /** `tied[k]`: place k is not separated from place k - 1. */
  readonly tied: boolean[];
  /** The rule and sphere that separated place k from place k - 1. */
  readonly rules: (RuleName | null)[];
  readonly spheres: (number | null)[];
  /** Whether reflection would exchange an odd number of pairs: the ranking rests on Rule 5 in the way that makes a unit pseudoasymmetric. */
  pseudo: boolean;
}

/** Whether all ligands have been told apart. */
export function isComplete(ranking: Ranking): boolean {
  return !ranking.tied.includes(true);
}

/** 1 for an even permutation, -1 for an odd one. */
export function permutationParity(order: readonly number[]): 1 | -1 {
  let parity: 1 | -1 = 1;
  for (let i = 0; i < order.length; i++) {
    for (let j = i + 1; j < order.length; j++) {
      if (order[i]! > order[j]!) parity = parity === 1 ? -1 : 1;
    }
  }
  return parity;
}

/** Ranks `ligands`, nodes next to `root` in the digraph (`NO_NODE` for a lone pair), by Rules 1a, 1b and 2. */
export function rankByConstitution(branches: Branches, root: number, ligands: readonly number[]): Ranking {
  branches.lookFrom(root);
  const ranking: Ranking = {
    order: ligands.map((_, i) => i),
    tied: ligands.map((_, i) => i > 0),
    rules: ligands.map(() => null),
    spheres: ligands.map(() => null),
    pseudo: false,
  };
  for (const rule of [rule1a, rule1b, rule2]) {
    applyNodeRule(branches, ranking, ligands, rule);
    if (isComplete(ranking)) break;
  }
  return ranking;
}

/** Goes on with Rules 3 to 5, once the auxiliary descriptors stand in the digraph; with `reflected`, as in the mirror image: Rule 5 puts S first. */
export function rankByConfiguration(
  branches: Branches,
  ranking: Ranking,
  ligands: readonly number[],
  reflected = false,
): void {
  for (const rule of [rule3, rule4a]) {
    applyNodeRule(branches, ranking, ligands, rule);
    if (isComplete(ranking)) return;
  }
  applyRule4b(branches, ranking, ligands);
  if (isComplete(ranking)) return;
  applyNodeRule(branches, ranking, ligands, rule4c);
  if (isComplete(ranking)) return;
  const before = branches.save();
  const mirrored = copyOf(ranking);
  applyNodeRule(branches, mirrored, ligands, reflected ? RULE_5 : RULE_5_MIRRORED);
  branches.restore(before);
  applyNodeRule(branches, ranking, ligands, reflected ? RULE_5_MIRRORED : RULE_5);
  ranking.pseudo = permutationParity(ranking.order) !== permutationParity(mirrored.order);
}

/** Ends with Rule 6, `referenceAtom` being the atom of one of the tied ligands. */
export function rankByReference(
  branches: Branches,
  ranking: Ranking,
  ligands: readonly number[],
  referenceAtom: number,
): void {
  applyNodeRule(branches, ranking, ligands, rule6With(referenceAtom));
}

/** A ranking that can be taken further without changing the first. */
export function copyOf(ranking: Ranking): Ranking {
  return {
    order: [...ranking.order],
    tied: [...ranking.tied],
    rules: [...ranking.rules],
    spheres: [...ranking.spheres],
    pseudo: ranking.pseudo,
  };
}

/** Applies one rule to sphere after sphere until nothing is tied or the branches end. */
function applyNodeRule(
  branches: Branches,
  ranking: Ranking,
  ligands: readonly number[],
  rule: NodeRule,
): void {
  const { order, tied } = ranking;
  const size = order.length;
  for (let sphere = 1; ; sphere++) {
    let any = false;
    let open = false;
    for (let k = 0; k < size; k++) {
      if (!(tied[k] || (k + 1 < size && tied[k + 1]))) continue;
      open = true;
      const node = ligands[order[k]!]!;
      if (node === NO_NODE) continue;
      if (sphere === 1 || branches.arrange(node, branches.root, 1, sphere, rule)) any = true;
    }
    if (!open || !any) return;
    sortTiedPlaces(ranking, rule.name, sphere, (first, second) =>
      compareLigands(branches, ligands[first]!, ligands[second]!, sphere, rule),
    );
  }
}

function compareLigands(
  branches: Branches,
  first: number,
  second: number,
  sphere: number,
  rule: NodeRule,
): number {
  if (first === NO_NODE || second === NO_NODE) {
    return (second === NO_NODE ? 1 : 0) - (first === NO_NODE ? 1 : 0);
  }
  return branches.compare(first, second, 1, sphere, rule);
}

/** Sorts each run of tied places and notes where the rule parts them. */
function sortTiedPlaces(
  ranking: Ranking,
  rule: RuleName,
  sphere: number,
  compare: (first: number, second: number) => number,
): void {
  const { order, tied, rules, spheres } = ranking;
  for (let run = 0; run < order.length; ) {
    let stop = run + 1;
    while (stop < order.length && tied[stop]) stop++;
    for (let i = run + 1; i < stop; i++) {
      const moving = order[i]!;
      let j = i;
      while (j > run && compare(moving, order[j - 1]!) > 0) {
        order[j] = order[j - 1]!;
        j--;
      }
      order[j] = moving;
    }
    for (let i = run + 1; i < stop; i++) {
      if (compare(order[i - 1]!, order[i]!) !== 0) {
        tied[i] = false;
        rules[i] = rule;
        spheres[i] = sphere;
      }
    }
    run = stop;
  }
}

/** For one ligand, what Rule 4b compares: like (2) and unlike (1) of each sphere, in order. */
type Pairs = readonly (readonly number[])[];

function applyRule4b(branches: Branches, ranking: Ranking, ligands: readonly number[]): void {
  const pairs = new Map<number, Pairs>();
  const size = ranking.order.length;
  for (let k = 0; k < size; k++) {
    if (!(ranking.tied[k] || (k + 1 < size && ranking.tied[k + 1]))) continue;
    const ligand = ranking.order[k]!;
    const node = ligands[ligand]!;
    pairs.set(ligand, node === NO_NODE ? [] : descriptorPairs(branches, node));
  }
  const longest = Math.max(0, ...[...pairs.values()].map(spheres => spheres.length));
  for (let sphere = 1; sphere <= longest; sphere++) {
    sortTiedPlaces(ranking, '4b', sphere, (first, second) =>
      compareLists(pairs.get(first)?.[sphere - 1] ?? [], pairs.get(second)?.[sphere - 1] ?? []),
    );
  }
}

function compareLists(a: readonly number[], b: readonly number[]): number {
  for (let i = 0; i < Math.max(a.length, b.length); i++) {
    const difference = (a[i] ?? 0) - (b[i] ?? 0);
    if (difference !== 0) return difference;
  }
  return 0;
}

/**
 * The pairs of a ligand against its reference; of two references, against the one that puts like first sooner. The
 * order in which the branch is read for this belongs to the reference and is given up afterwards: the later rules
 * find the branch as Rule 4a left it.
 */
function descriptorPairs(branches: Branches, ligand: number): Pairs {
  const before = branches.save();
  let best: Pairs = [];
  for (const reference of referencesIn(branches, ligand)) {
    const rule = against(reference);
    const spheres: number[][] = [];
    for (let sphere = 1; sphere === 1 || branches.arrange(ligand, branches.root, 1, sphere, rule); sphere++) {
      const list: number[] = [];
      collect(branches, ligand, 1, sphere, rule, list);
      spheres.push(list);
    }
    branches.restore(before);
    if (best.length === 0 || precedes(spheres, best)) best = spheres;
  }
  return best;
}

function precedes(first: Pairs, second: Pairs): boolean {
  for (let sphere = 0; sphere < first.length; sphere++) {
    const order = compareLists(first[sphere]!, second[sphere] ?? []);
    if (order !== 0) return order > 0;
  }
  return false;
}

function collect(
  branches: Branches,
  node: number,
  depth: number,
  sphere: number,
  rule: NodeRule,
  list: number[],
): void {
  if (depth === sphere) {
    const key = rule.key(branches.digraph, node, depth, branches.root);
    if (key !== 0) list.push(key);
    return;
  }
  for (let k = 0; k < branches.sizeOf(node); k++) {
    collect(branches, branches.child(node, k), depth + 1, sphere, rule, list);
  }
}

/** The reference descriptors of a ligand: those of its highest-ranked units, nodes of one rank taken together. */
export function referencesIn(branches: Branches, ligand: number): readonly (1 | -1)[] {
  let level: number[][] = [[ligand]];
  while (level.length > 0) {
    const next: number[][] = [];
    for (const set of level) {
      let right = 0;
      let left = 0;
      for (const node of set) {
        const side = sideAt(branches.digraph, node);
        if (side > 0) right++;
        else if (side < 0) left++;
      }
      const references = referencesOf(right, left);
      if (references.length > 0) return references;
    }
    for (const set of level) {
      const groups: number[][] = [];
      for (const node of set) {
        let group = -1;
        for (let k = 0; k < branches.sizeOf(node); k++) {
          if (k === 0 || !branches.isTied(node, k)) group++;
          (groups[group] ??= []).push(branches.child(node, k));
        }
      }
      next.push(...groups);
    }
    level = next;
  }
  return [];
}
