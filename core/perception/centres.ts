/**
 * Tetrahedral centres: which atoms can be one, which ligands they have, and why some settle nothing.
 *
 * Four ligands in all directions of a tetrahedron, a lone pair counting as one where it keeps its place: P, As, Sb, S,
 * Se, Te with three neighbours; nitrogen only where a ring holds it (P-93.2, P-93.3).
 */
import { isMetal } from '../chemistry/elements.ts';
import { IMPLICIT_HYDROGEN, isLocated, LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import { isAcidTerminal } from '../chemistry/symmetry.ts';
import { propagated, relativeVolume, signedVolume, signedVolumeGradient } from '../geometry/signed-volume.ts';
import { isBridgehead } from './bridgeheads.ts';
import {
  doubleBondsAt,
  isPlainHydrogen,
  isUnsaturated,
  type PerceptionContext,
  plainHydrogens,
  valence,
} from './context.ts';
import type { Ligand, StereoUnit, UnitState } from './unit.ts';

/** Bridged rings larger than this let a nitrogen turn its lone pair from outside to inside (cryptands), or be planar (common practice, no source). */
const LARGEST_HOLDING_RING = 8;

/** What `amineReason` says of a nitrogen that is no candidate. */
const PLANAR = 'planar';

/** A possible centre before it is measured. */
export interface CentreCandidate {
  readonly atom: number;
  /** Hydrogen and lone pair last. */
  readonly ligands: readonly Ligand[];
  readonly labile: string | null;
}

/** Finds the atoms that can be tetrahedral centres by their own bonding; ligands that are alike are left for later. */
export function centreCandidates(context: PerceptionContext): CentreCandidate[] {
  const { molecule } = context;
  const found: CentreCandidate[] = [];
  for (let atom = 0; atom < molecule.atomCount; atom++) {
    const candidate = candidateAt(context, atom);
    if (candidate !== null) found.push(candidate);
  }
  return found;
}

function candidateAt(context: PerceptionContext, atom: number): CentreCandidate | null {
  const { molecule } = context;
  const z = molecule.elements[atom]!;
  const neighbours = molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
  const total = neighbours + molecule.hydrogens[atom]!;
  if (neighbours < 2 || total < 3 || total > 4) return null;
  if (molecule.hydrogens[atom]! > 1 || plainHydrogens(molecule, atom) > 1) return null;
  const charge = molecule.charges[atom]!;
  if (bondedToMetal(molecule, atom)) return null;
  let labile: string | null = null;
  let lonePair = false;
  switch (z) {
    case 6:
    case 14:
    case 32:
    case 50:
      if (total !== 4 || isUnsaturated(molecule, atom)) return null;
      break;
    case 5:
      if (total !== 4 || isUnsaturated(molecule, atom)) return null;
      break;
    case 7: {
      if (total === 4) {
        if (plainHydrogens(molecule, atom) > 0) labile = 'an ammonium nitrogen exchanges its hydrogen';
        if (isUnsaturated(molecule, atom) && !isOxide(molecule, atom)) return null;
        break;
      }
      const reason = amineReason(context, atom);
      if (reason === PLANAR) return null;
      lonePair = true;
      labile = reason;
      break;
    }
    case 15:
    case 33:
    case 51:
      if (total === 4) {
        if (valence(molecule, atom) > 5) return null;
      } else if (doubleBondsAt(molecule, atom) > 0) return null;
      else lonePair = true;
      break;
    case 16:
    case 34:
    case 52:
      if (total === 3) {
        // Three-coordinate with a lone pair: sulfoxide and its kin (valence 4) or sulfonium (a charge).
        if (valence(molecule, atom) !== 4 && charge !== 1) return null;
        lonePair = true;
      } else if (charge === 0 && valence(molecule, atom) === 4) {
        // Four single bonds and a lone pair: a sulfurane, no tetrahedron.
        return null;
      }
      break;
    default:
      return null;
  }
  const ligands: Ligand[] = [];
  const hydrogens: Ligand[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] === 1) hydrogens.push(neighbour);
    else ligands.push(neighbour);
  }
  // Isotopes of hydrogen first, plain hydrogen last.
  hydrogens.sort((a, b) => molecule.isotopes[b]! - molecule.isotopes[a]! || a - b);
  ligands.push(...hydrogens);
  for (let i = 0; i < molecule.hydrogens[atom]!; i++) ligands.push(IMPLICIT_HYDROGEN);
  if (lonePair) ligands.push(LONE_PAIR);
  if (twoAcidTerminals(molecule, ligands)) return null;
  return { atom, ligands, labile };
}

function bondedToMetal(molecule: Molecule, atom: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (isMetal(molecule.elements[molecule.neighbours[k]!]!) && molecule.elements[atom] !== 6) return true;
  }
  return false;
}

/** Two O (or S …) of one acid group: charge, proton and double bond move between them. */
function twoAcidTerminals(molecule: Molecule, ligands: readonly Ligand[]): boolean {
  for (let i = 0; i < ligands.length; i++) {
    const a = ligands[i]!;
    if (a < 0 || !isAcidTerminal(molecule, a)) continue;
    for (let j = i + 1; j < ligands.length; j++) {
      const b = ligands[j]!;
      if (
        b >= 0 &&
        molecule.elements[a] === molecule.elements[b] &&
        molecule.isotopes[a] === molecule.isotopes[b] &&
        isAcidTerminal(molecule, b)
      ) {
        return true;
      }
    }
  }
  return false;
}

/** Amine oxide drawn with a double bond: R3N=O. */
function isOxide(molecule: Molecule, atom: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (
      molecule.bondOrders[molecule.neighbourBonds[k]!] === 2 &&
      molecule.elements[molecule.neighbours[k]!] !== 8
    ) {
      return false;
    }
  }
  return valence(molecule, atom) === 5;
}

