/** The entries of the opened files: cut from the host's bytes as they come, kept in memory as long as there is room, read again when there is not. */
import { gunzip } from '../../core/formats/gzip.ts';
import { DEFAULT_LIMITS, type Entry, type Format, type RawEntry } from '../../core/formats/format.ts';
import { detectFormat } from '../../core/formats/registry.ts';
import type { OpenedFile } from './protocol.ts';

/** Reads part of an opened file. */
export type ReadBytes = (id: string, offset: number, length: number) => Promise<Uint8Array>;

/** Bytes asked for at a time. */
const CHUNK = 1024 * 1024;
/** Bytes on which the format is told. */
const HEAD = 64 * 1024;
/** Bytes of entries that are kept in memory. */
const KEPT_BYTES = 384 * 1024 * 1024;

/** The bytes of a file in order; `onRead` hears how many have been taken. */
export async function* chunksOf(
  read: ReadBytes,
  file: OpenedFile,
  onRead: (bytes: number) => void = () => undefined,
  from = 0,
): AsyncGenerator<Uint8Array> {
  for (let offset = from; offset < file.size; ) {
    const chunk = await read(file.id, offset, Math.min(CHUNK, file.size - offset));
    if (chunk.length === 0) return;
    offset += chunk.length;
    onRead(offset);
    yield chunk;
  }
}

export interface OpenSource {
  readonly format: Format;
  readonly entries: AsyncGenerator<RawEntry>;
}

/** Opens a file: the format told by content, then by name. @throws Error that names the file and says what is wrong with it. */
export async function openSource(
  read: ReadBytes,
  file: OpenedFile,
  onRead: (bytes: number) => void = () => undefined,
): Promise<OpenSource> {
  const plain = gunzip(chunksOf(read, file, onRead))[Symbol.asyncIterator]();
  const first = await plain.next();
  if (first.done) throw new Error(`${file.name}: the file is empty`);
  const head = first.value.subarray(0, HEAD);
  const format = detectFormat(head, file.name);
  if (format === null) {
    const binary = head.subarray(0, 4096).includes(0);
    throw new Error(
      `${file.name}: ${binary ? 'a binary file' : 'not a format that can be read'}; SDF, Molfile, SMILES, InChI, CIF, mmCIF, PDB and XYZ can be`,
    );
  }
  async function* all(): AsyncGenerator<Uint8Array> {
    yield first.value as Uint8Array;
    for (;;) {
      const next = await plain.next();
      if (next.done) return;
      yield next.value;
    }
  }
  return { format, entries: format.split(all(), DEFAULT_LIMITS) };
}

interface Place {
  readonly file: number;
  readonly part: number;
  readonly entry: number;
  readonly line: number;
  /** Null once there is no room for it. */
  readonly bytes: Uint8Array | null;
}

/** What was read, by the index of the ledger. */
export class EntryTable {
  readonly #places: Place[] = [];
  readonly #files: { readonly file: OpenedFile; readonly format: Format }[] = [];
  readonly #read: ReadBytes;
  #kept = 0;

  constructor(read: ReadBytes) {
    this.#read = read;
  }

  get length(): number {
    return this.#places.length;
  }

  addFile(file: OpenedFile, format: Format): number {
    return this.#files.push({ file, format }) - 1;
  }

  fileOf(index: number): number {
    return this.#places[index]?.file ?? 0;
  }

  add(file: number, raw: RawEntry, part: number): number {
    const room = this.#kept + raw.bytes.length <= KEPT_BYTES;
    if (room && part === 0) this.#kept += raw.bytes.length;
    return (
      this.#places.push({
        file,
        part,
        entry: raw.entry,
        line: raw.line,
        bytes: room ? raw.bytes : null,
      }) - 1
    );
  }

  /** The entry as it stands in its file. @throws Error when the file no longer holds it. */
  async raw(
    index: number,
  ): Promise<{ readonly raw: RawEntry; readonly format: Format; readonly part: number }> {
    const place = this.#places[index];
    const source = place && this.#files[place.file];
    if (!place || !source) throw new Error(`there is no entry ${index + 1}`);
    const { entry, line, part, bytes } = place;
    if (bytes) return { raw: { entry, line, bytes }, format: source.format, part };
    const { entries } = await openSource(this.#read, source.file);
    for await (const raw of entries) {
      if (raw.entry === entry) return { raw, format: source.format, part };
    }
    throw new Error(`${source.file.name}: entry ${entry} is no longer in the file`);
  }

  async entry(index: number): Promise<Entry> {
    const { raw, format, part } = await this.raw(index);
    const entry = format.parse(raw, DEFAULT_LIMITS)[part];
    if (!entry) throw new Error(`entry ${raw.entry} no longer holds model ${part + 1}`);
    return entry;
  }
}
