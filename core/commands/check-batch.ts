/** Entries in batches through one thread or several, results in the order of the input, memory bounded by what is under way. */
import { Worker } from 'node:worker_threads';
import type { Intentions } from '../comparison/intentions.ts';
import type { Format, RawEntry } from '../formats/format.ts';
import type { EntryRecord } from '../record/json.ts';
import type { RecordFigure } from '../record/report.ts';
import { entryText } from '../record/text.ts';
import { digestOf, type EntryDigest } from './check-digest.ts';
import { checkRawEntry, type EntryOptions } from './check-entry.ts';

/** Most entries and bytes in a batch: enough to make the hand-over cheap, few enough to keep memory small. */
const BATCH_ENTRIES = 64;
const BATCH_BYTES = 1024 * 1024;
/** Milliseconds for which entries from a pipe wait for company. */
const IDLE_FLUSH = 20;
/** Batches handed to each thread ahead of need. */
const AHEAD = 2;

export interface Batch {
  readonly file: string;
  readonly format: Format;
  readonly raws: readonly RawEntry[];
}

/** How a checked entry is printed; null prints nothing. */
export type Printing = 'json' | 'text' | null;

export interface BatchOptions extends EntryOptions {
  /** What goes to standard output. */
  readonly printing: Printing;
  /** Whether JSON lines are wanted besides (`--lines`). */
  readonly lines: boolean;
  /** Whether digests carry their units, for a summary. */
  readonly withUnits: boolean;
  /** Whether results carry their records, for a document. */
  readonly withRecords: boolean;
  /** Whether results carry figures of the units that ask for a look. */
  readonly withFigures: boolean;
}

/** The result of one entry of the file. */
export interface EntryResult {
  readonly printed: string;
  readonly lines: string;
  readonly digests: readonly EntryDigest[];
  readonly records: readonly EntryRecord[];
  readonly figures: readonly RecordFigure[];
}

/** Checks the entries of a batch. */
export function checkBatch(
  batch: Batch,
  intentions: Intentions | null,
  options: BatchOptions,
): EntryResult[] {
  return batch.raws.map(raw => {
    const figures: RecordFigure[] | null = options.withFigures ? [] : null;
    const records = checkRawEntry(raw, batch.format, batch.file, intentions, options, figures);
    const lines =
      options.lines || options.printing === 'json'
        ? records.map(record => `${JSON.stringify(record)}\n`).join('')
        : '';
    return {
      printed:
        options.printing === 'json'
          ? lines
          : options.printing === 'text'
            ? records.map(entryText).join('')
            : '',
      lines: options.lines ? lines : '',
      digests: records.map(record => digestOf(record, options.withUnits)),
      records: options.withRecords ? records : [],
      figures: figures ?? [],
    };
  });
}

/** Cuts a stream of entries into batches; `prompt` lets no entry of a slow pipe wait long for others. */
export async function* batchesOf(
  file: string,
  format: Format,
  entries: AsyncIterator<RawEntry>,
  prompt: boolean,
): AsyncGenerator<Batch> {
  let raws: RawEntry[] = [];
  let bytes = 0;
  const flush = (): Batch => {
    const batch = { file, format, raws };
    raws = [];
    bytes = 0;
    return batch;
  };
  let pending = entries.next();
  for (;;) {
    if (prompt && raws.length > 0) {
      let timer: NodeJS.Timeout | undefined;
      const idle = new Promise<'idle'>(done => {
        timer = setTimeout(() => done('idle'), IDLE_FLUSH);
      });
      const winner = await Promise.race([pending.then(() => 'entry' as const), idle]);
      clearTimeout(timer);
      if (winner === 'idle') {
        yield flush();
        continue;
      }
    }
    const next = await pending;
    if (next.done) break;
    raws.push(next.value);
    bytes += next.value.bytes.length;
    pending = entries.next();
    if (raws.length >= BATCH_ENTRIES || bytes >= BATCH_BYTES) yield flush();
  }
  if (raws.length > 0) yield flush();
}

/** Something that checks batches. */
export interface Runner {
  /** Batches that may be under way at a time. */
  readonly width: number;
  run(batch: Batch): Promise<EntryResult[]>;
  close(): Promise<void>;
}

/** Checks batches in this thread. */
export function threadlessRunner(intentions: Intentions | null, options: BatchOptions): Runner {
  return {
    width: 1,
    run: batch => Promise.resolve(checkBatch(batch, intentions, options)),
    close: () => Promise.resolve(),
  };
}

/** What a worker is started with. */
export interface WorkerStart {
  readonly command: 'check';
  readonly cwd: string;
  readonly intended: string | null;
  readonly options: BatchOptions;
}

