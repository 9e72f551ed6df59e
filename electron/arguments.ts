/** The arguments of `npm start` and of the packaged program: files to open, and a few options. */
import { isAbsolute, join } from 'node:path';

export interface StartArguments {
  /** Absolute paths. */
  readonly files: readonly string[];
  /** Serve to a browser even where the Electron runtime is at hand. */
  readonly browser: boolean;
  /** Print the address only. */
  readonly quiet: boolean;
  readonly help: boolean;
  /** 0 for a port that the system picks. */
  readonly port: number;
}

export const USAGE = `npm start -- [FILE...] [--browser] [--no-open] [--port N]

Opens the window with the files; without any, with the demo.

  --browser   serve the window to a browser on 127.0.0.1, also where the Electron runtime is at hand
  --no-open   print the address, do not open a browser
  --port N    serve on this port; without it the system picks one
`;

/** Has the Electron shell open the demo. */
export const DEMO_SWITCH = '--deasil-demo';

const PORT_LIMIT = 65_535;

/**
 * Reads the arguments. @param folder Relative paths start here.
 * @throws Error that names an argument which is not understood.
 */
export function parseArguments(args: readonly string[], folder: string): StartArguments {
  const files: string[] = [];
  let browser = false;
  let quiet = false;
  let help = false;
  let port = 0;
  let onlyFiles = false;
  for (let i = 0; i < args.length; i++) {
    const argument = args[i]!;
    if (onlyFiles || !argument.startsWith('-'))
      files.push(isAbsolute(argument) ? argument : join(folder, argument));
    else if (argument === '--') onlyFiles = true;
    else if (argument === '--browser') browser = true;
    else if (argument === '--no-open') quiet = true;
    else if (argument === '--help' || argument === '-h') help = true;
    else if (argument === '--port') {
      const text = args[++i] ?? '';
      port = Number(text);
      if (!/^\d+$/.test(text) || port > PORT_LIMIT)
        throw new Error(`--port wants a number up to ${PORT_LIMIT}, not "${text}"`);
    } else throw new Error(`there is no option ${argument}`);
  }
  return { files, browser, quiet, help, port };
}

/**
 * The files among the arguments of an Electron start or of a second one: what is not an option.
 *
 * The shell's own switches (`--no-sandbox`, `--type=…`) are no files, nor is the program's folder of an unpackaged start.
 */
export function filesOf(argv: readonly string[], packaged: boolean, folder: string): string[] {
  const rest = argv.slice(packaged ? 1 : 2).filter(argument => argument !== '' && !argument.startsWith('-'));
  return rest.map(argument => (isAbsolute(argument) ? argument : join(folder, argument)));
}
