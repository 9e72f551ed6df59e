/** The judgement of one entry for the window: examined, set against its intention, as a model in full and as a line of the ledger. */
import type { Molecule } from '../../core/chemistry/molecule.ts';
import type { EntryComparison, Examined } from '../../core/comparison/compare.ts';
import { checkResidues } from '../../core/biopolymer/checks.ts';
import { distortionOf } from '../../core/comparison/distortion.ts';
import { identityOf } from '../../core/comparison/consistency.ts';
import { Intention } from '../../core/comparison/intention.ts';
import { Intentions, type IntentionSource } from '../../core/comparison/intentions.ts';
import { parseTyped } from '../../core/comparison/typed.ts';
import { alternativeDifferences } from '../../core/crystal/alternatives.ts';
import { crystalRecord } from '../../core/crystal/record.ts';
import type { Relation, Settings, Verdict } from '../../core/docket.ts';
import { examine } from '../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry, type EntryError } from '../../core/formats/format.ts';
import { smilesFormat } from '../../core/formats/smiles.ts';
import { type EntryRecord, entryRecord, unreadableRecord } from '../../core/record/json.ts';
import type { RecordFigure } from '../../core/record/report.ts';
import { sightFigure } from '../../core/record/sight-figure.ts';
import { residueName, unitName } from '../caption.ts';
import type { Finding, Model, Row, ShownVerdict } from './protocol.ts';

/** The intentions of a job, with their structures by name for the drawing. */
export interface Intended {
  readonly name: string;
  readonly intentions: Intentions;
  readonly structures: readonly Intention[];
}

/** Reads an intention given as text: descriptors on units, or a SMILES. @throws Error that says why it is neither. */
export function intendedFromText(text: string, settings: Settings): Intended {
  const typed = parseTyped(text, true);
  if (typed) return { name: text, intentions: Intentions.typed(typed), structures: [] };
  const raw = { entry: 1, line: 1, bytes: new TextEncoder().encode(`${text}\n`) };
  const [entry] = smilesFormat.parse(raw, DEFAULT_LIMITS);
  if (entry?.molecule && !entry.error) return intendedFromEntries(text, [entry], settings);
  const loose = parseTyped(text, false);
  if (loose) return { name: text, intentions: Intentions.typed(loose), structures: [] };
  throw new Error(
    `"${text}" is neither descriptors on units (C7=R, C9=S) nor a SMILES: ${entry?.error?.message ?? 'it is empty'}`,
  );
}

/** Makes intentions of the readable ones of some entries. */
export function intendedFromEntries(name: string, entries: readonly Entry[], settings: Settings): Intended {
  const structures: Intention[] = [];
  const sources: IntentionSource[] = [];
  for (const entry of entries) {
    const { molecule } = entry;
    if (!molecule || entry.error) continue;
    const intention = new Intention(entry.name, molecule, examine(molecule, settings));
    structures.push(intention);
    sources.push({ name: entry.name, load: () => intention });
  }
  return { name, intentions: Intentions.of(sources), structures };
}

/** A judged entry with what only its record needs. */
interface Judged {
  readonly model: Model;
  readonly comparison: EntryComparison | null;
}

/** Judges one entry. Never throws for what the entry holds. */
export function judgeEntry(
  entry: Entry,
  place: { readonly index: number; readonly file: number },
  intended: Intended | null,
  settings: Settings,
): Model {
  return judge(entry, place, intended, settings).model;
}

/** Figures of doubtful units that a record carries at most. */
export const MOST_FIGURES = 200;
/** Edge of a figure in a record, px. */
const FIGURE_SIZE = 360;

