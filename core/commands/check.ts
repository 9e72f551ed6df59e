/** `deasil check`: every stereogenic unit of every entry, set against the intention where there is one. */
import { stat } from 'node:fs/promises';
import { resolve } from 'node:path';
import manifest from '../../package.json' with { type: 'json' };
import type { Relation } from '../docket.ts';
import { DEFAULT_LIMITS, type RawEntry } from '../formats/format.ts';
import type { EntryRecord } from '../record/json.ts';
import type { RecordFigure } from '../record/report.ts';
import {
  flag,
  number,
  type OptionSpec,
  parseArguments,
  SETTING_HELP,
  SETTING_OPTIONS,
  settingsOf,
  text,
} from './arguments.ts';
import { writeAtomically } from './atomic-write.ts';
import {
  batchesOf,
  type BatchOptions,
  inOrder,
  type Runner,
  threadlessRunner,
  workerRunner,
} from './check-batch.ts';
import { type EntryDigest, Outcome } from './check-digest.ts';
import { checkRecordName, inputsOf, reportOf, writeFigures, writeRecord } from './check-record.ts';
import { Earlier } from './check-resume.ts';
import { Summary, summaryText } from './check-summary.ts';
import { readIntended } from './intended.ts';
import { type CommandIo, ExitStatus, UsageError } from './io.ts';
import { LineFile, openSink, type Sink } from './output.ts';
import { Progress } from './progress.ts';
import { openInput } from './reading.ts';

/** Formats in which every entry of the file is one model and one line of output. */
const ONE_MODEL_FORMATS: ReadonlySet<string> = new Set(['SDF', 'SMILES', 'InChI']);

/** Bytes of input from which several threads pay for their start. */
const MANY_BYTES = 4 * 1024 * 1024;

const OPTIONS = {
  intended: { type: 'string' },
  'match-by': { type: 'string' },
  json: { type: 'boolean' },
  lines: { type: 'string' },
  resume: { type: 'boolean' },
  jobs: { type: 'string' },
  shard: { type: 'string' },
  keep: { type: 'string' },
  output: { type: 'string', short: 'o' },
  rest: { type: 'string' },
  summary: { type: 'string' },
  record: { type: 'string' },
  images: { type: 'string' },
  ligands: { type: 'boolean' },
  enantiopure: { type: 'boolean' },
  ...SETTING_OPTIONS,
} as const satisfies Record<string, OptionSpec>;

export const CHECK_HELP = `deasil check FILE... [options]

Finds every stereogenic unit of every entry, measures and labels it, and sets it against the intention.
FILE may be - for standard input. Formats are told by content, then by name; gzip is undone.

  --intended WHAT     a file of structures, a SMILES, an InChI, or descriptors on units (C7=R,C3-C4=E)
  --match-by ITEM     an entry finds its intention by this SDF data item instead of by its title
  --json              one JSON object a line for each entry
  --lines FILE        the same lines into a file, which --resume can go on with
  --resume            go on where the run that wrote --lines FILE ended
  --keep RELATIONS    entries of these relations (same, or same,enantiomer ...) to -o, the others to --rest
  -o, --output FILE   where --keep writes, entries byte for byte as they came; - for standard output
  --rest FILE         the complement of --keep
  --summary FILE      summary by compound, JSON where the name ends in .json; - for standard output
  --record FILE       the record of the check as a document, .html or .csv
  --images DIR        the sight of every doubtful unit as SVG (of every unit where nothing was intended)
  --shard I/N         only every Nth entry, from the Ith
  --jobs N            threads; by default all processors for large files, else one
  --ligands           leave the units of polymer residues out
  --enantiopure       the samples of crystal structures are known to be enantiopure
${SETTING_HELP}

Exit status: 0 all agree or nothing was intended; 1 some unit inverted, flat or missing, or another compound,
undecided or unmatched; 2 unusable input or arguments; 3 some entries could not be read, the rest were checked.
A computed descriptor says what the coordinates show; it is no proof of absolute configuration.
`;

const RELATIONS: ReadonlySet<string> = new Set<Relation>([
  'same',
  'enantiomer',
  'epimer',
  'diastereomer',
  'other compound',
  'undecided',
  'unmatched',
  'mixed',
]);

