/**
 * Symmetry classes: atoms that the constitution does not tell apart, by iterative refinement of what surrounds them
 * (H. L. Morgan, J. Chem. Doc. 1965, 5, 107, with hashes for the sums). Configuration is not looked at.
 *
 * Equal atoms have equal classes; the reverse can fail in highly symmetric graphs, so a class is a reason to look
 * closer and never a proof.
 */
import type { Molecule } from './molecule.ts';

const MOST_ROUNDS = 64;

function mix(hash: number, value: number): number {
  let h = Math.imul(hash ^ value, 0x9e3779b1);
  h ^= h >>> 15;
  h = Math.imul(h, 0x85ebca77);
  return h ^ (h >>> 13);
}

/**
 * Class of each atom. Bond orders and charges enter through the electrons of each atom, not bond by bond, so that the
 * choice among Kekulé and other resonance structures does not matter; terminal O and S of one acid group (P, S, As, Se, N) count as equal whichever bears the
 * charge, the proton or the double bond.
 */
export function symmetryClasses(molecule: Molecule): Int32Array {
  const { atomCount, neighbourStart, neighbours, elements, isotopes } = molecule;
  let colours = new Int32Array(atomCount);
  let next = new Int32Array(atomCount);
  const sorted = new Int32Array(atomCount);
  const acid = new Uint8Array(atomCount);
  for (let i = 0; i < atomCount; i++) {
    let colour = mix(mix(7, elements[i]!), isotopes[i]!);
    acid[i] = isAcidTerminal(molecule, i) ? 1 : 0;
    if (acid[i] === 0) {
      colour = mix(colour, allHydrogens(molecule, i));
      colour = mix(colour, electronKey(molecule, i));
    } else colour = mix(colour, 0x777);
    colours[i] = colour;
  }
  let classes = countDistinct(colours, sorted);
  for (let round = 0; round < MOST_ROUNDS; round++) {
    for (let i = 0; i < atomCount; i++) {
      // The sum of well-mixed hashes is independent of the order of the neighbours.
      let sum = 0;
      for (let k = neighbourStart[i]!; k < neighbourStart[i + 1]!; k++) {
        const neighbour = neighbours[k]!;
        // A proton that either oxygen of an acid group can bear tells them apart no more.
        if (acid[i] === 1 && elements[neighbour] === 1) continue;
        sum = (sum + mix(0x51ed, colours[neighbour]!)) | 0;
      }
      next[i] = mix(colours[i]!, sum);
    }
    const count = countDistinct(next, sorted);
    if (count <= classes) break;
    classes = count;
    [colours, next] = [next, colours];
  }
  return colours;
}

/** Number of different values; `sorted` is a scratch array of the same length. */
function countDistinct(values: Int32Array, sorted: Int32Array): number {
  sorted.set(values);
  sorted.sort();
  let count = sorted.length > 0 ? 1 : 0;
  for (let i = 1; i < sorted.length; i++) if (sorted[i] !== sorted[i - 1]) count++;
  return count;
}

function allHydrogens(molecule: Molecule, atom: number): number {
  let count = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] === 1 && molecule.isotopes[neighbour] === 0) count++;
  }
  return count;
}

/**
 * Charge and share in double bonds as resonance leaves them: both ends of an amidinium, a carboxylate or an allyl ion
 * have one key, whichever is drawn with the charge. Two branches that differ in this alone exchange electrons with one another.
 */
function electronKey(molecule: Molecule, atom: number): number {
  const pi = unsaturation(molecule, atom);
  const charge = molecule.charges[atom]!;
  const z = molecule.elements[atom]!;
  const coordination =
    molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]! + molecule.hydrogens[atom]!;
  if (z === 7 || z === 8 || (z === 16 && coordination < 3) || (z === 34 && coordination < 3)) {
    return 0x100 + charge - pi;
  }
  if (z === 6) return 0x200 + pi + Math.abs(charge);
  return 0x300 + 16 * pi + charge;
}

function unsaturation(molecule: Molecule, atom: number): number {
  let pi = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    pi += Math.max(1, molecule.bondOrders[molecule.neighbourBonds[k]!]!) - 1;
  }
  return pi;
}

/** O, S or Se with nothing but hydrogen on it, bound to an acid-forming centre that bears a double bond to such an atom. */
export function isAcidTerminal(molecule: Molecule, atom: number): boolean {
  const z = molecule.elements[atom]!;
  if (z !== 8 && z !== 16 && z !== 34) return false;
  let centre = -1;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] === 1) {
      if (molecule.isotopes[neighbour] !== 0) return false;
      continue;
    }
    if (centre !== -1) return false;
    centre = neighbour;
  }
  if (centre === -1) return false;
  switch (molecule.elements[centre]) {
    case 7:
    case 15:
    case 16:
    case 33:
    case 34:
    case 51:
    case 52:
      return true;
    default:
      return false;
  }
}
