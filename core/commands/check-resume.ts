/** The lines of an interrupted run, read back in step with the input so that what is checked is not checked again. */
import { createReadStream } from 'node:fs';
import { stat } from 'node:fs/promises';
import { z } from 'zod';
import type { EntryRecord } from '../record/json.ts';
import { digestOf, type EntryDigest } from './check-digest.ts';

const verdict = z.enum(['agrees', 'inverted', 'relabelled', 'flat', 'open', 'missing']);
const relation = z.enum([
  'same',
  'enantiomer',
  'epimer',
  'diastereomer',
  'other compound',
  'undecided',
  'unmatched',
  'mixed',
]);

/** What is read back of a line; the rest is taken as it stands. */
const line = z.looseObject({
  file: z.string(),
  entry: z.number().int().positive(),
  name: z.string(),
  formula: z.string(),
  atoms: z.number().int().nonnegative(),
  units: z.array(
    z.looseObject({
      atoms: z.array(z.number().int().positive()),
      labels: z.array(z.string()),
      firmness: z.number().nullable(),
      verdict: verdict.nullable(),
    }),
  ),
  relation: relation.nullable(),
  warnings: z.array(z.string()),
  error: z.looseObject({ code: z.string(), message: z.string(), line: z.number().nullable() }).nullable(),
});

const LINE_FEED = 10;

/** Whole lines of a file with the byte after each. */
async function* linesOf(path: string): AsyncGenerator<{ text: string; end: number }> {
  let rest = Buffer.alloc(0);
  let at = 0;
  for await (const chunk of createReadStream(path) as AsyncIterable<Buffer>) {
    let buffer = rest.length > 0 ? Buffer.concat([rest, chunk]) : chunk;
    for (let end = buffer.indexOf(LINE_FEED); end !== -1; end = buffer.indexOf(LINE_FEED)) {
      at += end + 1;
      yield { text: buffer.toString('utf8', 0, end), end: at };
      buffer = buffer.subarray(end + 1);
    }
    rest = Buffer.from(buffer);
  }
}

/** The checked part of an earlier run. */
export class Earlier {
  readonly #lines: AsyncGenerator<{ text: string; end: number }>;
  readonly #withUnits: boolean;
  #next: { record: EntryRecord; end: number } | null = null;
  /** Bytes of the file that are still good. */
  kept = 0;

  private constructor(path: string, withUnits: boolean) {
    this.#lines = linesOf(path);
    this.#withUnits = withUnits;
  }

  /** Opens the lines of an earlier run; null when there are none. */
  static async open(path: string, withUnits: boolean): Promise<Earlier | null> {
    const info = await stat(path).catch(() => null);
    if (!info?.isFile() || info.size === 0) return null;
    const earlier = new Earlier(path, withUnits);
    await earlier.#advance();
    return earlier;
  }

  async #advance(): Promise<void> {
    this.#next = null;
    const { value, done } = await this.#lines.next();
    if (done) return;
    let parsed: unknown;
    try {
      parsed = JSON.parse(value.text);
    } catch {
      return;
    }
    const checked = line.safeParse(parsed);
    if (checked.success) this.#next = { record: checked.data as unknown as EntryRecord, end: value.end };
  }

  /** The digest of an entry if the earlier run got that far; null from the first entry it did not reach. */
  async take(file: string, entry: number): Promise<EntryDigest | null> {
    const next = this.#next;
    if (!next || next.record.file !== file || next.record.entry !== entry) {
      this.#next = null;
      return null;
    }
    this.kept = next.end;
    await this.#advance();
    return digestOf(next.record, this.#withUnits);
  }
}
