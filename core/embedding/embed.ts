/** From a graph with a configuration to relaxed coordinates in space: distance geometry, rejection, MMFF94 clean-up, check. */
import { degree, type Molecule } from '../chemistry/molecule.ts';
import { type RingInfo, ringInfo } from '../chemistry/rings.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { askedUnits, unitName, unitsMissed } from './asked.ts';
import { type BoundsInput, distanceBounds } from './bounds.ts';
import { type VolumeConstraints, volumeConstraints, wrongUnits } from './chirality.ts';
import { embedOnce, type PairBounds, pairBounds, refinementError, smoothed } from './distance-geometry.ts';
import { type Part, partsOf } from './fragments.ts';
import { addHydrogens } from './hydrogens.ts';
import { type IdealGeometry, idealGeometry } from './ideal-geometry.ts';
import { minimise } from './minimise.ts';
import { type Planarity, planarity } from './planarity.ts';
import { seededRandom } from './random.ts';
import { brokenBonds, collisions, piercedRings } from './rejection.ts';
import type { EmbeddingTables } from './resources.ts';
import type { Bounds } from './smoothing.ts';
import { type BuildingField, buildingField } from './stand-in.ts';

export interface EmbedOptions {
  /** Fixes every random choice; 1 when left out. */
  readonly seed?: number;
  /** Most attempts at each connected part; 30 when left out. */
  readonly attempts?: number;
  /** Starts of which the one lowest in energy is relaxed to the end; 5 when left out. */
  readonly starts?: number;
  /** Units that replace or add to those of the molecule, with explicit hydrogens as ligands where they have become atoms. */
  readonly units?: readonly StereoUnit[];
  /** Aborts between attempts. */
  readonly signal?: AbortSignal;
}

/** A model in space. */
export interface Model {
  /** All hydrogens listed, `dimension` 3. */
  readonly molecule: Molecule;
  /** MMFF94 energy in kcal/mol, the sum over connected parts; null where the force field has no types or stand-ins were used. */
  readonly energy: number | null;
  readonly warnings: readonly string[];
  readonly attempts: number;
}

export type EmbedResult =
  | ({ readonly ok: true } & Model)
  | { readonly ok: false; readonly reason: string; readonly attempts: number };

const DEFAULT_ATTEMPTS = 30;
/** Å between the boxes of connected parts that are set side by side. */
const GAP = 3;
/** Share of the refinement error per atom above which a start is not worth relaxing (ours, no source). */
const ERROR_PER_ATOM = 0.06;
/** Share of the least volume that a raw start, and a relaxed model, must have. */
const RAW_SHARE = 0.6;
const RELAXED_SHARE = 0.35;
/** Clean-up ends at this root mean square gradient, kcal mol⁻¹ Å⁻¹. */
const CLEAN_GRADIENT = 0.02;
const CLEAN_ITERATIONS = 1500;
/** The same for telling starts apart. */
const COARSE_GRADIENT = 0.5;
const COARSE_ITERATIONS = 80;
/** Starts of which the lowest is relaxed to the end. */
const DEFAULT_STARTS = 5;

/** Coordinates in Å and their energy in kcal/mol, null where MMFF94 does not cover the molecule. */
export interface Start {
  readonly x: Float64Array;
  readonly energy: number | null;
}

/** A connected part, prepared for as many attempts as are wanted. */
export class PartBuilder {
  readonly molecule: Molecule;
  readonly asked: readonly StereoUnit[];
  readonly open: readonly StereoUnit[];
  readonly field: BuildingField;
  readonly rings: RingInfo;
  readonly geometry: IdealGeometry;
  readonly volumes: VolumeConstraints;
  readonly sep: Uint8Array;
  /** Holds cumulenes at right angles in the clean-up: MMFF94 has no torsion about a linear row of atoms. */
  private readonly hold: ((x: Float64Array, g: Float64Array) => number) | null;
  private readonly settled: { bounds: Bounds; pairs: PairBounds; planarity: Planarity } | null;
  /** Reasons for rejected attempts and how often each came. */
  readonly rejected = new Map<string, number>();
  attempts = 0;

