/** `deasil build`: models in space from SMILES, a drawing or a pose, with the configuration stated; conformers and stereoisomers. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { LabelledUnit } from '../docket.ts';
import { conformers } from '../embedding/conformers.ts';
import type { Model } from '../embedding/embed.ts';
import { enumerateIsomers } from '../embedding/isomers.ts';
import { type EmbeddingTables, loadTables } from '../embedding/resources.ts';
import { examine } from '../examine.ts';
import { DEFAULT_LIMITS, type DataItem } from '../formats/format.ts';
import { writeSdfEntry } from '../formats/molfile-writer.ts';
import { parseSmiles, SmilesError } from '../formats/smiles.ts';
import { flag, number, type OptionSpec, parseArguments, text } from './arguments.ts';
import { type CommandIo, ExitStatus, UsageError } from './io.ts';
import { openSink } from './output.ts';
import { openInput } from './reading.ts';

const OPTIONS = {
  conformers: { type: 'string' },
  isomers: { type: 'boolean' },
  seed: { type: 'string' },
  rmsd: { type: 'string' },
  window: { type: 'string' },
  output: { type: 'string', short: 'o' },
} as const satisfies Record<string, OptionSpec>;

export const BUILD_HELP = `deasil build SMILES|FILE [options] -o OUT.sdf

Builds relaxed models in space with the configuration that the notation, drawing or coordinates state.

  --conformers N      up to N conformers of each structure, best energy first (1)
  --isomers           every stereoisomer over the units that are not stated
  --seed N            fixes every random choice (1)
  --rmsd R            heavy-atom deviation in Å below which two conformers count as one (0.5)
  --window E          conformers more than E kcal/mol above the best are left out (15)
  -o, --output OUT    SDF to write; standard output without it

FILE may be - for standard input. What could not be built is told on standard error with the reason, and the rest is built.
A built model is a hypothesis of force field and distance geometry, not evidence of structure.
`;

const MOST_CONFORMERS = 10_000;

interface BuildOptions {
  readonly count: number;
  readonly isomers: boolean;
  readonly seed: number;
  readonly rmsd: number;
  readonly window: number;
}

interface Named {
  readonly name: string;
  readonly source: string;
  readonly molecule: Molecule | null;
  readonly error: string | null;
}

/** Runs the command. @throws UsageError for bad arguments or an unusable file. */
export async function run(args: readonly string[], io: CommandIo): Promise<number> {
  if (args.includes('--help') || args.includes('-h')) {
    await io.out(BUILD_HELP);
    return ExitStatus.agree;
  }
  const parsed = parseArguments(args, OPTIONS);
  const [source, ...more] = parsed.positionals;
  if (source === undefined) throw new UsageError('no SMILES or FILE given; - reads standard input');
  if (more.length > 0) throw new UsageError(`one SMILES or FILE at a time; ${more.join(' ')} is left over`);
  const options: BuildOptions = {
    count: number(parsed, 'conformers', { least: 1, most: MOST_CONFORMERS, whole: true }) ?? 1,
    isomers: flag(parsed, 'isomers'),
    seed: number(parsed, 'seed', { least: 0, most: 4294967295, whole: true }) ?? 1,
    rmsd: number(parsed, 'rmsd', { least: 0, most: 100 }) ?? 0.5,
    window: number(parsed, 'window', { least: 0, most: 10_000 }) ?? 15,
  };
  const structures = await structuresOf(io, source);
  const tables = await loadTables();
  const sink = openSink(io, text(parsed, 'output') ?? '-');
  const encoder = new TextEncoder();
  let built = 0;
  let failed = 0;
  try {
    for await (const structure of structures) {
      if (io.signal.aborted) {
        await sink.abort(new Error('interrupted'));
        return ExitStatus.interrupted;
      }
      const outcome = buildOne(structure, tables, options, io.signal);
      for (const note of outcome.notes) io.err(`${structure.source}: ${note}\n`);
      for (const entry of outcome.entries) await sink.write(encoder.encode(entry));
      built += outcome.entries.length;
      if (outcome.failed) failed++;
    }
    await sink.close();
  } catch (error) {
    await sink.abort(error instanceof Error ? error : new Error(String(error)));
    throw error;
  }
  if (built === 0) {
    if (failed === 0) throw new UsageError(`${source}: there are no structures`);
    return ExitStatus.unusable;
  }
  return failed > 0 ? ExitStatus.partly : ExitStatus.agree;
}

