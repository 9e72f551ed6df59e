/** What a file format offers: cutting a stream into entries, and reading one entry into molecules. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { CrystalDescription } from '../crystal/description.ts';

/** An entry as it stands in the file: its own bytes, untouched, so that it can be written back byte for byte. */
export interface RawEntry {
  /** 1-based number of the entry within the file. */
  readonly entry: number;
  /** 1-based line of the file on which the entry begins. */
  readonly line: number;
  /** The bytes of the entry, its terminator included. */
  readonly bytes: Uint8Array;
}

/** Why an entry could not be read; `line` is the 1-based line of the file. */
export interface EntryError {
  readonly code: string;
  /** What is wrong and what would be right. */
  readonly message: string;
  readonly line: number | null;
}

/** A data item of an SDF entry or an item of a CIF block. */
export interface DataItem {
  readonly name: string;
  readonly value: string;
}

/** A model in which one disordered part is taken in another of its alternatives. */
export interface StructureAlternative {
  /** "assembly A, group 2", "alternate location B". */
  readonly name: string;
  readonly molecule: Molecule;
}

/** One model read from a file. */
export interface Entry {
  readonly entry: number;
  readonly line: number;
  readonly name: string;
  /** Null when `error` says why. */
  readonly molecule: Molecule | null;
  readonly data: readonly DataItem[];
  readonly warnings: readonly string[];
  readonly error: EntryError | null;
  /** What the file says of the crystal; absent where it says nothing. */
  readonly crystal?: CrystalDescription | null;
  /** Models with other alternatives of the disordered parts; `molecule` has the ones chosen by rule. */
  readonly alternatives?: readonly StructureAlternative[];
}

export interface Limits {
  /** Longest line, bytes. */
  readonly lineLength: number;
  /** Most atoms in an entry. */
  readonly atoms: number;
  /** Most bytes in an entry. */
  readonly entryBytes: number;
}

export const DEFAULT_LIMITS: Limits = {
  lineLength: 1_000_000,
  atoms: 1_000_000,
  entryBytes: 256 * 1024 * 1024,
};

export interface Format {
  /** "SDF", "SMILES": the name shown to people. */
  readonly name: string;
  /** File name endings without the dot, lower case. */
  readonly extensions: readonly string[];
  /** How well the first bytes (up to 64 kB) fit: 0 not at all, 1 certainly. */
  sniff(head: Uint8Array): number;
  /** Cuts a stream of chunks into entries, in order, in memory bounded by the largest entry. */
  split(chunks: AsyncIterable<Uint8Array>, limits: Limits): AsyncGenerator<RawEntry>;
  /** Reads an entry; never throws for what the bytes hold: `error` says what is wrong. More than one model is possible (PDB, mmCIF). */
  parse(raw: RawEntry, limits: Limits): Entry[];
}