interface CheckPlan {
  readonly files: readonly string[];
  readonly intended: string | null;
  readonly shard: { readonly index: number; readonly of: number } | null;
  readonly jobs: number | null;
  readonly lines: string | null;
  readonly resume: boolean;
  readonly keep: ReadonlySet<string> | null;
  readonly output: string | null;
  readonly rest: string | null;
  readonly summary: string | null;
  readonly record: string | null;
  readonly images: string | null;
  readonly options: BatchOptions;
}

function shardOf(value: string): { index: number; of: number } {
  const match = /^(\d+)\/(\d+)$/.exec(value);
  const index = Number(match?.[1]);
  const of = Number(match?.[2]);
  if (!match || index < 1 || of < 1 || index > of) {
    throw new UsageError(`--shard ${value}: I/N is wanted, I from 1 to N (2/8)`);
  }
  return { index, of };
}

function planOf(args: readonly string[]): CheckPlan {
  const parsed = parseArguments(args, OPTIONS);
  if (parsed.positionals.length === 0) throw new UsageError('no FILE given; - reads standard input');
  const intended = text(parsed, 'intended');
  const keepText = text(parsed, 'keep');
  const keep = keepText === null ? null : new Set(keepText.split(',').map(relation => relation.trim()));
  for (const relation of keep ?? []) {
    if (!RELATIONS.has(relation)) {
      throw new UsageError(`--keep ${relation}: no such relation; one of ${[...RELATIONS].join(', ')}`);
    }
  }
  const output = text(parsed, 'output');
  const rest = text(parsed, 'rest');
  const lines = text(parsed, 'lines');
  const resume = flag(parsed, 'resume');
  const json = flag(parsed, 'json');
  const summary = text(parsed, 'summary');
  const shard = text(parsed, 'shard');
  const record = text(parsed, 'record');
  const images = text(parsed, 'images');
  if (record !== null) checkRecordName(record);
  if (resume && (record !== null || images !== null)) {
    throw new UsageError('--record and --images need the whole run; leave --resume out');
  }
  if (intended === '-' && parsed.positionals.includes('-')) {
    throw new UsageError('standard input cannot be both FILE and --intended');
  }
  if (keep && !intended) throw new UsageError('--keep sorts by relation, which needs --intended');
  if (keep && output === null && rest === null) throw new UsageError('--keep needs -o FILE or --rest FILE');
  if (!keep && (output !== null || rest !== null)) {
    throw new UsageError('-o and --rest say where --keep writes; give --keep RELATIONS too');
  }
  if (resume && lines === null)
    throw new UsageError('--resume goes on with the file of --lines; give --lines FILE too');
  if (text(parsed, 'match-by') !== null && !intended) throw new UsageError('--match-by needs --intended');
  const onStdout = [
    json ? '--json' : null,
    output === '-' ? '-o -' : null,
    rest === '-' ? '--rest -' : null,
  ].filter(use => use !== null);
  if (onStdout.length > 1) throw new UsageError(`${onStdout.join(' and ')} would mix on standard output`);
  const quiet = output === '-' || rest === '-' || lines !== null;
  return {
    files: parsed.positionals,
    intended,
    shard: shard === null ? null : shardOf(shard),
    jobs: number(parsed, 'jobs', { least: 1, most: 1024, whole: true }),
    lines,
    resume,
    keep,
    output,
    rest,
    summary,
    record,
    images,
    options: {
      settings: settingsOf(parsed),
      limits: DEFAULT_LIMITS,
      matchBy: text(parsed, 'match-by'),
      ligandsOnly: flag(parsed, 'ligands'),
      enantiopure: flag(parsed, 'enantiopure'),
      printing: json ? 'json' : quiet ? null : 'text',
      lines: lines !== null,
      withUnits: summary !== null,
      withRecords: record !== null || images !== null,
      withFigures: images !== null || record?.toLowerCase().endsWith('.html') === true,
    },
  };
}

