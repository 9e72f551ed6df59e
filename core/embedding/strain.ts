/** Strain of a pose: its energy after a relaxation that holds it in place, against the best of its conformers. */
import type { Molecule } from '../chemistry/molecule.ts';
import { addHydrogens } from './hydrogens.ts';
import { conformers } from './conformers.ts';
import { type EnergyTerms, Mmff94 } from './mmff94/energy.ts';
import { placeEnergy, relax } from './restrained.ts';
import type { EmbeddingTables } from './resources.ts';

export interface PoseEnergy {
  /** kcal/mol of the coordinates as they stand. */
  readonly total: number;
  readonly terms: EnergyTerms;
  readonly warnings: readonly string[];
}

/** MMFF94 energy of coordinates as they stand; implicit hydrogens are placed and relaxed first, and a warning says so. @throws TypingError, Error where MMFF94 has no types; RangeError without coordinates in space. */
export function poseEnergy(molecule: Molecule, tables: EmbeddingTables): PoseEnergy {
  const { full, field, x, warnings } = readyPose(molecule, tables);
  const terms = field.terms(x);
  const total = Object.values(terms).reduce((sum, value) => sum + value, 0);
  return { total, terms, warnings: full.atomCount > 0 ? warnings : [] };
}

export interface PoseStrain {
  /** As it stands, after the held relaxation, and best conformer, kcal/mol. */
  readonly asItStands: number;
  readonly held: number;
  readonly best: number;
  /** Held less best. */
  readonly strain: number;
  /** Largest movement of a heavy atom in the held relaxation, Å. */
  readonly movement: number;
  readonly conformers: number;
  readonly warnings: readonly string[];
}

/** Heavy atoms move freely within this distance and are pulled back beyond it (ours, no source). */
const FREE_MOVEMENT = 0.3;
const HOLD = 20;

/** Strain of a pose with the configuration it has. @throws as `poseEnergy`. */
export function poseStrain(
  molecule: Molecule,
  tables: EmbeddingTables,
  options: { readonly count?: number; readonly seed?: number; readonly signal?: AbortSignal } = {},
): PoseStrain {
  const { full, field, x, warnings } = readyPose(molecule, tables);
  const asItStands = field.energy(x, new Float64Array(x.length));
  const heavy: number[] = [];
  for (let i = 0; i < full.atomCount; i++) if (full.elements[i] !== 1) heavy.push(i);
  const relaxed = x.slice();
  const restraint = { atoms: heavy, places: x, force: HOLD, free: FREE_MOVEMENT };
  const held = relax(field, relaxed, (at, g) => placeEnergy(restraint, at, g));
  let movement = 0;
  for (const i of heavy) {
    movement = Math.max(
      movement,
      Math.hypot(
        relaxed[3 * i]! - x[3 * i]!,
        relaxed[3 * i + 1]! - x[3 * i + 1]!,
        relaxed[3 * i + 2]! - x[3 * i + 2]!,
      ),
    );
  }
  let best = relax(field, relaxed.slice(), null);
  const ensemble = conformers({ ...full, coordinates: x, dimension: 3 }, tables, {
    count: options.count ?? 20,
    seed: options.seed ?? 1,
    ...(options.signal ? { signal: options.signal } : {}),
  });
  const said = [...warnings];
  if (ensemble.ok) {
    for (const model of ensemble.models) best = Math.min(best, model.energy ?? best);
  } else said.push(`no conformer could be built (${ensemble.reason}); the relaxed pose is the reference`);
  return {
    asItStands,
    held,
    best,
    strain: held - best,
    movement,
    conformers: ensemble.ok ? ensemble.models.length : 0,
    warnings: said,
  };
}

function readyPose(
  molecule: Molecule,
  tables: EmbeddingTables,
): { full: Molecule; field: Mmff94; x: Float64Array; warnings: string[] } {
  if (molecule.coordinates === null || molecule.dimension !== 3) {
    throw new RangeError('there are no coordinates in space; an energy needs them');
  }
  for (let i = 0; i < molecule.coordinates.length; i++) {
    if (!Number.isFinite(molecule.coordinates[i]!)) {
      throw new RangeError(`atom ${Math.floor(i / 3) + 1} has no coordinates; an energy needs all of them`);
    }
  }
  const full = addHydrogens(molecule);
  const field = new Mmff94(full, tables.mmff94);
  const x = full.coordinates!.slice();
  const warnings: string[] = [];
  if (full.atomCount > molecule.atomCount) {
    const listed = Array.from({ length: molecule.atomCount }, (_, i) => i);
    // Only the added hydrogens move.
    relax(
      field,
      x,
      (at, g) => placeEnergy({ atoms: listed, places: full.coordinates!, force: 1e4, free: 0 }, at, g),
      300,
      0.1,
    );
    x.set(molecule.coordinates);
    warnings.push(
      `${full.atomCount - molecule.atomCount} hydrogens were not in the file; they were placed and relaxed`,
    );
  }
  return { full, field, x, warnings };
}
