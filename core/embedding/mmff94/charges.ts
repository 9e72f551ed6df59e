/**
 * Partial charges of MMFF94: formal charges shared among equivalent atoms, then bond charge increments
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 520, eq. 15).
 */
import type { Molecule } from '../../chemistry/molecule.ts';
import { key, type Mmff94Parameters } from './parameters.ts';
import type { Typing } from './typing.ts';

/** Formal charge of each atom as the force field shares it. */
export function formalCharges(molecule: Molecule, typing: Typing): Float64Array {
  const { types } = typing;
  const { neighbourStart, neighbours, charges } = molecule;
  const formal = new Float64Array(molecule.atomCount);
  const degree = (atom: number): number => neighbourStart[atom + 1]! - neighbourStart[atom]!;
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    switch (types[atom]) {
      case 32:
      case 72: {
        // Terminal oxygens and sulfurs of one centre share the charge of all of them.
        const centre = neighbours[neighbourStart[atom]!]!;
        let sum = molecule.elements[centre] === 6 ? 0 : charges[centre]!;
        let count = 0;
        for (let k = neighbourStart[centre]!; k < neighbourStart[centre + 1]!; k++) {
          const other = neighbours[k]!;
          if (degree(other) !== 1 || (types[other] !== 32 && types[other] !== 72)) continue;
          sum += charges[other]!;
          count++;
        }
        formal[atom] = sum / count;
        break;
      }
      case 55:
      case 56:
        formal[atom] = types[atom] === 55 ? 1 / 2 : 1 / 3;
        break;
      case 76:
        formal[atom] = ringShare(molecule, typing, atom, 76, -1);
        break;
      case 81:
        formal[atom] = ringShare(molecule, typing, atom, 81, 1);
        break;
      case 61:
        formal[atom] = isIsonitrile(molecule, types, atom) ? 0 : 1;
        break;
      case 34:
      case 49:
      case 51:
      case 54:
      case 58:
        formal[atom] = 1;
        break;
      case 35:
      case 62:
        formal[atom] = -1;
        break;
      case 87:
      case 88:
      case 89:
      case 90:
      case 91:
      case 92:
      case 93:
      case 94:
      case 95:
      case 96:
      case 97:
      case 98:
      case 99:
        formal[atom] = charges[atom]!;
        break;
      default:
    }
  }
  return formal;
}

function ringShare(molecule: Molecule, typing: Typing, atom: number, type: number, charge: number): number {
  let share = 0;
  for (const ring of typing.aromatic.rings) {
    if (ring.atoms.length !== 5 || !ring.atoms.includes(atom)) continue;
    let count = 0;
    for (const other of ring.atoms) if (typing.types[other] === type) count++;
    share = Math.max(share, count);
  }
  if (type === 81) share += aminoPartners(molecule, typing, atom);
  return share > 0 ? charge / share : charge;
}

/** Nitrogens outside the ring that take part in an amidinium or guanidinium unit with a ring cation. */
function aminoPartners(molecule: Molecule, typing: Typing, atom: number): number {
  let count = 0;
  const { neighbourStart, neighbours } = molecule;
  for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
    const centre = neighbours[k]!;
    if (typing.types[centre] !== 80) continue;
    for (let m = neighbourStart[centre]!; m < neighbourStart[centre + 1]!; m++) {
      const type = typing.types[neighbours[m]!];
      if (type === 55 || type === 56) count++;
    }
  }
  return count;
}

function isIsonitrile(molecule: Molecule, types: Uint8Array, atom: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (types[molecule.neighbours[k]!] === 60) return true;
  }
  return false;
}

/** Partial charges in elementary charges. `bondTypes` are those of `bond.ts`. */
export function partialCharges(
  molecule: Molecule,
  typing: Typing,
  bondTypes: Uint8Array,
  parameters: Mmff94Parameters,
): Float64Array {
  const { types } = typing;
  const { neighbourStart, neighbours, neighbourBonds } = molecule;
  const formal = formalCharges(molecule, typing);
  const partial = new Float64Array(molecule.atomCount);
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    const type = types[atom]!;
    const [increment, share] = parameters.partialCharges[type] ?? [0, 0];
    let q0 = formal[atom]!;
    const coordination = parameters.properties[type]?.coordination ?? 0;
    let sum = 0;
    for (let k = neighbourStart[atom]!; k < neighbourStart[atom + 1]!; k++) {
      const other = neighbours[k]!;
      const otherType = types[other]!;
      const otherFormal = formal[other]!;
      const [otherIncrement, otherShare] = parameters.partialCharges[otherType] ?? [0, 0];
      sum += (otherShare ?? 0) * otherFormal;
      const bondType = bondTypes[neighbourBonds[k]!]!;
      const low = Math.min(type, otherType);
      const high = Math.max(type, otherType);
      const found = parameters.chargeIncrements.get(key(bondType, low, high));
      if (found) sum += type === otherType ? 0 : type === high ? found[0]! : -found[0]!;
      else sum += (increment ?? 0) - (otherIncrement ?? 0);
    }
    partial[atom] = (1 - coordination * (share ?? 0)) * q0 + sum;
  }
  return partial;
}
