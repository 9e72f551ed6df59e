/** What the comparison of one intended unit says: parity under the atom mapping, never a comparison of letters. */
import { HYDROGEN_NODE, LONE_PAIR_NODE, OUTSIDE_NODE } from './fragment.ts';
import type { IntendedUnit, NodeUnit, UnitTable } from './units.ts';

/** Outcome of comparing the arrangement in space. */
export const Arrangement = {
  same: 1,
  inverted: -1,
  /** The model has the unit, its coordinates do not decide. */
  flat: 0,
  /** The model lacks the unit or atoms of it, or its ligands cannot be matched. */
  missing: 2,
} as const;
export type Arrangement = (typeof Arrangement)[keyof typeof Arrangement];

/** Finds the model's unit of the same kind on the images of the intended unit's ends; -1 when there is none. */
export function modelUnitOf(intended: IntendedUnit, image: Int32Array, model: UnitTable): number {
  const first = image[intended.ends[0]!]!;
  if (first < 0) return -1;
  const candidates = model.at[first];
  if (!candidates) return -1;
  for (const u of candidates) {
    const unit = model.units[u]!;
    if (unit.kind !== intended.kind || unit.planar !== intended.planar) continue;
    if (unit.ends.length !== intended.ends.length) continue;
    if (intended.ends.length === 1) {
      if (unit.ends[0] === first) return u;
      continue;
    }
    const second = image[intended.ends[1]!]!;
    if (
      (unit.ends[0] === first && unit.ends[1] === second) ||
      (unit.ends[1] === first && unit.ends[0] === second)
    ) {
      return u;
    }
  }
  return -1;
}

/** Compares the arrangement of an intended unit with the model's under a mapping (intended node to model node, -1 unmapped). */
export function arrangementOf(intended: IntendedUnit, image: Int32Array, model: UnitTable): Arrangement {
  const at = modelUnitOf(intended, image, model);
  if (intended.kind === 'centre' && model.free.has(image[intended.ends[0]!]!)) return Arrangement.same;
  if (at === -1) return Arrangement.missing;
  const found = model.units[at]!;
  if (found.unit.sense === 0) return found.unit.state === 'flat' ? Arrangement.flat : Arrangement.missing;
  let parity: 1 | -1 | 0;
  if (intended.kind === 'helix') parity = 1;
  else if (intended.kind === 'plane') parity = planeParity(intended, found, image);
  else if (intended.ends.length === 1) {
    parity = permutationParity(intended.ligands[0]!, found.ligands[0]!, image);
  } else {
    const swapped = found.ends[0] !== image[intended.ends[0]!];
    parity = multiply(
      endParity(intended.ligands[0]!, found.ligands[swapped ? 1 : 0]!, image),
      endParity(intended.ligands[1]!, found.ligands[swapped ? 0 : 1]!, image),
    );
  }
  if (parity === 0) return Arrangement.missing;
  return intended.unit.sense * parity === found.unit.sense ? Arrangement.same : Arrangement.inverted;
}

/** A plane's sense changes with the end and with the side from which it is taken (`perception/unit.ts`). */
function planeParity(intended: NodeUnit, found: NodeUnit, image: Int32Array): 1 | -1 | 0 {
  const swapped = found.ends[0] !== image[intended.ends[0]!];
  const sides = found.ligands[swapped ? 1 : 0]!;
  const first = imageOf(intended.ligands[0]![0]!, image);
  const otherSide = first === sides[1];
  if (!otherSide && first !== sides[0]) return 0;
  return swapped === otherSide ? 1 : -1;
}

function multiply(a: 1 | -1 | 0, b: 1 | -1 | 0): 1 | -1 | 0 {
  if (a === 0 || b === 0) return 0;
  return a === b ? 1 : -1;
}

const UNMATCHED = -9;

function imageOf(ligand: number, image: Int32Array): number {
  if (ligand === HYDROGEN_NODE || ligand === LONE_PAIR_NODE) return ligand;
  if (ligand === OUTSIDE_NODE) return UNMATCHED;
  const at = image[ligand]!;
  return at < 0 ? UNMATCHED : at;
}

/**
 * Where each intended ligand stands among the model's. One ligand left over on each side is the same place in space
 * (a proton on a lone pair, a covalent attachment in place of a leaving group); null when more are left over.
 */
function matchLigands(
  intended: readonly number[],
  found: readonly number[],
  image: Int32Array,
  out: number[],
): boolean {
  const n = intended.length;
  if (found.length !== n) return false;
  let taken = 0;
  let open = -1;
  for (let i = 0; i < n; i++) {
    const wanted = imageOf(intended[i]!, image);
    let place = -1;
    if (wanted !== UNMATCHED) {
      for (let j = 0; j < n; j++) {
        if (found[j] === wanted && (taken & (1 << j)) === 0) {
          place = j;
          break;
        }
      }
    }
    if (place === -1) {
      if (open !== -1) return false;
      open = i;
    } else taken |= 1 << place;
    out[i] = place;
  }
  if (open === -1) return true;
  for (let j = 0; j < n; j++) if ((taken & (1 << j)) === 0) out[open] = j;
  // An intended atom that the model lacks leaves the unit outside the mapped part, unless an attachment stands in its place.
  return intended[open]! < 0 || found[out[open]!] === OUTSIDE_NODE;
}

const places: number[] = [0, 0, 0, 0];

/** Parity of the permutation that takes the intended order of ligands to the model's; 0 when they cannot be matched. */
function permutationParity(
  intended: readonly number[],
  found: readonly number[],
  image: Int32Array,
): 1 | -1 | 0 {
  if (intended.length > 4 || !matchLigands(intended, found, image, places)) return 0;
  let inversions = 0;
  for (let i = 0; i < intended.length; i++) {
    for (let j = i + 1; j < intended.length; j++) if (places[i]! > places[j]!) inversions++;
  }
  return inversions % 2 === 0 ? 1 : -1;
}

/** 1 when the first intended ligand of an end is the model's first, -1 when it is its second. */
function endParity(intended: readonly number[], found: readonly number[], image: Int32Array): 1 | -1 | 0 {
  if (intended.length === 1 || found.length === 1) {
    // Of an end of which only one ligand is listed, the reference itself must be found.
    const wanted = imageOf(intended[0]!, image);
    const at = found.indexOf(wanted);
    if (at !== -1) return at === 0 ? 1 : -1;
    const second = intended.length > 1 ? found.indexOf(imageOf(intended[1]!, image)) : -1;
    if (second === -1) return 0;
    return second === 0 ? -1 : 1;
  }
  if (!matchLigands(intended, found, image, places)) return 0;
  return places[0] === 0 ? 1 : -1;
}

/** The nodes an intended unit depends on: its ends and those ligands that are nodes. */
export function nodesOf(unit: NodeUnit): number[] {
  const nodes = [...unit.ends];
  for (const ligands of unit.ligands) for (const ligand of ligands) if (ligand >= 0) nodes.push(ligand);
  return nodes;
}
