/** The summary of a run by compound: counts by relation, the units that invert most, the spread of firmness, the odd ones out. */
import type { Relation, Verdict } from '../docket.ts';
import { columns, figure } from '../record/text.ts';
import type { EntryDigest } from './check-digest.ts';

/** Steps of firmness kept for the quantiles of a unit: 0.01. */
const STEPS = 101;
/** Most odd or distorted entries named for each compound. */
const NAMED = 20;
/** Spread below the median, in steps of the median absolute deviation scaled to σ of a normal distribution, beyond which a pose is called distorted. Ours, no source. */
const OUTLIER_DEVIATIONS = 4;
/** Least distance below the median firmness that counts, so that rigid units do not flag noise. Ours, no source. */
const OUTLIER_LEAST = 0.1;

interface UnitSpread {
  readonly label: string;
  readonly histogram: Uint32Array;
  measured: number;
  readonly verdicts: Map<Verdict, number>;
  /** The poses of lowest firmness, lowest first. */
  readonly lowest: { readonly where: string; readonly firmness: number }[];
}

interface ConfigurationCount {
  count: number;
  readonly first: { readonly where: string }[];
}

interface CompoundSummary {
  readonly title: string;
  poses: number;
  readonly relations: Map<Relation, number>;
  readonly configurations: Map<string, ConfigurationCount>;
  undecided: number;
  readonly units: Map<string, UnitSpread>;
}

export interface UnitReport {
  readonly unit: string;
  readonly poses: number;
  readonly verdicts: Readonly<Partial<Record<Verdict, number>>>;
  readonly firmness: {
    readonly least: number;
    readonly lowerQuartile: number;
    readonly median: number;
    readonly upperQuartile: number;
    readonly most: number;
  } | null;
  /** Poses in which the unit is far flatter than in the rest: distorted before it is inverted. */
  readonly outliers: readonly { readonly where: string; readonly firmness: number }[];
}

export interface CompoundReport {
  readonly compound: string;
  readonly poses: number;
  readonly relations: Readonly<Partial<Record<Relation, number>>>;
  /** Those inverted most often first. */
  readonly units: readonly UnitReport[];
  /** Where nothing was intended: how many configurations occur, and the poses not in the commonest. */
  readonly configurations: number | null;
  readonly oddOnesOut: readonly { readonly count: number; readonly where: readonly string[] }[];
  readonly undecided: number;
}

export class Summary {
  readonly #compounds = new Map<string, CompoundSummary>();

  add(digest: EntryDigest): void {
    if (!digest.readable) return;
    let compound = this.#compounds.get(digest.compound);
    if (!compound) {
      compound = {
        title: digest.title,
        poses: 0,
        relations: new Map(),
        configurations: new Map(),
        undecided: 0,
        units: new Map(),
      };
      this.#compounds.set(digest.compound, compound);
    }
    const where = `${digest.file} ${digest.entry}${digest.name ? ` ${digest.name}` : ''}`;
    compound.poses++;
    if (digest.relation !== null) increment(compound.relations, digest.relation);
    else if (digest.configuration === null) compound.undecided++;
    else {
      const known = compound.configurations.get(digest.configuration);
      if (known) {
        known.count++;
        if (known.first.length < NAMED) known.first.push({ where });
      } else compound.configurations.set(digest.configuration, { count: 1, first: [{ where }] });
    }
    for (const unit of digest.units) {
      let spread = compound.units.get(unit.key);
      if (!spread) {
        spread = {
          label: unit.label,
          histogram: new Uint32Array(STEPS),
          measured: 0,
          verdicts: new Map(),
          lowest: [],
        };
        compound.units.set(unit.key, spread);
      }
      if (unit.verdict !== null) increment(spread.verdicts, unit.verdict);
      if (unit.firmness === null) continue;
      spread.measured++;
      spread.histogram[Math.round(Math.min(1, Math.max(0, unit.firmness)) * (STEPS - 1))]!++;
      keepLowest(spread.lowest, { where, firmness: unit.firmness });
    }
  }