/** The structures of a SMILES typed in, else of a file. */
async function structuresOf(io: CommandIo, source: string): Promise<AsyncIterable<Named> | Iterable<Named>> {
  let opened: Awaited<ReturnType<typeof openInput>> | null = null;
  let problem = '';
  try {
    opened = await openInput(io, source, DEFAULT_LIMITS);
  } catch (error) {
    problem = error instanceof Error ? error.message : String(error);
  }
  if (opened === null) {
    try {
      const { molecule, warnings } = parseSmiles(source);
      for (const warning of warnings) io.err(`${source}: ${warning}\n`);
      return [{ name: '', source, molecule, error: null }];
    } catch (error) {
      if (!(error instanceof SmilesError)) throw error;
      // A name with a dot or a slash was meant as a file more often than as a SMILES.
      const asFile = /\.[A-Za-z0-9]{1,6}$|\.gz$/u.test(source) || source === '-';
      throw new UsageError(
        asFile ? problem : `${source}: no file of this name, and not a SMILES: ${error.message}`,
      );
    }
  }
  const { entries, format } = opened;
  async function* all(): AsyncGenerator<Named> {
    for await (const raw of entries) {
      for (const entry of format.parse(raw, DEFAULT_LIMITS)) {
        const at = `${source === '-' ? 'standard input' : source}, entry ${entry.entry}, line ${entry.error?.line ?? entry.line}`;
        yield { name: entry.name, source: at, molecule: entry.molecule, error: entry.error?.message ?? null };
      }
    }
  }
  return all();
}

/** SDF entries of one structure, what to say of it, and whether something of it could not be built. */
export function buildOne(
  structure: Named,
  tables: EmbeddingTables,
  options: BuildOptions,
  signal?: AbortSignal,
): { readonly entries: readonly string[]; readonly notes: readonly string[]; readonly failed: boolean } {
  if (structure.molecule === null)
    return { entries: [], notes: [structure.error ?? 'no structure'], failed: true };
  const notes: string[] = [];
  const entries: string[] = [];
  let failed = false;
  const passed = signal ? { signal } : {};
  const targets: { molecule: Molecule; isomer: DataItem[]; suffix: string }[] = [];
  if (options.isomers) {
    const list = enumerateIsomers(structure.molecule, tables, { seed: options.seed, test: true, ...passed });
    for (const { molecule, reason } of list.impossible) {
      notes.push(`left out ${letters(examine(molecule).units)}: ${reason}`);
    }
    if (list.truncated) notes.push(`only the first ${list.isomers.length} stereoisomers were built`);
    for (const isomer of list.isomers) {
      const relation =
        isomer.chirality === 'meso'
          ? 'meso'
          : isomer.enantiomer === null
            ? (isomer.chirality ?? 'undecided')
            : `enantiomer of ${isomer.enantiomer}`;
      targets.push({
        molecule: isomer.molecule,
        suffix: list.isomers.length > 1 ? ` isomer ${isomer.number}` : '',
        isomer: [
          { name: 'Isomer', value: `${isomer.number} of ${list.isomers.length}` },
          { name: 'Isomer relation', value: relation },
        ],
      });
    }
  } else targets.push({ molecule: structure.molecule, isomer: [], suffix: '' });
  for (const { molecule, isomer, suffix } of targets) {
    const result = conformers(molecule, tables, {
      count: options.count,
      seed: options.seed,
      rmsd: options.rmsd,
      window: options.window,
      ...passed,
    });
    if (!result.ok) {
      notes.push(`${suffix.trim() === '' ? '' : `${suffix.trim()}: `}${result.reason}`);
      failed = true;
      continue;
    }
    for (const warning of result.models[0]?.warnings ?? []) notes.push(warning);
    result.models.forEach((model, at) => {
      const title = `${structure.name}${suffix}${options.count > 1 ? ` conformer ${at + 1}` : ''}`.trim();
      entries.push(writeSdfEntry(model.molecule, { title, data: [...isomer, ...modelItems(model)] }));
    });
  }
  return { entries, notes, failed };
}

function modelItems(model: Model): DataItem[] {
  const { units } = examine(model.molecule);
  return [
    { name: 'MMFF94 energy kcal/mol', value: model.energy === null ? 'none' : model.energy.toFixed(4) },
    ...(units.length > 0 ? [{ name: 'Descriptors', value: letters(units) }] : []),
    { name: 'Note', value: 'Computed model: a hypothesis, not evidence of structure' },
  ];
}

/** Descriptors with 1-based atom numbers: "2R, 5-6E". */
function letters(units: readonly LabelledUnit[]): string {
  const list = units
    .filter(({ descriptor, unit }) => descriptor !== null && unit.labile === null)
    .map(({ descriptor, unit }) => `${unit.atoms.map(atom => atom + 1).join('-')}${descriptor}`);
  return list.length > 0 ? list.join(', ') : 'no descriptors';
}