/** The record of one entry, and figures of its doubtful units (of all of them where nothing was intended). */
export function recordOf(
  entry: Entry,
  file: string,
  intended: Intended | null,
  settings: Settings,
): { readonly record: EntryRecord; readonly figures: readonly RecordFigure[] } {
  const { model, comparison } = judge(entry, { index: 0, file: 0 }, intended, settings);
  const { molecule, docket } = model;
  if (!molecule || !docket) {
    const error = model.error ?? {
      code: 'no-structure',
      message: 'the entry holds no structure',
      line: null,
    };
    return { record: unreadableRecord(file, entry, error), figures: [] };
  }
  const identity = intended ? null : identityOf(molecule, docket);
  const record = entryRecord({
    file,
    entry,
    molecule,
    docket,
    comparison,
    intention: model.intention,
    error: model.error,
    relation: model.relation,
    compound: identity?.compound ?? null,
    configuration: identity?.configuration ?? null,
    places: identity?.places ?? null,
    distorted: model.distorted,
    alternatives: alternativeDifferences(molecule, docket, entry.alternatives ?? [], each =>
      examine(each, settings),
    ),
  });
  const figures: RecordFigure[] = [];
  docket.units.forEach((labelled, unit) => {
    const { intended: wanted, verdict } = model.verdicts[unit]!;
    if (labelled.unit.labile !== null || verdict === 'agrees' || verdict === 'open') return;
    const source = `${file}, entry ${entry.entry}${entry.name === '' ? '' : `, ${entry.name}`}`;
    const svg = sightFigure(molecule, labelled, { size: FIGURE_SIZE, intended: wanted, verdict, source });
    if (svg !== null) figures.push({ file, entry: entry.entry, unit, svg });
  });
  return { record, figures };
}

function judge(
  entry: Entry,
  place: { readonly index: number; readonly file: number },
  intended: Intended | null,
  settings: Settings,
): Judged {
  const base = {
    ...place,
    entry: entry.entry,
    line: entry.line,
    name: entry.name,
    data: entry.data,
    warnings: entry.warnings,
    molecule: null,
    docket: null,
    verdicts: [],
    absent: [],
    relation: null,
    difference: null,
    intention: null,
    intended: null,
    mapping: null,
    distorted: [],
    crystal: null,
    residueFindings: [],
  };
  if (entry.error || !entry.molecule) {
    const error = entry.error ?? {
      code: 'no-structure',
      message: 'the entry holds no structure',
      line: entry.line,
    };
    return { model: { ...base, error }, comparison: null };
  }
  try {
    return judgeMolecule(entry, entry.molecule, place, intended, settings);
  } catch (error) {
    const message = error instanceof Error ? error.message : String(error);
    const failure = { code: 'not-examined', message: `the examination failed: ${message}`, line: entry.line };
    return { model: { ...base, molecule: entry.molecule, error: failure }, comparison: null };
  }
}

function judgeMolecule(
  entry: Entry,
  molecule: Molecule,
  place: { readonly index: number; readonly file: number },
  intended: Intended | null,
  settings: Settings,
): Judged {
  const examineOne = (each: Molecule): Examined => ({ molecule: each, docket: examine(each, settings) });
  let examined = examineOne(molecule);
  let comparison: EntryComparison | null = null;
  let relation: Relation | null = null;
  let error: EntryError | null = null;
  let name: string | null = null;
  if (intended) {
    const choice = intended.intentions.compare(examined, entry.name, examineOne);
    if (choice.kind === 'compared') {
      ({ comparison, name } = choice);
      examined = comparison.examined;
      relation = comparison.relation;
    } else if (choice.kind === 'ambiguous') {
      relation = 'undecided';
      const names = choice.names.map(one => one || 'one without a name').join(', ');
      error = {
        code: 'ambiguous-intention',
        message: `several intentions fit and none is named for this entry: ${names}. Give the entry the name of one`,
        line: entry.line,
      };
    } else relation = 'unmatched';
  }
  const { docket } = examined;
  const verdicts: ShownVerdict[] = docket.units.map(() => ({ intended: null, verdict: null, group: null }));
  for (const unit of comparison?.units ?? []) {
    if (unit.unit === null) continue;
    verdicts[unit.unit] = { intended: unit.intended, verdict: unit.verdict, group: unit.group };
  }
  const structure = intended?.structures.find(each => each.name === name) ?? null;
  const model: Model = {
    ...place,
    entry: entry.entry,
    line: entry.line,
    name: entry.name,
    data: entry.data,
    error,
    warnings: [...new Set([...entry.warnings, ...docket.warnings, ...(comparison?.warnings ?? [])])],
    molecule: examined.molecule,
    docket,
    verdicts,
    absent: (comparison?.units ?? []).filter(({ unit }) => unit === null),
    relation,
    difference: comparison?.difference ?? null,
    intention: name,
    intended: structure?.molecule ?? null,
    mapping: comparison?.mapping ?? null,
    distorted: docket.units.map(unit => distortionOf(examined.molecule, unit)),
    residueFindings: examined.molecule.residues
      ? checkResidues(examined.molecule).findings.map(({ index, message, kind }) => ({
          atom: index,
          message,
          doubtful: kind !== 'dextro',
        }))
      : [],
    crystal: entry.crystal ? crystalRecord(entry.crystal, false) : null,
  };
  return { model, comparison };
}

