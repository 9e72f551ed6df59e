/** The candidate units of a molecule, arranged for look-up by atom while digraphs are labelled. */
import { type Molecule, bondBetween } from '../chemistry/molecule.ts';
import type { StereoUnit } from '../perception/unit.ts';

/** A two-ended unit met at one of its ends: the atoms that lead from there to the other end, that end included. */
export interface UnitFromEnd {
  readonly unit: number;
  readonly path: readonly number[];
}

export interface UnitTable {
  readonly units: readonly StereoUnit[];
  /** Sense of each unit as it is taken for auxiliary descriptors: 0 for labile ones; those that nothing decides can be tried either way. */
  readonly sense: Int8Array;
  /** The unit whose centre an atom is, -1 for none. */
  readonly centreAt: Int32Array;
  readonly endsAt: ReadonlyMap<number, readonly UnitFromEnd[]>;
}

/** Arranges units for look-up. */
export function unitTable(molecule: Molecule, units: readonly StereoUnit[], labileToo: boolean): UnitTable {
  const counts = (unit: StereoUnit): boolean => labileToo || unit.labile === null;
  const sense = Int8Array.from(units, unit => (counts(unit) ? unit.sense : 0));
  const centreAt = new Int32Array(molecule.atomCount).fill(-1);
  const endsAt = new Map<number, UnitFromEnd[]>();
  units.forEach((unit, index) => {
    if (!counts(unit)) return;
    if (unit.kind === 'centre') {
      centreAt[unit.atoms[0]!] = index;
    } else if (unit.kind !== 'helix' && unit.kind !== 'plane') {
      const first = unit.ends[0]!.atom;
      const second = unit.ends[1]!.atom;
      const path = unitPath(molecule, first, second);
      if (path === null) return;
      const back = [...path].reverse();
      addTo(endsAt, first, { unit: index, path: path.slice(1) });
      addTo(endsAt, second, { unit: index, path: back.slice(1) });
    }
  });
  return { units, sense, centreAt, endsAt };
}

function addTo(map: Map<number, UnitFromEnd[]>, atom: number, item: UnitFromEnd): void {
  const list = map.get(atom);
  if (list) list.push(item);
  else map.set(atom, [item]);
}

/** Atoms from one end of a unit to the other, both included: one bond, or the double bonds of a cumulene. Null where neither joins them. */
export function unitPath(molecule: Molecule, first: number, second: number): number[] | null {
  if (bondBetween(molecule, first, second) >= 0) return [first, second];
  for (let k = molecule.neighbourStart[first]!; k < molecule.neighbourStart[first + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!] !== 2) continue;
    const path = [first, molecule.neighbours[k]!];
    while (path[path.length - 1] !== second) {
      const at = path[path.length - 1]!;
      const before = path[path.length - 2]!;
      let next = -1;
      for (let j = molecule.neighbourStart[at]!; j < molecule.neighbourStart[at + 1]!; j++) {
        const neighbour = molecule.neighbours[j]!;
        if (neighbour !== before && molecule.bondOrders[molecule.neighbourBonds[j]!] === 2) next = neighbour;
      }
      if (next < 0 || path.includes(next)) break;
      path.push(next);
    }
    if (path[path.length - 1] === second) return path;
  }
  return null;
}