  constructor(molecule: Molecule, tables: EmbeddingTables, extra: readonly StereoUnit[] = []) {
    this.molecule = molecule;
    const { asked, open } = askedUnits(molecule, extra);
    this.asked = asked;
    this.open = open;
    this.field = buildingField(molecule, tables.mmff94);
    this.rings = ringInfo(molecule);
    this.geometry = idealGeometry(molecule, this.field.field);
    this.volumes = volumeConstraints(molecule, asked, this.geometry);
    this.sep = new Uint8Array(molecule.atomCount ** 2);
    this.hold = cumuleneHold(asked, this.volumes);
    // With nothing left to chance about flat bonds the bounds are the same for all attempts.
    let drawn = false;
    const shape = this.shape(() => {
      drawn = true;
      return 0;
    });
    this.settled = drawn ? null : this.bound(shape);
  }

  private shape(random: () => number): Planarity {
    return planarity(this.molecule, this.rings, this.field.field, this.asked, random);
  }

  private bound(shape: Planarity): { bounds: Bounds; pairs: PairBounds; planarity: Planarity } | null {
    const input: BoundsInput = {
      molecule: this.molecule,
      rings: this.rings,
      geometry: this.geometry,
      planarBonds: shape.planarBonds,
      cis: shape.cis,
    };
    this.sep.fill(0);
    const bounds = smoothed(distanceBounds(input, this.sep), this.sep);
    return bounds ? { bounds, pairs: pairBounds(bounds), planarity: shape } : null;
  }

  private reject(reason: string): null {
    this.rejected.set(reason, (this.rejected.get(reason) ?? 0) + 1);
    return null;
  }

  /** No acyclic bond about which heavy atoms turn, and no ring that could pucker: one start is as good as another. */
  get isRigid(): boolean {
    const { molecule, rings, field } = this;
    if (field.field === null) return true;
    for (let b = 0; b < molecule.bondCount; b++) {
      if (molecule.bondOrders[b] !== 1 || field.field.typing.aromatic.bonds[b] === 1) continue;
      const i = molecule.bondAtoms[2 * b]!;
      const j = molecule.bondAtoms[2 * b + 1]!;
      if (molecule.elements[i] === 1 || molecule.elements[j] === 1) continue;
      if (
        rings.bondInRing[b] === 1
          ? rings.bondRingSize[b]! > 5
          : degree(molecule, i) > 1 && degree(molecule, j) > 1
      )
        return false;
    }
    return true;
  }

  /** One attempt: coordinates in Å and the energy, or null with the reason noted. */
  attempt(random: () => number, coarse = false): Start | null {
    this.attempts++;
    const { molecule } = this;
    const n = molecule.atomCount;
    if (n === 1) return { x: new Float64Array(3), energy: this.field.exact ? 0 : null };
    const ready = this.settled ?? this.bound(this.shape(random));
    if (ready === null) return this.reject('the bounds on distances contradict each other');
    const flat = ready.planarity.flatAtoms;
    const { x, error } = embedOnce(ready.bounds, ready.pairs, this.volumes, flat, random, this.attempts > 1);
    if (!(error < ERROR_PER_ATOM * n)) return this.reject('distances could not be satisfied');
    const wrong = wrongUnits(this.volumes, x, 3, RAW_SHARE);
    if (wrong.length > 0)
      return this.reject(`${unitName(this.asked[wrong[0]!]!)} would not take the hand asked for`);
    if (piercedRings(molecule, this.rings, x) > 0) return this.reject('a bond passes through a ring');
    return this.relaxed(x, coarse);
  }

