/** The intended arrangement at the sighted unit, laid over what was found: for intentions that have coordinates of their own. */
import { isLocated, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { moved, superpose } from '../../core/geometry/superposition.ts';
import type { Rod } from './impostors.ts';
import { unitAtoms } from './model-geometry.ts';

export interface IntendedModel {
  readonly molecule: Molecule;
  /** For each atom of the model the intended atom, -1 for none. */
  readonly mapping: Int32Array;
}

/** Bonds from the unit within which atoms are laid on one another. */
const REACH = 3;
const RADIUS = 0.07;

/** Thin rods for the bonds of the unit as they were intended, laid over the model around it; empty without coordinates to lay. */
export function intendedRods(
  molecule: Molecule,
  labelled: LabelledUnit,
  intended: IntendedModel,
  colour: number,
): readonly Rod[] {
  const r = molecule.coordinates;
  const s = intended.molecule.coordinates;
  if (r === null || s === null || intended.molecule.dimension !== 3) return [];
  const all = pairsWithin(molecule, labelled, intended);
  // A lone substituent goes where the inversion puts it; what holds the unit in place is the rest.
  const anchored = all.filter(([atom]) => !isLoneSubstituent(molecule, labelled, atom));
  const pairs = anchored.length >= 3 ? anchored : all;
  if (pairs.length < 3) return [];
  const fixed = Float64Array.from(
    pairs.flatMap(([atom]) => [r[3 * atom]!, r[3 * atom + 1]!, r[3 * atom + 2]!]),
  );
  const moving = Float64Array.from(
    pairs.flatMap(([, other]) => [s[3 * other]!, s[3 * other + 1]!, s[3 * other + 2]!]),
  );
  const laid = moved(s, superpose(moving, fixed));
  const own = new Set<number>();
  for (const atom of unitAtoms(molecule, labelled).keys()) {
    const other = intended.mapping[atom] ?? -1;
    if (other >= 0) own.add(other);
  }
  const middle = new Set(labelled.unit.atoms.map(atom => intended.mapping[atom] ?? -1));
  const rods: Rod[] = [];
  const { bondAtoms, bondCount } = intended.molecule;
  const place = (atom: number): [number, number, number] => [
    laid[3 * atom]!,
    laid[3 * atom + 1]!,
    laid[3 * atom + 2]!,
  ];
  for (let b = 0; b < bondCount; b++) {
    const i = bondAtoms[2 * b]!;
    const j = bondAtoms[2 * b + 1]!;
    const belongs =
      (middle.has(i) || middle.has(j)) && isLocated(intended.molecule, i) && isLocated(intended.molecule, j);
    const known = own.has(i) && own.has(j);
    const hydrogen = intended.molecule.elements[i] === 1 || intended.molecule.elements[j] === 1;
    if (!belongs || !(known || hydrogen)) continue;
    rods.push({ from: place(i), to: place(j), radius: RADIUS, colours: [colour, colour], strength: 1 });
  }
  return rods;
}

function pairsWithin(
  molecule: Molecule,
  labelled: LabelledUnit,
  intended: IntendedModel,
): [number, number][] {
  const pairs: [number, number][] = [];
  for (const atom of within(molecule, labelled.unit.atoms, REACH)) {
    const other = intended.mapping[atom] ?? -1;
    if (other >= 0 && isLocated(molecule, atom) && isLocated(intended.molecule, other))
      pairs.push([atom, other]);
  }
  return pairs;
}

/** Whether an atom is a ligand of the unit with no other neighbour but hydrogens. */
function isLoneSubstituent(molecule: Molecule, labelled: LabelledUnit, atom: number): boolean {
  if (!labelled.unit.ends.some(end => end.ligands.includes(atom))) return false;
  let heavy = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.elements[molecule.neighbours[k]!] !== 1) heavy++;
  }
  return heavy < 2;
}

/** Atoms within some bonds of others, these included. */
function within(molecule: Molecule, from: readonly number[], reach: number): ReadonlySet<number> {
  const found = new Set(from);
  let edge = [...from];
  for (let step = 0; step < reach; step++) {
    const next: number[] = [];
    for (const atom of edge) {
      for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
        const neighbour = molecule.neighbours[k]!;
        if (!found.has(neighbour)) {
          found.add(neighbour);
          next.push(neighbour);
        }
      }
    }
    edge = next;
  }
  return found;
}
