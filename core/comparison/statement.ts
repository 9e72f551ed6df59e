/** Statements about a whole molecule: how many stereoisomers its units allow, and whether it is chiral, achiral or meso. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Docket } from '../docket.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { type Fragment, type Fragments, fragmentsOf } from './fragment.ts';
import { initialColours, refine } from './refinement.ts';
import { symmetryOf } from './symmetry.ts';
import { isChiralKind, nodeUnit, type NodeUnit, unitTable } from './units.ts';
import { Arrangement, arrangementOf, modelUnitOf, nodesOf } from './verdict.ts';

/** `undecided` when a unit that matters has no clear arrangement, or the symmetry is too large to be searched. */
export type Chirality = 'chiral' | 'achiral' | 'meso' | 'undecided';

export interface StereoStatement {
  /** 1-based number of the molecule within the entry. */
  readonly molecule: number;
  /** Configurationally stable stereogenic units. */
  readonly units: number;
  /** Stereoisomers that the graph allows, enantiomers counted apart; whether each can exist in space is not asked. Null when the symmetry is too large. */
  readonly stereoisomers: number | null;
  readonly chirality: Chirality;
}

/** Most automorphisms that are looked at. */
const AUTOMORPHISM_LIMIT = 50_000;

/** How one automorphism acts on the units: where each goes, and whether its sense is kept. */
interface Action {
  readonly image: Int32Array;
  readonly sign: Int8Array;
}

/**
 * States for every molecule of an entry how many stereoisomers its candidate units allow (Burnside's lemma over the
 * automorphisms, each acting on the senses of the units), and whether this one is superposable on its mirror image.
 *
 * Meso: achiral, with at least two R/S or M/P units, and some stereoisomer of the set chiral (IUPAC 1996, Basic
 * Terminology of Stereochemistry, Pure Appl. Chem. 68, 2193: meso-compound).
 */
export function stereoStatements(molecule: Molecule, docket: Docket): StereoStatement[] {
  const fragments = fragmentsOf(molecule);
  return fragments.list.map((fragment, index) => statementOf(docket, fragments, fragment, index));
}

function statementOf(
  docket: Docket,
  fragments: Fragments,
  fragment: Fragment,
  index: number,
): StereoStatement {
  const nodeUnits: NodeUnit[] = [];
  for (const unit of docket.candidates) {
    if (unit.labile !== null) continue;
    const placed = nodeUnit(unit, fragments, index);
    if (placed !== null) nodeUnits.push(placed);
  }
  const stable = docket.units.filter(
    ({ unit }) =>
      unit.labile === null && fragments.fragmentOf[unit.ends[0]?.atom ?? unit.atoms[0]!] === index,
  );
  const base = { molecule: fragment.id, units: stable.length };
  if (nodeUnits.length === 0) return { ...base, stereoisomers: 1, chirality: 'achiral' };
  const actions = actionsOf(fragment, nodeUnits);
  if (actions === null) return { ...base, stereoisomers: null, chirality: 'undecided' };
  const chiralKind = nodeUnits.map(({ unit }) => isChiralKind(unit));
  const all = orbits(actions, chiralKind, false);
  const upToMirror = orbits(actions, chiralKind, true);
  const someChiral = upToMirror < all;
  const listed = new Set<StereoUnit>(stable.map(({ unit }) => unit));
  const undecided = nodeUnits.some(({ unit }) => unit.sense === 0 && listed.has(unit));
  let chirality: Chirality = 'undecided';
  if (!undecided) {
    // A candidate that is not stereogenic may stand either way: it is left out of the comparison.
    const matters = nodeUnits.map(({ unit }) => listed.has(unit));
    const achiral = actions.some(action => invertsAll(action, nodeUnits, chiralKind, matters));
    const several =
      stable.filter(({ descriptor }) => descriptor !== null && /^[RSMP]$/u.test(descriptor)).length >= 2;
    chirality = !achiral ? 'chiral' : several && someChiral ? 'meso' : 'achiral';
  }
  return { ...base, stereoisomers: all, chirality };
}

/** The different actions of the automorphisms on the units; null above the limit. */
function actionsOf(fragment: Fragment, nodeUnits: readonly NodeUnit[]): Action[] | null {
  const { colours } = refine(fragment, initialColours(fragment, 'isotopic'));
  const base = [...new Set(nodeUnits.flatMap(nodesOf))].filter(node => node >= 0);
  const symmetry = symmetryOf(fragment, colours, base);
  const total = symmetry.levels.reduce((product, l) => product * l.elements.length, 1);
  if (total > AUTOMORPHISM_LIMIT) return null;
  const facing = nodeUnits.map(one => ({ ...one, unit: { ...one.unit, sense: 1 as const } }));
  const table = unitTable(facing, fragment.count);
  const asked = facing.map((one, i) => ({
    ...one,
    index: i,
    descriptor: null,
    chiral: true,
    countsForEpimer: false,
    group: -1,
  }));
  const found = new Map<string, Action>();
  const descend = (depth: number, permutation: Int32Array | null): void => {
    const at = symmetry.levels[depth];
    if (at === undefined) {
      const image = permutation ?? Int32Array.from({ length: fragment.count }, (_, v) => v);
      const action: Action = { image: new Int32Array(asked.length), sign: new Int8Array(asked.length) };
      asked.forEach((unit, u) => {
        action.image[u] = modelUnitOf(unit, image, table);
        action.sign[u] = arrangementOf(unit, image, table) === Arrangement.inverted ? -1 : 1;
      });
      if (!action.image.includes(-1)) found.set(`${action.image.join()};${action.sign.join()}`, action);
      return;
    }
    for (const element of at.elements) {
      let next = element;
      if (permutation !== null) next = element.map(v => permutation[v]!);
      descend(depth + 1, next);
    }
  };
  descend(0, null);
  return [...found.values()];
}

/** Orbits of all assignments of senses under the actions, with reflection as well when `mirror` is set (Burnside). */
function orbits(actions: readonly Action[], chiral: readonly boolean[], mirror: boolean): number {
  let fixed = 0;
  let members = 0;
  for (const action of actions) {
    for (const reflected of mirror ? [false, true] : [false]) {
      members++;
      fixed += assignmentsKept(action, chiral, reflected);
    }
  }
  return Math.round(fixed / members);
}

/** Assignments that an action leaves as they are: two for each cycle whose signs multiply to 1, none when one does not. */
function assignmentsKept(action: Action, chiral: readonly boolean[], reflected: boolean): number {
  const seen = new Uint8Array(action.image.length);
  let kept = 1;
  for (let u = 0; u < action.image.length; u++) {
    if (seen[u] === 1) continue;
    let sign = 1;
    for (let v = u; seen[v] === 0; v = action.image[v]!) {
      seen[v] = 1;
      sign *= action.sign[v]! * (reflected && chiral[v] === true ? -1 : 1);
    }
    if (sign < 0) return 0;
    kept *= 2;
  }
  return kept;
}

/** Whether an action carries the molecule into its mirror image: an improper automorphism. */
function invertsAll(
  action: Action,
  units: readonly NodeUnit[],
  chiral: readonly boolean[],
  matters: readonly boolean[],
): boolean {
  for (let u = 0; u < units.length; u++) {
    const v = action.image[u]!;
    if (matters[u] !== true || matters[v] !== true) {
      if (matters[u] !== matters[v]) return false;
      continue;
    }
    const expected = units[u]!.unit.sense * action.sign[u]! * (chiral[u] === true ? -1 : 1);
    if (units[v]!.unit.sense !== expected) return false;
  }
  return true;
}
