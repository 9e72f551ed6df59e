/**
 * Auxiliary descriptors: the configuration of the stereogenic units inside the digraph of another unit, as Rules 3 to
 * 5 compare them (P-92.1.4, P-92.5).
 *
 * Each is determined with its own node as the root of the same digraph, the farthest nodes first, so that every
 * ranking can use the descriptors that lie beyond it.
 */
import { LONE_PAIR } from '../chemistry/molecule.ts';
import type { StereoUnit, UnitEnd } from '../perception/unit.ts';
import type { Branches } from './branches.ts';
import { Nature } from './digraph.ts';
import { Letter } from './letter.ts';
import {
  NO_NODE,
  type Ranking,
  isComplete,
  permutationParity,
  rankByConfiguration,
  rankByConstitution,
} from './ranking.ts';
import type { UnitTable } from './unit-table.ts';

/** One descriptor of one node, as the ladder reports it. */
export interface AuxiliaryDescriptor {
  readonly unit: number;
  readonly node: number;
  readonly letter: Letter;
}

interface Place {
  readonly unit: number;
  /** The node of the centre, or of the end nearer to the root. */
  readonly node: number;
  /** The node of the farther end; equal to `node` for a centre. */
  readonly far: number;
  readonly depth: number;
}

/**
 * Labels every unit in the given branches of the digraph. `view` shows the digraph from its root, fully explored in
 * these branches; `scratch` is another view of the same digraph. `ownUnit` is the unit under examination, left out.
 */
export function labelAuxiliary(
  view: Branches,
  scratch: Branches,
  tiedLigands: readonly number[],
  table: UnitTable,
  ownUnit: number,
): AuxiliaryDescriptor[] {
  const places: Place[] = [];
  for (const ligand of tiedLigands) {
    if (ligand !== NO_NODE) findPlaces(view, ligand, table, ownUnit, places);
  }
  places.sort((a, b) => b.depth - a.depth);
  const { digraph } = view;
  const found: AuxiliaryDescriptor[] = [];
  let done = 0;
  for (let i = 0; i < places.length; i++) {
    const place = places[i]!;
    const letter = letterAt(scratch, place, table);
    if (letter !== Letter.none) found.push({ unit: place.unit, node: place.far, letter });
    const next = places[i + 1];
    if (next === undefined || next.depth < place.depth) {
      // Units of one sphere are labelled without regard to each other, then all at once.
      for (; done < found.length; done++) {
        const descriptor = found[done]!;
        const planar =
          table.units[descriptor.unit]!.kind === 'double-bond' || table.units[descriptor.unit]!.planar;
        if (planar) digraph.auxiliaryBond[descriptor.node] = descriptor.letter;
        else digraph.auxiliary[descriptor.node] = descriptor.letter;
      }
    }
  }
  return found;
}

function findPlaces(
  view: Branches,
  ligand: number,
  table: UnitTable,
  ownUnit: number,
  places: Place[],
): void {
  const { digraph } = view;
  const stack = [ligand];
  while (stack.length > 0) {
    const node = stack.pop()!;
    if (digraph.nature[node] !== Nature.real) continue;
    const atom = digraph.atom[node]!;
    const depth = digraph.depth[node]!;
    const centre = table.centreAt[atom]!;
    if (centre >= 0 && centre !== ownUnit && table.sense[centre] !== 0) {
      places.push({ unit: centre, node, far: node, depth });
    }
    for (const { unit, path } of table.endsAt.get(atom) ?? []) {
      if (unit === ownUnit || table.sense[unit] === 0) continue;
      let far = node;
      for (const next of path) {
        far = realChild(view, far, next);
        if (far < 0) break;
      }
      if (far >= 0) places.push({ unit, node, far, depth });
    }
    for (let k = 0; k < view.sizeOf(node); k++) stack.push(view.child(node, k));
  }
}

function realChild(view: Branches, node: number, atom: number): number {
  const { digraph } = view;
  const first = digraph.firstChild[node]!;
  for (let i = 0; i < digraph.childCount[node]!; i++) {
    if (digraph.atom[first + i] === atom && digraph.nature[first + i] === Nature.real) return first + i;
  }
  return -1;
}

function letterAt(scratch: Branches, place: Place, table: UnitTable): Letter {
  const unit = table.units[place.unit]!;
  const sense = table.sense[place.unit]!;
  const { digraph } = scratch;
  if (unit.ends.length === 1) {
    const ranking = rankEnd(scratch, place.node, unit.ends[0]!);
    return ranking ? centreLetter(sense, [ranking]) : Letter.none;
  }
  const nearAtom = digraph.atom[place.node]!;
  const [near, far] =
    unit.ends[0]!.atom === nearAtom ? [unit.ends[0]!, unit.ends[1]!] : [unit.ends[1]!, unit.ends[0]!];
  const nearRanking = rankEnd(scratch, place.node, near);
  if (!nearRanking) return Letter.none;
  const farRanking = rankEnd(scratch, place.far, far);
  return farRanking ? pairLetter(unit, sense, nearRanking, farRanking) : Letter.none;
}

function rankEnd(scratch: Branches, node: number, end: UnitEnd): Ranking | null {
  const { digraph } = scratch;
  const ligands: number[] = [];
  for (const ligand of end.ligands) {
    if (ligand === LONE_PAIR) {
      ligands.push(NO_NODE);
      continue;
    }
    const at = digraph.ligandNode(node, ligand);
    if (at < 0) return null;
    ligands.push(at);
  }
  const ranking = rankByConstitution(scratch, node, ligands);
  if (!isComplete(ranking)) rankByConfiguration(scratch, ranking, ligands);
  return isComplete(ranking) ? ranking : null;
}

/** R, S, r or s for a centre whose ligands stand as `sense` says in their listed order. */
export function centreLetter(sense: number, rankings: readonly Ranking[]): Letter {
  const ranking = rankings[0]!;
  const clockwise = sense * permutationParity(ranking.order) > 0;
  if (ranking.pseudo) return clockwise ? Letter.r : Letter.s;
  return clockwise ? Letter.R : Letter.S;
}

/** E, Z, e, z for a planar unit, M, P, m, p for an axial one, from the rankings at both ends. */
export function pairLetter(unit: StereoUnit, sense: number, first: Ranking, second: Ranking): Letter {
  const swaps = permutationParity(first.order) * permutationParity(second.order);
  const positive = sense * swaps > 0;
  const pseudo = first.pseudo !== second.pseudo;
  if (unit.kind === 'double-bond' || unit.planar) {
    if (pseudo) return positive ? Letter.z : Letter.e;
    return positive ? Letter.Z : Letter.E;
  }
  if (pseudo) return positive ? Letter.p : Letter.m;
  return positive ? Letter.P : Letter.M;
}
