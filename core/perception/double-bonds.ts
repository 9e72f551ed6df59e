/**
 * Double bonds and cumulenes: which can be stereogenic by their own bonding, and their torsion.
 *
 * C=C, C=N, N=N and their like, a lone pair being a ligand of nitrogen (P-93.4.2.1); rows of cumulated double bonds,
 * axial where their number is even, planar where it is odd (P-93.4.2).
 */
import {
  hydrogenCount,
  IMPLICIT_HYDROGEN,
  isLocated,
  LONE_PAIR,
  type Molecule,
} from '../chemistry/molecule.ts';
import { torsion, torsionGradient } from '../geometry/torsion.ts';
import { propagated } from '../geometry/signed-volume.ts';
import { doubleBondsAt, isPlainHydrogen, type PerceptionContext } from './context.ts';
import type { Ligand, StereoUnit, UnitState } from './unit.ts';

/** Rings smaller than this hold their double bonds in one arrangement. */
const SMALLEST_STEREOGENIC_RING = 8;
/** Mancude rings up to this size (cyclooctatetraene) have no double bond of fixed place. */
const LARGEST_DELOCALISED_RING = 8;

/** A possible unit with two ends (double bond, cumulene, hindered axis) before it is measured. */
export interface PairCandidate {
  readonly kind: 'double-bond' | 'cumulene' | 'axis';
  /** End atoms; the ones between them. */
  readonly ends: readonly [number, number];
  readonly between: readonly number[];
  readonly ligands: readonly [readonly Ligand[], readonly Ligand[]];
  readonly planar: boolean;
  readonly labile: string | null;
}

/** Finds the double bonds and cumulenes that can be stereogenic by their own bonding. */
export function doubleBondCandidates(context: PerceptionContext): PairCandidate[] {
  const { molecule, rings, movable } = context;
  const found: PairCandidate[] = [];
  for (let b = 0; b < molecule.bondCount; b++) {
    if (molecule.bondOrders[b] !== 2) continue;
    const first = molecule.bondAtoms[2 * b]!;
    const second = molecule.bondAtoms[2 * b + 1]!;
    const firstIsEnd = doubleBondsAt(molecule, first) === 1;
    const secondIsEnd = doubleBondsAt(molecule, second) === 1;
    if (!firstIsEnd && !secondIsEnd) continue;
    if (firstIsEnd && secondIsEnd) {
      const size = rings.bondRingSize[b]!;
      if (size > 0 && size < SMALLEST_STEREOGENIC_RING) continue;
      if (size > 0 && movable[b] === 1) {
        // A macrocycle over smaller mancude rings (a porphyrin) is delocalised as they are; a plain annulene is not judged so.
        const smallest = Math.min(rings.atomRingSize[first]!, rings.atomRingSize[second]!);
        if (size <= LARGEST_DELOCALISED_RING || smallest < SMALLEST_STEREOGENIC_RING) continue;
      }
      const candidate = candidateOf(context, [first, second], []);
      if (candidate !== null) found.push(candidate);
      continue;
    }
    const path = row(molecule, firstIsEnd ? first : second, firstIsEnd ? second : first);
    const start = path[0]!;
    const end = path[path.length - 1]!;
    // Each row is met once from either end.
    if (start > end || doubleBondsAt(molecule, end) !== 1) continue;
    if (path.slice(1, -1).some(atom => molecule.elements[atom] !== 6)) continue;
    const ring = rings.bondRingSize[b]!;
    if (ring > 0 && ring < SMALLEST_STEREOGENIC_RING) continue;
    const candidate = candidateOf(context, [start, end], path.slice(1, -1));
    if (candidate !== null) found.push(candidate);
  }
  return found;
}

/** Atoms along cumulated double bonds from an end. */
function row(molecule: Molecule, end: number, next: number): number[] {
  const path = [end, next];
  for (;;) {
    const at = path[path.length - 1]!;
    const before = path[path.length - 2]!;
    let following = -1;
    for (let k = molecule.neighbourStart[at]!; k < molecule.neighbourStart[at + 1]!; k++) {
      const neighbour = molecule.neighbours[k]!;
      if (neighbour !== before && molecule.bondOrders[molecule.neighbourBonds[k]!] === 2)
        following = neighbour;
    }
    if (following < 0 || path.includes(following)) return path;
    path.push(following);
  }
}

