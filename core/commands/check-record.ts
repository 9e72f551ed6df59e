/** What `check --record` and `--images` leave: the record as a document, a figure for each unit that asks for a look. */
import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { mkdir } from 'node:fs/promises';
import { basename, extname, join, resolve } from 'node:path';
import type { LabelledUnit, Settings } from '../docket.ts';
import type { Molecule } from '../chemistry/molecule.ts';
import type { EntryRecord, UnitRecord } from '../record/json.ts';
import { csvHead, csvLines } from '../record/csv.ts';
import { htmlRecord } from '../record/html.ts';
import type { RecordFigure, RecordInput, Report } from '../record/report.ts';
import { sightFigure } from '../record/sight-figure.ts';
import { writeAtomically } from './atomic-write.ts';
import { UsageError } from './io.ts';

/** Forms a record can take, by the ending of its name. */
export const RECORD_ENDINGS: readonly string[] = ['.html', '.csv'];

/** @throws UsageError when a record cannot be written under this name. */
export function checkRecordName(path: string): void {
  if (!RECORD_ENDINGS.includes(extname(path).toLowerCase())) {
    throw new UsageError(`--record ${path}: the name should end in ${RECORD_ENDINGS.join(' or ')}`);
  }
}

/** Edge of the figures in px. */
const FIGURE_SIZE = 360;

/** Whether a unit is drawn: the doubtful ones where something was intended, all of them otherwise. */
function isDrawn(unit: UnitRecord): boolean {
  if (unit.labile !== undefined) return false;
  return unit.verdict === null || (unit.verdict !== 'agrees' && unit.verdict !== 'open');
}

/** Draws the units of one checked entry that ask for a look. `units` are those of its docket, in the order of its record. */
export function figuresOf(
  record: EntryRecord,
  molecule: Molecule,
  units: readonly LabelledUnit[],
): RecordFigure[] {
  const figures: RecordFigure[] = [];
  units.forEach((labelled, index) => {
    const unit = record.units[index];
    if (unit === undefined || !isDrawn(unit)) return;
    const svg = sightFigure(molecule, labelled, {
      size: FIGURE_SIZE,
      intended: unit.intended,
      verdict: unit.verdict,
      source: `${basename(record.file)}, entry ${record.entry}${record.name === '' ? '' : `, ${record.name}`}`,
    });
    if (svg !== null) figures.push({ file: record.file, entry: record.entry, unit: index, svg });
  });
  return figures;
}

/** SHA-256 of a file, hexadecimal. */
async function digestOf(path: string): Promise<string> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path)) hash.update(chunk as Uint8Array);
  return hash.digest('hex');
}

/** Names and digests of what took part; what is no file has no digest. */
export async function inputsOf(
  cwd: string,
  files: readonly string[],
  intended: string | null,
): Promise<RecordInput[]> {
  const inputs: RecordInput[] = [];
  const add = async (name: string, role: RecordInput['role']): Promise<void> => {
    const sha256 = name === '-' ? null : await digestOf(resolve(cwd, name)).catch(() => null);
    inputs.push({ name: name === '-' ? 'standard input' : name, sha256, role });
  };
  for (const file of files) await add(file, 'models');
  if (intended !== null) await add(intended, 'intention');
  return inputs;
}

/** Writes a record under a name that ends in one of `RECORD_ENDINGS`. */
export async function writeRecord(path: string, report: Report): Promise<void> {
  const pieces =
    extname(path).toLowerCase() === '.csv'
      ? [csvHead(), ...report.entries.map(csvLines)]
      : [...htmlRecord(report)];
  await writeAtomically(path, pieces.join(''));
}

/** Writes figures as `ENTRY-LABEL.svg` into a folder, made if need be; entries of several files get the file's name in front. */
export async function writeFigures(
  folder: string,
  figures: readonly RecordFigure[],
  entries: readonly EntryRecord[],
): Promise<void> {
  await mkdir(folder, { recursive: true });
  const several = new Set(figures.map(figure => figure.file)).size > 1;
  for (const figure of figures) {
    const record = entries.find(entry => entry.file === figure.file && entry.entry === figure.entry);
    const labels = record?.units[figure.unit]?.labels.join('-') ?? String(figure.unit + 1);
    const name = `${several ? `${basename(figure.file)}-` : ''}${figure.entry}-${labels}.svg`;
    await writeAtomically(join(folder, name.replaceAll(/[^\w.-]/gu, '_')), figure.svg);
  }
}

/** Puts a report together. */
export function reportOf(
  version: string,
  inputs: readonly RecordInput[],
  settings: Settings,
  entries: readonly EntryRecord[],
  figures: readonly RecordFigure[],
): Report {
  return {
    title: 'Record of a check of handedness',
    date: new Date().toISOString(),
    version,
    inputs,
    settings,
    entries,
    figures,
    marks: [],
  };
}