/** Runs the command. @throws UsageError for bad arguments or an unusable intention. */
export async function run(args: readonly string[], io: CommandIo): Promise<number> {
  if (args.includes('--help') || args.includes('-h')) {
    await io.out(CHECK_HELP);
    return ExitStatus.agree;
  }
  const plan = planOf(args);
  let intentions = null;
  if (plan.intended !== null) {
    const read = await readIntended(io, plan.intended, plan.options.limits, plan.options.settings);
    for (const problem of read.problems) io.err(`intention not used: ${problem}\n`);
    intentions = read.intentions;
  }
  const size = await totalSize(io, plan.files);
  const jobs = plan.jobs ?? (size !== null && size >= MANY_BYTES ? io.processors : 1);
  const runner =
    jobs > 1 && io.workerEntry && plan.intended !== '-'
      ? workerRunner(io.workerEntry, jobs, {
          command: 'check',
          cwd: io.cwd,
          intended: plan.intended,
          options: plan.options,
        })
      : threadlessRunner(intentions, plan.options);
  const check = new Check(plan, io, runner, size);
  try {
    return await check.run();
  } finally {
    await runner.close();
  }
}

async function totalSize(io: CommandIo, files: readonly string[]): Promise<number | null> {
  let total = 0;
  for (const file of files) {
    const info = file === '-' ? null : await stat(resolve(io.cwd, file)).catch(() => null);
    if (!info?.isFile() || file.endsWith('.gz')) return null;
    total += info.size;
  }
  return total;
}

/** One run of the command. */
class Check {
  readonly #plan: CheckPlan;
  readonly #io: CommandIo;
  readonly #runner: Runner;
  readonly #progress: Progress;
  readonly #outcome = new Outcome();
  readonly #summary: Summary | null;
  readonly #kept: Sink | null;
  readonly #rest: Sink | null;
  #lines: LineFile | null = null;
  #earlier: Earlier | null = null;
  #unusable = 0;
  readonly #records: EntryRecord[] = [];
  readonly #figures: RecordFigure[] = [];

  constructor(plan: CheckPlan, io: CommandIo, runner: Runner, size: number | null) {
    this.#plan = plan;
    this.#io = io;
    this.#runner = runner;
    this.#progress = new Progress(io);
    this.#progress.total = size;
    this.#summary = plan.summary === null ? null : new Summary();
    this.#kept = plan.output === null ? null : openSink(io, plan.output);
    this.#rest = plan.rest === null ? null : openSink(io, plan.rest);
  }