const VERDICT_LETTERS: Readonly<Record<Verdict, string>> = {
  agrees: 'a',
  inverted: 'i',
  relabelled: 'r',
  flat: 'f',
  open: 'o',
  missing: 'm',
};

/** Relations in which an entry is not what was asked for, whatever its single units say. */
const BAD_RELATIONS: readonly (Relation | null)[] = ['other compound', 'undecided', 'unmatched'];

/** Units of an entry that its line names. */
const MOST_NAMES = 24;

/** The line of the ledger for a judged entry. */
export function rowOf(model: Model): Row {
  const { molecule, docket } = model;
  let letters = '';
  let verdicts = '';
  const doubtful: string[] = [];
  const names: string[] = [];
  let firmness: number | null = null;
  let finding: Finding = model.error ? 'error' : 'none';
  const raise = (to: Finding): void => {
    if (FINDING_ORDER[to] < FINDING_ORDER[finding]) finding = to;
  };
  docket?.units.forEach((labelled, u) => {
    const { unit } = labelled;
    const verdict = model.verdicts[u]?.verdict ?? null;
    letters += labelled.descriptor ?? '·';
    const name = molecule ? unitName(molecule, labelled).replaceAll(' ', '/') : '';
    if (u < MOST_NAMES) names.push(name);
    const state = unit.state === 'flat' ? 'f' : unit.state === 'unspecified' ? 'u' : '-';
    verdicts += verdict === null ? state : VERDICT_LETTERS[verdict];
    if (unit.labile === null && unit.firmness !== null) firmness = Math.min(firmness ?? 1, unit.firmness);
    const flat = verdict === 'flat' || (verdict === null && unit.state === 'flat' && unit.labile === null);
    if (verdict === 'inverted') raise('inverted');
    else if (verdict === 'missing') raise('missing');
    else if (flat) raise('flat');
    else return;
    if (doubtful.length < MOST_NAMES) doubtful.push(name);
  });
  for (const unit of model.absent) {
    if (unit.verdict !== 'missing') continue;
    raise('missing');
    verdicts += 'm';
    letters += '·';
  }
  for (const { atom, doubtful: isDoubtful } of model.residueFindings) {
    if (!isDoubtful) continue;
    raise('residue');
    if (molecule && doubtful.length < MOST_NAMES) doubtful.push(residueName(molecule, atom));
  }
  if (BAD_RELATIONS.includes(model.relation)) raise('relation');
  return {
    index: model.index,
    file: model.file,
    entry: model.entry,
    line: model.line,
    name: model.name,
    formula: docket?.molecules.map(({ formula }) => formula).join('.') ?? '',
    atoms: molecule?.atomCount ?? 0,
    letters,
    names: names.join(' '),
    verdicts,
    doubtful: doubtful.join(', '),
    firmness,
    relation: model.relation,
    finding,
    error: model.error,
  };
}

/** Most urgent first. */
const FINDING_ORDER: Readonly<Record<Finding, number>> = {
  error: 0,
  inverted: 1,
  missing: 2,
  flat: 3,
  residue: 4,
  relation: 5,
  none: 6,
};
