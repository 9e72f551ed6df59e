/** Turns implicit hydrogens into atoms of the list, placed by the directions of the other ligands where the molecule has coordinates in space. */
import {
  assembleMolecule,
  IMPLICIT_HYDROGEN,
  type Molecule,
  type StatedStereo,
} from '../chemistry/molecule.ts';

/** Length of a bond to an added hydrogen, Å: usual values for C-H, N-H, O-H, S-H, others (common practice, no source). */
const LENGTHS: Readonly<Record<number, number>> = {
  6: 1.09,
  7: 1.01,
  8: 0.97,
  16: 1.34,
  15: 1.42,
  14: 1.48,
  5: 1.19,
};
const DEFAULT_LENGTH = 1.3;

/** The molecule with every hydrogen listed; the atoms it had keep their numbers, added ones follow in order of their parents. */
export function addHydrogens(molecule: Molecule): Molecule {
  let added = 0;
  for (let i = 0; i < molecule.atomCount; i++) added += molecule.hydrogens[i]!;
  if (added === 0) return molecule;
  const n = molecule.atomCount;
  const total = n + added;
  const widen = <T extends Uint8Array | Int8Array | Uint16Array>(fresh: T, old: T): T => {
    fresh.set(old);
    return fresh;
  };
  const elements = widen(new Uint8Array(total), molecule.elements);
  elements.fill(1, n);
  const bondAtoms = new Uint32Array(molecule.bondAtoms.length + 2 * added);
  bondAtoms.set(molecule.bondAtoms);
  const bondOrders = widen(new Uint8Array(molecule.bondCount + added), molecule.bondOrders);
  bondOrders.fill(1, molecule.bondCount);
  const firstHydrogen = new Int32Array(n).fill(-1);
  let next = n;
  let bond = molecule.bondCount;
  for (let i = 0; i < n; i++) {
    for (let h = 0; h < molecule.hydrogens[i]!; h++) {
      if (h === 0) firstHydrogen[i] = next;
      bondAtoms[2 * bond] = i;
      bondAtoms[2 * bond + 1] = next;
      bond++;
      next++;
    }
  }
  let coordinates: Float64Array | null = null;
  if (molecule.coordinates && molecule.dimension === 3) {
    coordinates = new Float64Array(3 * total);
    coordinates.set(molecule.coordinates);
    place(molecule, coordinates, firstHydrogen);
  } else if (molecule.coordinates) {
    coordinates = new Float64Array(3 * total).fill(Number.NaN);
    coordinates.set(molecule.coordinates);
  }
  return assembleMolecule({
    ...molecule,
    elements,
    charges: widen(new Int8Array(total), molecule.charges),
    isotopes: widen(new Uint16Array(total), molecule.isotopes),
    radicals: widen(new Uint8Array(total), molecule.radicals),
    hydrogens: new Uint8Array(total),
    bondAtoms,
    bondOrders,
    bondMarks: widen(new Uint8Array(bondOrders.length), molecule.bondMarks),
    coordinates,
    labels: molecule.labels
      ? [...molecule.labels, ...Array.from({ length: added }, (_, h) => `H${n + h + 1}`)]
      : null,
    stated: molecule.stated.map(stereo => withHydrogens(stereo, firstHydrogen)),
    residues: null,
    uncertainty: null,
    occupancies: null,
    doubtfulBonding: null,
  });
}

/** A statement with its implicit hydrogens replaced by the atoms they have become. */
function withHydrogens(stereo: StatedStereo, first: Int32Array): StatedStereo {
  const real = (ligand: number, parent: number): number =>
    ligand === IMPLICIT_HYDROGEN && first[parent]! >= 0 ? first[parent]! : ligand;
  const { kind } = stereo;
  if (kind === 'centre') {
    const [a, b, c, d] = stereo.ligands;
    return {
      ...stereo,
      ligands: [real(a, stereo.atom), real(b, stereo.atom), real(c, stereo.atom), real(d, stereo.atom)],
    };
  }
  if (kind === 'double-bond') {
    return {
      ...stereo,
      references: [real(stereo.references[0], stereo.ends[0]), real(stereo.references[1], stereo.ends[1])],
    };
  }
  const [a, b, c, d] = stereo.ligands;
  const [p, q] = stereo.ends;
  return { ...stereo, ligands: [real(a, p), real(b, p), real(c, q), real(d, q)] };
}