/** A batch on its way to a worker: the bytes of all entries in one buffer. */
export interface WorkerTask {
  readonly id: number;
  readonly file: string;
  readonly format: string;
  /** Entry number, line and length of each entry. */
  readonly heads: readonly (readonly [number, number, number])[];
  readonly buffer: ArrayBuffer;
}

export type WorkerAnswer =
  | { readonly id: number; readonly results: EntryResult[] }
  | { readonly id: number; readonly failure: string };

interface Waiting {
  readonly done: (results: EntryResult[]) => void;
  readonly failed: (error: Error) => void;
}

interface Lane {
  readonly worker: Worker;
  readonly waiting: Map<number, Waiting>;
}

/** Checks batches in worker threads, each of which reads the intentions for itself. */
export function workerRunner(entry: URL, jobs: number, start: WorkerStart): Runner {
  const lanes: Lane[] = [];
  const open = (): Lane => {
    const worker = new Worker(entry, { workerData: start });
    const lane: Lane = { worker, waiting: new Map() };
    const fail = (error: Error): void => {
      for (const { failed } of lane.waiting.values()) failed(error);
      lane.waiting.clear();
    };
    worker.on('message', (answer: WorkerAnswer) => {
      const waiting = lane.waiting.get(answer.id);
      lane.waiting.delete(answer.id);
      if ('failure' in answer) waiting?.failed(new Error(answer.failure));
      else waiting?.done(answer.results);
    });
    worker.on('error', fail);
    worker.on('exit', code => fail(new Error(`a worker thread ended early (${code})`)));
    lanes.push(lane);
    return lane;
  };
  let next = 0;
  return {
    width: jobs * AHEAD,
    run: batch => {
      let lane = lanes.find(({ waiting }) => waiting.size === 0);
      if (!lane) {
        lane =
          lanes.length < jobs
            ? open()
            : lanes.reduce((least, each) => (each.waiting.size < least.waiting.size ? each : least));
      }
      const id = next++;
      const { waiting, worker } = lane;
      return new Promise<EntryResult[]>((done, failed) => {
        waiting.set(id, { done, failed });
        const task = taskOf(id, batch);
        worker.postMessage(task, [task.buffer]);
      });
    },
    close: async () => {
      await Promise.all(
        lanes.map(({ worker, waiting }) => {
          waiting.clear();
          worker.removeAllListeners('exit');
          return worker.terminate();
        }),
      );
    },
  };
}

function taskOf(id: number, batch: Batch): WorkerTask {
  let length = 0;
  for (const { bytes } of batch.raws) length += bytes.length;
  const buffer = new ArrayBuffer(length);
  const all = new Uint8Array(buffer);
  let at = 0;
  const heads = batch.raws.map(({ entry, line, bytes }): [number, number, number] => {
    all.set(bytes, at);
    at += bytes.length;
    return [entry, line, bytes.length];
  });
  return { id, file: batch.file, format: batch.format.name, heads, buffer };
}

/** The batch that a task carries. */
export function batchOfTask(task: WorkerTask, format: Format): Batch {
  let at = 0;
  return {
    file: task.file,
    format,
    raws: task.heads.map(([entry, line, length]) => {
      const bytes = new Uint8Array(task.buffer, at, length);
      at += length;
      return { entry, line, bytes };
    }),
  };
}

/** Runs batches with as many under way as the runner takes and yields each with its results, in order. */
export async function* inOrder(
  batches: AsyncIterable<Batch>,
  runner: Runner,
): AsyncGenerator<{ batch: Batch; results: EntryResult[] }> {
  const underWay: { batch: Batch; results: Promise<EntryResult[]> }[] = [];
  const source = batches[Symbol.asyncIterator]();
  let pending: Promise<IteratorResult<Batch>> | null = source.next();
  while (pending || underWay.length > 0) {
    const first = underWay[0];
    // Results that are ready go out at once, also while the input pauses.
    const turn: 'input' | 'result' =
      !pending || underWay.length >= runner.width
        ? 'result'
        : first
          ? await Promise.race([
              first.results.then(() => 'result' as const),
              pending.then(() => 'input' as const),
            ])
          : 'input';
    if (turn === 'result' && first) {
      yield { batch: first.batch, results: await first.results };
      underWay.shift();
      continue;
    }
    const next = await pending!;
    if (next.done) {
      pending = null;
      continue;
    }
    const results = runner.run(next.value);
    // A failure is met when its turn comes; until then it must not count as unhandled.
    results.catch(() => undefined);
    underWay.push({ batch: next.value, results });
    pending = source.next();
  }
}
