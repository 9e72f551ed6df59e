/** Bond orders that are missing or wrong in a model, weighed against its geometry and taken over from the intention. */
import { isMetal } from '../chemistry/elements.ts';
import { assembleMolecule, isLocated, type Molecule } from '../chemistry/molecule.ts';
import type { Fragment } from './fragment.ts';

/** Single-bond covalent radii in Å: B. Cordero et al., Dalton Trans. 2008, 2832. */
const COVALENT_RADII: ReadonlyMap<number, number> = new Map([
  [5, 0.84],
  [6, 0.76],
  [7, 0.71],
  [8, 0.66],
  [9, 0.57],
  [14, 1.11],
  [15, 1.07],
  [16, 1.05],
  [17, 1.02],
  [34, 1.2],
  [35, 1.2],
  [53, 1.39],
]);

/** A bond shorter than this share of the sum of the single-bond radii has π character (C–C single 1.01, aromatic 0.91, C=O 0.85). Ours, no source. */
const SHORT_BOND = 0.945;
/** Distance in Å of a carbon from the plane of its three neighbours: 0 trigonal, about 0.5 tetrahedral; the border is ours, no source. */
const PYRAMIDAL = 0.22;

/** What the geometry at a carbon says of its π bonds: 1 some, 0 none, -1 no evidence. */
export function geometricPi(fragment: Fragment, node: number): 0 | 1 | -1 {
  const { molecule } = fragment;
  const atom = fragment.atoms[node]!;
  const r = molecule.coordinates;
  if (r === null || molecule.dimension !== 3 || !isLocated(molecule, atom)) return -1;
  let votes = 0;
  let shortest = Number.POSITIVE_INFINITY;
  for (let k = fragment.start[node]!; k < fragment.start[node + 1]!; k++) {
    const other = fragment.atoms[fragment.adjacent[k]!]!;
    const radius = COVALENT_RADII.get(molecule.elements[other]!);
    if (radius === undefined || !isLocated(molecule, other)) continue;
    const d = Math.hypot(
      r[3 * atom]! - r[3 * other]!,
      r[3 * atom + 1]! - r[3 * other + 1]!,
      r[3 * atom + 2]! - r[3 * other + 2]!,
    );
    shortest = Math.min(shortest, d / (COVALENT_RADII.get(6)! + radius));
  }
  if (Number.isFinite(shortest)) votes += shortest < SHORT_BOND ? 1 : -1;
  const height = heightOverNeighbours(molecule, atom);
  if (height !== null) votes += height < PYRAMIDAL ? 1 : -1;
  if (votes === 0) return -1;
  return votes > 0 ? 1 : 0;
}

/** Distance in Å of an atom from the plane of its neighbours; null unless it has exactly three that are located. */
function heightOverNeighbours(molecule: Molecule, atom: number): number | null {
  const from = molecule.neighbourStart[atom]!;
  if (molecule.neighbourStart[atom + 1]! - from !== 3) return null;
  const r = molecule.coordinates!;
  const points: number[][] = [];
  for (let k = 0; k < 3; k++) {
    const other = molecule.neighbours[from + k]!;
    if (!isLocated(molecule, other)) return null;
    points.push([0, 1, 2].map(axis => r[3 * other + axis]! - r[3 * atom + axis]!));
  }
  const [a, b, c] = points as [number[], number[], number[]];
  const u = b.map((value, axis) => value - a[axis]!);
  const v = c.map((value, axis) => value - a[axis]!);
  const normal = [
    u[1]! * v[2]! - u[2]! * v[1]!,
    u[2]! * v[0]! - u[0]! * v[2]!,
    u[0]! * v[1]! - u[1]! * v[0]!,
  ];
  const length = Math.hypot(normal[0]!, normal[1]!, normal[2]!);
  if (length < 1e-6) return null;
  return Math.abs(normal[0]! * a[0]! + normal[1]! * a[1]! + normal[2]! * a[2]!) / length;
}

/**
 * Cost of taking a model carbon for an intended one: 1 where the model's bond orders or, when these are doubtful, its
 * geometry or its listed hydrogens say otherwise.
 */
