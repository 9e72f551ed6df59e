/**
 * Atom types of MMFF94 from the graph: symbolic type rules, aromatic types by ring size and place, hydrogen types by parent
 * (T. A. Halgren, J. Comput. Chem. 1996, 17, 490, tables of atom types and of aromatic and hydrogen typing).
 */
import { elementSymbol } from '../../chemistry/elements.ts';
import { type Molecule, bondBetween } from '../../chemistry/molecule.ts';
import { type Aromaticity, aromaticity } from './aromatic.ts';

export interface Typing {
  readonly types: Uint8Array;
  readonly aromatic: Aromaticity;
}

/** Thrown for an atom for which the force field has no type. */
export class TypingError extends Error {
  readonly atom: number;
  constructor(molecule: Molecule, atom: number) {
    const neighbours = molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
    super(
      `atom ${atom + 1} (${elementSymbol(molecule.elements[atom]!)} with ${neighbours} neighbours): MMFF94 has no atom type for it`,
    );
    this.name = 'TypingError';
    this.atom = atom;
  }
}

/** Types every atom; all hydrogens must be listed. @throws TypingError */
export function typeAtoms(molecule: Molecule): Typing {
  const aromatic = aromaticity(molecule);
  const types = new Uint8Array(molecule.atomCount);
  const typer = new Typer(molecule, aromatic);
  typer.aromaticTypes(aromatic, types);
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    if (molecule.elements[atom] === 1 || types[atom] !== 0) continue;
    const type = typer.heavy(atom);
    if (type === 0) throw new TypingError(molecule, atom);
    types[atom] = type;
  }
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    if (molecule.elements[atom] !== 1) continue;
    const type = typer.hydrogen(atom, types);
    if (type === 0) throw new TypingError(molecule, atom);
    types[atom] = type;
  }
  return { types, aromatic };
}

class Typer {
  private readonly molecule: Molecule;
  /** Size of the smallest aromatic ring of each atom, 0 for none. */
  private readonly ringSizes: Uint8Array;

  constructor(molecule: Molecule, aromatic: Aromaticity) {
    this.molecule = molecule;
    this.ringSizes = new Uint8Array(molecule.atomCount);
    for (const ring of aromatic.rings) {
      for (const atom of ring.atoms) if (this.ringSizes[atom] !== 5) this.ringSizes[atom] = ring.atoms.length;
    }
  }

  private degree(atom: number): number {
    return this.molecule.neighbourStart[atom + 1]! - this.molecule.neighbourStart[atom]!;
  }

  private z(atom: number): number {
    return this.molecule.elements[atom]!;
  }

  private neighbours(atom: number): Uint32Array {
    const { neighbours, neighbourStart } = this.molecule;
    return neighbours.subarray(neighbourStart[atom], neighbourStart[atom + 1]);
  }

  private order(first: number, second: number): number {
    return this.molecule.bondOrders[bondBetween(this.molecule, first, second)]!;
  }

  private orderSum(atom: number): number {
    let sum = 0;
    for (const n of this.neighbours(atom)) sum += this.order(atom, n);
    return sum;
  }

  /** Neighbours of an element (0 for any) joined by a bond of an order (0 for any). */
  private count(atom: number, z: number, order = 0): number {
    let count = 0;
    for (const n of this.neighbours(atom)) {
      if ((z === 0 || this.z(n) === z) && (order === 0 || this.order(atom, n) === order)) count++;
    }
    return count;
  }

  /** Terminal neighbours of an element. */
  private terminals(atom: number, z: number): number {
    let count = 0;
    for (const n of this.neighbours(atom)) if (this.z(n) === z && this.degree(n) === 1) count++;
    return count;
  }

  private inRing3(atom: number): boolean {
    const list = this.neighbours(atom);
    for (let i = 0; i < list.length; i++) {
      for (let j = i + 1; j < list.length; j++)
        if (bondBetween(this.molecule, list[i]!, list[j]!) >= 0) return true;
    }
    return false;
  }

  private inRing4(atom: number): boolean {
    const list = this.neighbours(atom);
    for (let i = 0; i < list.length; i++) {
      for (let j = i + 1; j < list.length; j++) {
        if (bondBetween(this.molecule, list[i]!, list[j]!) >= 0) continue;
        for (const m of this.neighbours(list[i]!)) {
          if (m === atom || bondBetween(this.molecule, m, list[j]!) < 0) continue;
          if (bondBetween(this.molecule, m, atom) < 0) return true;
        }
      }
    }
    return false;
  }

