/**
 * Hindered single bonds: biaryls, N-aryl heterocycles, anilides, styrenes and aryl ketones, and how hindered they are.
 *
 * Two planar groups joined by a bond that cannot turn form an axis of chirality (IUPAC 1996, Basic Terminology of Stereochemistry: axial chirality). Whether
 * it can turn is judged from the groups beside it: each of the four flanks gets a bulk, and their sum is set against a
 * limit. The classes follow S. R. LaPlante et al., J. Med. Chem. 2011, 54, 7005; the bulks and limits are ours,
 * fitted to the textbook order H < F, C≡ < O, N < C, Cl, Br < CF3 < t-Bu (common practice, no source). A judgement, not a barrier.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import { isUnsaturated, type PerceptionContext } from './context.ts';
import type { PairCandidate } from './double-bonds.ts';
import type { Ligand } from './unit.ts';

/** Bulk of hydrogen or a lone pair beside the axis. */
const BULK_NONE = 0;
const BULK_FLUORINE = 0.5;
const BULK_OXO = 0.5;
/** An sp carbon: thin next to the axis. */
const BULK_LINEAR = 0.6;
const BULK_HETERO = 0.75;
const BULK_FUSED = 0.8;
const BULK_USUAL = 1;
const BULK_TRIFLUOROMETHYL = 1.3;
const BULK_QUATERNARY = 1.8;
/** The flanks of a five-membered ring bend away: their bulk counts by this much. */
const FIVE_RING_FACTOR = 0.75;

/** Sum of bulks from which a bond between two rings counts as unable to turn. */
const RING_LIMIT = 2.5;
/** The same where one side is not a ring: its flanks can bend away. */
const OPEN_LIMIT = 3.3;
/** How far below its limit an axis is still worth a mention as labile. */
const MENTION_MARGIN = 0.6;
/** Smaller rings that contain the axis itself hold it flat. */
const SMALLEST_BRIDGE = 7;
/** A ring of up to this size that contains the axis flips as a whole unless both flanks outside it bear a group (bridged biaryls). */
const LARGEST_FLIPPING_BRIDGE = 8;

/** Finds single bonds between two planar atoms whose flanks hinder rotation. */
export function axisCandidates(context: PerceptionContext): PairCandidate[] {
  const { molecule, rings } = context;
  const found: PairCandidate[] = [];
  for (let b = 0; b < molecule.bondCount; b++) {
    if (molecule.bondOrders[b] !== 1) continue;
    const ringSize = rings.bondRingSize[b]!;
    if (ringSize > 0 && ringSize < SMALLEST_BRIDGE) continue;
    const first = molecule.bondAtoms[2 * b]!;
    const second = molecule.bondAtoms[2 * b + 1]!;
    if (!isPlanar(molecule, first) || !isPlanar(molecule, second)) continue;
    // At least one side is an aromatic or other unsaturated ring, so that there are ortho positions at all.
    if (!isUnsaturatedRing(context, first, second) && !isUnsaturatedRing(context, second, first)) continue;
    const flanksFirst = flanks(context, first, second);
    const flanksSecond = flanks(context, second, first);
    if (flanksFirst === null || flanksSecond === null) continue;
    if (exchange(molecule, first, flanksFirst.ligands) || exchange(molecule, second, flanksSecond.ligands))
      continue;
    const bulks = [...flanksFirst.bulks, ...flanksSecond.bulks];
    const hindrance = bulks.reduce((sum, bulk) => sum + bulk, 0);
    const bothRings = isUnsaturatedRing(context, first, second) && isUnsaturatedRing(context, second, first);
    const limit = bothRings ? RING_LIMIT : OPEN_LIMIT;
    if (hindrance < limit - MENTION_MARGIN) continue;
    const hindered =
      hindrance >= limit && Math.max(...flanksFirst.bulks) > 0 && Math.max(...flanksSecond.bulks) > 0;
    const ortho = bulks.filter(bulk => bulk > 0).length;
    let labile = hindered
      ? null
      : `the single bond is judged free to turn: ${ortho} of 4 flanks bear a group, bulk ${hindrance.toFixed(1)} of ${limit}`;
    if (hindered && ringSize > 0 && ringSize <= LARGEST_FLIPPING_BRIDGE && (ortho < 4 || !bothRings)) {
      labile = `the ring of ${ringSize} that holds the single bond is judged free to flip: ${ortho} of 4 flanks bear a group`;
    }
    if (hindered && !bothRings) labile ??= openSideReason(molecule, first, second);
    found.push({
      kind: 'axis',
      ends: [first, second],
      between: [],
      planar: false,
      ligands: [flanksFirst.ligands, flanksSecond.ligands],
      labile,
    });
  }
  return found;
}