export function bondingCost(
  intended: Fragment,
  node: number,
  model: Fragment,
  modelNode: number,
  ordersDoubtful: boolean,
): number {
  let cost = 0;
  if (model.listedHydrogens[modelNode]! > intended.hydrogens[node]!) cost++;
  if (!ordersDoubtful) {
    if (model.pi[modelNode] !== intended.pi[node]) cost++;
    return cost;
  }
  const seen = geometricPi(model, modelNode);
  if (seen !== -1 && seen !== Number(intended.pi[node]! > 0)) cost++;
  return cost;
}

/** Charge of an atom as its bonds imply where the file states none (a nitrogen with four bonds, an oxygen with one). */
function impliedCharge(molecule: Molecule, atom: number): number {
  const stated = molecule.charges[atom]!;
  if (stated !== 0 || molecule.radicals[atom] !== 0) return stated;
  let valence = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    valence += molecule.bondOrders[molecule.neighbourBonds[k]!]!;
  }
  switch (molecule.elements[atom]) {
    case 5:
      return valence === 4 ? -1 : 0;
    case 7:
    case 15:
      return valence === 4 ? 1 : valence === 2 && molecule.elements[atom] === 7 ? -1 : 0;
    case 8:
      return valence === 1 ? -1 : valence === 3 ? 1 : 0;
    case 16:
    case 34:
      return valence === 1 ? -1 : valence === 3 ? 1 : 0;
    default:
      return 0;
  }
}

/**
 * Hydrogens less charge: a protonation or a tautomeric shift leaves it as it is, an oxidation does not.
 * Null where a metal makes charges a matter of convention.
 */
export function protonBalance(fragment: Fragment): number | null {
  let balance = 0;
  for (let v = 0; v < fragment.count; v++) {
    if (isMetal(fragment.elements[v]!)) return null;
    if (fragment.elements[v] !== 1 || fragment.count === 1) balance += fragment.hydrogens[v]!;
    balance -= impliedCharge(fragment.molecule, fragment.atoms[v]!);
  }
  return balance;
}

/** Whether any bond of the fragment has an order above one. */
export function hasMultipleBonds(fragment: Fragment): boolean {
  for (const bond of fragment.bonds) if (fragment.molecule.bondOrders[bond]! > 1) return true;
  return false;
}

/** Whether the file's bond orders are guesses anywhere in the fragment. */
export function hasDoubtfulBonding(fragment: Fragment): boolean {
  const doubtful = fragment.molecule.doubtfulBonding;
  if (doubtful === null) return false;
  for (const atom of fragment.atoms) if (doubtful[atom]) return true;
  return false;
}

/** Whether hydrogens on carbon are listed as atoms. */
export function listsHydrogens(fragment: Fragment): boolean {
  for (let v = 0; v < fragment.count; v++) {
    if (fragment.elements[v] === 6 && fragment.listedHydrogens[v]! > 0) return true;
  }
  return false;
}

/**
 * The model with the bond orders, charges and hydrogen counts of the intention on the mapped atoms; listed hydrogens
 * stay, and a proton more than intended is a positive charge more.
 */
export function supplyBonding(intended: Fragment, model: Fragment, image: Int32Array): Molecule {
  const source = intended.molecule;
  const target = model.molecule;
  const bondOrders = target.bondOrders.slice();
  const charges = target.charges.slice();
  const hydrogens = target.hydrogens.slice();
  const back = new Int32Array(model.count).fill(-1);
  for (let v = 0; v < intended.count; v++) if (image[v]! >= 0) back[image[v]!] = v;
  for (let w = 0; w < model.count; w++) {
    const v = back[w]!;
    if (v === -1) continue;
    const atom = model.atoms[w]!;
    const wanted = intended.hydrogens[v]!;
    const listed = model.listedHydrogens[w]!;
    hydrogens[atom] = Math.max(0, wanted - listed);
    charges[atom] = source.charges[intended.atoms[v]!]! + Math.max(0, listed - wanted);
    for (let k = model.start[w]!; k < model.start[w + 1]!; k++) {
      const x = back[model.adjacent[k]!]!;
      if (x === -1) continue;
      for (let m = intended.start[v]!; m < intended.start[v + 1]!; m++) {
        if (intended.adjacent[m] === x) bondOrders[model.bonds[k]!] = source.bondOrders[intended.bonds[m]!]!;
      }
    }
  }
  return assembleMolecule({ ...target, bondOrders, charges, hydrogens, doubtfulBonding: null });
}
