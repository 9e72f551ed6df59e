/** Units whose arrangement a notation states (SMILES, InChI): the parity between the stated order of ligands and ours. */
import { IMPLICIT_HYDROGEN, LONE_PAIR, type Molecule, type StatedStereo } from '../chemistry/molecule.ts';
import type { CentreCandidate } from './centres.ts';
import type { PairCandidate } from './double-bonds.ts';
import type { Ligand, StereoUnit, UnitEnd, UnitKind } from './unit.ts';

/** Statements by the atom they are made of: centres by their atom, the others by "lower-higher" end. */
export interface StatedTable {
  readonly centres: ReadonlyMap<number, StatedStereo & { kind: 'centre' }>;
  readonly pairs: ReadonlyMap<string, StatedStereo & { kind: 'double-bond' | 'allene' }>;
}

export function statedTable(molecule: Molecule): StatedTable {
  const centres = new Map<number, StatedStereo & { kind: 'centre' }>();
  const pairs = new Map<string, StatedStereo & { kind: 'double-bond' | 'allene' }>();
  for (const stereo of molecule.stated) {
    if (stereo.kind === 'centre') centres.set(stereo.atom, stereo);
    else pairs.set(pairKey(stereo.ends), stereo);
  }
  return { centres, pairs };
}

function pairKey(ends: readonly number[]): string {
  return `${Math.min(ends[0]!, ends[1]!)}-${Math.max(ends[0]!, ends[1]!)}`;
}

/** A centre with the arrangement its notation states; `unspecified` where it states none. */
export function statedCentre(table: StatedTable, candidate: CentreCandidate): StereoUnit {
  const stated = table.centres.get(candidate.atom);
  let sense: 1 | -1 | 0 = 0;
  if (stated !== undefined) {
    const parity = orderParity(stated.ligands, candidate.ligands);
    if (parity !== 0) sense = (stated.turn === 'clockwise') === parity > 0 ? 1 : -1;
  }
  return plain(
    'centre',
    [candidate.atom],
    [{ atom: candidate.atom, ligands: candidate.ligands }],
    false,
    candidate.labile,
    sense,
  );
}

/** A double bond or cumulene with the arrangement its notation states. */
export function statedPair(table: StatedTable, candidate: PairCandidate): StereoUnit {
  const stated = table.pairs.get(pairKey(candidate.ends));
  const sense = stated === undefined ? 0 : statedSense(stated, candidate);
  return plain(
    candidate.kind,
    candidate.ends,
    [
      { atom: candidate.ends[0], ligands: candidate.ligands[0] },
      { atom: candidate.ends[1], ligands: candidate.ligands[1] },
    ],
    candidate.kind === 'cumulene' && candidate.planar,
    candidate.labile,
    sense,
  );
}

function statedSense(
  stated: StatedStereo & { kind: 'double-bond' | 'allene' },
  candidate: PairCandidate,
): 1 | -1 | 0 {
  const swapped = stated.ends[0] !== candidate.ends[0];
  const [ours, theirs] = swapped
    ? [candidate.ligands[1], candidate.ligands[0]]
    : [candidate.ligands[0], candidate.ligands[1]];
  if (stated.kind === 'double-bond') {
    const i = ours.indexOf(stated.references[0]);
    const j = theirs.indexOf(stated.references[1]);
    if (i < 0 || j < 0 || !candidate.planar) return 0;
    return (stated.side === 'same') === ((i + j) % 2 === 0) ? 1 : -1;
  }
  if (candidate.planar) return 0;
  const first = orderParity(stated.ligands.slice(0, 2), ours);
  const second = orderParity(stated.ligands.slice(2), theirs);
  if (first === 0 || second === 0) return 0;
  // Seen from a, with b, c, d clockwise, the torsion a – end – end – c is negative.
  const positive = (stated.turn === 'anticlockwise') === first * second > 0;
  return positive ? 1 : -1;
}

/** A unit with nothing measured. */
function plain(
  kind: UnitKind,
  atoms: readonly number[],
  ends: readonly UnitEnd[],
  planar: boolean,
  labile: string | null,
  sense: 1 | -1 | 0,
): StereoUnit {
  return {
    kind,
    atoms,
    ends,
    planar,
    state: sense === 0 ? 'unspecified' : 'clear',
    sense,
    basis: 'notation',
    signedVolume: null,
    sigma: null,
    firmness: null,
    torsion: null,
    torsionSigma: null,
    labile,
    warnings: [],
  };
}

/** Parity of the permutation from one order of ligands to another; 0 when they are not the same ligands. A stated implicit hydrogen or lone pair stands for whichever of the two we have. */
export function orderParity(stated: readonly Ligand[], ours: readonly Ligand[]): 1 | -1 | 0 {
  if (stated.length !== ours.length) return 0;
  const virtual = ours.find(ligand => ligand < 0);
  const places: number[] = [];
  for (const ligand of stated) {
    const wanted = ligand === IMPLICIT_HYDROGEN || ligand === LONE_PAIR ? (virtual ?? ligand) : ligand;
    const place = ours.indexOf(wanted);
    if (place < 0 || places.includes(place)) return 0;
    places.push(place);
  }
  let parity: 1 | -1 = 1;
  for (let i = 0; i < places.length; i++) {
    for (let j = i + 1; j < places.length; j++) if (places[i]! > places[j]!) parity = parity === 1 ? -1 : 1;
  }
  return parity;
}
