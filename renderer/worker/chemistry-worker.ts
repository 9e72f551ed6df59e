/** The chemistry of the window: reads, examines and compares in a worker, in slices short enough to answer the person in between. */
import { config } from 'zod';
import type { Settings } from '../../core/docket.ts';
import { DEFAULT_SETTINGS } from '../../core/docket.ts';
import { explainUnit } from '../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry } from '../../core/formats/format.ts';
import { csvHead, csvLines } from '../../core/record/csv.ts';
import { htmlRecord } from '../../core/record/html.ts';
import type { EntryRecord } from '../../core/record/json.ts';
import type { RecordFigure, RecordInput, RecordMark } from '../../core/record/report.ts';
import { chunksOf, EntryTable, openSource, type ReadBytes } from './entry-source.ts';
import {
  intendedFromEntries,
  intendedFromText,
  type Intended,
  judgeEntry,
  MOST_FIGURES,
  recordOf,
  rowOf,
} from './judge.ts';
import {
  type FromWorker,
  type IntentionInput,
  type OpenedFile,
  type Row,
  type ToWorker,
  toWorker,
} from './protocol.ts';

config({ jitless: true });

/** Longest time between two looks at the person's questions, ms. */
const SLICE = 16;
/** Files up to this size are put on record with their digest, bytes. */
const DIGEST_LIMIT = 1024 * 1024 * 1024;
/** How often the window hears of new rows, ms. */
const REPORT = 80;
/** Models kept in full for stepping back and forth. */
const MODELS_KEPT = 24;

function send(message: FromWorker): void {
  self.postMessage(message, { transfer: [] });
}

function words(error: unknown): string {
  return error instanceof Error ? error.message : String(error);
}

let lastRequest = 0;
const waiting = new Map<number, { resolve: (bytes: Uint8Array) => void; reject: (error: Error) => void }>();

const read: ReadBytes = (id, offset, length) =>
  new Promise((resolve, reject) => {
    const request = ++lastRequest;
    waiting.set(request, { resolve, reject });
    send({ type: 'read', request, id, offset, length });
  });

/** Lets waiting messages through. */
const channel = new MessageChannel();
let wake: (() => void) | null = null;
channel.port1.addEventListener('message', () => {
  const resume = wake;
  wake = null;
  resume?.();
});
channel.port1.start();
function breathe(): Promise<void> {
  return new Promise(resolve => {
    wake = resolve;
    channel.port2.postMessage(null);
  });
}

let job = 0;
/** Whether another job has taken the place of this one, or the person stopped it. */
const isStale = (mine: number): boolean => job !== mine;
let settings: Settings = DEFAULT_SETTINGS;
let files: readonly OpenedFile[] = [];
let table = new EntryTable(read);
let intended: Intended | null = null;
let intendedFile: OpenedFile | null = null;
const models = new Map<number, ReturnType<typeof judgeEntry>>();

async function modelAt(index: number): Promise<ReturnType<typeof judgeEntry>> {
  const kept = models.get(index);
  if (kept) return kept;
  const model = judgeEntry(
    await table.entry(index),
    { index, file: table.fileOf(index) },
    intended,
    settings,
  );
  models.set(index, model);
  if (models.size > MODELS_KEPT) {
    const [oldest] = models.keys();
    if (oldest !== undefined) models.delete(oldest);
  }
  return model;
}

/** Collects rows and tells the window of them now and then. */
class Reporter {
  #rows: Row[] = [];
  #from = 0;
  #last = performance.now();
  readonly #job: number;

  constructor(job: number) {
    this.#job = job;
  }