  report(): CompoundReport[] {
    return [...this.#compounds.values()].map(compound => {
      const configurations = [...compound.configurations.values()].sort((a, b) => b.count - a.count);
      const units = [...compound.units.values()].map(unitReport);
      units.sort((a, b) => (b.verdicts.inverted ?? 0) - (a.verdicts.inverted ?? 0));
      return {
        compound: compound.title,
        poses: compound.poses,
        relations: Object.fromEntries(compound.relations),
        units,
        configurations: compound.relations.size > 0 ? null : configurations.length,
        oddOnesOut: configurations
          .slice(1)
          .map(({ count, first }) => ({ count, where: first.map(({ where }) => where) })),
        undecided: compound.undecided,
      };
    });
  }
}

function increment<K>(counts: Map<K, number>, key: K): void {
  counts.set(key, (counts.get(key) ?? 0) + 1);
}

function keepLowest<T extends { readonly firmness: number }>(list: T[], item: T): void {
  const last = list.at(-1);
  if (list.length >= NAMED && last && item.firmness >= last.firmness) return;
  let at = list.length;
  while (at > 0 && list[at - 1]!.firmness > item.firmness) at--;
  list.splice(at, 0, item);
  if (list.length > NAMED) list.pop();
}

/** The firmness below which a share of the poses lie. */
function quantile(histogram: Uint32Array, total: number, share: number): number {
  const wanted = share * (total - 1);
  let seen = 0;
  for (let step = 0; step < STEPS; step++) {
    seen += histogram[step]!;
    if (seen > wanted) return step / (STEPS - 1);
  }
  return 1;
}

/** Median distance from the median, from the histogram. */
function medianDeviation(histogram: Uint32Array, total: number, median: number): number {
  const distances = new Uint32Array(STEPS);
  const centre = Math.round(median * (STEPS - 1));
  for (let step = 0; step < STEPS; step++) distances[Math.abs(step - centre)]! += histogram[step]!;
  return quantile(distances, total, 0.5);
}

/** Scale from a median absolute deviation to σ of a normal distribution. */
const MAD_TO_SIGMA = 1.4826;

function unitReport(spread: UnitSpread): UnitReport {
  const { histogram, measured } = spread;
  const at = (share: number): number => quantile(histogram, measured, share);
  const median = measured > 0 ? at(0.5) : 0;
  const sigma = MAD_TO_SIGMA * medianDeviation(histogram, measured, median);
  const border = median - Math.max(OUTLIER_LEAST, OUTLIER_DEVIATIONS * sigma);
  return {
    unit: spread.label,
    poses: measured,
    verdicts: Object.fromEntries(spread.verdicts),
    firmness:
      measured === 0
        ? null
        : { least: at(0), lowerQuartile: at(0.25), median, upperQuartile: at(0.75), most: at(1) },
    outliers: spread.lowest.filter(({ firmness }) => firmness < border),
  };
}

/** The summary as lines for reading. */
export function summaryText(reports: readonly CompoundReport[]): string {
  const lines: string[] = [];
  for (const report of reports) {
    lines.push(`${report.compound}: ${report.poses} ${report.poses === 1 ? 'entry' : 'entries'}`);
    const relations = Object.entries(report.relations).map(([relation, count]) => `${count} ${relation}`);
    if (relations.length > 0) lines.push(`  ${relations.join(', ')}`);
    if (report.configurations !== null) {
      lines.push(
        `  ${report.configurations} ${report.configurations === 1 ? 'configuration' : 'configurations'}`,
      );
      if (report.undecided > 0) lines.push(`  ${report.undecided} not decided by their coordinates`);
      for (const odd of report.oddOnesOut) {
        const rest = odd.count > odd.where.length ? `, and ${odd.count - odd.where.length} more` : '';
        lines.push(`  odd ones out, ${odd.count}: ${odd.where.join('; ')}${rest}`);
      }
    }
    const rows = report.units.map(({ unit, verdicts, firmness }) => [
      unit,
      Object.entries(verdicts)
        .map(([verdict, count]) => `${count} ${verdict}`)
        .join(', '),
      firmness
        ? `firmness ${figure(firmness.least, 2)} to ${figure(firmness.most, 2)}, median ${figure(firmness.median, 2)}, middle half ${figure(firmness.lowerQuartile, 2)} to ${figure(firmness.upperQuartile, 2)}`
        : '',
    ]);
    lines.push(...columns(rows, '  '));
    for (const { unit, outliers } of report.units) {
      for (const { where, firmness } of outliers) {
        lines.push(`  ${unit} distorted in ${where}: firmness ${figure(firmness, 2)}`);
      }
    }
  }
  return lines.map(line => `${line}\n`).join('');
}
