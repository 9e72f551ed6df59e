/** `deasil mirror`: the mirror image of a model, in the right space group and about the right origin where it is a crystal structure. */
import { resolve } from 'node:path';
import { mirrorCif } from '../crystal/mirror-cif.ts';
import { EntryProblem } from '../formats/errors.ts';
import { mirrorPdb, mirrorSdf, mirrorXyz } from '../formats/mirror-plain.ts';
import { detectFormat } from '../formats/registry.ts';
import { type OptionSpec, parseArguments, text } from './arguments.ts';
import { writeAtomically } from './atomic-write.ts';
import { type CommandIo, ExitStatus, UsageError } from './io.ts';

const OPTIONS = { output: { type: 'string', short: 'o' } } as const satisfies Record<string, OptionSpec>;

export const MIRROR_HELP = `deasil mirror FILE [-o OUT]

Writes the mirror image of every structure of a file: CIF, mmCIF, chemical components, PDB, SDF, Molfile, XYZ.
FILE may be - for standard input; gzip is undone. What was done, and what to do next, goes to standard error.

  -o, --output OUT    where to write; standard output without it

A crystal structure is inverted in a point that its symmetry operators give; the group changes within its
enantiomorphic pair where it must. Torsions and symmetry codes are made to fit; figures of merit, the Flack
parameter, checksums and descriptors in names are taken out, since they hold for the old model.
A macromolecule becomes its mirror image: L residues become D. Whether an inverted model is right, only a
refinement against the data can tell.
`;

const HEAD_BYTES = 64 * 1024;

/** One character for each byte, so that what is not changed is written back as it was. */
function characters(bytes: Uint8Array): string {
  const parts: string[] = [];
  for (let at = 0; at < bytes.length; at += 8192) {
    parts.push(String.fromCharCode(...bytes.subarray(at, at + 8192)));
  }
  return parts.join('');
}

function bytesOf(text: string): Uint8Array {
  return Uint8Array.from(text, character => character.charCodeAt(0));
}

async function readAll(io: CommandIo, path: string): Promise<Uint8Array> {
  try {
    const input = await io.open(path);
    const chunks: Uint8Array[] = [];
    let size = 0;
    for await (const chunk of input.chunks) {
      chunks.push(chunk);
      size += chunk.length;
    }
    const all = new Uint8Array(size);
    let at = 0;
    for (const chunk of chunks) {
      all.set(chunk, at);
      at += chunk.length;
    }
    return all;
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
}

/** Mirrors the bytes of a file. @throws UsageError for a format that cannot be mirrored; EntryProblem, its line 1-based, for a structure that cannot. */
export function mirrorBytes(
  bytes: Uint8Array,
  fileName: string,
): { bytes: Uint8Array; notes: readonly string[] } {
  const format = detectFormat(bytes.subarray(0, HEAD_BYTES), fileName);
  const content = characters(bytes);
  const plain = (mirror: typeof mirrorPdb): { bytes: Uint8Array; notes: readonly string[] } => {
    try {
      const { text: mirrored, notes } = mirror(content);
      return { bytes: bytesOf(mirrored), notes };
    } catch (error) {
      // Plain formats count lines from 0.
      if (error instanceof EntryProblem && error.at !== null) {
        throw new EntryProblem(error.code, error.message, error.at + 1);
      }
      throw error;
    }
  };
  switch (format?.name) {
    case 'CIF': {
      const { text: mirrored, notes } = mirrorCif(content);
      return { bytes: bytesOf(mirrored), notes };
    }
    case 'PDB':
      return plain(mirrorPdb);
    case 'SDF':
      return plain(mirrorSdf);
    case 'XYZ':
      return plain(mirrorXyz);
    default:
      throw new UsageError(
        `${fileName}: ${format ? `${format.name} has no coordinates to mirror` : 'not a format that can be read'}; CIF, mmCIF, PDB, SDF and XYZ can be mirrored`,
      );
  }
}

/** Runs the command. @throws UsageError for bad arguments or a file that cannot be mirrored. */
export async function run(args: readonly string[], io: CommandIo): Promise<number> {
  if (args.includes('--help') || args.includes('-h')) {
    await io.out(MIRROR_HELP);
    return ExitStatus.agree;
  }
  const parsed = parseArguments(args, OPTIONS);
  const [file, ...more] = parsed.positionals;
  if (file === undefined) throw new UsageError('no FILE given; - reads standard input');
  if (more.length > 0) throw new UsageError(`one FILE is mirrored at a time; ${more.join(' ')} is left over`);
  const shown = file === '-' ? 'standard input' : file;
  const input = await readAll(io, file);
  if (input.length === 0) throw new UsageError(`${shown}: the file is empty`);
  let result: { bytes: Uint8Array; notes: readonly string[] };
  try {
    result = mirrorBytes(input, shown);
  } catch (error) {
    if (!(error instanceof EntryProblem)) throw error;
    throw new UsageError(`${shown}${error.at === null ? '' : `, line ${error.at}`}: ${error.message}`);
  }
  const output = text(parsed, 'output');
  if (output === null || output === '-') await io.out(result.bytes);
  else await writeAtomically(resolve(io.cwd, output), result.bytes);
  for (const note of result.notes) io.err(`${shown}: ${note}\n`);
  return ExitStatus.agree;
}
