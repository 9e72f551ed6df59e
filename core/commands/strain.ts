/** `deasil strain`: the MMFF94 energy of each entry, its terms, and its strain against the best of its conformers. */
import { poseEnergy, poseStrain } from '../embedding/strain.ts';
import { loadTables } from '../embedding/resources.ts';
import { DEFAULT_LIMITS } from '../formats/format.ts';
import { flag, number, type OptionSpec, parseArguments } from './arguments.ts';
import { type CommandIo, ExitStatus, UsageError } from './io.ts';
import { openInput } from './reading.ts';

const OPTIONS = {
  terms: { type: 'boolean' },
  json: { type: 'boolean' },
  relax: { type: 'boolean' },
  conformers: { type: 'string' },
  seed: { type: 'string' },
} as const satisfies Record<string, OptionSpec>;

export const STRAIN_HELP = `deasil strain FILE [options]

The MMFF94 energy of the coordinates as they stand, for each entry, in kcal/mol (no cut-off, dielectric constant 1).

  --terms             the terms of the energy by kind
  --relax             the strain too: the energy after a relaxation that holds heavy atoms within 0.3 Å, less that
                      of the best conformer with the same configuration
  --conformers N      conformers for --relax (20)
  --seed N            fixes every random choice of --relax (1)
  --json              one JSON object a line for each entry

FILE may be - for standard input. An entry without coordinates in space, or with atoms for which MMFF94 has no type, is
reported as an error and the rest are read. A gas-phase force-field energy says nothing of binding.
`;

const MOST_CONFORMERS = 10_000;

/** Runs the command. @throws UsageError for bad arguments or an unusable file. */
export async function run(args: readonly string[], io: CommandIo): Promise<number> {
  if (args.includes('--help') || args.includes('-h')) {
    await io.out(STRAIN_HELP);
    return ExitStatus.agree;
  }
  const parsed = parseArguments(args, OPTIONS);
  const [file, ...more] = parsed.positionals;
  if (file === undefined) throw new UsageError('no FILE given; - reads standard input');
  if (more.length > 0) throw new UsageError(`one FILE at a time; ${more.join(' ')} is left over`);
  const count = number(parsed, 'conformers', { least: 1, most: MOST_CONFORMERS, whole: true }) ?? 20;
  const seed = number(parsed, 'seed', { least: 0, most: 4294967295, whole: true }) ?? 1;
  const withTerms = flag(parsed, 'terms');
  const json = flag(parsed, 'json');
  const withStrain = flag(parsed, 'relax');
  let opened: Awaited<ReturnType<typeof openInput>>;
  try {
    opened = await openInput(io, file, DEFAULT_LIMITS);
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
  const tables = await loadTables();
  let read = 0;
  let failed = 0;
  for await (const raw of opened.entries) {
    for (const entry of opened.format.parse(raw, DEFAULT_LIMITS)) {
      if (io.signal.aborted) return ExitStatus.interrupted;
      read++;
      const base = { file, entry: entry.entry, name: entry.name };
      try {
        if (!entry.molecule) throw new Error(entry.error?.message ?? 'no structure');
        const { total, terms, warnings } = poseEnergy(entry.molecule, tables);
        const strain = withStrain
          ? poseStrain(entry.molecule, tables, { count, seed, signal: io.signal })
          : null;
        const notes = [...entry.warnings, ...(strain?.warnings ?? warnings)];
        if (json) {
          const record = {
            ...base,
            total,
            ...(withTerms ? { terms } : {}),
            ...(strain
              ? {
                  held: strain.held,
                  best: strain.best,
                  strain: strain.strain,
                  movement: strain.movement,
                  conformers: strain.conformers,
                }
              : {}),
            warnings: notes,
            error: null,
          };
          await io.out(`${JSON.stringify(record)}\n`);
        } else {
          const parts = [`${entry.entry}`, entry.name, total.toFixed(3)];
          if (withTerms)
            for (const [kind, value] of Object.entries(terms))
              parts.push(`${kind} ${Number(value).toFixed(3)}`);
          if (strain) {
            parts.push(
              `held ${strain.held.toFixed(3)}`,
              `best ${strain.best.toFixed(3)}`,
              `strain ${strain.strain.toFixed(3)}`,
              `movement ${strain.movement.toFixed(2)} Å`,
            );
          }
          await io.out(`${parts.join('\t')}\n`);
          for (const note of notes) io.err(`${file}, entry ${entry.entry}: ${note}\n`);
        }
      } catch (error) {
        failed++;
        const message = error instanceof Error ? error.message : String(error);
        if (json) {
          const code = entry.molecule ? 'no-energy' : (entry.error?.code ?? 'unreadable');
          const at = entry.error?.line ?? entry.line;
          await io.out(`${JSON.stringify({ ...base, total: null, error: { code, message, line: at } })}\n`);
        } else io.err(`${file}, entry ${entry.entry}, line ${entry.error?.line ?? entry.line}: ${message}\n`);
      }
    }
  }
  if (read === 0) throw new UsageError(`${file}: there are no entries`);
  return failed > 0 ? ExitStatus.partly : ExitStatus.agree;
}
