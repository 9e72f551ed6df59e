/** The structure as it is drawn: hydrogens left to their atoms, double bonds as found, wedges that show what the model shows. */
import {
  assembleMolecule,
  bondBetween,
  BondMark,
  degree,
  type Molecule,
  type StatedStereo,
} from '../chemistry/molecule.ts';
import { ringBonds } from '../chemistry/rings.ts';
import type { LabelledUnit } from '../docket.ts';

export interface Skeleton {
  readonly molecule: Molecule;
  /** Atom of the model for each atom of the skeleton. */
  readonly atoms: readonly number[];
}

/** Whether an atom is left to its neighbour in a drawing: a plain hydrogen on one heavier atom. */
function isLeftOut(molecule: Molecule, atom: number): boolean {
  if (molecule.elements[atom] !== 1 || molecule.isotopes[atom] !== 0 || molecule.charges[atom] !== 0)
    return false;
  const start = molecule.neighbourStart[atom]!;
  return (
    molecule.neighbourStart[atom + 1]! - start === 1 && molecule.elements[molecule.neighbours[start]!]! > 1
  );
}

/** Atoms up to which a molecule is drawn whole, hydrogens included. */
const WHOLE = 400;
/** Bonds from the unit within which the rest of a larger one is drawn. */
const REACH = 5;

/** The atoms near a unit of a molecule that is too large to be drawn whole; null for one that is not. */
function surroundings(molecule: Molecule, focus: readonly number[]): ReadonlySet<number> | null {
  if (molecule.atomCount <= WHOLE || focus.length === 0) return null;
  const near = new Set(focus);
  let edge = [...focus];
  for (let step = 0; step < REACH; step++) {
    const next: number[] = [];
    for (const atom of edge) {
      for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
        const neighbour = molecule.neighbours[k]!;
        if (near.has(neighbour)) continue;
        near.add(neighbour);
        next.push(neighbour);
      }
    }
    edge = next;
  }
  return near;
}

/** The atoms on which a drawing that cannot show the whole molecule is centred; none where it can. */
export function focusOf(molecule: Molecule, labelled: LabelledUnit | undefined): readonly number[] {
  return molecule.atomCount <= WHOLE ? [] : (labelled?.unit.atoms ?? [0]);
}

/** Leaves the plain hydrogens out and states the double bonds of the docket, so that a layout keeps their sides. */
export function skeletonOf(
  molecule: Molecule,
  units: readonly LabelledUnit[],
  focus: readonly number[] = [],
): Skeleton {
  const near = surroundings(molecule, focus);
  const place = new Int32Array(molecule.atomCount).fill(-1);
  const atoms: number[] = [];
  for (let i = 0; i < molecule.atomCount; i++) {
    if (isLeftOut(molecule, i) || (near && !near.has(i))) continue;
    place[i] = atoms.length;
    atoms.push(i);
  }
  const hydrogens = Uint8Array.from(atoms, atom => molecule.hydrogens[atom]!);
  const bondAtoms: number[] = [];
  const orders: number[] = [];
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    const a = place[i]!;
    const c = place[j]!;
    if (a >= 0 && c >= 0) {
      bondAtoms.push(a, c);
      orders.push(molecule.bondOrders[b]!);
    } else if (a >= 0 && isLeftOut(molecule, j)) hydrogens[a]!++;
    else if (c >= 0 && isLeftOut(molecule, i)) hydrogens[c]!++;
  }
  const stated: StatedStereo[] = [];
  for (const { unit } of units) {
    const [first, second] = unit.ends;
    if (unit.kind !== 'double-bond' || unit.sense === 0 || !first || !second) continue;
    let same = unit.sense === 1;
    const reference = (ligands: readonly number[]): number => {
      const at = ligands.findIndex(ligand => ligand >= 0 && place[ligand]! >= 0);
      if (at === 1) same = !same;
      return at === -1 ? -1 : place[ligands[at]!]!;
    };
    const references = [reference(first.ligands), reference(second.ligands)] as const;
    if (references[0] < 0 || references[1] < 0) continue;
    stated.push({
      kind: 'double-bond',
      ends: [place[first.atom]!, place[second.atom]!],
      references,
      side: same ? 'same' : 'opposite',
    });
  }
  return {
    atoms,
    molecule: assembleMolecule({
      name: molecule.name,
      elements: Uint8Array.from(atoms, atom => molecule.elements[atom]!),
      charges: Int8Array.from(atoms, atom => molecule.charges[atom]!),
      isotopes: Uint16Array.from(atoms, atom => molecule.isotopes[atom]!),
      radicals: Uint8Array.from(atoms, atom => molecule.radicals[atom]!),
      hydrogens,
      bondAtoms: Uint32Array.from(bondAtoms),
      bondOrders: Uint8Array.from(orders),
      bondMarks: new Uint8Array(orders.length),
      coordinates: null,
      dimension: 0,
      labels: null,
      stated,
      stereoGroups: [],
      residues: null,
      uncertainty: null,
      occupancies: null,
      doubtfulBonding: null,
    }),
  };
}