/** Why a three-coordinate nitrogen settles nothing; null where a ring holds it; `PLANAR` where it is no pyramid, or is one of the many N–H. */
function amineReason(context: PerceptionContext, atom: number): string | null {
  const { molecule, rings } = context;
  if (molecule.charges[atom] !== 0 || isUnsaturated(molecule, atom)) return PLANAR;
  const first = molecule.neighbourStart[atom]!;
  const last = molecule.neighbourStart[atom + 1]!;
  let heteroatom = false;
  let ringBonds = 0;
  let heavy = 0;
  for (let k = first; k < last; k++) {
    const neighbour = molecule.neighbours[k]!;
    const z = molecule.elements[neighbour]!;
    if (z !== 1) heavy++;
    if (z === 7 || z === 8 || z === 9 || z === 17 || z === 35) heteroatom = true;
    if (rings.bondInRing[molecule.neighbourBonds[k]!] === 1) ringBonds++;
  }
  const inThreeRing = rings.atomRingSize[atom] === 3;
  const held =
    (inThreeRing && heteroatom) || (ringBonds === 3 && isBridgehead(context, atom, LARGEST_HOLDING_RING));
  if (held) return null;
  for (let k = first; k < last; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] !== 1 && isUnsaturated(molecule, neighbour)) return PLANAR;
  }
  if (heavy < 3) return PLANAR;
  if (inThreeRing) return 'the nitrogen of an N-alkyl aziridine inverts';
  return ringBonds === 3 ? 'a nitrogen of ring fusion inverts' : 'a pyramidal amine nitrogen inverts';
}

/** Measures a centre in space. */
export function measureCentre(context: PerceptionContext, candidate: CentreCandidate): StereoUnit {
  const { molecule, settings } = context;
  const r = context.space!;
  const { atom, ligands } = candidate;
  const warnings: string[] = [];
  const located = isLocated(molecule, atom)
    ? ligands.filter(ligand => ligand >= 0 && isLocated(molecule, ligand))
    : [];
  const heavy = located.filter(ligand => !isPlainHydrogen(molecule, ligand));
  const used = heavy.length >= 3 ? heavy : located;
  if (used.length < 3) return unitOf(candidate, 'unspecified', 0, null, null, null, warnings);
  const volume = signedVolume(r, atom, used);
  const relative = relativeVolume(r, atom, used);
  const firmness = Math.min(1, Math.abs(relative));
  let sigma: number | null = null;
  if (molecule.uncertainty) {
    const { atoms, gradient } = signedVolumeGradient(r, atom, used);
    sigma = propagated(molecule.uncertainty, atoms, gradient);
  }
  let state: UnitState = 'clear';
  if (firmness < settings.flatFirmness) state = 'flat';
  else if (sigma !== null && sigma > 0 && Math.abs(volume) < settings.flatSigmas * sigma) state = 'flat';
  if (used.length === 3 && state === 'clear') {
    const fourth = located.find(ligand => !used.includes(ligand));
    if (fourth !== undefined && wrongSide(r, atom, used, fourth)) {
      state = 'flat';
      warnings.push(
        'the hydrogen lies on the side of the three other neighbours: the coordinates of the centre do not decide',
      );
    }
  }
  // The ligand that was not used stands last in the listed order, or its place gives the parity.
  const sense = state === 'clear' ? senseOf(ligands, used, volume) : 0;
  return unitOf(candidate, state, sense, volume * listedParity(ligands, used), sigma, firmness, warnings);
}

/** A hydrogen points away from the plane of the three other neighbours, on the side of the centre; otherwise the model contradicts itself. */
function wrongSide(r: Float64Array, atom: number, used: readonly number[], hydrogen: number): boolean {
  const [a, b, c] = used as [number, number, number];
  const d = (to: number, from: number, x: number): number => r[3 * to + x]! - r[3 * from + x]!;
  const nx = d(b, a, 1) * d(c, a, 2) - d(b, a, 2) * d(c, a, 1);
  const ny = d(b, a, 2) * d(c, a, 0) - d(b, a, 0) * d(c, a, 2);
  const nz = d(b, a, 0) * d(c, a, 1) - d(b, a, 1) * d(c, a, 0);
  const along = (to: number, from: number): number =>
    nx * d(to, from, 0) + ny * d(to, from, 1) + nz * d(to, from, 2);
  return along(hydrogen, atom) * along(atom, a) < 0;
}

/** Sign that the volume of the used ligands has with all ligands in the listed order: the parity of moving the unused one to the end. */
function listedParity(ligands: readonly Ligand[], used: readonly number[]): 1 | -1 {
  if (used.length !== 3) return 1;
  const unused = ligands.findIndex(ligand => !used.includes(ligand));
  if (unused < 0) return 1;
  return (ligands.length - 1 - unused) % 2 === 0 ? 1 : -1;
}

function senseOf(ligands: readonly Ligand[], used: readonly number[], volume: number): 1 | -1 {
  return volume * listedParity(ligands, used) < 0 ? 1 : -1;
}

function unitOf(
  candidate: CentreCandidate,
  state: UnitState,
  sense: 1 | -1 | 0,
  volume: number | null,
  sigma: number | null,
  firmness: number | null,
  warnings: readonly string[],
): StereoUnit {
  return {
    kind: 'centre',
    atoms: [candidate.atom],
    ends: [{ atom: candidate.atom, ligands: candidate.ligands }],
    planar: false,
    state,
    sense,
    basis: 'coordinates',
    signedVolume: volume,
    sigma,
    firmness,
    torsion: null,
    torsionSigma: null,
    labile: candidate.labile,
    warnings,
  };
}