  /** Types of atoms of aromatic rings; rings of five go before rings of six. */
  aromaticTypes(aromatic: Aromaticity, types: Uint8Array): void {
    for (const ring of aromatic.rings) {
      if (ring.atoms.length !== 5) continue;
      const first = ring.lonePairAtom;
      const at = ring.atoms.indexOf(first);
      const member = (step: number): number => ring.atoms[(at + step) % 5]!;
      const anion = this.z(first) === 7 && this.degree(first) === 2;
      // Imidazolium: the lone-pair nitrogen and a cationic one on both sides of one carbon.
      let between = -1;
      if (this.z(first) === 7) {
        for (const [next, beta] of [
          [1, 2],
          [4, 3],
        ] as const) {
          if (this.z(member(next)) === 6 && this.isCationicNitrogen(member(beta))) between = member(next);
        }
      }
      for (let step = 0; step < 5; step++) {
        const atom = member(step);
        const type = this.fiveRing(atom, step, anion, between);
        const earlier = types[atom]!;
        types[atom] = earlier === 0 || earlier === type ? type : merged(earlier, type);
      }
    }
    for (const ring of aromatic.rings) {
      if (ring.atoms.length !== 6) continue;
      for (const atom of ring.atoms) if (types[atom] === 0) types[atom] = this.sixRing(atom);
    }
  }

  private isCationicNitrogen(atom: number): boolean {
    return (
      this.z(atom) === 7 &&
      this.degree(atom) === 3 &&
      this.orderSum(atom) === 4 &&
      this.terminals(atom, 8) === 0
    );
  }

  private fiveRing(atom: number, step: number, anion: boolean, between: number): number {
    const z = this.z(atom);
    const alpha = step === 1 || step === 4;
    if (z === 6) {
      if (this.cationCentre(atom) > 0) return 80;
      if (between >= 0) return 78;
      if (anion) return 78;
      return alpha ? 63 : 64;
    }
    if (step === 0) {
      if (z === 8) return 59;
      if (z === 16) return 44;
      if (anion) return 76;
      return between >= 0 ? 81 : 39;
    }
    if (z !== 7) return z === 8 ? 59 : 44;
    if (this.degree(atom) === 3) {
      if (this.terminals(atom, 8) > 0) return 82;
      return 81;
    }
    if (anion) return 76;
    if (between >= 0) return 79;
    return alpha ? 65 : 66;
  }

  private sixRing(atom: number): number {
    const z = this.z(atom);
    if (z === 6) return 37;
    if (z === 7) {
      if (this.degree(atom) === 2) return 38;
      return this.terminals(atom, 8) > 0 ? 69 : 58;
    }
    return this.heavy(atom);
  }

  /** Type of an atom that is not in an aromatic ring; 0 when there is none. */
  heavy(atom: number): number {
    const { molecule } = this;
    const charge = molecule.charges[atom]!;
    const degree = this.degree(atom);
    switch (this.z(atom)) {
      case 3:
        return degree === 0 ? 92 : 0;
      case 6:
        return this.carbon(atom);
      case 7:
        return this.nitrogen(atom);
      case 8:
        return this.oxygen(atom);
      case 9:
        return degree === 0 ? 89 : degree === 1 ? 11 : 0;
      case 11:
        return degree === 0 ? 93 : 0;
      case 12:
        return degree === 0 ? 99 : 0;
      case 14:
        return degree === 4 ? 19 : 0;
      case 15:
        return degree === 4 ? 25 : degree === 3 ? 26 : degree === 2 && this.count(atom, 6, 2) === 1 ? 75 : 0;
      case 16:
        return this.sulfur(atom);
      case 17:
        return degree === 0 ? 90 : degree === 1 ? 12 : degree === 4 ? 77 : 0;
      case 19:
        return degree === 0 ? 94 : 0;
      case 20:
        return degree === 0 ? 96 : 0;
      case 26:
        return degree !== 0 ? 0 : charge === 2 ? 87 : charge === 3 ? 88 : 0;
      case 29:
        return degree !== 0 ? 0 : charge === 1 ? 97 : charge === 2 ? 98 : 0;
      case 30:
        return degree === 0 ? 95 : 0;
      case 35:
        return degree === 0 ? 91 : degree === 1 ? 13 : 0;
      case 53:
        return degree === 1 ? 14 : 0;
      default:
        return 0;
    }
  }

