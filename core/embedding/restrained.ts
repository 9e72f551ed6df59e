/** Relaxation under restraints: atoms held near their places, a torsion held at an angle. */
import type { Mmff94 } from './mmff94/energy.ts';
import { minimise } from './minimise.ts';

/** Atoms held to places: no force within `free` Å, a parabola beyond. */
export interface PlaceRestraint {
  readonly atoms: ArrayLike<number>;
  /** Coordinates of all atoms to hold to. */
  readonly places: Float64Array;
  /** kcal mol⁻¹ Å⁻². */
  readonly force: number;
  /** Å. */
  readonly free: number;
}

/** Energy of the restraint; adds the gradient. */
export function placeEnergy(restraint: PlaceRestraint, x: Float64Array, g: Float64Array): number {
  let energy = 0;
  const { atoms, places, force, free } = restraint;
  for (let t = 0; t < atoms.length; t++) {
    const i = 3 * atoms[t]!;
    const dx = x[i]! - places[i]!;
    const dy = x[i + 1]! - places[i + 1]!;
    const dz = x[i + 2]! - places[i + 2]!;
    const d = Math.sqrt(dx * dx + dy * dy + dz * dz);
    if (d <= free) continue;
    const over = d - free;
    energy += force * over * over;
    const slope = (2 * force * over) / d;
    g[i]! += slope * dx;
    g[i + 1]! += slope * dy;
    g[i + 2]! += slope * dz;
  }
  return energy;
}

/** Relaxes `x` in the force field with restraints; returns the energy of the force field alone, kcal/mol. */
export function relax(
  field: Mmff94,
  x: Float64Array,
  extra: ((x: Float64Array, g: Float64Array) => number) | null,
  iterations = 1500,
  gradient = 0.02,
): number {
  minimise((at, g) => field.energy(at, g) + (extra ? extra(at, g) : 0), x, {
    iterations,
    gradient,
    step: 0.3,
    stall: 1e-6,
  });
  return field.energy(x, new Float64Array(x.length));
}
