/**
 * Which change of a substituent would give a centre another letter although nothing moves in space: a letter depends
 * on the ranking, and the ranking on what the ligands carry.
 */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { Descriptor, Docket, Settings } from '../docket.ts';
import { Labeller } from './label.ts';
import { withAtom } from './trial-molecule.ts';

/** One change: on `atom`, what stands there now and what would. */
export interface LetterChange {
  /** 0-based: the atom that is replaced, or that carries the hydrogen that is. */
  readonly atom: number;
  /** Bonds between it and the nearest atom of the unit. */
  readonly distance: number;
  /** "O5 replaced by S", "H on C3 replaced by F". */
  readonly change: string;
  readonly descriptor: Descriptor;
}

/** Elements of like valence, by which an atom is replaced in the trial. */
const EXCHANGES: ReadonlyMap<number, readonly number[]> = new Map([
  [6, [14]],
  [7, [15]],
  [8, [16]],
  [16, [8]],
  [9, [17, 35]],
  [17, [9, 35]],
  [35, [9, 17]],
  [53, [9, 17]],
]);

/** What a hydrogen is replaced by: fluorine, chlorine, hydroxy, methyl; the number of hydrogens the new atom bears. */
const HYDROGEN_EXCHANGES: readonly { element: number; hydrogens: number; text: string }[] = [
  { element: 6, hydrogens: 3, text: 'CH3' },
  { element: 8, hydrogens: 1, text: 'OH' },
  { element: 9, hydrogens: 0, text: 'F' },
  { element: 17, hydrogens: 0, text: 'Cl' },
];

const FARTHEST = 5;

/** Tries single replacements near a unit of the docket and returns those that change its letter, nearest first. */
export function letterChanges(
  molecule: Molecule,
  docket: Docket,
  unitIndex: number,
  settings: Settings,
): LetterChange[] {
  const labelled = docket.units[unitIndex];
  if (labelled === undefined) throw new RangeError(`the docket has no unit ${unitIndex + 1}`);
  if (labelled.descriptor === null || labelled.unit.ends.length === 0) return [];
  const index = docket.candidates.indexOf(labelled.unit);
  const fixed = new Set(labelled.unit.atoms);
  const changes: LetterChange[] = [];
  const attempt = (atom: number, distance: number, change: string, changed: Molecule): void => {
    const result = new Labeller(changed, docket.candidates, settings).label(index);
    if (result?.descriptor != null && result.descriptor !== labelled.descriptor) {
      changes.push({ atom, distance, change, descriptor: result.descriptor });
    }
  };
  for (const { atom, distance } of near(molecule, labelled.unit.atoms)) {
    if (fixed.has(atom)) continue;
    const label = atomLabel(molecule, atom, elementSymbol);
    for (const element of EXCHANGES.get(molecule.elements[atom]!) ?? []) {
      const elements = molecule.elements.slice();
      elements[atom] = element;
      attempt(atom, distance, `${label} replaced by ${elementSymbol(element)}`, { ...molecule, elements });
    }
    for (const exchange of HYDROGEN_EXCHANGES) {
      const changed = withHydrogenReplaced(molecule, atom, exchange.element, exchange.hydrogens);
      if (changed !== null) attempt(atom, distance, `H on ${label} replaced by ${exchange.text}`, changed);
    }
  }
  return changes;
}

/** Heavy atoms up to `FARTHEST` bonds from the unit, nearest first. */
function near(molecule: Molecule, atoms: readonly number[]): { atom: number; distance: number }[] {
  const distance = new Map<number, number>(atoms.map(atom => [atom, 0]));
  const queue = [...atoms];
  const found: { atom: number; distance: number }[] = [];
  for (let head = 0; head < queue.length; head++) {
    const atom = queue[head]!;
    const here = distance.get(atom)!;
    if (here > 0 && molecule.elements[atom]! > 1) found.push({ atom, distance: here });
    if (here === FARTHEST) continue;
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const next = molecule.neighbours[k]!;
      if (distance.has(next)) continue;
      distance.set(next, here + 1);
      queue.push(next);
    }
  }
  return found;
}

/** The molecule with one hydrogen of `atom` turned into another group; null when it has none. */
function withHydrogenReplaced(
  molecule: Molecule,
  atom: number,
  element: number,
  hydrogens: number,
): Molecule | null {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] !== 1) continue;
    const elements = molecule.elements.slice();
    const counts = molecule.hydrogens.slice();
    elements[neighbour] = element;
    counts[neighbour] = hydrogens;
    return { ...molecule, elements, hydrogens: counts };
  }
  if (molecule.hydrogens[atom] === 0) return null;
  const counts = molecule.hydrogens.slice();
  counts[atom]!--;
  return withAtom({ ...molecule, hydrogens: counts }, element, hydrogens, [atom]);
}
