/** What a run remembers of a checked entry: enough for the exit status, the sorting into files and the summary. */
import type { Relation, Verdict } from '../docket.ts';
import type { EntryRecord } from '../record/json.ts';
import { ExitStatus } from './io.ts';

export interface UnitDigest {
  /** The same unit over all entries of a compound. */
  readonly key: string;
  readonly label: string;
  readonly firmness: number | null;
  readonly verdict: Verdict | null;
  readonly distorted: boolean;
}

export interface EntryDigest {
  readonly file: string;
  readonly entry: number;
  readonly name: string;
  readonly compound: string;
  readonly title: string;
  readonly configuration: string | null;
  readonly relation: Relation | null;
  readonly error: { readonly code: string; readonly message: string; readonly line: number | null } | null;
  readonly readable: boolean;
  /** Whether it makes the exit status 1. */
  readonly differs: boolean;
  readonly units: readonly UnitDigest[];
}

const FAILING: ReadonlySet<Relation> = new Set<Relation>(['other compound', 'undecided', 'unmatched']);
const FAILING_VERDICTS: ReadonlySet<Verdict> = new Set<Verdict>(['inverted', 'flat', 'missing']);

/** Digests a record; the units only where a summary is wanted. */
export function digestOf(record: EntryRecord, withUnits: boolean): EntryDigest {
  const readable = record.error === null || record.relation !== null;
  return {
    file: record.file,
    entry: record.entry,
    name: record.name,
    compound: record.intention === undefined ? (record.compound ?? '') : `= ${record.intention}`,
    title: record.intention || record.name || record.formula,
    configuration: record.configuration ?? null,
    relation: record.relation,
    error: record.error,
    readable,
    differs:
      readable &&
      ((record.relation !== null && FAILING.has(record.relation)) ||
        record.units.some(({ verdict }) => verdict !== null && FAILING_VERDICTS.has(verdict))),
    units: withUnits
      ? record.units
          .filter(({ labile }) => labile === undefined)
          .map(unit => ({
            key: unit.intendedAtoms?.join('-') ?? unit.place ?? unit.atoms.join('-'),
            label: (unit.intendedLabels ?? unit.labels).join('='),
            firmness: unit.firmness,
            verdict: unit.verdict,
            distorted: unit.distorted !== undefined,
          }))
      : [],
  };
}

/** Counts towards the exit status. */
export class Outcome {
  checked = 0;
  unreadable = 0;
  differing = 0;

  add(digest: EntryDigest): void {
    if (!digest.readable) this.unreadable++;
    else {
      this.checked++;
      if (digest.differs) this.differing++;
    }
  }

  status(): ExitStatus {
    if (this.unreadable > 0) return this.checked > 0 ? ExitStatus.partly : ExitStatus.unusable;
    return this.differing > 0 ? ExitStatus.differ : ExitStatus.agree;
  }
}
