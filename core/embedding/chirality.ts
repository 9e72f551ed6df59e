/** Chirality constraints: the ordered signed volumes that the units asked for must have, and whether coordinates have them. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { StereoUnit } from '../perception/unit.ts';
import type { IdealGeometry } from './ideal-geometry.ts';

/** Volumes V = (r1 - r4) · [(r2 - r4) × (r3 - r4)] that must keep a sign. */
export interface VolumeConstraints {
  readonly count: number;
  /** Four atoms each. */
  readonly atoms: Int32Array;
  readonly sign: Int8Array;
  /** Least size of the volume, Å³. */
  readonly least: Float64Array;
  /** Index into the units asked for. */
  readonly unit: Int32Array;
}

/** 16 / (3 √3): the volume for unit bonds at a tetrahedral centre with four ligands. */
const TETRAHEDRAL_VOLUME = 16 / (3 * Math.sqrt(3));
/** Share of the ideal volume that is asked for, so that strained rings can yield (ours, no source). */
const LEAST_SHARE = 0.4;
/** The same for torsions of axes and cumulenes: about the sine of 30°. */
const AXIS_SHARE = 0.5;

/** Constraints for every unit with a sense; double bonds and flat cumulenes are left to distances. */
export function volumeConstraints(
  molecule: Molecule,
  units: readonly StereoUnit[],
  geometry: IdealGeometry,
): VolumeConstraints {
  const atoms: number[] = [];
  const sign: number[] = [];
  const least: number[] = [];
  const unitOf: number[] = [];
  units.forEach((unit, index) => {
    if (unit.sense === 0) return;
    if (unit.kind === 'centre') {
      const { atom, ligands } = unit.ends[0]!;
      const virtual = ligands.findIndex(ligand => ligand < 0);
      if (ligands.length !== 4 || virtual === 0 || (virtual > 0 && virtual < 3)) return;
      const lengths = ligands.map(ligand => (ligand < 0 ? 1 : bondLength(molecule, geometry, atom, ligand)));
      const mean = (lengths.reduce((a, b) => a + b, 0) / 4) ** 3;
      if (virtual === 3) {
        atoms.push(ligands[0]!, ligands[1]!, ligands[2]!, atom);
        least.push(LEAST_SHARE * 0.25 * TETRAHEDRAL_VOLUME * lengths[0]! * lengths[1]! * lengths[2]!);
      } else {
        atoms.push(ligands[0]!, ligands[1]!, ligands[2]!, ligands[3]!);
        least.push(LEAST_SHARE * TETRAHEDRAL_VOLUME * mean);
      }
      // Clockwise with the fourth behind is the negative volume.
      sign.push(-unit.sense);
      unitOf.push(index);
    } else if ((unit.kind === 'cumulene' && !unit.planar) || unit.kind === 'axis') {
      const first = unit.ends[0]!;
      const second = unit.ends[1]!;
      const a = first.ligands.findIndex(ligand => ligand >= 0);
      const b = second.ligands.findIndex(ligand => ligand >= 0);
      if (a < 0 || b < 0) return;
      atoms.push(first.ligands[a]!, first.atom, second.atom, second.ligands[b]!);
      // A positive torsion a - end - end - b has a negative volume of these four.
      sign.push(unit.sense * ((a + b) % 2 === 0 ? -1 : 1));
      const p = bondLength(molecule, geometry, first.atom, first.ligands[a]!);
      const q = bondLength(molecule, geometry, second.atom, second.ligands[b]!);
      const span = unit.kind === 'axis' ? bondLength(molecule, geometry, first.atom, second.atom) : 2.6;
      least.push(AXIS_SHARE * 0.75 * p * q * span);
      unitOf.push(index);
    }
  });
  return {
    count: sign.length,
    atoms: Int32Array.from(atoms),
    sign: Int8Array.from(sign),
    least: Float64Array.from(least),
    unit: Int32Array.from(unitOf),
  };
}

function bondLength(molecule: Molecule, geometry: IdealGeometry, first: number, second: number): number {
  for (let k = molecule.neighbourStart[first]!; k < molecule.neighbourStart[first + 1]!; k++) {
    if (molecule.neighbours[k] === second) return geometry.lengths[molecule.neighbourBonds[k]!]!;
  }
  return 1.5;
}

/** The signed volume of a constraint, with `stride` coordinates an atom. */
export function volumeAt(constraints: VolumeConstraints, t: number, x: Float64Array, stride: number): number {
  const { atoms } = constraints;
  const a = stride * atoms[4 * t]!;
  const b = stride * atoms[4 * t + 1]!;
  const c = stride * atoms[4 * t + 2]!;
  const d = stride * atoms[4 * t + 3]!;
  const ax = x[a]! - x[d]!;
  const ay = x[a + 1]! - x[d + 1]!;
  const az = x[a + 2]! - x[d + 2]!;
  const bx = x[b]! - x[d]!;
  const by = x[b + 1]! - x[d + 1]!;
  const bz = x[b + 2]! - x[d + 2]!;
  const cx = x[c]! - x[d]!;
  const cy = x[c + 1]! - x[d + 1]!;
  const cz = x[c + 2]! - x[d + 2]!;
  return ax * (by * cz - bz * cy) + ay * (bz * cx - bx * cz) + az * (bx * cy - by * cx);
}

/** Units whose volume has the wrong sign or less than `share` of the least size. */
export function wrongUnits(
  constraints: VolumeConstraints,
  x: Float64Array,
  stride: number,
  share: number,
): number[] {
  const wrong: number[] = [];
  for (let t = 0; t < constraints.count; t++) {
    if (constraints.sign[t]! * volumeAt(constraints, t, x, stride) < share * constraints.least[t]!) {
      wrong.push(constraints.unit[t]!);
    }
  }
  return wrong;
}
