/** Perception: every atom, bond and row of bonds that may be a stereogenic unit, measured from what the molecule offers. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Settings } from '../docket.ts';
import { type CentreCandidate, centreCandidates, measureCentre } from './centres.ts';
import { type PerceptionContext, perceptionContext } from './context.ts';
import { type DoubleBondCandidate, doubleBondCandidates, measureDoubleBond } from './double-bonds.ts';
import { prune } from './pruning.ts';
import { type StatedTable, statedCentre, statedDoubleBond, statedTable } from './stated.ts';
import type { StereoUnit, UnitEnd } from './unit.ts';

export interface Perceived {
  /** Candidates in order of kind, then of their lowest atom; the ranking decides which are stereogenic. */
  readonly units: StereoUnit[];
  readonly warnings: string[];
}

type Candidate = { readonly ends: readonly UnitEnd[] } & (
  | { readonly kind: 'centre'; readonly centre: CentreCandidate }
  | { readonly kind: 'double-bond'; readonly bond: DoubleBondCandidate }
);

/** Finds and measures the candidate units of a molecule: from coordinates in space, else from the drawing, else from the notation. */
export function perceiveUnits(molecule: Molecule, settings: Settings): Perceived {
  const context = perceptionContext(molecule, settings);
  const candidates: Candidate[] = [
    ...centreCandidates(context).map(
      centre => ({ kind: 'centre', centre, ends: [{ atom: centre.atom, ligands: centre.ligands }] }) as const,
    ),
    ...doubleBondCandidates(context).map(
      bond =>
        ({
          kind: 'double-bond',
          bond,
          ends: [
            { atom: bond.ends[0], ligands: bond.ligands[0] },
            { atom: bond.ends[1], ligands: bond.ligands[1] },
          ],
        }) as const,
    ),
  ];
  const stated = statedTable(molecule);
  const units = prune(context, candidates).map(candidate => measured(context, candidate, stated));
  return { units, warnings: [] };
}

function measured(context: PerceptionContext, candidate: Candidate, stated: StatedTable): StereoUnit {
  if (context.space !== null) {
    return candidate.kind === 'centre'
      ? measureCentre(context, candidate.centre)
      : measureDoubleBond(context, candidate.bond);
  }
  return candidate.kind === 'centre'
    ? statedCentre(stated, candidate.centre)
    : statedDoubleBond(stated, candidate.bond);
}
