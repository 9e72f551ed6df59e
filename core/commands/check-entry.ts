/** The check of one entry: read, examined, set against its intention, put on record. */
import type { EntryComparison, Examined } from '../comparison/compare.ts';
import { identityOf } from '../comparison/consistency.ts';
import { distortionOf } from '../comparison/distortion.ts';
import type { Intentions } from '../comparison/intentions.ts';
import type { Molecule } from '../chemistry/molecule.ts';
import { alternativeDifferences } from '../crystal/alternatives.ts';
import { compareIndependent } from '../crystal/independent.ts';
import type { Docket, Settings } from '../docket.ts';
import { examine } from '../examine.ts';
import type { Entry, Format, Limits, RawEntry } from '../formats/format.ts';
import { type EntryRecord, type ErrorRecord, entryRecord, unreadableRecord } from '../record/json.ts';
import type { RecordFigure } from '../record/report.ts';
import { figuresOf } from './check-record.ts';

export interface EntryOptions {
  readonly settings: Settings;
  readonly limits: Limits;
  /** SDF data item that holds the name by which an entry finds its intention. */
  readonly matchBy: string | null;
  /** Units of polymer residues are left out. */
  readonly ligandsOnly: boolean;
  /** The user states that the sample of a crystal structure is enantiopure. */
  readonly enantiopure?: boolean;
}

/** Checks one entry as it stands in its file; more than one record where it holds more than one model. Figures of doubtful units go to `figures` where a list is given. */
export function checkRawEntry(
  raw: RawEntry,
  format: Format,
  file: string,
  intentions: Intentions | null,
  options: EntryOptions,
  figures: RecordFigure[] | null = null,
): EntryRecord[] {
  return format
    .parse(raw, options.limits)
    .map(entry => checkEntry(entry, file, intentions, options, figures));
}

function checkEntry(
  entry: Entry,
  file: string,
  intentions: Intentions | null,
  options: EntryOptions,
  figures: RecordFigure[] | null,
): EntryRecord {
  if (entry.error || !entry.molecule) {
    const error = entry.error ?? {
      code: 'no-structure',
      message: 'the entry holds no structure',
      line: entry.line,
    };
    return unreadableRecord(file, entry, error);
  }
  try {
    return checkMolecule(entry, entry.molecule, file, intentions, options, figures);
  } catch (error) {
    // One entry must not end a run of a million: what went wrong goes on its record.
    const message = error instanceof Error ? error.message : String(error);
    return unreadableRecord(file, entry, {
      code: 'not-examined',
      message: `the examination failed: ${message}`,
      line: entry.line,
    });
  }
}

function checkMolecule(
  entry: Entry,
  molecule: Molecule,
  file: string,
  intentions: Intentions | null,
  options: EntryOptions,
  figures: RecordFigure[] | null,
): EntryRecord {
  const examineOne = (each: Molecule): Examined => ({
    molecule: each,
    docket: examineLigands(each, options),
  });
  let examined = examineOne(molecule);
  let comparison: EntryComparison | null = null;
  let intention: string | null = null;
  let error: ErrorRecord | null = null;
  let relation: EntryRecord['relation'] = null;
  if (intentions) {
    const choice = intentions.compare(examined, nameFor(entry, options.matchBy), examineOne);
    if (choice.kind === 'compared') {
      comparison = choice.comparison;
      examined = comparison.examined;
      intention = choice.name;
      relation = comparison.relation;
    } else if (choice.kind === 'ambiguous') {
      relation = 'undecided';
      error = {
        code: 'ambiguous-intention',
        message: `several intentions fit and none is named for this entry: ${choice.names.map(name => name || 'one without a name').join(', ')}. Give the entry the name of one, or use --match-by`,
        line: entry.line,
      };
    } else relation = 'unmatched';
  }
  const identity = intentions ? null : identityOf(molecule, examined.docket);
  const record = entryRecord({
    file,
    entry,
    molecule: examined.molecule,
    docket: examined.docket,
    comparison,
    intention,
    error,
    relation,
    compound: identity?.compound ?? null,
    configuration: identity?.configuration ?? null,
    places: identity?.places ?? null,
    enantiopure: options.enantiopure ?? false,
    independent:
      entry.crystal && !entry.crystal.macromolecule
        ? compareIndependent(molecule, entry.crystal.operators, entry.crystal.cell, each =>
            examineLigands(each, options),
          )
        : [],
    alternatives: alternativeDifferences(examined.molecule, examined.docket, entry.alternatives ?? [], each =>
      examineLigands(each, options),
    ),
    distorted: examined.docket.units.map(unit => distortionOf(examined.molecule, unit)),
  });
  figures?.push(...figuresOf(record, examined.molecule, examined.docket.units));
  return record;
}

function examineLigands(molecule: Molecule, options: EntryOptions): Docket {
  const docket = examine(molecule, options.settings);
  const { residues } = molecule;
  if (!options.ligandsOnly || !residues) return docket;
  return {
    ...docket,
    units: docket.units.filter(({ unit }) => unit.atoms.some(atom => residues[atom]!.hetero)),
  };
}

/** The name by which an entry finds its intention: a data item where one is named and present, else its title. */
export function nameFor(entry: Entry, matchBy: string | null): string {
  if (matchBy === null) return entry.name;
  return entry.data.find(({ name }) => name === matchBy)?.value.trim() ?? entry.name;
}