/** A wedge: from its narrow end to the other. */
export interface Wedge {
  readonly from: number;
  readonly to: number;
  readonly mark: BondMark;
}

/** |V| of a drawing below which a wedge on this bond would not be read without doubt. */
const LEAST_VOLUME = 0.25;

/** Where each atom of a molecule is drawn: x, y; NaN where it is not. */
export type Layout = Float64Array;

/**
 * A wedge for each centre of which the arrangement is known, on the bond where it is read most easily, so that the drawing
 * (IUPAC Recommendations 2006, Pure Appl. Chem. 78, 1897) shows the sense that was found.
 */
export function wedgesFor(molecule: Molecule, units: readonly LabelledUnit[], layout: Layout): Wedge[] {
  const inRing = ringBonds(molecule);
  const centres = new Set<number>();
  for (const { unit } of units) if (unit.kind === 'centre') centres.add(unit.atoms[0]!);
  const wedges: Wedge[] = [];
  const taken = new Set<number>();
  for (const { unit } of units) {
    const [end] = unit.ends;
    if (unit.kind !== 'centre' || unit.sense === 0 || !end) continue;
    const cost = (ligand: number): number => {
      const bond = bondBetween(molecule, end.atom, ligand);
      const terminal = degree(molecule, ligand) === 1;
      return (
        (centres.has(ligand) ? 8 : 0) +
        (inRing[bond] ? 4 : 0) +
        (molecule.bondOrders[bond] === 1 ? 0 : 16) +
        (terminal ? 0 : 1)
      );
    };
    const candidates = end.ligands
      .filter(ligand => ligand >= 0 && Number.isFinite(layout[2 * ligand]!))
      .filter(ligand => !taken.has(bondBetween(molecule, end.atom, ligand)))
      .sort((a, b) => cost(a) - cost(b));
    for (const ligand of candidates) {
      const volume = drawnVolume(end.atom, end.ligands, ligand, layout);
      if (Math.abs(volume) < LEAST_VOLUME) continue;
      // A negative volume is clockwise: the sense 1 of a unit.
      const shown = volume < 0 ? 1 : -1;
      wedges.push({
        from: end.atom,
        to: ligand,
        mark: shown === unit.sense ? BondMark.wedge : BondMark.hash,
      });
      taken.add(bondBetween(molecule, end.atom, ligand));
      break;
    }
  }
  return wedges;
}

/** Signed volume of a drawn centre with one bond raised towards the reader, on unit bond vectors, ligands in listed order. */
function drawnVolume(centre: number, ligands: readonly number[], raised: number, layout: Layout): number {
  const points = ligands.map((ligand): readonly [number, number, number] | null => {
    if (ligand < 0) return null;
    const x = layout[2 * ligand]! - layout[2 * centre]!;
    const y = layout[2 * ligand + 1]! - layout[2 * centre + 1]!;
    const length = Math.hypot(x, y);
    if (!Number.isFinite(length) || length === 0) return null;
    return [x / length, y / length, ligand === raised ? 1 : 0];
  });
  const missing = points.indexOf(null);
  if (missing !== points.lastIndexOf(null)) return 0;
  const triple = (
    a: readonly [number, number, number],
    b: readonly [number, number, number],
    c: readonly [number, number, number],
  ): number =>
    a[0] * (b[1] * c[2] - b[2] * c[1]) +
    a[1] * (b[2] * c[0] - b[0] * c[2]) +
    a[2] * (b[0] * c[1] - b[1] * c[0]);
  const drawn = points.filter(point => point !== null);
  if (missing !== -1 || drawn.length === 3) {
    const [a, b, c] = drawn;
    if (!a || !b || !c) return 0;
    // The one not drawn stands opposite to the rest; moving it to the end changes the sign for each place.
    const places = missing === -1 ? 0 : 3 - missing;
    return triple(a, b, c) * (places % 2 === 0 ? 1 : -1);
  }
  const [a, b, c, d] = drawn;
  if (!a || !b || !c || !d) return 0;
  const from = (p: readonly [number, number, number]): readonly [number, number, number] => [
    p[0] - d[0],
    p[1] - d[1],
    p[2] - d[2],
  ];
  return triple(from(a), from(b), from(c)) / 4;
}
