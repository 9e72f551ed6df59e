/**
 * Helices: ortho-fused ring systems that wind round, [5]helicene and longer (P-92.1.2.2.1).
 *
 * The inner rim is a row of fusion atoms joined by bonds that are not fusion bonds; its two neighbours outside the row,
 * in the terminal rings, are the ends by which the unit is named. P when the rim winds clockwise as it recedes.
 */
import { isLocated, type Molecule } from '../chemistry/molecule.ts';
import { torsion } from '../geometry/torsion.ts';
import { isUnsaturated, type PerceptionContext } from './context.ts';
import { markHeight } from './drawing.ts';
import type { StereoUnit, UnitState } from './unit.ts';

/** Fusion atoms on the inner rim of a helicene of n rings: n − 1. Six rings do not pass each other at room temperature, five do within hours to days. */
const STABLE_RIM = 5;
const SHORTEST_RIM = 4;
/** Sum of the rim's torsions at which a helix counts as ideal, degrees: about that of hexahelicene (C. de Rango et al., Cryst. Struct. Commun. 1973, 2, 189; from memory). */
const IDEAL_SUM = 60;

export interface HelixCandidate {
  /** End, fusion atoms of the rim, end. */
  readonly path: readonly number[];
  readonly labile: string | null;
}

/** Finds inner rims of at least four fusion atoms in a row. */
export function helixCandidates(context: PerceptionContext): HelixCandidate[] {
  const { molecule, rings } = context;
  const fusion = new Uint8Array(molecule.atomCount);
  for (let i = 0; i < molecule.atomCount; i++) {
    if (rings.ringsAt[i]!.length === 2 && ringBondCount(context, i) === 3 && isUnsaturated(molecule, i)) {
      fusion[i] = 1;
    }
  }
  const found: HelixCandidate[] = [];
  const rimNeighbours = (atom: number): number[] => {
    const list: number[] = [];
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const neighbour = molecule.neighbours[k]!;
      if (
        rings.bondInRing[molecule.neighbourBonds[k]!] === 1 &&
        sharedRings(context, atom, neighbour) === 1
      ) {
        list.push(neighbour);
      }
    }
    return list;
  };
  for (let start = 0; start < molecule.atomCount; start++) {
    // A rim begins at a fusion atom with one neighbour on the rim that is not a fusion atom.
    if (fusion[start] === 0) continue;
    for (const end of rimNeighbours(start)) {
      if (fusion[end] === 1) continue;
      const path = [end, start];
      let closed = false;
      for (;;) {
        const at = path[path.length - 1]!;
        if (fusion[at] === 0) break;
        const next = rimNeighbours(at).find(neighbour => neighbour !== path[path.length - 2]);
        if (next === undefined || path.includes(next)) {
          closed = true;
          break;
        }
        path.push(next);
      }
      const rim = path.length - 2;
      if (closed || rim < SHORTEST_RIM || path[0]! > path[path.length - 1]!) continue;
      found.push({
        path,
        labile: rim < STABLE_RIM ? 'a [5]helicene inverts in hours to days at room temperature' : null,
      });
    }
  }
  return found;
}

function ringBondCount(context: PerceptionContext, atom: number): number {
  const { molecule, rings } = context;
  let count = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    count += rings.bondInRing[molecule.neighbourBonds[k]!]!;
  }
  return count;
}

/** Rings of the list that hold both atoms. */
function sharedRings(context: PerceptionContext, first: number, second: number): number {
  const { rings } = context;
  return rings.ringsAt[first]!.filter(index => rings.ringsAt[second]!.includes(index)).length;
}

/** Measures a helix in space, or reads it from a drawing in which one end is marked as the nearer; a notation cannot state it. */
export function measureHelix(context: PerceptionContext, candidate: HelixCandidate): StereoUnit {
  const { path, labile } = candidate;
  const { molecule, space } = context;
  const ends = [path[0]!, path[path.length - 1]!] as const;
  let sum: number | null = null;
  let firmness: number | null = null;
  let state: UnitState = 'unspecified';
  if (space !== null) {
    sum = path.every(atom => isLocated(molecule, atom)) ? windingSum(pathCoordinates(space, path)) : null;
    firmness = sum === null ? null : Math.min(1, Math.abs(sum) / IDEAL_SUM);
    if (firmness !== null) state = firmness < context.settings.flatFirmness ? 'flat' : 'clear';
  } else if (molecule.dimension === 2) {
    sum = drawnWinding(molecule, path);
    if (sum !== null) state = 'clear';
  }
  return {
    kind: 'helix',
    atoms: ends,
    ends: ends.map(atom => ({ atom, ligands: [] })),
    planar: false,
    state,
    sense: state === 'clear' ? (sum! > 0 ? 1 : -1) : 0,
    basis: space !== null ? 'coordinates' : molecule.dimension === 2 ? 'drawing' : 'notation',
    signedVolume: null,
    sigma: null,
    firmness,
    torsion: space === null ? null : sum,
    torsionSigma: null,
    labile,
    warnings: [],
  };
}

function pathCoordinates(r: Float64Array, path: readonly number[]): Float64Array {
  return Float64Array.from(path.flatMap(atom => [r[3 * atom]!, r[3 * atom + 1]!, r[3 * atom + 2]!]));
}

/** Sum of the torsions along the rim, degrees: positive winds clockwise. */
function windingSum(points: Float64Array): number | null {
  let sum = 0;
  for (let i = 0; i + 3 < points.length / 3; i++) {
    const angle = torsion(points, i, i + 1, i + 2, i + 3);
    if (Number.isNaN(angle)) return null;
    sum += angle;
  }
  return sum === 0 ? null : sum;
}

/** The winding of a drawn rim whose last bonds are marked: the rim descends evenly from the nearer end to the farther. */
function drawnWinding(molecule: Molecule, path: readonly number[]): number | null {
  const last = path.length - 1;
  let first: number = markHeight(molecule, path[1]!, path[0]!);
  let second: number = markHeight(molecule, path[last - 1]!, path[last]!);
  if (first === 0) first = -second;
  if (second === 0) second = -first;
  if (first === second) return null;
  const points = pathCoordinates(molecule.coordinates!, path);
  for (let i = 0; i <= last; i++) points[3 * i + 2] = first + ((second - first) * i) / last;
  return windingSum(points);
}