  private carbon(atom: number): number {
    switch (this.degree(atom)) {
      case 4:
        return this.inRing3(atom) ? 22 : this.inRing4(atom) ? 20 : 1;
      case 3: {
        const cation = this.cationCentre(atom);
        if (cation > 0) return 57;
        if (
          this.count(atom, 7, 2) +
            this.count(atom, 8, 2) +
            this.count(atom, 15, 2) +
            this.count(atom, 16, 2) >
          0
        ) {
          const oxygens = this.terminals(atom, 8);
          const sulfurs = this.terminals(atom, 16);
          return oxygens === 2 || sulfurs === 2 ? 41 : 3;
        }
        if (this.count(atom, 6, 2) > 0) return this.inRing4(atom) ? 30 : 2;
        return 0;
      }
      case 2:
        return 4;
      case 1:
        return 60;
      default:
        return 0;
    }
  }

  /** Number of equivalent nitrogens (2 amidinium, 3 guanidinium) when an atom is the carbon of such a cation, else 0. */
  private cationCentre(atom: number): number {
    if (this.z(atom) !== 6 || this.degree(atom) !== 3) return 0;
    let positive = 0;
    let nitrogens = 0;
    for (const n of this.neighbours(atom)) {
      if (this.z(n) !== 7) continue;
      if (this.order(atom, n) === 2) {
        if (this.degree(n) !== 3 || this.terminals(n, 8) > 0 || this.inSix(n)) return 0;
        positive++;
        nitrogens++;
      } else if (this.degree(n) === 3 && this.orderSum(n) === 3) nitrogens++;
    }
    return positive === 1 && nitrogens >= 2 ? nitrogens : 0;
  }

  private inAromatic(atom: number): boolean {
    return this.ringSizes[atom] !== 0;
  }

  /** In an aromatic ring of six and in none of five. */
  private inSix(atom: number): boolean {
    return this.ringSizes[atom] === 6;
  }

  private nitrogen(atom: number): number {
    const sum = this.orderSum(atom);
    switch (this.degree(atom)) {
      case 4:
        return this.terminals(atom, 8) > 0 ? 68 : 34;
      case 3: {
        if (sum >= 4) {
          const oxygens = this.terminals(atom, 8);
          if (oxygens >= 2) return 45;
          if (oxygens === 1) return 67;
          for (const n of this.neighbours(atom)) {
            if (this.order(atom, n) !== 2 || this.z(n) !== 6) continue;
            const nitrogens = this.cationCentre(n);
            if (nitrogens > 0) return nitrogens === 3 ? 56 : 55;
          }
          return 54;
        }
        return this.amine(atom);
      }
      case 2: {
        if (sum === 4) return this.count(atom, 0, 3) > 0 ? 61 : 53;
        if (sum === 3) {
          if (this.count(atom, 8, 2) > 0) return 46;
          for (const n of this.neighbours(atom)) {
            if (this.z(n) === 16 && this.order(atom, n) === 2 && this.terminals(n, 8) === 1) return 48;
          }
          return this.count(atom, 0, 2) > 0 ? 9 : 0;
        }
        if (sum === 2) return 62;
        return 0;
      }
      case 1:
        if (this.count(atom, 0, 3) === 1) return 42;
        if (this.count(atom, 7, 2) === 1) return 47;
        return 0;
      default:
        return 0;
    }
  }

