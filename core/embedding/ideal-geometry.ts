/** Ideal bond lengths and angles of a molecule: those of the force field where there is one, else from radii and numbers of neighbours. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Mmff94 } from './mmff94/energy.ts';
import { radiiLength } from './radii.ts';

export interface IdealGeometry {
  /** Å, for each bond. */
  readonly lengths: Float64Array;
  /** Radians, for each pair of neighbours of each atom, in the order of the force field's angles. */
  readonly angles: Float64Array;
  /** Where the angles of each atom begin. */
  readonly angleStart: Int32Array;
}

const RADIANS = Math.PI / 180;
const TETRAHEDRAL = Math.acos(-1 / 3);

export function idealGeometry(molecule: Molecule, field: Mmff94 | null): IdealGeometry {
  const angleStart = new Int32Array(molecule.atomCount + 1);
  for (let i = 0; i < molecule.atomCount; i++) {
    const d = molecule.neighbourStart[i + 1]! - molecule.neighbourStart[i]!;
    angleStart[i + 1] = angleStart[i]! + (d * (d - 1)) / 2;
  }
  if (field) {
    const angles = new Float64Array(angleStart[molecule.atomCount]!);
    for (let t = 0; t < angles.length; t++)
      angles[t] = field.angles.linear[t] === 1 ? Math.PI : field.angles.ideal[t]! * RADIANS;
    return { lengths: field.bonds.length, angles, angleStart };
  }
  const lengths = new Float64Array(molecule.bondCount);
  for (let b = 0; b < lengths.length; b++) {
    lengths[b] = radiiLength(
      molecule.elements[molecule.bondAtoms[2 * b]!]!,
      molecule.elements[molecule.bondAtoms[2 * b + 1]!]!,
      molecule.bondOrders[b]!,
    );
  }
  const angles = new Float64Array(angleStart[molecule.atomCount]!);
  for (let i = 0; i < molecule.atomCount; i++)
    angles.fill(plainAngle(molecule, i), angleStart[i], angleStart[i + 1]);
  return { lengths, angles, angleStart };
}

/** Angle at an atom by its bonds and its place in the table: 180, 120 or tetrahedral. */
function plainAngle(molecule: Molecule, atom: number): number {
  const neighbours = molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
  let excess = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    excess += Math.max(1, molecule.bondOrders[molecule.neighbourBonds[k]!]!) - 1;
  }
  const z = molecule.elements[atom]!;
  if (neighbours >= 4) return TETRAHEDRAL;
  if (neighbours === 2 && excess === 2 && z === 6) return Math.PI;
  if (excess > 0 && z < 15) return (2 * Math.PI) / 3;
  if (z === 5 || z === 13) return (2 * Math.PI) / 3;
  return z > 14 ? 100 * RADIANS : TETRAHEDRAL;
}

/** The ideal angle between the neighbours at positions a < b (counted from 0) of an atom, radians. */
export function angleAt(geometry: IdealGeometry, atom: number, degree: number, a: number, b: number): number {
  const [low, high] = a < b ? [a, b] : [b, a];
  return geometry.angles[geometry.angleStart[atom]! + (low * (2 * degree - low - 1)) / 2 + (high - low - 1)]!;
}
