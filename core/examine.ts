/** The examination of one model, from molecule to docket: perception, ranking, descriptors; and the ladder of one unit. */
import type { Molecule } from './chemistry/molecule.ts';
import { labelUnits } from './cip/label.ts';
import { ladderOf } from './cip/ladder.ts';
import { moleculeStatements } from './chemistry/components.ts';
import { DEFAULT_SETTINGS, type Docket, type Ladder, type Settings } from './docket.ts';
import { perceiveUnits } from './perception/perceive.ts';

/** Finds, measures and labels every stereogenic unit of a molecule. */
export function examine(molecule: Molecule, settings: Settings = DEFAULT_SETTINGS): Docket {
  const perceived = perceiveUnits(molecule, settings);
  const { units } = labelUnits(molecule, perceived.units, settings);
  return {
    units,
    candidates: perceived.units,
    molecules: moleculeStatements(molecule),
    warnings: perceived.warnings,
  };
}

/**
 * The ladder of one unit of a docket, `unitIndex` counted in `docket.units`.
 *
 * @throws RangeError when the docket has no such unit; DigraphLimitError when the ranking outgrows its limit.
 */
export function explainUnit(
  molecule: Molecule,
  docket: Docket,
  unitIndex: number,
  settings: Settings = DEFAULT_SETTINGS,
): Ladder {
  const labelled = docket.units[unitIndex];
  if (labelled === undefined) throw new RangeError(`the docket has no unit ${unitIndex + 1}`);
  return ladderOf(molecule, docket.candidates, docket.candidates.indexOf(labelled.unit), settings);
}