/** Puts the added hydrogens of each atom around the axis that points away from its other ligands. */
function place(molecule: Molecule, x: Float64Array, first: Int32Array): void {
  for (let i = 0; i < molecule.atomCount; i++) {
    const count = molecule.hydrogens[i]!;
    if (count === 0) continue;
    const length = LENGTHS[molecule.elements[i]!] ?? DEFAULT_LENGTH;
    const units: number[][] = [];
    let unsaturated = false;
    for (let k = molecule.neighbourStart[i]!; k < molecule.neighbourStart[i + 1]!; k++) {
      const j = molecule.neighbours[k]!;
      const u = [x[3 * j]! - x[3 * i]!, x[3 * j + 1]! - x[3 * i + 1]!, x[3 * j + 2]! - x[3 * i + 2]!];
      const norm = Math.hypot(u[0]!, u[1]!, u[2]!) || 1;
      units.push(u.map(c => c / norm));
      if (molecule.bondOrders[molecule.neighbourBonds[k]!]! > 1) unsaturated = true;
    }
    const directions = openDirections(units, count, unsaturated);
    for (let h = 0; h < count; h++) {
      const at = 3 * (first[i]! + h);
      for (let c = 0; c < 3; c++) x[at + c] = x[3 * i + c]! + length * directions[h]![c]!;
    }
  }
}

function cross(a: readonly number[], b: readonly number[]): number[] {
  return [a[1]! * b[2]! - a[2]! * b[1]!, a[2]! * b[0]! - a[0]! * b[2]!, a[0]! * b[1]! - a[1]! * b[0]!];
}

function unit(a: readonly number[]): number[] | null {
  const norm = Math.hypot(a[0]!, a[1]!, a[2]!);
  return norm < 1e-3 ? null : a.map(c => c / norm);
}

function perpendicular(a: readonly number[]): number[] {
  const other = Math.abs(a[0]!) < 0.7 ? [1, 0, 0] : [0, 1, 0];
  return unit(cross(a, other))!;
}

/** Unit vectors for `count` hydrogens given the unit vectors of the other ligands. */
function openDirections(units: readonly number[][], count: number, planar: boolean): number[][] {
  const sum = [0, 1, 2].map(c => -units.reduce((total, u) => total + u[c]!, 0));
  const axis = unit(sum) ?? (units[0] ? perpendicular(units[0]) : [0, 0, 1]);
  if (count === 1 && units.length !== 1) return [axis];
  const ring = (
    angle: number,
    n: number,
    around: readonly number[],
    start: readonly number[],
  ): number[][] => {
    const side = cross(around, start);
    return Array.from({ length: n }, (_, k) => {
      const phi = (2 * Math.PI * k) / n;
      return [0, 1, 2].map(
        c =>
          Math.cos(angle) * around[c]! +
          Math.sin(angle) * (Math.cos(phi) * start[c]! + Math.sin(phi) * side[c]!),
      );
    });
  };
  const tetrahedral = Math.acos(1 / 3);
  if (units.length === 0)
    return [axis, ...ring(Math.PI - tetrahedral, 3, axis, perpendicular(axis))].slice(0, count);
  if (units.length === 1) {
    if (planar) return ring(Math.PI / 3, 2, axis, perpendicular(axis)).slice(0, count);
    return ring(tetrahedral, 3, axis, perpendicular(axis)).slice(0, count);
  }
  // Two hydrogens in the plane that halves the angle of the other two ligands.
  const normal = unit(cross(units[0]!, units[1]!)) ?? perpendicular(axis);
  return ring(0.955, 2, axis, normal).slice(0, count);
}
