/** What a record holds before it takes a form: the check's input, settings and outcome, the same for HTML and PDF. */
import type { Relation, Settings, Verdict } from '../docket.ts';
import type { EntryRecord, UnitRecord } from './json.ts';

/** A file that took part, and what it was. */
export interface RecordInput {
  readonly name: string;
  /** Lower-case hexadecimal; null for standard input or a structure given as an argument. */
  readonly sha256: string | null;
  readonly role: 'models' | 'intention';
}

/** A remark a person made on a unit. */
export interface RecordMark {
  readonly entry: number;
  /** Index in the entry's units. */
  readonly unit: number;
  readonly mark: 'accepted' | 'rejected' | 'question';
  readonly remark: string;
}

/** A figure that belongs to a unit of an entry. */
export interface RecordFigure {
  readonly file: string;
  readonly entry: number;
  readonly unit: number;
  readonly svg: string;
}

export interface Report {
  readonly title: string;
  /** ISO 8601 date; the only thing that differs between two records of the same input and settings. */
  readonly date: string;
  readonly version: string;
  readonly inputs: readonly RecordInput[];
  readonly settings: Settings;
  readonly entries: readonly EntryRecord[];
  readonly figures: readonly RecordFigure[];
  readonly marks: readonly RecordMark[];
}

export interface ReportSummary {
  readonly entries: number;
  readonly unreadable: number;
  readonly units: number;
  readonly verdicts: ReadonlyMap<Verdict, number>;
  readonly relations: ReadonlyMap<Relation, number>;
  /** Units whose coordinates do not decide, intended or not. */
  readonly flat: number;
}

/** Counts for the top of a record. */
export function summarise(entries: readonly EntryRecord[]): ReportSummary {
  const verdicts = new Map<Verdict, number>();
  const relations = new Map<Relation, number>();
  let units = 0;
  let unreadable = 0;
  let flat = 0;
  for (const entry of entries) {
    if (entry.error !== null && entry.units.length === 0) unreadable++;
    if (entry.relation !== null) relations.set(entry.relation, (relations.get(entry.relation) ?? 0) + 1);
    for (const unit of entry.units) {
      units++;
      if (unit.state === 'flat' && unit.labile === undefined) flat++;
      if (unit.verdict !== null) verdicts.set(unit.verdict, (verdicts.get(unit.verdict) ?? 0) + 1);
    }
  }
  return { entries: entries.length, unreadable, units, verdicts, relations, flat };
}

const MINUS = '\u2212';

/** A number with a true minus sign; an en dash where there is none. */
export function number(value: number | null | undefined, digits: number): string {
  return value === null || value === undefined ? '–' : value.toFixed(digits).replace('-', MINUS);
}

/** A measured value with its uncertainty, as many digits as the uncertainty leaves. */
export function measured(value: number | null, sigma: number | null, digits: number): string {
  if (value === null) return '–';
  if (sigma === null) return number(value, digits);
  const kept = sigma > 0 ? Math.max(digits, Math.min(4, Math.ceil(-Math.log10(sigma)) + 1)) : digits;
  return `${number(value, kept)} ± ${number(sigma, kept)}`;
}

/** What a unit is called in a table. */
export function unitName(unit: UnitRecord): string {
  const atoms = unit.labels.length > 0 ? unit.labels.join('–') : 'not in the model';
  return unit.residue === undefined ? atoms : `${atoms} of ${unit.residue}`;
}

/** The rules that made the ranking, "1a, 2". */
export function decidingRules(unit: UnitRecord): string {
  const rules = new Set<string>();
  for (const { decidedBy } of unit.ranking) if (decidedBy !== undefined) rules.add(decidedBy);
  return [...rules].sort().join(', ');
}

/** The letter as a reader should see it: starred where the scope is relative or racemic, words where there is none. */
export function letterText(unit: UnitRecord): string {
  if (unit.descriptor === null) return unit.state === 'clear' ? 'no letter' : unit.state;
  return unit.scope === 'racemic' || unit.scope === 'relative' ? `${unit.descriptor}*` : unit.descriptor;
}
