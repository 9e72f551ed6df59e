/** What is flat in a molecule: atoms with their three neighbours, bonds about which torsions are 0° or 180°, and which of the two each torsion is. */
import { degree, type Molecule } from '../chemistry/molecule.ts';
import type { RingInfo } from '../chemistry/rings.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { ringOfFour, torsionKey } from './bounds.ts';
import type { Mmff94 } from './mmff94/energy.ts';

export interface Planarity {
  readonly planarBonds: Uint8Array;
  readonly cis: ReadonlyMap<number, boolean>;
  /** Centre and its three neighbours, four numbers each. */
  readonly flatAtoms: Int32Array;
}

/** Works out the flat parts; an acyclic double bond about which nothing is asked is settled by `random`. */
export function planarity(
  molecule: Molecule,
  rings: RingInfo,
  field: Mmff94 | null,
  units: readonly StereoUnit[],
  random: () => number,
): Planarity {
  const n = molecule.atomCount;
  const { neighbourStart, neighbours, bondAtoms } = molecule;
  const planarBonds = new Uint8Array(molecule.bondCount);
  const cis = new Map<number, boolean>();
  const asked = new Map<number, StereoUnit>();
  for (const unit of units) {
    if (unit.kind === 'double-bond' && unit.sense !== 0)
      asked.set(torsionKey(n, unit.atoms[0]!, unit.atoms[1]!), unit);
  }
  for (let b = 0; b < molecule.bondCount; b++) {
    const j = bondAtoms[2 * b]!;
    const k = bondAtoms[2 * b + 1]!;
    const aromatic = field?.typing.aromatic.bonds[b] === 1;
    const amide = aromatic ? 0 : amideEnd(molecule, j, k) ? 1 : amideEnd(molecule, k, j) ? 2 : 0;
    const double = molecule.bondOrders[b] === 2 && isTrigonal(molecule, j) && isTrigonal(molecule, k);
    if (!aromatic && !double && amide === 0) continue;
    const size = rings.bondInRing[b] === 1 ? rings.bondRingSize[b]! : 0;
    if (amide > 0 && size > 0 && size <= 8) continue;
    const js = others(neighbours, neighbourStart, j, k);
    const ks = others(neighbours, neighbourStart, k, j);
    if (js.length === 0 || ks.length === 0 || js.length > 2 || ks.length > 2) continue;
    let together: boolean | null = null;
    const unit = asked.get(torsionKey(n, j, k));
    if (unit) {
      const [p, q] =
        unit.ends[0]!.atom === j ? [unit.ends[0]!, unit.ends[1]!] : [unit.ends[1]!, unit.ends[0]!];
      const first = p.ligands.find(ligand => ligand >= 0);
      const second = q.ligands.find(ligand => ligand >= 0);
      if (first !== undefined && second !== undefined) {
        const swaps =
          p.ligands.indexOf(first) + q.ligands.indexOf(second) + js.indexOf(first) + ks.indexOf(second);
        together = (unit.sense === 1) === (swaps % 2 === 0);
      }
    }
    if (together === null && size > 0 && size <= 8) {
      for (let a = 0; a < js.length && together === null; a++) {
        for (let c = 0; c < ks.length && together === null; c++) {
          if (ringOfFour(rings, js[a]!, j, k, ks[c]!) > 0) together = (a + c) % 2 === 0;
        }
      }
    }
    if (together === null && amide > 0) {
      // The carbonyl oxygen lies on the side of the substituent: Z esters and secondary amides.
      const [carbonyl, hetero] = amide === 1 ? [js, ks] : [ks, js];
      const oxygen = carbonyl.findIndex(a => molecule.elements[a] === 8 || molecule.elements[a] === 16);
      const heavy = hetero.findIndex(a => molecule.elements[a] !== 1);
      const heavies = hetero.filter(a => molecule.elements[a] !== 1).length;
      if (heavies === 2) together = random() < 0.5;
      else together = (oxygen + Math.max(heavy, 0)) % 2 === 0;
    }
    if (together === null && size > 8 && double) continue;
    together ??= random() < 0.5;
    planarBonds[b] = 1;
    for (let a = 0; a < js.length; a++) {
      for (let c = 0; c < ks.length; c++) {
        cis.set(torsionKey(n, js[a]!, ks[c]!), ((a + c) % 2 === 0) === together);
      }
    }
  }
  const flat: number[] = [];
  for (let i = 0; i < n; i++) {
    if (degree(molecule, i) !== 3) continue;
    if (!isFlat(molecule, field, i)) continue;
    flat.push(i, ...neighbours.subarray(neighbourStart[i], neighbourStart[i + 1]));
  }
  return { planarBonds, cis, flatAtoms: Int32Array.from(flat) };
}

function others(neighbours: Uint32Array, start: Uint32Array, atom: number, not: number): number[] {
  const list: number[] = [];
  for (let k = start[atom]!; k < start[atom + 1]!; k++) if (neighbours[k] !== not) list.push(neighbours[k]!);
  return list;
}

/** An end of a double bond with no other multiple bond. */
function isTrigonal(molecule: Molecule, atom: number): boolean {
  if (degree(molecule, atom) > 3) return false;
  let multiple = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!]! > 1) multiple++;
  }
  return multiple === 1 && (molecule.elements[atom] === 6 || molecule.elements[atom] === 7);
}

/** C(=O)-X with X a nitrogen of three neighbours or an oxygen of two: the first atom the carbonyl carbon. */
function amideEnd(molecule: Molecule, carbon: number, hetero: number): boolean {
  if (molecule.elements[carbon] !== 6 || degree(molecule, carbon) !== 3) return false;
  const z = molecule.elements[hetero];
  if (!(z === 7 && degree(molecule, hetero) === 3) && !(z === 8 && degree(molecule, hetero) === 2))
    return false;
  for (let k = molecule.neighbourStart[carbon]!; k < molecule.neighbourStart[carbon + 1]!; k++) {
    const other = molecule.neighbours[k]!;
    if (other !== hetero && molecule.bondOrders[molecule.neighbourBonds[k]!] === 2) {
      return molecule.elements[other] === 8 || molecule.elements[other] === 16;
    }
  }
  return false;
}

/** Types of trigonal nitrogens that MMFF94 keeps flat or nearly so. */
const FLAT_NITROGENS: ReadonlySet<number> = new Set([10, 39, 45, 54, 55, 56, 58, 67, 69, 81, 82]);

function isFlat(molecule: Molecule, field: Mmff94 | null, atom: number): boolean {
  const z = molecule.elements[atom]!;
  if (z === 6) return isTrigonal(molecule, atom) || field?.typing.types[atom] === 41;
  if (z === 5) return true;
  if (z !== 7) return false;
  return isTrigonal(molecule, atom) || (field !== null && FLAT_NITROGENS.has(field.typing.types[atom]!));
}
