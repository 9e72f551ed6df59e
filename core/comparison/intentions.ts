/** The set of intentions given for a run, and the choice of the one that an entry is set against. */
import { compareEntry, type EntryComparison, type Examined } from './compare.ts';
import { type Intention, principalSignature } from './intention.ts';
import type { Molecule } from '../chemistry/molecule.ts';
import { compareTyped, type TypedUnit } from './typed.ts';
import { isAskedFor } from './units.ts';

/** An intention that is read when it is first needed. */
export interface IntentionSource {
  readonly name: string;
  /** Reads and examines it; throws an Error that says what is wrong with it. */
  load(): Intention;
}

/** What choosing came to. */
export type Choice =
  | { readonly kind: 'compared'; readonly name: string; readonly comparison: EntryComparison }
  | { readonly kind: 'ambiguous'; readonly names: readonly string[] }
  | { readonly kind: 'unmatched' };

/** Most intentions kept ready at a time. */
const KEPT = 2000;

export class Intentions {
  readonly #sources: readonly IntentionSource[];
  readonly #byName = new Map<string, number[]>();
  readonly #ready = new Map<number, Intention>();
  #bySignature: Map<number, number[]> | null = null;
  readonly #typed: readonly TypedUnit[] | null;

  private constructor(sources: readonly IntentionSource[], typed: readonly TypedUnit[] | null) {
    this.#sources = sources;
    this.#typed = typed;
    sources.forEach(({ name }, s) => {
      if (name === '') return;
      const list = this.#byName.get(name);
      if (list) list.push(s);
      else this.#byName.set(name, [s]);
    });
  }

  static of(sources: readonly IntentionSource[]): Intentions {
    return new Intentions(sources, null);
  }

  static typed(units: readonly TypedUnit[]): Intentions {
    return new Intentions([], units);
  }

  get count(): number {
    return this.#typed ? 1 : this.#sources.length;
  }

  #load(index: number): Intention {
    const kept = this.#ready.get(index);
    if (kept) {
      // Moved to the end: the first of the map is the one used longest ago.
      this.#ready.delete(index);
      this.#ready.set(index, kept);
      return kept;
    }
    const intention = this.#sources[index]!.load();
    this.#ready.set(index, intention);
    if (this.#ready.size > KEPT) {
      const [oldest] = this.#ready.keys();
      if (oldest !== undefined) this.#ready.delete(oldest);
    }
    return intention;
  }

  /**
   * Sets an entry against its intention: the only one there is; else that of the same name; else that of the same
   * compound, stereochemistry aside. Where several fit and none is named for the entry, none is chosen.
   */
  compare(examined: Examined, name: string, examine: (molecule: Molecule) => Examined): Choice {
    if (this.#typed) return { kind: 'compared', name: '', comparison: compareTyped(examined, this.#typed) };
    if (this.#sources.length === 1) return this.#against(0, examined, examine);
    const named = name === '' ? undefined : this.#byName.get(name);
    if (named?.length === 1) return this.#against(named[0]!, examined, examine);
    const candidates = named ?? this.#ofCompound(examined.molecule);
    const fitting = new Map<number, EntryComparison>();
    for (const s of candidates) {
      const comparison = compareEntry(examined, this.#load(s), examine);
      if (comparison.relation !== 'other compound') fitting.set(s, comparison);
    }
    const [first, ...rest] = fitting.keys();
    if (first === undefined) {
      return named ? this.#against(named[0]!, examined, examine) : { kind: 'unmatched' };
    }
    if (rest.every(other => this.#alike(first, other, examine))) {
      return { kind: 'compared', name: this.#sources[first]!.name, comparison: fitting.get(first)! };
    }
    return { kind: 'ambiguous', names: [...fitting.keys()].map(s => this.#sources[s]!.name) };
  }

  #against(index: number, examined: Examined, examine: (molecule: Molecule) => Examined): Choice {
    const comparison = compareEntry(examined, this.#load(index), examine);
    return { kind: 'compared', name: this.#sources[index]!.name, comparison };
  }

  #ofCompound(molecule: Molecule): readonly number[] {
    if (!this.#bySignature) {
      this.#bySignature = new Map();
      for (let s = 0; s < this.#sources.length; s++) {
        const { signature } = this.#load(s);
        const list = this.#bySignature.get(signature);
        if (list) list.push(s);
        else this.#bySignature.set(signature, [s]);
      }
    }
    return this.#bySignature.get(principalSignature(molecule)) ?? [];
  }

  /** Whether two intentions ask for the same, so that it does not matter which is taken. */
  #alike(first: number, second: number, examine: (molecule: Molecule) => Examined): boolean {
    const a = this.#load(first);
    const b = this.#load(second);
    const asked = (intention: Intention): number => intention.docket.units.filter(isAskedFor).length;
    const groups = (intention: Intention): string =>
      intention.molecule.stereoGroups
        .filter(({ kind }) => kind !== 'absolute')
        .map(({ kind, atoms }) => `${kind}${atoms.length}`)
        .sort()
        .join(' ');
    if (asked(a) !== asked(b) || groups(a) !== groups(b)) return false;
    return (
      compareEntry({ molecule: a.molecule, docket: a.docket }, b, examine).relation === 'same' &&
      compareEntry({ molecule: b.molecule, docket: b.docket }, a, examine).relation === 'same'
    );
  }
}