  async run(): Promise<number> {
    const { lines, resume, options } = this.#plan;
    try {
      if (lines !== null) {
        const path = resolve(this.#io.cwd, lines);
        if (resume) this.#earlier = await Earlier.open(path, options.withUnits);
        if (!this.#earlier) this.#lines = await LineFile.open(path, 0);
      }
      for (const file of this.#plan.files) await this.#file(file);
      await this.#stopResuming();
      this.#io.signal.throwIfAborted();
    } catch (error) {
      this.#progress.clear();
      const reason = error instanceof Error ? error : new Error(String(error));
      await this.#kept?.abort(reason);
      await this.#rest?.abort(reason);
      await this.#lines?.close();
      if (!this.#io.signal.aborted) throw error;
      this.#io.err(
        lines === null
          ? 'interrupted\n'
          : `interrupted; --resume goes on after the ${this.#outcome.checked + this.#outcome.unreadable} entries in ${lines}\n`,
      );
      return ExitStatus.interrupted;
    }
    this.#progress.clear();
    await this.#lines?.close();
    await this.#kept?.close();
    await this.#rest?.close();
    await this.#writeSummary();
    await this.#writeRecord();
    this.#io.err(`${this.#counts()}\n`);
    if (this.#unusable > 0) return this.#outcome.checked > 0 ? ExitStatus.partly : ExitStatus.unusable;
    return this.#outcome.status();
  }

  async #file(file: string): Promise<void> {
    try {
      const { format, entries } = await openInput(this.#io, file, this.#plan.options.limits);
      // What an earlier run did of a file of several models to an entry cannot be told by its lines: it is done again.
      if (!ONE_MODEL_FORMATS.has(format.name)) await this.#stopResuming();
      const wanted = this.#resumed(file, this.#sharded(entries));
      const batches = batchesOf(file, format, wanted, file === '-');
      let read = 0;
      for await (const { batch, results } of inOrder(batches, this.#runner)) {
        this.#io.signal.throwIfAborted();
        read += results.length;
        let printed = '';
        let lines = '';
        for (const [r, result] of results.entries()) {
          printed += result.printed;
          lines += result.lines;
          this.#records.push(...result.records);
          this.#figures.push(...result.figures);
          await this.#account(result.digests, batch.raws[r]!);
        }
        if (printed !== '') await this.#io.out(printed);
        if (lines !== '') await this.#lines?.write(lines);
        this.#progress.entries += results.length;
        this.#progress.show();
      }
      if (read === 0 && this.#seen === 0) this.#complain(`${file}: no entries`);
    } catch (error) {
      if (this.#io.signal.aborted || !(error instanceof Error) || isFatal(error)) throw error;
      this.#complain(error.message);
    }
  }

  /** Entries of the current file that were seen, those of other shards included. */
  #seen = 0;

  async *#sharded(entries: AsyncIterable<RawEntry>): AsyncGenerator<RawEntry> {
    const { shard } = this.#plan;
    this.#seen = 0;
    for await (const raw of entries) {
      this.#seen++;
      this.#progress.bytes += raw.bytes.length;
      if (shard && (raw.entry - 1) % shard.of !== shard.index - 1) continue;
      yield raw;
    }
  }

  /** Passes over what an earlier run has checked, accounting for it. */
  async *#resumed(file: string, entries: AsyncIterable<RawEntry>): AsyncGenerator<RawEntry> {
    for await (const raw of entries) {
      if (this.#earlier) {
        const digest = await this.#earlier.take(file, raw.entry);
        if (digest) {
          await this.#account([digest], raw);
          continue;
        }
        await this.#stopResuming();
      }
      yield raw;
    }
  }

  async #stopResuming(): Promise<void> {
    if (!this.#earlier || this.#plan.lines === null) return;
    this.#lines = await LineFile.open(resolve(this.#io.cwd, this.#plan.lines), this.#earlier.kept);
    this.#earlier = null;
  }

  async #account(digests: readonly EntryDigest[], raw: RawEntry): Promise<void> {
    let keep = digests.length > 0;
    for (const digest of digests) {
      this.#outcome.add(digest);
      this.#summary?.add(digest);
      if (digest.error) {
        const line = digest.error.line === null ? '' : `, line ${digest.error.line}`;
        this.#progress.clear();
        this.#io.err(`${digest.file}, entry ${digest.entry}${line}: ${digest.error.message}\n`);
      }
      if (digest.relation === null || !this.#plan.keep?.has(digest.relation)) keep = false;
    }
    if (keep) await this.#kept?.write(raw.bytes);
    else await this.#rest?.write(raw.bytes);
  }

  #complain(message: string): void {
    this.#unusable++;
    this.#progress.clear();
    this.#io.err(`${message}\n`);
  }

  #counts(): string {
    const { checked, differing, unreadable } = this.#outcome;
    const parts = [`${checked} ${checked === 1 ? 'entry' : 'entries'} checked`];
    if (this.#plan.intended !== null) parts.push(`${differing} not as intended`);
    if (unreadable > 0) parts.push(`${unreadable} could not be read`);
    if (this.#unusable > 0)
      parts.push(`${this.#unusable} ${this.#unusable === 1 ? 'file' : 'files'} unusable`);
    return parts.join(', ');
  }

  async #writeRecord(): Promise<void> {
    const { record, images, files, intended, options } = this.#plan;
    if (record !== null) {
      const inputs = await inputsOf(this.#io.cwd, files, intended);
      const report = reportOf(manifest.version, inputs, options.settings, this.#records, this.#figures);
      await writeRecord(resolve(this.#io.cwd, record), report);
    }
    if (images !== null) await writeFigures(resolve(this.#io.cwd, images), this.#figures, this.#records);
  }

  async #writeSummary(): Promise<void> {
    const { summary, options } = this.#plan;
    if (!this.#summary || summary === null) return;
    const report = this.#summary.report();
    if (summary === '-') {
      const lines = summaryText(report);
      if (options.printing === 'json') this.#io.err(lines);
      else await this.#io.out(lines);
      return;
    }
    const content = summary.endsWith('.json') ? `${JSON.stringify(report, null, 1)}\n` : summaryText(report);
    await writeAtomically(resolve(this.#io.cwd, summary), content);
  }
}

/** Errors that end the run rather than one file: a worker lost, an output that cannot be written. */
function isFatal(error: Error): boolean {
  return (
    error.name === 'WriteError' || error.message.startsWith('a worker thread') || error instanceof TypeError
  );
}