  /** Cleans coordinates up (only roughly when `coarse`, to tell starts apart) and checks them. */
  relaxed(x: Float64Array, coarse = false): Start | null {
    const { field } = this.field;
    let energy: number | null = null;
    if (field) {
      const hold = this.hold;
      const objective = hold
        ? (at: Float64Array, g: Float64Array) => field.energy(at, g) + hold(at, g)
        : (at: Float64Array, g: Float64Array) => field.energy(at, g);
      const clean = minimise(objective, x, {
        iterations: coarse ? COARSE_ITERATIONS : CLEAN_ITERATIONS,
        gradient: coarse ? COARSE_GRADIENT : CLEAN_GRADIENT,
        step: 0.3,
        stall: 1e-5,
      });
      if (!Number.isFinite(clean.value)) return this.reject('the energy could not be minimised');
      energy = !this.field.exact ? null : hold ? field.energy(x, new Float64Array(x.length)) : clean.value;
    }
    const reason = this.fault(x);
    return reason === null ? { x, energy } : this.reject(reason);
  }

  /** What is wrong with a model, or null. */
  fault(x: Float64Array): string | null {
    const { molecule } = this;
    const wrong = wrongUnits(this.volumes, x, 3, RELAXED_SHARE);
    if (wrong.length > 0) return `${unitName(this.asked[wrong[0]!]!)} lost the hand asked for on relaxing`;
    if (piercedRings(molecule, this.rings, x) > 0) return 'a bond passes through a ring';
    if (brokenBonds(molecule, this.geometry.lengths, x) > 0) return 'a bond is stretched beyond belief';
    if (collisions(molecule, this.sep, x) > 0) return 'atoms collide';
    const missed = unitsMissed({ ...molecule, coordinates: x, dimension: 3 }, this.asked);
    return missed.length > 0 ? `${unitName(missed[0]!)} is not as asked` : null;
  }

  /** Why no attempt succeeded. */
  refusal(): string {
    const reasons = [...this.rejected]
      .sort((a, b) => b[1] - a[1])
      .map(([reason, count]) => `${reason} (${count})`);
    return `no model after ${this.attempts} attempts: ${reasons.join('; ')}`;
  }
}

/** Weight of the hold on cumulenes, kcal mol⁻¹ Å⁻⁶. */
const CUMULENE_HOLD = 5;
const NO_PAIRS: PairBounds = { count: 0, atoms: new Int32Array(0), squares: new Float64Array(0) };

function cumuleneHold(
  asked: readonly StereoUnit[],
  volumes: VolumeConstraints,
): ((x: Float64Array, g: Float64Array) => number) | null {
  const held: number[] = [];
  for (let t = 0; t < volumes.count; t++) if (asked[volumes.unit[t]!]!.kind === 'cumulene') held.push(t);
  if (held.length === 0) return null;
  const subset: VolumeConstraints = {
    count: held.length,
    atoms: Int32Array.from(held.flatMap(t => [...volumes.atoms.subarray(4 * t, 4 * t + 4)])),
    sign: Int8Array.from(held, t => volumes.sign[t]!),
    least: Float64Array.from(held, t => volumes.least[t]!),
    unit: Int32Array.from(held, t => volumes.unit[t]!),
  };
  return refinementError(
    NO_PAIRS,
    subset,
    new Int32Array(0),
    { volume: CUMULENE_HOLD, fourth: 0, flat: 0 },
    3,
  );
}

/** Parts of a molecule with all hydrogens, each prepared; `units` are numbered as in the whole. */
export function prepare(
  molecule: Molecule,
  tables: EmbeddingTables,
  units: readonly StereoUnit[] = [],
): { readonly full: Molecule; readonly parts: { readonly part: Part; readonly builder: PartBuilder }[] } {
  const full = addHydrogens(molecule);
  const parts = partsOf(full).map(part => {
    const place = new Map(part.atoms.map((atom, at) => [atom, at]));
    const extra = units
      .filter(unit => place.has(unit.atoms[0]!))
      .map(unit => ({
        ...unit,
        atoms: unit.atoms.map(atom => place.get(atom) ?? atom),
        ends: unit.ends.map(end => ({
          atom: place.get(end.atom) ?? end.atom,
          ligands: end.ligands.map(ligand => (ligand < 0 ? ligand : (place.get(ligand) ?? ligand))),
        })),
      }));
    return { part, builder: new PartBuilder(part.molecule, tables, extra) };
  });
  return { full, parts };
}