/**
 * Why an open-chain group turns about its bond to a ring, however it is flanked: a carbonyl without a planar nitrogen
 * beside it (acid, ester, ketone, aldehyde). Null for tertiary amides, anilides and alkenes.
 */
function openSideReason(molecule: Molecule, first: number, second: number): string | null {
  for (const [atom, other] of [
    [first, second],
    [second, first],
  ] as const) {
    if (molecule.elements[atom] !== 6) continue;
    const ligands = ligandsOf(molecule, atom, other);
    const isCarbonyl = ligands.some(
      ligand =>
        (molecule.elements[ligand] === 8 || molecule.elements[ligand] === 16) &&
        isDouble(molecule, ligand, atom),
    );
    if (!isCarbonyl) continue;
    // The nitrogen of a ring or amide at the other end of the axis makes it an amide bond, which is no axis either.
    const tertiaryAmide = ligands.some(
      ligand =>
        molecule.elements[ligand] === 7 &&
        ligandsOf(molecule, ligand, atom).filter(neighbour => molecule.elements[neighbour] !== 1).length ===
          2,
    );
    if (!tertiaryAmide && molecule.elements[other] === 6) {
      return 'the bond of a carboxyl, ester or keto group to a ring is judged free to turn';
    }
  }
  return null;
}

/** Whether both ligands are the oxygens (or sulfurs) of a carboxyl group or carboxylate: proton and charge make them alike. */
function exchange(molecule: Molecule, atom: number, ligands: readonly Ligand[]): boolean {
  const [a, b] = ligands as readonly [number, number];
  const z = molecule.elements[a];
  if (z !== molecule.elements[b] || (z !== 8 && z !== 16)) return false;
  return [a, b].every(ligand =>
    ligandsOf(molecule, ligand, atom).every(neighbour => molecule.elements[neighbour] === 1),
  );
}

/** Three bonds and a share in a π system: a doubly bonded or aromatic atom, or a nitrogen beside one. */
function isPlanar(molecule: Molecule, atom: number): boolean {
  const neighbours = molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
  const z = molecule.elements[atom]!;
  if (neighbours + molecule.hydrogens[atom]! !== 3 || neighbours < 3) return false;
  if (z === 6 || (z === 7 && molecule.charges[atom] === 1)) return isUnsaturated(molecule, atom);
  if (z !== 7 || molecule.charges[atom] !== 0) return false;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (molecule.elements[neighbour] === 1) return false;
    if (isAcylLike(molecule, neighbour)) return true;
  }
  return false;
}

/** Carbon (or N, S, P) with a double bond, beside which a nitrogen is planar. */
function isAcylLike(molecule: Molecule, atom: number): boolean {
  return isUnsaturated(molecule, atom);
}

/** Whether an end and both its ligands are in one ring in which they are all unsaturated. */
function isUnsaturatedRing(context: PerceptionContext, atom: number, other: number): boolean {
  const { molecule } = context;
  const ligands = ligandsOf(molecule, atom, other);
  if (commonRing(context, atom, ligands) === null) return false;
  return molecule.elements[atom] === 7
    ? ligands.every(ligand => isUnsaturated(molecule, ligand))
    : isUnsaturated(molecule, atom);
}

