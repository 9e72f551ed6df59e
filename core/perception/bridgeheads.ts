/** Bridgeheads: atoms at which bridges of a bicycle meet, told from atoms of ring fusion whatever the numbering. */
import type { PerceptionContext } from './context.ts';

/** Most shortest rings looked at for one pair of bonds; no chemical bicycle comes near. */
const MOST_RINGS = 64;

interface PairOfBonds {
  readonly first: number;
  readonly second: number;
  /** Atoms of every shortest ring through both bonds. */
  readonly rings: readonly (readonly number[])[];
  readonly size: number;
}

/**
 * Whether two of the smallest rings at an atom, none of them larger than `largest`, have three atoms or more in common:
 * a bridgehead. Rings with two common atoms are fused. The rim of two fused rings is no ring of its own here.
 */
export function isBridgehead(context: PerceptionContext, atom: number, largest: number): boolean {
  const pairs = pairsAt(context, atom, largest);
  for (let i = 0; i < pairs.length; i++) {
    for (let j = i + 1; j < pairs.length; j++) {
      for (const ring of pairs[i]!.rings) {
        for (const other of pairs[j]!.rings) {
          let shared = 0;
          for (const member of ring) if (other.includes(member)) shared++;
          if (shared >= 3) return true;
        }
      }
    }
  }
  return false;
}

/** Whether three rings of four or fewer atoms meet at an atom, one through every two of three bonds: a corner of cubane, prismane, tetrahedrane. */
export function isCorner(context: PerceptionContext, atom: number): boolean {
  return pairsAt(context, atom, 4).length >= 3;
}

/** The pairs of ring bonds at an atom with their shortest rings, without rims of smaller rings. */
function pairsAt(context: PerceptionContext, atom: number, largest: number): PairOfBonds[] {
  const { molecule, rings } = context;
  const around: number[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (rings.bondInRing[molecule.neighbourBonds[k]!] === 1) around.push(molecule.neighbours[k]!);
  }
  const pairs: PairOfBonds[] = [];
  for (let i = 0; i < around.length; i++) {
    for (let j = i + 1; j < around.length; j++) {
      const found = shortestRings(context, atom, around[i]!, around[j]!, largest);
      if (found.length === 0) continue;
      pairs.push({ first: around[i]!, second: around[j]!, rings: found, size: found[0]!.length });
    }
  }
  return pairs.filter(pair => !isRim(pair, pairs));
}

/** Whether the ring through two bonds is no smaller than the sum of the two rings that both share a third bond. */
function isRim(pair: PairOfBonds, pairs: readonly PairOfBonds[]): boolean {
  const reach = (neighbour: number): PairOfBonds[] =>
    pairs.filter(other => other !== pair && (other.first === neighbour || other.second === neighbour));
  const partner = (other: PairOfBonds, neighbour: number): number =>
    other.first === neighbour ? other.second : other.first;
  return reach(pair.first).some(one =>
    reach(pair.second).some(
      two => partner(one, pair.first) === partner(two, pair.second) && one.size + two.size - 2 <= pair.size,
    ),
  );
}

/** All shortest rings through two bonds of an atom, up to a size. */
function shortestRings(
  context: PerceptionContext,
  atom: number,
  from: number,
  to: number,
  largest: number,
): number[][] {
  const { molecule, rings } = context;
  const distance = new Map<number, number>([[from, 0]]);
  let layer = [from];
  // A ring of n atoms: n − 2 steps from one neighbour to the other.
  for (let step = 1; step <= largest - 2 && layer.length > 0 && !distance.has(to); step++) {
    const next: number[] = [];
    for (const at of layer) {
      for (let k = molecule.neighbourStart[at]!; k < molecule.neighbourStart[at + 1]!; k++) {
        const neighbour = molecule.neighbours[k]!;
        if (rings.bondInRing[molecule.neighbourBonds[k]!] === 0) continue;
        if (neighbour === atom || distance.has(neighbour)) continue;
        distance.set(neighbour, step);
        next.push(neighbour);
      }
    }
    layer = next;
  }
  const found: number[][] = [];
  const end = distance.get(to);
  if (end === undefined) return found;
  const walk = (path: number[], left: number): void => {
    if (found.length >= MOST_RINGS) return;
    const at = path[path.length - 1]!;
    if (left === 0) {
      found.push([...path, atom]);
      return;
    }
    for (let k = molecule.neighbourStart[at]!; k < molecule.neighbourStart[at + 1]!; k++) {
      const neighbour = molecule.neighbours[k]!;
      if (rings.bondInRing[molecule.neighbourBonds[k]!] === 0) continue;
      if (neighbour !== atom && distance.get(neighbour) === left - 1) walk([...path, neighbour], left - 1);
    }
  };
  walk([to], end);
  return found;
}
