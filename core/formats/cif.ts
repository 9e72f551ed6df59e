/** CIF: small-molecule structures, macromolecular models and chemical components, told apart block by block by what they list. */
import { readComponent, isComponentBlock } from './ccd.ts';
import { isCoreBlock, readCoreBlock } from './cif-core.ts';
import { splitCif } from './cif-split.ts';
import { type CifBlock, type CifProblem, parseCif } from './cif-syntax.ts';
import { EntryProblem } from './errors.ts';
import type { Entry, Format, Limits, RawEntry } from './format.ts';
import { decodeText } from './lines.ts';
import { isModelBlock, readModelBlock } from './mmcif.ts';

/** CIF 1.1 and 2.0 of any of the dictionaries core, PDBx/mmCIF and chemical components. */
export const cifFormat: Format = {
  name: 'CIF',
  extensions: ['cif', 'mmcif', 'mcif', 'pdbx'],

  sniff(head) {
    const text = decodeText(head.subarray(0, 64 * 1024));
    if (/^\uFEFF?#\\#CIF_/u.test(text)) return 1;
    const block = /^[ \t]*data_\S*/imu.test(text);
    const name = /^[ \t]*(?:loop_\s+)?_[a-z][\w.\-[\]/%]*/imu.test(text);
    return block && name ? 0.95 : 0;
  },

  split: splitCif,

  parse: parseEntry,
};

/** Most problems told one by one. */
const TOLD_PROBLEMS = 8;

function problemTexts(problems: readonly CifProblem[]): string[] {
  const told = problems.slice(0, TOLD_PROBLEMS).map(({ line, message }) => `line ${line}: ${message}`);
  if (problems.length > told.length) told.push(`and ${problems.length - told.length} more errors of syntax`);
  return told;
}

function parseEntry(raw: RawEntry, limits: Limits): Entry[] {
  const document = parseCif(decodeText(raw.bytes), raw.line);
  const warnings = problemTexts(document.problems);
  const blocks = document.blocks.filter(
    block => isCoreBlock(block) || isModelBlock(block) || isComponentBlock(block),
  );
  if (blocks.length === 0) {
    const message =
      document.blocks.length === 0
        ? 'no data block; a line data_NAME is wanted before the items'
        : 'no block lists atoms (_atom_site_fract_x, _atom_site.Cartn_x or _chem_comp_atom.atom_id)';
    const name = document.blocks[0]?.name ?? '';
    return [failed(raw, raw.entry, raw.line, name, warnings, 'no-structure', message, null)];
  }
  const entries: Entry[] = [];
  for (const block of blocks)
    entries.push(...readBlock(block, raw, raw.entry + entries.length, warnings, limits));
  return entries;
}

function readBlock(
  block: CifBlock,
  raw: RawEntry,
  entry: number,
  problems: readonly string[],
  limits: Limits,
): Entry[] {
  try {
    if (isModelBlock(block)) {
      return readModelBlock(block, limits).map((model, k) => ({
        entry: entry + k,
        line: block.line,
        data: [],
        error: null,
        ...model,
        warnings: [...problems, ...model.warnings],
      }));
    }
    if (isComponentBlock(block)) {
      const component = readComponent(block, limits);
      return [
        {
          entry,
          line: block.line,
          name: component.id,
          molecule: component.molecule,
          data: component.data,
          warnings: [...problems, ...component.warnings],
          error: null,
          crystal: null,
          alternatives: component.alternatives,
        },
      ];
    }
    const { molecule, crystal, alternatives, warnings } = readCoreBlock(block, limits);
    return [
      {
        entry,
        line: block.line,
        name: block.name,
        molecule,
        data: [],
        warnings: [...problems, ...warnings],
        error: null,
        crystal,
        alternatives,
      },
    ];
  } catch (error) {
    if (!(error instanceof EntryProblem)) throw error;
    return [failed(raw, entry, block.line, block.name, problems, error.code, error.message, error.at)];
  }
}

function failed(
  raw: RawEntry,
  entry: number,
  line: number,
  name: string,
  warnings: readonly string[],
  code: string,
  message: string,
  at: number | null,
): Entry {
  return {
    entry,
    line,
    name,
    molecule: null,
    data: [],
    warnings,
    error: { code, message, line: at ?? raw.line },
  };
}
