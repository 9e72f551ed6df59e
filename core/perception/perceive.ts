/** Perception: every atom, bond and row of bonds that may be a stereogenic unit, measured from what the molecule offers. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Settings } from '../docket.ts';
import { axisCandidates } from './axes.ts';
import { isBridgehead, isCorner } from './bridgeheads.ts';
import { type CentreCandidate, centreCandidates, measureCentre } from './centres.ts';
import { type PerceptionContext, perceptionContext } from './context.ts';
import { doubleBondCandidates, measurePair, type PairCandidate } from './double-bonds.ts';
import { drawnCentre, drawnPair } from './drawing.ts';
import { helixCandidates, measureHelix } from './helices.ts';
import { measurePlane, planeCandidates } from './planes.ts';
import { prune } from './pruning.ts';
import { type StatedTable, statedCentre, statedPair, statedTable } from './stated.ts';
import type { StereoUnit, UnitEnd } from './unit.ts';

export interface Perceived {
  /** Candidates in order of kind, then of their place in the molecule; the ranking decides which are stereogenic. */
  readonly units: StereoUnit[];
  readonly warnings: string[];
}

type Candidate = { readonly ends: readonly UnitEnd[] } & (
  | { readonly kind: 'centre'; readonly centre: CentreCandidate }
  | { readonly kind: 'pair'; readonly pair: PairCandidate }
);

/** Finds and measures the candidate units of a molecule: from coordinates in space, else from the drawing, else from the notation. */
export function perceiveUnits(molecule: Molecule, settings: Settings): Perceived {
  const context = perceptionContext(molecule, settings);
  const candidates: Candidate[] = [];
  for (const centre of centreCandidates(context)) {
    candidates.push({ kind: 'centre', centre, ends: [{ atom: centre.atom, ligands: centre.ligands }] });
  }
  for (const pair of [...doubleBondCandidates(context), ...axisCandidates(context)]) {
    const ends = pair.ends.map((atom, e) => ({ atom, ligands: pair.ligands[e]! }));
    candidates.push({ kind: 'pair', pair, ends });
  }
  const stated = statedTable(molecule);
  const all = prune(context, candidates).map(candidate => measured(context, candidate, stated));
  let units = all.filter(unit => !isHeldBySymmetry(context, unit));
  if (units.length < all.length) {
    // Without the held ones, others of which nothing is known may have nothing left to tell their ligands apart.
    const separable = new Set(prune(context, units));
    units = units.filter(unit => unit.sense !== 0 || unit.basis === 'coordinates' || separable.has(unit));
  }
  for (const helix of helixCandidates(context)) units.push(measureHelix(context, helix));
  for (const plane of planeCandidates(context)) units.push(measurePlane(context, plane));
  return { units, warnings: [] };
}

/** Rings up to this size are looked at for bridgeheads that are held by symmetry. */
const LARGEST_BRIDGED_RING = 12;

/**
 * A bridgehead, or a corner of a cage (cubane), of which nothing is stated and two bridges of which are alike: its rings, not a choice of configuration,
 * hold it as it is. Where coordinates or a notation give it an arrangement, it is taken as given.
 */
function isHeldBySymmetry(context: PerceptionContext, unit: StereoUnit): boolean {
  if (unit.kind !== 'centre' || unit.sense !== 0 || unit.basis === 'coordinates') return false;
  const { ligands, atom } = unit.ends[0]!;
  const classes = ligands.filter(ligand => ligand >= 0).map(ligand => context.classes[ligand]);
  if (new Set(classes).size === classes.length) return false;
  return isCorner(context, atom) || isBridgehead(context, atom, LARGEST_BRIDGED_RING);
}

function measured(context: PerceptionContext, candidate: Candidate, stated: StatedTable): StereoUnit {
  const { molecule } = context;
  if (context.space !== null) {
    return candidate.kind === 'centre'
      ? measureCentre(context, candidate.centre)
      : measurePair(context, candidate.pair);
  }
  if (molecule.dimension === 2 && molecule.stated.length === 0) {
    return candidate.kind === 'centre'
      ? drawnCentre(molecule, candidate.centre)
      : drawnPair(molecule, candidate.pair);
  }
  return candidate.kind === 'centre'
    ? statedCentre(stated, candidate.centre)
    : statedPair(stated, candidate.pair);
}