  add(row: Row): void {
    this.#rows.push(row);
    // The first row is what the person waits for.
    if (this.#from === 0 && this.#rows.length === 1) this.flush();
  }

  due(now: number): boolean {
    return now - this.#last >= REPORT;
  }

  flush(): void {
    this.#last = performance.now();
    if (this.#rows.length === 0) return;
    send({ type: 'rows', job: this.#job, from: this.#from, rows: this.#rows });
    this.#from += this.#rows.length;
    this.#rows = [];
  }
}

async function readAll(file: OpenedFile): Promise<Entry[]> {
  const { format, entries } = await openSource(read, file);
  const list: Entry[] = [];
  for await (const raw of entries) list.push(...format.parse(raw, DEFAULT_LIMITS));
  return list;
}

/** Whether a file's first readable entry is a model in space. */
async function holdsModels(file: OpenedFile): Promise<boolean> {
  const { format, entries } = await openSource(read, file);
  let seen = 0;
  for await (const raw of entries) {
    for (const entry of format.parse(raw, DEFAULT_LIMITS)) {
      if (entry.molecule) return entry.molecule.dimension === 3;
    }
    if (++seen > 20) break;
  }
  return true;
}

async function readIntention(input: IntentionInput): Promise<Intended> {
  if (input.kind === 'text') return intendedFromText(input.text, settings);
  const found = intendedFromEntries(input.file.name, await readAll(input.file), settings);
  if (found.structures.length === 0) {
    throw new Error(`${input.file.name}: no structure in it can be read as an intention`);
  }
  return found;
}

/**
 * Opens files. Structures without coordinates in space that come together with models are what those are meant to be.
 */
async function open(message: Extract<ToWorker, { type: 'open' }>): Promise<void> {
  const mine = (job = message.job);
  ({ settings } = message);
  models.clear();
  table = new EntryTable(read);
  intended = null;
  intendedFile = null;
  let given: IntentionInput | null = message.intention;
  let opened = [...message.files];
  if (given === null && opened.length > 1) {
    const flags = await Promise.all(opened.map(file => holdsModels(file).catch(() => true)));
    const flat = opened.filter((_, f) => !flags[f]);
    if (flat.length === 1 && flat.length < opened.length) {
      given = { kind: 'file', file: flat[0]! };
      opened = opened.filter((_, f) => flags[f]);
    }
  }
  if (isStale(mine)) {
    stopped(mine);
    return;
  }
  files = opened;
  if (given) {
    try {
      intended = await readIntention(given);
      intendedFile = given.kind === 'file' ? given.file : null;
    } catch (error) {
      send({ type: 'problem', job: mine, message: words(error) });
    }
  }
  if (isStale(mine)) {
    stopped(mine);
    return;
  }
  taken(mine);
  await readFiles(mine);
}

/** Says that a job ended before anything was read. */
function stopped(mine: number): void {
  send({ type: 'progress', job: mine, read: 0, total: 0, entries: 0, done: true, cancelled: true });
}

function taken(mine: number): void {
  send({
    type: 'taken',
    job: mine,
    models: [...files],
    intention:
      intended === null ? null : { name: intended.name, structures: Math.max(1, intended.structures.length) },
    formats: [],
  });
}

async function readFiles(mine: number): Promise<void> {
  const reporter = new Reporter(mine);
  const total = files.reduce((sum, file) => sum + file.size, 0);
  const entriesOf = table;
  let before = 0;
  let within = 0;
  let slice = performance.now();
  const progress = (done: boolean): void => {
    send({
      type: 'progress',
      job: mine,
      read: Math.min(total, before + within),
      total,
      entries: entriesOf.length,
      done,
      cancelled: job !== mine,
    });
  };
  for (const file of files) {
    within = 0;
    try {
      const { format, entries } = await openSource(read, file, bytes => {
        within = bytes;
      });
      const number = entriesOf.addFile(file, format);
      for await (const raw of entries) {
        if (job !== mine) break;
        const parsed = format.parse(raw, DEFAULT_LIMITS);
        parsed.forEach((entry, part) => {
          const index = entriesOf.add(number, raw, part);
          const model = judgeEntry(entry, { index, file: number }, intended, settings);
          if (index === 0) models.set(index, model);
          reporter.add(rowOf(model));
        });
        const now = performance.now();
        if (now - slice < SLICE) continue;
        if (reporter.due(now)) {
          reporter.flush();
          progress(false);
        }
        await breathe();
        slice = performance.now();
      }
    } catch (error) {
      send({ type: 'problem', job: mine, message: words(error) });
    }
    if (job !== mine) break;
    before += file.size;
  }
  within = 0;
  reporter.flush();
  progress(true);
}

/** Judges what has been read against another intention. */
async function intend(message: Extract<ToWorker, { type: 'intend' }>): Promise<void> {
  const mine = (job = message.job);
  let next: Intended | null = null;
  if (message.intention) {
    try {
      next = await readIntention(message.intention);
    } catch (error) {
      send({ type: 'problem', job: mine, message: words(error) });
      return;
    }
  }
  if (job !== mine) return;
  intended = next;
  intendedFile = message.intention?.kind === 'file' ? message.intention.file : null;
  models.clear();
  taken(mine);
  const reporter = new Reporter(mine);
  let slice = performance.now();
  const total = table.length;
  const progress = (at: number, done: boolean): void => {
    send({
      type: 'progress',
      job: mine,
      read: at,
      total,
      entries: total,
      done,
      cancelled: job !== mine,
    });
  };
  let at = 0;
  for (; at < total; at++) {
    if (isStale(mine)) break;
    const place = { index: at, file: table.fileOf(at) };
    reporter.add(rowOf(judgeEntry(await table.entry(at), place, intended, settings)));
    const now = performance.now();
    if (now - slice < SLICE) continue;
    if (reporter.due(now)) {
      reporter.flush();
      progress(at, false);
    }
    await breathe();
    slice = performance.now();
  }
  reporter.flush();
  progress(at, true);
}

async function explain(message: Extract<ToWorker, { type: 'explain' }>): Promise<void> {
  const { request, index, unit } = message;
  try {
    const model = await modelAt(index);
    if (!model.molecule || !model.docket) throw new Error('the entry could not be read');
    const ladder = explainUnit(model.molecule, model.docket, unit, settings);
    send({ type: 'explained', request, ladder, problem: null });
  } catch (error) {
    send({ type: 'explained', request, ladder: null, problem: words(error) });
  }
}

async function rawBytes(message: Extract<ToWorker, { type: 'raw' }>): Promise<void> {
  const list: Uint8Array[] = [];
  for (const index of message.indices) list.push((await table.raw(index)).raw.bytes);
  send({ type: 'raw', request: message.request, bytes: list });
}

/** SHA-256 of a file, lower-case hexadecimal; null for one that is too large to be held at once. */
async function digestOf(file: OpenedFile): Promise<string | null> {
  if (file.size > DIGEST_LIMIT) return null;
  const content = new Uint8Array(file.size);
  let at = 0;
  for await (const chunk of chunksOf(read, file)) {
    content.set(chunk, at);
    at += chunk.length;
  }
  const digest = new Uint8Array(await crypto.subtle.digest('SHA-256', content.subarray(0, at)));
  return Array.from(digest, byte => byte.toString(16).padStart(2, '0')).join('');
}

/** Writes the record of everything that is open, in slices like the reading. */
async function writeRecord(message: Extract<ToWorker, { type: 'record' }>): Promise<void> {
  const { request, form, marks } = message;
  const mine = job;
  const pieces: string[] = form === 'csv' ? [csvHead()] : [];
  const entries: EntryRecord[] = [];
  const figures: RecordFigure[] = [];
  const shownMarks: RecordMark[] = [];
  const total = table.length;
  let slice = performance.now();
  let reported = slice;
  for (let index = 0; index < total; index++) {
    if (isStale(mine)) {
      send({ type: 'recorded', request, bytes: null });
      return;
    }
    const name = files[table.fileOf(index)]?.name ?? '';
    const { record, figures: drawn } = recordOf(await table.entry(index), name, intended, settings);
    if (form === 'csv') pieces.push(csvLines(record));
    else {
      entries.push(record);
      if (figures.length < MOST_FIGURES) figures.push(...drawn);
      for (const mark of marks) {
        if (mark.index !== index) continue;
        const unit = record.units.findIndex(({ atoms }) => atoms.join() === mark.atoms.join());
        if (unit !== -1) shownMarks.push({ entry: record.entry, unit, mark: mark.mark, remark: mark.remark });
      }
    }
    const now = performance.now();
    if (now - slice < SLICE) continue;
    if (now - reported > REPORT) {
      reported = now;
      send({
        type: 'progress',
        job: mine,
        read: index,
        total,
        entries: index,
        done: false,
        cancelled: false,
      });
    }
    await breathe();
    slice = performance.now();
  }
  if (form === 'html') {
    const inputs: RecordInput[] = [];
    for (const file of files) inputs.push({ name: file.name, sha256: await digestOf(file), role: 'models' });
    if (intendedFile) {
      inputs.push({ name: intendedFile.name, sha256: await digestOf(intendedFile), role: 'intention' });
    } else if (intended) inputs.push({ name: intended.name, sha256: null, role: 'intention' });
    const { version, date } = message;
    const title = `Handedness of ${files.map(({ name }) => name).join(', ')}`;
    const report = { title, date, version, inputs, settings, entries, figures, marks: shownMarks };
    for (const piece of htmlRecord(report)) pieces.push(piece);
  }
  send({ type: 'progress', job: mine, read: total, total, entries: total, done: true, cancelled: false });
  send({ type: 'recorded', request, bytes: new TextEncoder().encode(pieces.join('')) });
}

function failed(error: unknown): void {
  send({ type: 'problem', job, message: words(error) });
}

self.addEventListener('message', (event: MessageEvent<unknown>) => {
  const message = toWorker.parse(event.data);
  switch (message.type) {
    case 'bytes': {
      const entry = waiting.get(message.request);
      waiting.delete(message.request);
      if (message.bytes) entry?.resolve(message.bytes);
      else entry?.reject(new Error(message.problem ?? 'the file cannot be read'));
      break;
    }
    case 'open':
      open(message).catch(failed);
      break;
    case 'intend':
      intend(message).catch(failed);
      break;
    case 'examine':
      modelAt(message.index)
        .then(model => send({ type: 'examined', request: message.request, model }))
        .catch((error: unknown) => {
          send({ type: 'examined', request: message.request, model: null });
          failed(error);
        });
      break;
    case 'explain':
      explain(message).catch(failed);
      break;
    case 'raw':
      rawBytes(message).catch(failed);
      break;
    case 'record':
      writeRecord(message).catch(failed);
      break;
    case 'cancel':
      if (job === message.job) job = -1;
      break;
  }
});
