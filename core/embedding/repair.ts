/** Repair of a pose: the configuration asked for, by the smallest movement found, the rest of the molecule held in place. */
import type { Molecule } from '../chemistry/molecule.ts';
import { ringInfo } from '../chemistry/rings.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { askedUnits, unitName, unitsMissed } from './asked.ts';
import { distanceBounds } from './bounds.ts';
import { volumeConstraints, wrongUnits } from './chirality.ts';
import { pairBounds, refinementError } from './distance-geometry.ts';
import { addHydrogens } from './hydrogens.ts';
import { idealGeometry } from './ideal-geometry.ts';
import { minimise } from './minimise.ts';
import { planarity } from './planarity.ts';
import { seededRandom } from './random.ts';
import { brokenBonds, collisions, piercedRings } from './rejection.ts';
import type { EmbeddingTables } from './resources.ts';
import { type PlaceRestraint, placeEnergy, relax } from './restrained.ts';
import { smooth } from './smoothing.ts';
import { buildingField } from './stand-in.ts';

export type RepairResult =
  | {
      readonly ok: true;
      readonly molecule: Molecule;
      /** Units that were not as asked. */
      readonly repaired: readonly StereoUnit[];
      /** MMFF94, kcal/mol: the pose as it stands, and the repaired one; null without types. */
      readonly before: number | null;
      readonly after: number | null;
      /** Root mean square movement of the heavy atoms, Å, without superposition. */
      readonly movement: number;
      readonly warnings: readonly string[];
    }
  | { readonly ok: false; readonly reason: string };

/** Forces that pull heavy atoms back to their places while the hand changes, tried in turn; the firmest that works makes the smallest movement. */
const HOLDS = [1, 0.2, 0.03, 0.003] as const;
const LEAST_SHARE = 0.6;
const TRIALS = 4;

/** Gives a pose in space the senses of `wanted` (ligands as the pose numbers them); other units keep theirs. @throws RangeError without coordinates in space. */
export function repairPose(
  molecule: Molecule,
  wanted: readonly StereoUnit[],
  tables: EmbeddingTables,
  seed = 1,
): RepairResult {
  if (molecule.dimension !== 3 || !molecule.coordinates)
    throw new RangeError('a repair needs a pose in space');
  const full = addHydrogens(molecule);
  const places = full.coordinates!;
  const n = full.atomCount;
  // Units of the pose with its hydrogens listed; those wanted replace them, ligands in the order of the pose.
  const { asked } = askedUnits(
    full,
    wanted.map(unit => inFull(unit, full)),
  );
  const wrongBefore = unitsMissed({ ...full, stated: [] }, asked);
  const building = buildingField(full, tables.mmff94);
  const energyOf = (x: Float64Array): number | null =>
    building.exact && building.field ? building.field.energy(x, new Float64Array(x.length)) : null;
  const before = energyOf(places);
  if (wrongBefore.length === 0) {
    return {
      ok: true,
      molecule: full,
      repaired: [],
      before,
      after: before,
      movement: 0,
      warnings: building.warnings,
    };
  }
  const rings = ringInfo(full);
  const geometry = idealGeometry(full, building.field);
  const volumes = volumeConstraints(full, asked, geometry);
  const random = seededRandom(seed);
  const flat = planarity(full, rings, building.field, asked, () => 0);
  const sep = new Uint8Array(n * n);
  const bounds = distanceBounds(
    { molecule: full, rings, geometry, planarBonds: flat.planarBonds, cis: flat.cis },
    sep,
  );
  if (smooth(bounds, 0.5) !== null)
    return { ok: false, reason: 'the bounds on distances contradict each other' };
  const pairs = pairBounds(bounds);
  const heavy: number[] = [];
  for (let i = 0; i < n; i++) if (full.elements[i] !== 1) heavy.push(i);
  let reason = 'no movement was found';
  for (const hold of HOLDS) {
    for (let trial = 0; trial < TRIALS; trial++) {
      const x = places.slice();
      // A small push lets a centre leave the plane it has to pass.
      for (let i = 0; i < x.length; i++) x[i]! += 0.1 * (trial + 1) * (random() - 0.5);
      const restraint: PlaceRestraint = { atoms: heavy, places, force: hold, free: 0.1 };
      const turnOver = refinementError(
        pairs,
        volumes,
        flat.flatAtoms,
        { volume: 2, fourth: 0, flat: 0.02 },
        3,
      );
      const settle = refinementError(
        pairs,
        volumes,
        flat.flatAtoms,
        { volume: 0.5, fourth: 0, flat: 0.1 },
        3,
      );
      minimise((at, g) => turnOver(at, g) + placeEnergy(restraint, at, g), x, {
        iterations: 400,
        gradient: 1e-3,
        step: 0.3,
      });
      minimise(
        (at, g) => 5 * settleScaled(settle, at, g) + placeEnergy({ ...restraint, force: 0.1 * hold }, at, g),
        x,
        {
          iterations: 400,
          gradient: 1e-3,
          step: 0.2,
        },
      );
      if (building.field)
        relax(
          building.field,
          x,
          (at, g) => placeEnergy({ ...restraint, force: 20 * hold }, at, g),
          600,
          0.05,
        );
      const model: Molecule = { ...full, coordinates: x, stated: [] };
      const wrong = wrongUnits(volumes, x, 3, LEAST_SHARE);
      const missed = unitsMissed(model, asked);
      if (wrong.length > 0 || missed.length > 0) {
        reason = `${unitName(asked[wrong[0] ?? -1] ?? missed[0]!)} would not take the hand asked for`;
      } else if (piercedRings(full, rings, x) > 0) reason = 'a bond would pass through a ring';
      else if (brokenBonds(full, geometry.lengths, x) > 0 || collisions(full, sep, x) > 0) {
        reason = 'the movement would break bonds or make atoms collide';
      } else {
        let sum = 0;
        for (const i of heavy) for (let c = 0; c < 3; c++) sum += (x[3 * i + c]! - places[3 * i + c]!) ** 2;
        return {
          ok: true,
          molecule: model,
          repaired: wrongBefore,
          before,
          after: energyOf(x),
          movement: Math.sqrt(sum / heavy.length),
          warnings: building.warnings,
        };
      }
    }
  }
  return { ok: false, reason };
}

function settleScaled(
  objective: (x: Float64Array, g: Float64Array) => number,
  x: Float64Array,
  g: Float64Array,
): number {
  const own = new Float64Array(g.length);
  const value = objective(x, own);
  for (let i = 0; i < g.length; i++) g[i]! += 5 * own[i]!;
  return value;
}

/** A unit with its implicit hydrogen replaced by the atom it has become. */
function inFull(unit: StereoUnit, full: Molecule): StereoUnit {
  return {
    ...unit,
    ends: unit.ends.map(end => ({
      atom: end.atom,
      ligands: end.ligands.map(ligand => {
        if (ligand !== -1) return ligand;
        for (let k = full.neighbourStart[end.atom]!; k < full.neighbourStart[end.atom + 1]!; k++) {
          const other = full.neighbours[k]!;
          if (full.elements[other] === 1 && !end.ligands.includes(other)) return other;
        }
        return ligand;
      }),
    })),
  };
}
