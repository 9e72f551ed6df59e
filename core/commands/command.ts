/** The command line as a whole: finds the command, runs it, turns its errors into messages and exit statuses. */
import manifest from '../../package.json' with { type: 'json' };
import { type CommandIo, ExitStatus, UsageError } from './io.ts';

type Command = { run(args: readonly string[], io: CommandIo): Promise<number> };

/** Commands are loaded when they are called, so that each starts quickly. */
const COMMANDS: Readonly<Record<string, { readonly line: string; load(): Promise<Command> }>> = {
  check: { line: 'handedness of every unit, against the intention', load: () => import('./check.ts') },
  explain: { line: 'how the ligands of one unit were ranked', load: () => import('./explain.ts') },
  mirror: {
    line: 'the mirror image of a model, in the right space group',
    load: () => import('./mirror.ts'),
  },
  build: { line: 'relaxed models from SMILES, a drawing or a pose', load: () => import('./build.ts') },
  strain: { line: 'MMFF94 energy and strain of poses', load: () => import('./strain.ts') },
};

function help(): string {
  const width = Math.max(...Object.keys(COMMANDS).map(name => name.length));
  const list = Object.entries(COMMANDS).map(([name, { line }]) => `  ${name.padEnd(width)}  ${line}`);
  return [
    'deasil COMMAND [arguments]',
    '',
    'Checks the handedness of three-dimensional molecular models.',
    '',
    ...list,
    '',
    'deasil COMMAND --help tells the options of a command; deasil --version the version.',
    '',
  ].join('\n');
}

/** Runs a command line; resolves with the exit status. */
export async function runCommandLine(args: readonly string[], io: CommandIo): Promise<number> {
  const [name, ...rest] = args;
  if (name === '--version' || name === '-V') {
    await io.out(`deasil ${manifest.version}\n`);
    return ExitStatus.agree;
  }
  if (name === '--help' || name === '-h' || name === 'help') {
    await io.out(help());
    return ExitStatus.agree;
  }
  if (name === undefined) {
    io.err(help());
    return ExitStatus.unusable;
  }
  const command = Object.hasOwn(COMMANDS, name) ? COMMANDS[name] : undefined;
  if (!command) {
    io.err(`deasil: there is no command ${name}; one of ${Object.keys(COMMANDS).join(', ')}\n`);
    return ExitStatus.unusable;
  }
  try {
    return await (await command.load()).run(rest, io);
  } catch (error) {
    if (error instanceof UsageError) {
      io.err(`deasil ${name}: ${error.message}\n`);
      return ExitStatus.unusable;
    }
    if (error instanceof Error && error.name === 'WriteError') {
      io.err(`deasil ${name}: ${error.message}\n`);
      return ExitStatus.unusable;
    }
    throw error;
  }
}
