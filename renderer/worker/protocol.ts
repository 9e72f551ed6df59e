/** The messages between the window and its chemistry worker, and the checks both ends apply to them. */
import { z } from 'zod';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import type { UnitVerdict } from '../../core/comparison/compare.ts';
import type { Docket, Ladder, Relation, Settings, Verdict } from '../../core/docket.ts';
import type { CrystalRecord } from '../../core/crystal/record.ts';
import type { DataItem, EntryError } from '../../core/formats/format.ts';

/** What the worst finding of an entry is, most urgent first. */
export const FINDINGS = ['error', 'inverted', 'missing', 'flat', 'residue', 'relation', 'none'] as const;
export type Finding = (typeof FINDINGS)[number];

/** One line of the ledger: what is kept of every entry, small enough for hundreds of thousands. */
export interface Row {
  /** 0-based place among all entries of all opened files. */
  readonly index: number;
  /** Index in the list of opened files. */
  readonly file: number;
  /** 1-based number in its file, and line on which it begins. */
  readonly entry: number;
  readonly line: number;
  readonly name: string;
  readonly formula: string;
  readonly atoms: number;
  /** The letters of its units in order, a middle dot where there is none. */
  readonly letters: string;
  /** One letter a unit, in the order of `letters`: `a`grees, `i`nverted, `r`elabelled, `f`lat, `o`pen, `m`issing, `-` nothing asked, `u`nspecified. */
  readonly verdicts: string;
  /** Labels of the first units, in the order of `letters`, separated by spaces. */
  readonly names: string;
  /** Labels of the units that are in doubt: "C7, C9". */
  readonly doubtful: string;
  /** Lowest firmness of its units, null without coordinates. */
  readonly firmness: number | null;
  readonly relation: Relation | null;
  readonly finding: Finding;
  readonly error: EntryError | null;
}

/** What the comparison says, as the docket shows it. */
export interface ShownVerdict {
  readonly intended: string | null;
  readonly verdict: Verdict | null;
  readonly group: string | null;
}

/** One entry in full. */
export interface Model {
  readonly index: number;
  readonly file: number;
  readonly entry: number;
  readonly line: number;
  readonly name: string;
  readonly data: readonly DataItem[];
  readonly error: EntryError | null;
  readonly warnings: readonly string[];
  readonly molecule: Molecule | null;
  readonly docket: Docket | null;
  /** One for each unit of the docket. */
  readonly verdicts: readonly ShownVerdict[];
  /** Intended units that the model lacks. */
  readonly absent: readonly UnitVerdict[];
  readonly relation: Relation | null;
  readonly difference: string | null;
  /** Name of the intention it was set against. */
  readonly intention: string | null;
  /** The intention itself, for the drawing, and for each atom of the model the intended atom, -1 for none. */
  readonly intended: Molecule | null;
  readonly mapping: Int32Array | null;
  /** Firmness that the rings at each unit allow where the measured one is far below it. */
  readonly distorted: readonly (number | null)[];
  /** Of a macromolecule: where residues differ from what their names say; `atom` is 0-based. */
  readonly residueFindings: readonly {
    readonly atom: number;
    readonly message: string;
    /** False for what only deserves a mention: a D residue that is named as one. */
    readonly doubtful: boolean;
  }[];
  /** What the file says of the crystal and what follows for the absolute structure. */
  readonly crystal: CrystalRecord | null;
}

const count = z.number().int().nonnegative();
const object = <T>(...keys: readonly string[]): z.ZodType<T> =>
  z.custom<T>(value => typeof value === 'object' && value !== null && keys.every(key => key in value));

const bytes = z.custom<Uint8Array>(value => value instanceof Uint8Array);
const row = object<Row>('index', 'file', 'entry', 'letters', 'verdicts', 'finding');
const model = object<Model>('index', 'molecule', 'docket', 'verdicts', 'error');
const ladder = object<Ladder>('steps', 'auxiliary', 'nodes');

export const openedFile = z.strictObject({ id: z.string(), name: z.string(), size: count });
export type OpenedFile = z.infer<typeof openedFile>;

const intention = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('file'), file: openedFile }),
  z.strictObject({ kind: z.literal('text'), text: z.string() }),
]);
export type IntentionInput = z.infer<typeof intention>;

const settings = object<Settings>('flatFirmness', 'flatSigmas', 'digraphLimit');

/** From the window to the worker. */
export const toWorker = z.discriminatedUnion('type', [
  /** Replaces what is open. */
  z.strictObject({
    type: z.literal('open'),
    job: count,
    files: z.array(openedFile),
    intention: intention.nullable(),
    settings,
  }),
  /** Gives another intention and judges every entry again. */
  z.strictObject({ type: z.literal('intend'), job: count, intention: intention.nullable() }),
  z.strictObject({ type: z.literal('examine'), request: count, index: count }),
  z.strictObject({ type: z.literal('explain'), request: count, index: count, unit: count }),
  z.strictObject({ type: z.literal('raw'), request: count, indices: z.array(count) }),
  /** Writes the record of all entries. */
  z.strictObject({
    type: z.literal('record'),
    request: count,
    form: z.enum(['html', 'csv']),
    version: z.string(),
    date: z.string(),
    marks: z.array(
      z.strictObject({
        index: count,
        atoms: z.array(count),
        mark: z.enum(['accepted', 'rejected', 'question']),
        remark: z.string(),
      }),
    ),
  }),
  z.strictObject({ type: z.literal('cancel'), job: count }),
  z.strictObject({
    type: z.literal('bytes'),
    request: count,
    bytes: bytes.nullable(),
    problem: z.string().nullable(),
  }),
]);
export type ToWorker = z.infer<typeof toWorker>;

/** From the worker to the window. */
export const fromWorker = z.discriminatedUnion('type', [
  z.strictObject({ type: z.literal('read'), request: count, id: z.string(), offset: count, length: count }),
  /** The files as the worker took them: which hold models, which give the intention. */
  z.strictObject({
    type: z.literal('taken'),
    job: count,
    models: z.array(openedFile),
    intention: z.strictObject({ name: z.string(), structures: count }).nullable(),
    formats: z.array(z.string()),
  }),
  /** `from` is the index of the first of `rows`; rows after it are replaced. */
  z.strictObject({ type: z.literal('rows'), job: count, from: count, rows: z.array(row) }),
  z.strictObject({
    type: z.literal('progress'),
    job: count,
    read: count,
    total: count,
    entries: count,
    done: z.boolean(),
    cancelled: z.boolean(),
  }),
  z.strictObject({ type: z.literal('examined'), request: count, model: model.nullable() }),
  z.strictObject({
    type: z.literal('explained'),
    request: count,
    ladder: ladder.nullable(),
    problem: z.string().nullable(),
  }),
  z.strictObject({ type: z.literal('raw'), request: count, bytes: z.array(bytes) }),
  /** Null when it was stopped. */
  z.strictObject({ type: z.literal('recorded'), request: count, bytes: bytes.nullable() }),
  /** Something a person must know that belongs to no entry: a file that cannot be read. */
  z.strictObject({ type: z.literal('problem'), job: count, message: z.string() }),
]);
export type FromWorker = z.infer<typeof fromWorker>;
