/** Reading of what `--intended` names: a file of structures, a SMILES, an InChI, or descriptors typed on units. */
import { Intention } from '../comparison/intention.ts';
import { type IntentionSource, Intentions } from '../comparison/intentions.ts';
import { parseTyped } from '../comparison/typed.ts';
import type { Settings } from '../docket.ts';
import { examine } from '../examine.ts';
import type { Format, Limits, RawEntry } from '../formats/format.ts';
import { inchiFormat } from '../formats/inchi.ts';
import { smilesFormat } from '../formats/smiles.ts';
import { type CommandIo, UsageError } from './io.ts';
import { openInput } from './reading.ts';

export interface IntendedResult {
  readonly intentions: Intentions;
  /** Entries of the file that could not be read; the others are used. */
  readonly problems: readonly string[];
}

function sourceOf(
  raw: RawEntry,
  part: number,
  format: Format,
  limits: Limits,
  settings: Settings,
  name: string,
): IntentionSource {
  return {
    name,
    load: () => {
      const entry = format.parse(raw, limits)[part];
      if (!entry?.molecule) throw new Error(entry?.error?.message ?? 'the entry holds no structure');
      return new Intention(name, entry.molecule, examine(entry.molecule, settings));
    },
  };
}

/** Collects the structures of a stream of entries. */
async function collect(
  shown: string,
  format: Format,
  entries: AsyncIterable<RawEntry>,
  limits: Limits,
  settings: Settings,
): Promise<IntendedResult> {
  const sources: IntentionSource[] = [];
  const problems: string[] = [];
  for await (const raw of entries) {
    format.parse(raw, limits).forEach((entry, part) => {
      if (entry.molecule && !entry.error) {
        sources.push(sourceOf(raw, part, format, limits, settings, entry.name));
        return;
      }
      const line = entry.error?.line ?? entry.line;
      problems.push(
        `${shown}, entry ${entry.entry}, line ${line}: ${entry.error?.message ?? 'no structure'}`,
      );
    });
  }
  return { intentions: Intentions.of(sources), problems };
}

async function fileExists(io: CommandIo, path: string): Promise<boolean> {
  try {
    const input = await io.open(path);
    await input.chunks[Symbol.asyncIterator]().return?.();
    return true;
  } catch {
    return false;
  }
}

/** Whether an argument is meant as the name of a file: it has a folder or a known ending. */
function looksLikePath(value: string): boolean {
  return /\.(smi|smiles|cxsmiles|ism|sdf|sd|mol|mdl|cif|mmcif|pdb|ent|inchi|txt)(\.gz)?$/i.test(value);
}

/** Reads an intention. @throws UsageError when nothing usable is found. */
export async function readIntended(
  io: CommandIo,
  value: string,
  limits: Limits,
  settings: Settings,
): Promise<IntendedResult> {
  const typed = parseTyped(value, true);
  if (typed) return { intentions: Intentions.typed(typed), problems: [] };
  if (value === '-' || (await fileExists(io, value))) {
    let result: IntendedResult;
    try {
      const { format, entries } = await openInput(io, value, limits);
      result = await collect(value, format, entries, limits, settings);
    } catch (error) {
      throw new UsageError(`--intended ${error instanceof Error ? error.message : String(error)}`);
    }
    if (result.intentions.count === 0) {
      throw new UsageError([`--intended ${value}: no usable structure`, ...result.problems].join('\n'));
    }
    return result;
  }
  if (looksLikePath(value)) throw new UsageError(`--intended ${value}: there is no such file`);
  const bytes = new TextEncoder().encode(`${value}\n`);
  const raw: RawEntry = { entry: 1, line: 1, bytes };
  const format = value.startsWith('InChI=') ? inchiFormat : smilesFormat;
  const [entry] = format.parse(raw, limits);
  if (entry?.molecule && !entry.error) {
    return {
      intentions: Intentions.of([sourceOf(raw, 0, format, limits, settings, entry.name)]),
      problems: [],
    };
  }
  const loose = parseTyped(value, false);
  if (loose) return { intentions: Intentions.typed(loose), problems: [] };
  throw new UsageError(
    `--intended ${value}: neither a file, nor descriptors on units (C7=R,C9=S), nor ${format === inchiFormat ? 'an' : 'a'} ${format.name}: ${entry?.error?.message ?? 'empty'}`,
  );
}