function ligandsOf(molecule: Molecule, atom: number, other: number): number[] {
  const ligands: number[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (neighbour !== other) ligands.push(neighbour);
  }
  return ligands;
}

/** The smallest ring that holds an atom and both its ligands, not through the axis. */
function commonRing(context: PerceptionContext, atom: number, ligands: readonly number[]): Int32Array | null {
  let best: Int32Array | null = null;
  for (const index of context.rings.ringsAt[atom]!) {
    const ring = context.rings.rings[index]!;
    if (
      ligands.every(ligand => ring.includes(ligand)) &&
      ring.length <= 8 &&
      (best === null || ring.length < best.length)
    ) {
      best = ring;
    }
  }
  return best;
}

/** The two ligands of an end with the bulk each turns towards the axis. */
function flanks(
  context: PerceptionContext,
  atom: number,
  other: number,
): { ligands: Ligand[]; bulks: number[] } | null {
  const { molecule } = context;
  const ligands = ligandsOf(molecule, atom, other);
  if (ligands.length !== 2) return null;
  const ring = commonRing(context, atom, ligands);
  const bulks = ligands.map(ligand =>
    ring === null
      ? groupBulk(molecule, ligand, atom)
      : orthoBulk(context, ligand, atom, ring) * (ring.length === 5 ? FIVE_RING_FACTOR : 1),
  );
  return { ligands, bulks };
}

/** What an ortho position turns towards the axis: its substituent outside the ring. */
function orthoBulk(context: PerceptionContext, ortho: number, atom: number, ring: Int32Array): number {
  const { molecule, rings } = context;
  let bulk = BULK_NONE;
  for (let k = molecule.neighbourStart[ortho]!; k < molecule.neighbourStart[ortho + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    if (neighbour === atom || ring.includes(neighbour)) continue;
    const bond = molecule.neighbourBonds[k]!;
    const size = rings.bondRingSize[bond]!;
    const own =
      size > 0 && size < SMALLEST_BRIDGE
        ? BULK_FUSED
        : molecule.bondOrders[bond] === 2
          ? BULK_OXO
          : groupBulk(molecule, neighbour, ortho);
    bulk = Math.max(bulk, own);
  }
  return bulk;
}

/** Bulk of a group by its first atom. */
function groupBulk(molecule: Molecule, atom: number, from: number): number {
  const heavy = ligandsOf(molecule, atom, from).filter(
    neighbour => molecule.elements[neighbour] !== 1,
  ).length;
  switch (molecule.elements[atom]) {
    case 1:
      return BULK_NONE;
    case 9:
      return BULK_FLUORINE;
    case 8:
      return heavy === 0 && isDouble(molecule, atom, from) ? BULK_OXO : BULK_HETERO;
    case 7:
      return heavy >= 2 ? BULK_USUAL : BULK_HETERO;
    case 6:
      if (isLinear(molecule, atom)) return BULK_LINEAR;
      if (heavy >= 3) return isTrifluoromethyl(molecule, atom) ? BULK_TRIFLUOROMETHYL : BULK_QUATERNARY;
      return BULK_USUAL;
    default:
      return BULK_USUAL;
  }
}

function isTrifluoromethyl(molecule: Molecule, atom: number): boolean {
  let fluorines = 0;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.elements[molecule.neighbours[k]!] === 9) fluorines++;
  }
  return fluorines === 3;
}

function isLinear(molecule: Molecule, atom: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.bondOrders[molecule.neighbourBonds[k]!] === 3) return true;
  }
  return false;
}

function isDouble(molecule: Molecule, atom: number, other: number): boolean {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.neighbours[k] === other) return molecule.bondOrders[molecule.neighbourBonds[k]!] === 2;
  }
  return false;
}
