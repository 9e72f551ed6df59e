/**
 * Which candidates constitution alone rules out, so that no digraph is built for them: two ligands alike whose
 * branches hold nothing that could make them differ.
 *
 * Only certain cases are dropped; the ranking decides the rest.
 */
import { bondBetween, IMPLICIT_HYDROGEN, LONE_PAIR } from '../chemistry/molecule.ts';
import type { PerceptionContext } from './context.ts';
import type { Ligand, UnitEnd } from './unit.ts';

export interface Prunable {
  readonly ends: readonly UnitEnd[];
}

/** Scratch of the walks through branches: marks that a new stamp clears, and a stack. */
interface Walk {
  readonly seen: Int32Array;
  stamp: number;
  readonly stack: number[];
}

/** The candidates that may be stereogenic, in their order. */
export function prune<T extends Prunable>(context: PerceptionContext, candidates: readonly T[]): T[] {
  let kept = [...candidates];
  const walk: Walk = { seen: new Int32Array(context.molecule.atomCount), stamp: 0, stack: [] };
  const holders = new Int32Array(context.molecule.atomCount);
  for (;;) {
    holders.fill(0);
    for (const candidate of kept) for (const end of candidate.ends) holders[end.atom]!++;
    const next = kept.filter(candidate => {
      const outlook = candidate.ends.map(end => separation(context, candidate, end, holders, walk));
      if (outlook.includes('never')) return false;
      // Ring ligands exchanged by symmetry at one end alone leave nothing; at both ends, Rule 6 may still decide.
      return outlook.filter(end => end === 'exchanged').length !== 1;
    });
    if (next.length === kept.length) return next;
    kept = next;
  }
}

/** What can become of the ligands of one end: told apart perhaps; two in a ring exchanged by symmetry; or never told apart. */
function separation(
  context: PerceptionContext,
  candidate: Prunable,
  end: UnitEnd,
  holders: Int32Array,
  walk: Walk,
): 'perhaps' | 'exchanged' | 'never' {
  const { ligands } = end;
  let ringTies = 0;
  let open = true;
  for (let i = 0; i < ligands.length; i++) {
    for (let j = i + 1; j < ligands.length; j++) {
      if (!alike(context, ligands[i]!, ligands[j]!)) continue;
      const first = ligands[i]!;
      if (first < 0) return 'never';
      if (!inOneRing(context, end.atom, first, ligands[j]!)) {
        if (!branchHolds(context, candidate, end.atom, first, holders, walk)) return 'never';
        continue;
      }
      ringTies++;
      if (!branchHolds(context, candidate, end.atom, first, holders, walk)) open = false;
    }
  }
  // A single pair of ring ligands with no other unit in reach can be exchanged by symmetry; two pairs, or three alike,
  // may still be stereogenic (Rule 6).
  return open || ringTies !== 1 ? 'perhaps' : 'exchanged';
}

function alike(context: PerceptionContext, a: Ligand, b: Ligand): boolean {
  if (a === LONE_PAIR || b === LONE_PAIR) return a === b;
  const { molecule, classes } = context;
  if (a === IMPLICIT_HYDROGEN || b === IMPLICIT_HYDROGEN) {
    const other = a === IMPLICIT_HYDROGEN ? b : a;
    return other === IMPLICIT_HYDROGEN || (molecule.elements[other] === 1 && molecule.isotopes[other] === 0);
  }
  return classes[a] === classes[b];
}

function inOneRing(context: PerceptionContext, atom: number, a: Ligand, b: Ligand): boolean {
  const { molecule, rings } = context;
  const first = bondBetween(molecule, atom, a);
  const second = bondBetween(molecule, atom, b);
  return first >= 0 && second >= 0 && rings.bondInRing[first] === 1 && rings.bondInRing[second] === 1;
}

/** Whether the part of the molecule reached through `ligand` without passing `atom` has another candidate. */
function branchHolds(
  context: PerceptionContext,
  candidate: Prunable,
  atom: number,
  ligand: number,
  holders: Int32Array,
  walk: Walk,
): boolean {
  const { molecule } = context;
  const { seen, stack } = walk;
  const stamp = ++walk.stamp;
  seen[atom] = stamp;
  seen[ligand] = stamp;
  stack.length = 0;
  stack.push(ligand);
  const ownCount = (at: number): number => (candidate.ends.some(end => end.atom === at) ? 1 : 0);
  while (stack.length > 0) {
    const at = stack.pop()!;
    if (holders[at]! > 0 && holders[at]! > ownCount(at)) return true;
    for (let k = molecule.neighbourStart[at]!; k < molecule.neighbourStart[at + 1]!; k++) {
      const next = molecule.neighbours[k]!;
      if (seen[next] !== stamp) {
        seen[next] = stamp;
        stack.push(next);
      }
    }
  }
  return false;
}