function candidateOf(
  context: PerceptionContext,
  ends: readonly [number, number],
  between: readonly number[],
): PairCandidate | null {
  const { molecule } = context;
  const inner = [between[0] ?? ends[1], between[between.length - 1] ?? ends[0]] as const;
  const first = endLigands(molecule, ends[0], inner[0]);
  const second = endLigands(molecule, ends[1], inner[1]);
  if (first === null || second === null) return null;
  if (between.length === 0 && isDelocalisedIminium(context, ends)) return null;
  return {
    kind: between.length === 0 ? 'double-bond' : 'cumulene',
    ends,
    between,
    ligands: [first, second],
    planar: between.length % 2 === 0,
    labile: labileReason(molecule, ends, between),
  };
}

/** The two ligands of an end: hydrogens and lone pairs last; null where the end cannot have two. */
function endLigands(molecule: Molecule, atom: number, inner: number): Ligand[] | null {
  const z = molecule.elements[atom]!;
  const ligands: Ligand[] = [];
  const hydrogens: Ligand[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (neighbour === inner) continue;
    if (molecule.bondOrders[molecule.neighbourBonds[k]!]! > 1) return null;
    (molecule.elements[neighbour] === 1 ? hydrogens : ligands).push(neighbour);
  }
  hydrogens.sort((a, b) => molecule.isotopes[b]! - molecule.isotopes[a]! || a - b);
  ligands.push(...hydrogens);
  for (let i = 0; i < molecule.hydrogens[atom]!; i++) ligands.push(IMPLICIT_HYDROGEN);
  switch (z) {
    case 6:
    case 14:
    case 32:
      break;
    case 7:
      if (ligands.length === 1 && molecule.charges[atom] === 0) ligands.push(LONE_PAIR);
      break;
    case 15:
    case 33:
      // Only the three-valent element; P=C of an ylide is no double bond of fixed arrangement.
      if (ligands.length !== 1 || molecule.charges[atom] !== 0) return null;
      ligands.push(LONE_PAIR);
      break;
    default:
      return null;
  }
  if (ligands.length !== 2) return null;
  if (isPlainHydrogen(molecule, ligands[0]!) && isPlainHydrogen(molecule, ligands[1]!)) return null;
  return ligands;
}

/** C=N⁺ of an amidinium or guanidinium: the charge is shared, neither C–N bond is double. */
function isDelocalisedIminium(context: PerceptionContext, ends: readonly [number, number]): boolean {
  const { molecule } = context;
  for (const [carbon, nitrogen] of [ends, [ends[1], ends[0]]] as const) {
    if (molecule.elements[carbon] !== 6 || molecule.elements[nitrogen] !== 7) continue;
    if (molecule.charges[nitrogen] !== 1) continue;
    for (let k = molecule.neighbourStart[carbon]!; k < molecule.neighbourStart[carbon + 1]!; k++) {
      const other = molecule.neighbours[k]!;
      if (other === nitrogen || molecule.elements[other] !== 7 || molecule.charges[other] !== 0) continue;
      return true;
    }
  }
  return false;
}

function labileReason(
  molecule: Molecule,
  ends: readonly [number, number],
  between: readonly number[],
): string | null {
  if (between.length > 0) {
    return ends.some(end => molecule.elements[end] === 7) ? 'a cumulated nitrogen inverts' : null;
  }
  for (const [carbon, nitrogen] of [ends, [ends[1], ends[0]]] as const) {
    if (molecule.elements[carbon] !== 6 || molecule.elements[nitrogen] !== 7) continue;
    if (hydrogenCount(molecule, nitrogen) === 0) continue;
    for (let k = molecule.neighbourStart[carbon]!; k < molecule.neighbourStart[carbon + 1]!; k++) {
      const other = molecule.neighbours[k]!;
      if (other !== nitrogen && molecule.elements[other] === 7)
        return 'an N–H amidine exchanges its hydrogen';
    }
  }
  return null;
}

