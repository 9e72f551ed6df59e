/** The ladder: the account of how the ligands of a unit were ranked, sphere by sphere, to the first difference. */
import { elementSymbol } from '../chemistry/elements.ts';
import { LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import type { Ladder, LadderNode, LadderSphere, LadderStep, RuleName, Settings } from '../docket.ts';
import type { StereoUnit } from '../perception/unit.ts';
import type { Branches } from './branches.ts';
import { Nature } from './digraph.ts';
import { Labeller } from './label.ts';
import { descriptorOf } from './letter.ts';
import { NO_NODE, type Ranking, copyOf, isComplete, rankByReference, referencesIn } from './ranking.ts';
import { rootDistance } from './rule1b.ts';
import { nodeMass } from './rule2.ts';
import { sideAt } from './rule4b.ts';
import { RULE_STATEMENTS } from './rules.ts';

/** Most sets of one sphere that are written out; what lies beyond cannot hold the first difference of anything people read. */
const MOST_SETS = 400;

/**
 * Explains the ranking of one unit. `index` counts in `units`, the list of candidates from which the docket was made.
 *
 * @throws DigraphLimitError when the digraph outgrows `settings.digraphLimit`.
 */
export function ladderOf(
  molecule: Molecule,
  units: readonly StereoUnit[],
  index: number,
  settings: Settings,
): Ladder {
  const unit = units[index];
  if (unit === undefined) throw new RangeError(`there is no unit ${index + 1}`);
  const labeller = new Labeller(molecule, units, settings);
  const steps: LadderStep[] = [];
  const auxiliary: { atoms: readonly number[]; descriptor: string }[] = [];
  let nodes = 0;
  if (unit.kind === 'helix' || unit.kind === 'plane') return { steps, auxiliary, nodes };
  unit.ends.forEach((end, e) => {
    const { ranking, ligands } = labeller.rankEnd(index, end);
    let shown = ranking;
    if (!isComplete(ranking)) shown = withReference(labeller.view, ranking, ligands, unit, e);
    const number = unit.ends.length === 2 ? ((e + 1) as 1 | 2) : null;
    for (let place = 1; place < shown.order.length; place++) {
      steps.push(stepOf(labeller.view, shown, place, ligands, unit, e, number));
    }
    for (const found of labeller.auxiliary) {
      const descriptor = descriptorOf(found.letter);
      if (descriptor === null) continue;
      const node = labeller.digraph.atom[found.node]!;
      const atoms = units[found.unit]!.atoms;
      auxiliary.push({ atoms: atoms.length === 1 ? [node] : atoms, descriptor });
    }
    nodes = Math.max(nodes, labeller.digraph.count);
  });
  return { steps, auxiliary, nodes };
}

/** Adds Rule 6 with the first of the tied ligands as the reference, where a tie is left. */
function withReference(
  view: Branches,
  ranking: Ranking,
  ligands: readonly number[],
  unit: StereoUnit,
  end: number,
): Ranking {
  const first = ranking.order[ranking.tied.indexOf(true) - 1]!;
  const reference = unit.ends[end]!.ligands[first]!;
  if (reference < 0) return ranking;
  const extended = copyOf(ranking);
  rankByReference(view, extended, ligands, reference);
  return isComplete(extended) ? extended : ranking;
}

function stepOf(
  view: Branches,
  ranking: Ranking,
  place: number,
  ligands: readonly number[],
  unit: StereoUnit,
  e: number,
  end: 1 | 2 | null,
): LadderStep {
  const upper = ranking.order[place - 1]!;
  const lower = ranking.order[place]!;
  const above = unit.ends[e]!.ligands[upper]!;
  const below = unit.ends[e]!.ligands[lower]!;
  const rule = ranking.rules[place]!;
  const sphere = ranking.spheres[place]!;
  if (rule === null || sphere === null) {
    return {
      above,
      below,
      end,
      rule: null,
      sphere: null,
      spheres: [],
      summary: 'No rule tells these two apart.',
    };
  }
  const nodeAbove = ligands[upper]!;
  const nodeBelow = ligands[lower]!;
  const write = textWriter(view, rule);
  const spheres: LadderSphere[] = [];
  for (let s = 1; s <= sphere; s++) {
    const a = setsOf(view, nodeAbove, s, write);
    const b = setsOf(view, nodeBelow, s, write);
    if (rule >= '3' && a.length === 0 && b.length === 0) continue;
    spheres.push({ sphere: s, above: a, below: b, difference: s === sphere ? firstDifference(a, b) : null });
  }
  const last = spheres[spheres.length - 1];
  return { above, below, end, rule, sphere, spheres, summary: summaryOf(rule, sphere, last) };
}

function summaryOf(rule: RuleName, sphere: number, last: LadderSphere | undefined): string {
  const head = `Rule ${rule}, sphere ${sphere}`;
  if (last === undefined || last.difference === null) return `${head}: ${RULE_STATEMENTS[rule]}`;
  const set = last.difference.set;
  const text = (nodes: readonly LadderNode[] | undefined): string =>
    nodes === undefined || nodes.length === 0 ? 'nothing' : `{${nodes.map(node => node.text).join(', ')}}`;
  return `${head}: ${text(last.above[set])} before ${text(last.below[set])}; ${RULE_STATEMENTS[rule]}`;
}

/** Text for a node under a rule, and whether the rule sees anything in it. */
type Writer = (node: number, depth: number, ligand: number) => string | null;

function textWriter(view: Branches, rule: RuleName): Writer {
  const { digraph } = view;
  const symbol = (node: number): string => {
    const atom = digraph.atom[node]!;
    const text = atom < 0 ? 'H' : elementSymbol(digraph.molecule.elements[atom]!);
    const nature = digraph.nature[node];
    if (nature !== Nature.bondDuplicate && nature !== Nature.ringDuplicate) return text;
    const z = digraph.atomicNumber[node]!;
    return Number.isInteger(z) ? `(${text})` : `(${z.toFixed(2)})`;
  };
  const letter = (node: number): string | null =>
    descriptorOf(digraph.auxiliary[node]!) ?? descriptorOf(digraph.auxiliaryBond[node]!);
  switch (rule) {
    case '1a':
      return symbol;
    case '1b':
      return (node, depth) => `${symbol(node)} at ${rootDistance(digraph, node, depth)}`;
    case '2':
      return node => `${symbol(node)} ${Number(nodeMass(digraph, node).toFixed(3))}`;
    case '4b':
      return (node, _depth, ligand) => {
        const side = sideAt(digraph, node);
        if (side === 0) return null;
        const references = referencesIn(view, ligand);
        const kind = references.length === 1 ? (side === references[0] ? ' like' : ' unlike') : '';
        return `${letter(node) ?? ''}${kind}`;
      };
    case '6':
      return symbol;
    default:
      return letter;
  }
}

/** The sets of one sphere of a branch: the children of each node of the sphere before, in order. */
function setsOf(view: Branches, ligand: number, sphere: number, write: Writer): LadderNode[][] {
  if (ligand === NO_NODE) {
    const pair: LadderNode = { atom: LONE_PAIR, nature: 'implicit', text: 'lone pair' };
    return sphere === 1 ? [[pair]] : [];
  }
  if (sphere === 1) {
    const node = ladderNode(view, ligand, 1, ligand, write);
    return node === null ? [] : [[node]];
  }
  let level = [ligand];
  for (let s = 2; s < sphere; s++) {
    const next: number[] = [];
    for (const node of level) for (let k = 0; k < view.sizeOf(node); k++) next.push(view.child(node, k));
    level = next;
  }
  const sets: LadderNode[][] = [];
  for (const node of level) {
    if (view.sizeOf(node) === 0 || sets.length >= MOST_SETS) continue;
    const set: LadderNode[] = [];
    for (let k = 0; k < view.sizeOf(node); k++) {
      const one = ladderNode(view, view.child(node, k), sphere, ligand, write);
      if (one !== null) set.push(one);
    }
    if (set.length > 0) sets.push(set);
  }
  return sets;
}

function ladderNode(
  view: Branches,
  node: number,
  depth: number,
  ligand: number,
  write: Writer,
): LadderNode | null {
  const text = write(node, depth, ligand);
  if (text === null) return null;
  const { digraph } = view;
  const nature = digraph.nature[node];
  return {
    atom: digraph.atom[node]!,
    nature:
      nature === Nature.bondDuplicate
        ? 'multiple-bond duplicate'
        : nature === Nature.ringDuplicate
          ? 'ring duplicate'
          : nature === Nature.implicitHydrogen
            ? 'implicit'
            : 'real',
    text,
  };
}

function firstDifference(
  above: readonly (readonly LadderNode[])[],
  below: readonly (readonly LadderNode[])[],
): { set: number; place: number } | null {
  for (let set = 0; set < Math.max(above.length, below.length); set++) {
    const a = above[set] ?? [];
    const b = below[set] ?? [];
    for (let place = 0; place < Math.max(a.length, b.length); place++) {
      if (a[place]?.text !== b[place]?.text) return { set, place };
    }
  }
  return null;
}