  /** Three-coordinate nitrogen with single bonds only. */
  private amine(atom: number): number {
    for (const n of this.neighbours(atom)) {
      const z = this.z(n);
      if ((z === 16 || z === 15) && this.terminals(n, 8) >= 2) return 43;
      if (z === 6 && this.count(n, 7, 3) > 0) return 43;
    }
    for (const n of this.neighbours(atom)) {
      const nitrogens = this.cationCentre(n);
      if (nitrogens > 0) return nitrogens === 3 ? 56 : 55;
    }
    let conjugated = false;
    let triazene = false;
    for (const n of this.neighbours(atom)) {
      const z = this.z(n);
      if (z === 6) {
        if (this.inAromatic(n)) {
          conjugated = true;
          continue;
        }
        if (this.count(n, 8, 2) + this.count(n, 16, 2) > 0) return 10;
      }
      if (z === 7 && this.degree(n) === 2 && this.count(n, 7, 2) > 0 && !this.inAromatic(n)) triazene = true;
    }
    for (const n of this.neighbours(atom)) {
      if (this.z(n) !== 6 || this.inAromatic(n)) continue;
      if (this.count(n, 6, 2) + this.count(n, 7, 2) + this.count(n, 15, 2) + this.count(n, 6, 3) > 0)
        conjugated = true;
    }
    return conjugated ? 40 : triazene ? 10 : 8;
  }

  private oxygen(atom: number): number {
    const degree = this.degree(atom);
    if (degree === 3) return 49;
    if (degree === 2) {
      if (this.orderSum(atom) === 3) return 51;
      return this.count(atom, 1) === 2 ? 70 : 6;
    }
    if (degree !== 1) return 0;
    const centre = this.neighbours(atom)[0]!;
    const double = this.order(atom, centre) === 2;
    const oxygens = this.terminals(centre, 8);
    switch (this.z(centre)) {
      case 1:
        return 35;
      case 6:
        if (oxygens === 2) return 32;
        return double ? 7 : 35;
      case 7:
        if (!double && this.degree(centre) === 3 && this.orderSum(centre) === 3) return 35;
        return double && oxygens < 2 ? 7 : 32;
      case 15:
      case 17:
        return 32;
      case 16: {
        if (!double || oxygens > 1 || this.degree(centre) === 4) return 32;
        return this.terminals(centre, 16) > 0 ? 32 : 7;
      }
      default:
        return double ? 7 : 35;
    }
  }

  private sulfur(atom: number): number {
    const degree = this.degree(atom);
    switch (degree) {
      case 4:
        return 18;
      case 3: {
        const oxygens = this.terminals(atom, 8);
        if (oxygens === 2) return this.count(atom, 6, 2) > 0 ? 18 : 73;
        if (oxygens === 1 && this.terminals(atom, 16) === 1) return 73;
        return 17;
      }
      case 2:
        return this.count(atom, 8, 2) === 1 && this.orderSum(atom) === 4 ? 74 : 15;
      case 1: {
        const centre = this.neighbours(atom)[0]!;
        const z = this.z(centre);
        if (z === 6 && this.order(atom, centre) === 2 && this.terminals(centre, 16) < 2) return 16;
        return 72;
      }
      default:
        return 0;
    }
  }

  hydrogen(atom: number, types: Uint8Array): number {
    if (this.degree(atom) !== 1) return 0;
    const parent = this.neighbours(atom)[0]!;
    switch (this.z(parent)) {
      case 6:
      case 14:
        return 5;
      case 7:
        switch (types[parent]) {
          case 8:
          case 39:
          case 62:
          case 67:
          case 68:
            return 23;
          case 34:
          case 54:
          case 55:
          case 56:
          case 58:
          case 81:
            return 36;
          case 9:
            return 27;
          default:
            return 28;
        }
      case 8: {
        switch (types[parent]) {
          case 49:
            return 50;
          case 51:
            return 52;
          case 70:
            return 31;
          case 35:
            return 21;
          default:
        }
        for (const n of this.neighbours(parent)) {
          if (n === atom) continue;
          const z = this.z(n);
          if (z === 16) return 33;
          if (z === 15) return 24;
          if (z !== 6) continue;
          if (this.count(n, 8, 2) + this.count(n, 16, 2) > 0) return 24;
          if (this.count(n, 6, 2) + this.count(n, 7, 2) + this.count(n, 15, 2) > 0) return 29;
        }
        return 21;
      }
      case 15:
      case 16:
        return 71;
      default:
        return 0;
    }
  }
}

/** An atom in two aromatic rings of five that gives it different places. */
function merged(first: number, second: number): number {
  const low = Math.min(first, second);
  const high = Math.max(first, second);
  if (low === 63 && high === 64) return 78;
  if (low === 65 && high === 66) return 79;
  if (low === 39 || high === 39) return 39;
  // A place that singles the atom out (cation, anion, general) goes before alpha and beta.
  return high;
}