/** Sets the parts side by side along x. */
export function joined(
  full: Molecule,
  parts: readonly { readonly atoms: readonly number[]; readonly x: Float64Array }[],
): Molecule {
  const coordinates = new Float64Array(3 * full.atomCount);
  let right = 0;
  for (const { atoms, x } of parts) {
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    const middle = [0, 0];
    for (let i = 0; i < atoms.length; i++) {
      low = Math.min(low, x[3 * i]!);
      high = Math.max(high, x[3 * i]!);
      middle[0]! += x[3 * i + 1]! / atoms.length;
      middle[1]! += x[3 * i + 2]! / atoms.length;
    }
    for (let i = 0; i < atoms.length; i++) {
      const to = 3 * atoms[i]!;
      coordinates[to] = x[3 * i]! - low + right;
      coordinates[to + 1] = x[3 * i + 1]! - middle[0]!;
      coordinates[to + 2] = x[3 * i + 2]! - middle[1]!;
    }
    right += high - low + GAP;
  }
  return { ...full, coordinates, dimension: 3, bondMarks: new Uint8Array(full.bondCount), stated: [] };
}

/**
 * Builds one relaxed model of a molecule with the configuration that its notation, drawing or coordinates state.
 *
 * Units about which nothing is stated come out as chance has it, and a warning names them.
 */
export function embed(molecule: Molecule, tables: EmbeddingTables, options: EmbedOptions = {}): EmbedResult {
  if (molecule.atomCount === 0) return { ok: false, reason: 'the molecule has no atoms', attempts: 0 };
  const { full, parts } = prepare(molecule, tables, options.units);
  const random = seededRandom(options.seed ?? 1);
  const most = options.attempts ?? DEFAULT_ATTEMPTS;
  const done: { atoms: readonly number[]; x: Float64Array }[] = [];
  let energy: number | null = 0;
  let attempts = 0;
  const warnings: string[] = [];
  for (const { part, builder } of parts) {
    const wanted = builder.isRigid ? 1 : (options.starts ?? DEFAULT_STARTS);
    const starts: Start[] = [];
    while (starts.length < wanted && builder.attempts < most) {
      if (options.signal?.aborted)
        return { ok: false, reason: 'cancelled', attempts: attempts + builder.attempts };
      const start = builder.attempt(random, wanted > 1);
      if (start !== null) starts.push(start);
    }
    starts.sort((a, b) => (a.energy ?? 0) - (b.energy ?? 0));
    let found = starts[0] ?? null;
    if (wanted > 1) {
      found = null;
      for (let s = 0; found === null && s < starts.length; s++) found = builder.relaxed(starts[s]!.x);
    }
    attempts += builder.attempts;
    if (found === null) return { ok: false, reason: builder.refusal(), attempts };
    energy = energy === null || found.energy === null ? null : energy + found.energy;
    warnings.push(...partWarnings(builder));
    done.push({ atoms: part.atoms, x: found.x });
  }
  if (parts.length > 1)
    warnings.push(`${parts.length} separate parts are set side by side; their places mean nothing`);
  return { ok: true, molecule: joined(full, done), energy, warnings, attempts };
}

/** What a reader must know of the model of a part. */
export function partWarnings(builder: PartBuilder): string[] {
  const warnings = [...builder.field.warnings];
  if (builder.field.field === null) {
    warnings.push(
      'no force field covers this part: the model satisfies distances and configuration and is not relaxed',
    );
  }
  if (builder.asked.some(unit => unit.kind === 'cumulene' && !unit.planar)) {
    warnings.push(
      'MMFF94 has no torsion about cumulated double bonds; their ends were held near right angles',
    );
  }
  const open = builder.open.filter(unit => unit.labile === null);
  if (open.length > 0) {
    warnings.push(`not stated, so as chance has it: ${open.map(unitName).join(', ')}`);
  }
  return warnings;
}
