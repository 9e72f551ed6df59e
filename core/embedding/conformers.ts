/** Ensembles of conformers: built one by one, those alike under the symmetry of the graph left out, ordered by energy. */
import type { Molecule } from '../chemistry/molecule.ts';
import { superpose } from '../geometry/superposition.ts';
import { type HeavyAutomorphisms, heavyAutomorphisms } from './automorphisms.ts';
import { embed, type EmbedOptions, joined, type Model, partWarnings, prepare } from './embed.ts';
import { seededRandom } from './random.ts';
import type { EmbeddingTables } from './resources.ts';

export interface ConformerOptions extends EmbedOptions {
  /** Conformers wanted. */
  readonly count: number;
  /** Heavy-atom deviation in Å below which two conformers count as one; 0.5 when left out. */
  readonly rmsd?: number;
  /** Energy above the best in kcal/mol beyond which a conformer is left out; 15 when left out. */
  readonly window?: number;
  /** Called after each attempt with the conformers so far. */
  readonly progress?: (found: number, wanted: number) => void;
}

export type EnsembleResult =
  | {
      readonly ok: true;
      /** Best energy first. */
      readonly models: readonly Model[];
      /** Models built that were alike, or too high in energy. */
      readonly dropped: number;
      readonly cancelled: boolean;
    }
  | { readonly ok: false; readonly reason: string; readonly attempts: number };

const DEFAULT_RMSD = 0.5;
const DEFAULT_WINDOW = 15;
/** Models built for each conformer wanted before the search counts as exhausted. */
const TRIES_PER_CONFORMER = 4;
const FIRST_TRIES = 30;

/** Heavy-atom deviation in Å of two sets of coordinates after superposition, the least over the mappings. */
export function symmetricRmsd(
  symmetry: HeavyAutomorphisms,
  first: Float64Array,
  second: Float64Array,
): number {
  const fixed = picked(symmetry.atoms, first);
  const moving = new Float64Array(fixed.length);
  let best = Number.POSITIVE_INFINITY;
  for (const mapping of symmetry.mappings) {
    for (let i = 0; i < mapping.length; i++) {
      const from = 3 * symmetry.atoms[mapping[i]!]!;
      moving[3 * i] = second[from]!;
      moving[3 * i + 1] = second[from + 1]!;
      moving[3 * i + 2] = second[from + 2]!;
    }
    best = Math.min(best, superpose(moving, fixed).rmsd);
  }
  return best;
}

function picked(atoms: Int32Array, x: Float64Array): Float64Array {
  const result = new Float64Array(3 * atoms.length);
  atoms.forEach((atom, i) => result.set(x.subarray(3 * atom, 3 * atom + 3), 3 * i));
  return result;
}

interface Found {
  readonly x: Float64Array;
  readonly energy: number | null;
}

/** Conformers of a molecule with the configuration stated; of a salt, those of its largest part with one model of each other part. */
export function conformers(
  molecule: Molecule,
  tables: EmbeddingTables,
  options: ConformerOptions,
): EnsembleResult {
  if (molecule.atomCount === 0) return { ok: false, reason: 'the molecule has no atoms', attempts: 0 };
  if (options.count === 1) {
    const one = embed(molecule, tables, options);
    return one.ok ? { ok: true, models: [one], dropped: 0, cancelled: false } : one;
  }
  const { full, parts } = prepare(molecule, tables, options.units);
  const random = seededRandom(options.seed ?? 1);
  const largest = parts.reduce((a, b) => (b.part.atoms.length > a.part.atoms.length ? b : a));
  const ensembles: { atoms: readonly number[]; list: readonly Found[] }[] = [];
  const warnings: string[] = [];
  let attempts = 0;
  let dropped = 0;
  let cancelled = false;
  for (const each of parts) {
    const { builder, part } = each;
    const wanted = each === largest ? options.count : 1;
    const kept: Found[] = [];
    const symmetry = wanted > 1 ? heavyAutomorphisms(builder.molecule) : null;
    const most =
      wanted === 1 ? (options.attempts ?? FIRST_TRIES) : FIRST_TRIES + TRIES_PER_CONFORMER * wanted;
    while (kept.length < wanted && builder.attempts < most) {
      if (options.signal?.aborted) {
        cancelled = true;
        break;
      }
      if (kept.length === 0 && builder.attempts >= (options.attempts ?? FIRST_TRIES)) break;
      const found = builder.attempt(random);
      options.progress?.(kept.length, wanted);
      if (found === null) continue;
      const limit = options.rmsd ?? DEFAULT_RMSD;
      const alike = symmetry
        ? kept.findIndex(other => symmetricRmsd(symmetry, other.x, found.x) < limit)
        : -1;
      if (alike < 0) kept.push(found);
      else {
        dropped++;
        const other = kept[alike]!;
        if (found.energy !== null && other.energy !== null && found.energy < other.energy)
          kept[alike] = found;
      }
    }
    attempts += builder.attempts;
    if (kept.length === 0) {
      return { ok: false, reason: cancelled ? 'cancelled' : builder.refusal(), attempts };
    }
    kept.sort((a, b) => (a.energy ?? 0) - (b.energy ?? 0));
    const best = kept[0]!.energy;
    const within = kept.filter(
      ({ energy }) => energy === null || best === null || energy - best <= (options.window ?? DEFAULT_WINDOW),
    );
    dropped += kept.length - within.length;
    ensembles.push({ atoms: part.atoms, list: within });
    warnings.push(...partWarnings(builder));
  }
  if (parts.length > 1)
    warnings.push(`${parts.length} separate parts are set side by side; their places mean nothing`);
  const count = Math.max(...ensembles.map(({ list }) => list.length));
  const models = Array.from({ length: count }, (_, c): Model => {
    const chosen = ensembles.map(({ atoms, list }) => ({ atoms, ...list[Math.min(c, list.length - 1)]! }));
    const energy = chosen.some(each => each.energy === null)
      ? null
      : chosen.reduce((sum, each) => sum + (each.energy ?? 0), 0);
    return { molecule: joined(full, chosen), energy, warnings, attempts };
  });
  return { ok: true, models, dropped, cancelled };
}