/** Measures a unit with two ends in space by its torsion. */
export function measurePair(context: PerceptionContext, candidate: PairCandidate): StereoUnit {
  const { molecule, settings } = context;
  const r = context.space!;
  const [first, second] = candidate.ends;
  const measured = endsLocated(molecule, candidate);
  if (measured === null) return unitOf(candidate, 'unspecified', 0, null, null, null);
  const { reference, shift } = measured;
  const raw = torsion(r, reference[0], first, second, reference[1]);
  if (Number.isNaN(raw)) return unitOf(candidate, 'flat', 0, 0, null, null);
  let angle = raw + shift;
  if (angle > 180) angle -= 360;
  const mean = meanTorsion(r, candidate, raw, shift);
  const radians = (mean * Math.PI) / 180;
  const decisive = candidate.planar ? Math.cos(radians) : Math.sin(radians);
  const firmness = Math.min(1, Math.abs(decisive));
  let sigma: number | null = null;
  if (molecule.uncertainty) {
    const atoms = [reference[0], first, second, reference[1]] as const;
    sigma = propagated(molecule.uncertainty, atoms, torsionGradient(r, atoms));
  }
  const state: UnitState = firmness < settings.flatFirmness ? 'flat' : 'clear';
  const sense = state === 'clear' ? (decisive > 0 ? 1 : -1) : 0;
  return unitOf(candidate, state, sense, firmness, angle, sigma);
}

/** A located ligand at each end, and the half turn by which its torsion differs from that of the first-listed ligands. */
function endsLocated(
  molecule: Molecule,
  candidate: PairCandidate,
): { reference: readonly [number, number]; shift: 0 | 180 } | null {
  let turns = 0;
  const reference: number[] = [];
  for (let e = 0; e < 2; e++) {
    if (!isLocated(molecule, candidate.ends[e]!)) return null;
    const ligands = candidate.ligands[e]!;
    const at = ligands.findIndex(ligand => ligand >= 0 && isLocated(molecule, ligand));
    if (at < 0) return null;
    turns += at;
    reference.push(ligands[at]!);
  }
  return { reference: reference as unknown as readonly [number, number], shift: turns % 2 === 0 ? 0 : 180 };
}

/** The torsion averaged over all pairs of located ligands, those of second rank turned by half a turn. */
function meanTorsion(r: Float64Array, candidate: PairCandidate, raw: number, shift: number): number {
  const [first, second] = candidate.ends;
  let sine = 0;
  let cosine = 0;
  candidate.ligands[0].forEach((a, i) => {
    candidate.ligands[1].forEach((b, j) => {
      if (a < 0 || b < 0) return;
      const angle = torsion(r, a, first, second, b);
      if (Number.isNaN(angle)) return;
      const turned = ((angle + 180 * (i + j)) * Math.PI) / 180;
      sine += Math.sin(turned);
      cosine += Math.cos(turned);
    });
  });
  return sine === 0 && cosine === 0 ? raw + shift : (Math.atan2(sine, cosine) * 180) / Math.PI;
}

function unitOf(
  candidate: PairCandidate,
  state: UnitState,
  sense: 1 | -1 | 0,
  firmness: number | null,
  angle: number | null,
  sigma: number | null,
): StereoUnit {
  return {
    kind: candidate.kind,
    atoms: candidate.ends,
    ends: [
      { atom: candidate.ends[0], ligands: candidate.ligands[0] },
      { atom: candidate.ends[1], ligands: candidate.ligands[1] },
    ],
    planar: candidate.kind === 'cumulene' && candidate.planar,
    state,
    sense,
    basis: 'coordinates',
    signedVolume: null,
    sigma: null,
    firmness,
    torsion: angle,
    torsionSigma: sigma,
    labile: candidate.labile,
    warnings: [],
  };
}
