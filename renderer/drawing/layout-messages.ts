/** The messages between the window and the worker that lays structures out. */
import { z } from 'zod';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';

const count = z.number().int().nonnegative();

export const layoutRequest = z.strictObject({
  request: count,
  molecule: z.custom<Molecule>(
    value => typeof value === 'object' && value !== null && 'bondAtoms' in value && 'neighbourStart' in value,
  ),
  /** Atoms around which a large molecule is drawn. */
  focus: z.array(count),
  units: z.custom<readonly LabelledUnit[]>(value => Array.isArray(value)),
});
export type LayoutRequest = z.infer<typeof layoutRequest>;

export const layoutAnswer = z.strictObject({
  request: count,
  /** x and y of each atom, NaN where it is not drawn; null where no layout could be made. */
  layout: z.custom<Float64Array>(value => value instanceof Float64Array).nullable(),
  problem: z.string().nullable(),
});
export type LayoutAnswer = z.infer<typeof layoutAnswer>;
