/** `deasil explain`: how the ligands of one unit were ranked, sphere by sphere, and the rule that decided each step. */
import { IMPLICIT_HYDROGEN, LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import { type LetterChange, letterChanges } from '../cip/letter-changes.ts';
import { type StereoStatement, stereoStatements } from '../comparison/statement.ts';
import type { Ladder, LadderNode, LadderStep, LabelledUnit } from '../docket.ts';
import { examine, explainUnit } from '../examine.ts';
import type { Entry } from '../formats/format.ts';
import { figure } from '../record/text.ts';
import {
  flag,
  number,
  type OptionSpec,
  parseArguments,
  SETTING_HELP,
  SETTING_OPTIONS,
  settingsOf,
  text,
} from './arguments.ts';
import { type CommandIo, ExitStatus, UsageError } from './io.ts';
import { findEntry, findUnit, labelOf } from './lookup.ts';

const OPTIONS = {
  unit: { type: 'string' },
  entry: { type: 'string' },
  json: { type: 'boolean' },
  ...SETTING_OPTIONS,
} as const satisfies Record<string, OptionSpec>;

export const EXPLAIN_HELP = `deasil explain FILE --unit ATOM [options]

Shows the ladder of one stereogenic unit: which sets were compared in which sphere, the first difference, the rule.

  --unit ATOM         an atom of the unit: its label in the file (C7, CA) or its number; two joined by a
                      hyphen (C3-C4) for a unit that spans two
  --entry N           the entry of the file (1)
  --json              the ladder as one JSON object
${SETTING_HELP}

A computed descriptor says what the coordinates show; it is no proof of absolute configuration.
`;

/** Most changes of a substituent that are listed as text. */
const CHANGES_LISTED = 8;

/** Runs the command. @throws UsageError for bad arguments, an entry or a unit that is not there. */
export async function run(args: readonly string[], io: CommandIo): Promise<number> {
  if (args.includes('--help') || args.includes('-h')) {
    await io.out(EXPLAIN_HELP);
    return ExitStatus.agree;
  }
  const parsed = parseArguments(args, OPTIONS);
  const [file, ...more] = parsed.positionals;
  if (file === undefined) throw new UsageError('no FILE given; - reads standard input');
  if (more.length > 0)
    throw new UsageError(`one FILE is explained at a time; ${more.join(' ')} is left over`);
  const wanted = text(parsed, 'unit');
  if (wanted === null) throw new UsageError('no unit named; give --unit ATOM');
  const entryNumber = number(parsed, 'entry', { least: 1, most: Number.MAX_SAFE_INTEGER, whole: true }) ?? 1;
  const settings = settingsOf(parsed);
  const entry = await findEntry(io, file, entryNumber);
  const { molecule } = entry;
  if (entry.error || !molecule) {
    const at = entry.error?.line ?? entry.line;
    throw new UsageError(
      `${file}, entry ${entryNumber}, line ${at}: ${entry.error?.message ?? 'no structure'}`,
    );
  }
  const docket = examine(molecule, settings);
  const index = findUnit(molecule, docket, wanted);
  const labelled = docket.units[index]!;
  const ladder = explainUnit(molecule, docket, index, settings);
  const context: Context = {
    changes: letterChanges(molecule, docket, index, settings),
    statements: stereoStatements(molecule, docket),
  };
  if (flag(parsed, 'json')) {
    await io.out(`${JSON.stringify(ladderRecord(file, entry, molecule, labelled, ladder, context))}\n`);
  } else {
    await io.out(ladderText(file, entry, molecule, labelled, ladder, context));
  }
  return ExitStatus.agree;
}

/** What stands beside the ladder: changes that would give another letter, and what holds of the whole molecule. */
interface Context {
  readonly changes: readonly LetterChange[];
  readonly statements: readonly StereoStatement[];
}

function nodeText(node: LadderNode): string {
  return node.text;
}

function setText(set: readonly LadderNode[], at: number | null): string {
  return `{${set.map((node, n) => (n === at ? `*${nodeText(node)}*` : nodeText(node))).join(', ')}}`;
}

function stepLines(molecule: Molecule, step: LadderStep): string[] {
  const above = labelOf(molecule, step.above);
  const below = labelOf(molecule, step.below);
  const lines = [
    step.rule === null ? `${above} and ${below} are not told apart` : `${above} before ${below}`,
  ];
  const width = Math.max(above.length, below.length);
  for (const { sphere, above: higher, below: lower, difference } of step.spheres) {
    const row = (sets: readonly (readonly LadderNode[])[]): string =>
      sets.map((set, s) => setText(set, difference?.set === s ? difference.place : null)).join(' ');
    const mark = difference ? '  differs' : '';
    lines.push(`    sphere ${sphere}  ${above.padEnd(width)}  ${row(higher)}`);
    lines.push(`    ${' '.repeat(`sphere ${sphere}`.length)}  ${below.padEnd(width)}  ${row(lower)}${mark}`);
  }
  lines.push(`    ${step.summary}`);
  return lines;
}

function ladderText(
  file: string,
  entry: Entry,
  molecule: Molecule,
  labelled: LabelledUnit,
  ladder: Ladder,
  context: Context,
): string {
  const { unit } = labelled;
  const name = unit.atoms.map(atom => labelOf(molecule, atom)).join('-');
  const title = [file, String(entry.entry), entry.name].filter(part => part !== '').join('  ');
  const measures: string[] = [];
  if (labelled.signedVolume !== null) measures.push(`signed volume ${figure(labelled.signedVolume, 2)} Å³`);
  if (labelled.torsion !== null) measures.push(`torsion ${figure(labelled.torsion, 1)}°`);
  if (unit.firmness !== null) measures.push(`firmness ${figure(unit.firmness, 2)}`);
  const letter = labelled.descriptor ?? (unit.state === 'clear' ? 'no descriptor' : unit.state);
  const lines = [title, [`${name}, ${unit.kind}: ${letter}`, ...measures].join(', ')];
  const ends: (1 | 2 | null)[] = unit.ends.length > 1 ? [1, 2] : [null];
  for (const end of ends) {
    const ranked = labelled.ranking.filter(each => each.end === end);
    const order = [...ranked]
      .sort((a, b) => a.rank - b.rank)
      .map(each => `${each.rank} ${labelOf(molecule, each.ligand)}`);
    const where = end === null ? '' : ` at ${labelOf(molecule, unit.ends[end - 1]!.atom)}`;
    if (order.length > 0) lines.push(`ranking${where}: ${order.join(', ')}`);
    for (const step of ladder.steps.filter(each => each.end === end)) {
      lines.push(...stepLines(molecule, step).map(line => `  ${line}`));
    }
  }
  if (ladder.auxiliary.length > 0) {
    const said = ladder.auxiliary.map(
      ({ atoms, descriptor }) => `${atoms.map(atom => labelOf(molecule, atom)).join('-')} ${descriptor}`,
    );
    lines.push(`auxiliary descriptors: ${said.join(', ')}`);
  }
  lines.push(`(X): duplicate atom; ${ladder.nodes} nodes in the digraph`);
  lines.push(...contextLines(context));
  for (const warning of [...unit.warnings, ...labelled.warnings]) lines.push(warning);
  return `${lines.join('\n')}\n`;
}

function contextLines({ changes, statements }: Context): string[] {
  const lines: string[] = [];
  if (changes.length > 0) {
    lines.push('the same arrangement in space would have another letter with');
    for (const { change, descriptor } of changes.slice(0, CHANGES_LISTED))
      lines.push(`  ${change}: ${descriptor}`);
    if (changes.length > CHANGES_LISTED)
      lines.push(`  and ${changes.length - CHANGES_LISTED} other single changes`);
  }
  for (const { molecule, units, stereoisomers, chirality } of statements) {
    if (units === 0) continue;
    const which = statements.length > 1 ? `molecule ${molecule}` : 'the molecule';
    const count =
      stereoisomers === null ? 'stereoisomers not counted' : `${stereoisomers} stereoisomers possible`;
    lines.push(`${which}: ${units} ${units === 1 ? 'unit' : 'units'}, ${count}, this one ${chirality}`);
  }
  return lines;
}

/** The ladder with 1-based atoms, for programs. */
function ladderRecord(
  file: string,
  entry: Entry,
  molecule: Molecule,
  labelled: LabelledUnit,
  ladder: Ladder,
  context: Context,
): object {
  const ligand = (at: number): object => ({
    atom: at >= 0 ? at + 1 : null,
    ...(at === IMPLICIT_HYDROGEN && { implicit: 'H' }),
    ...(at === LONE_PAIR && { implicit: 'lone-pair' }),
    label: labelOf(molecule, at),
  });
  const nodes = (sets: readonly (readonly LadderNode[])[]): object =>
    sets.map(set => set.map(node => ({ ...ligand(node.atom), nature: node.nature, text: node.text })));
  return {
    file,
    entry: entry.entry,
    name: entry.name,
    kind: labelled.unit.kind,
    atoms: labelled.unit.atoms.map(atom => atom + 1),
    labels: labelled.unit.atoms.map(atom => labelOf(molecule, atom)),
    descriptor: labelled.descriptor,
    state: labelled.unit.state,
    ranking: labelled.ranking.map(({ ligand: at, rank, decidedBy, sphere, end }) => ({
      ...ligand(at),
      rank,
      decidedBy,
      sphere,
      end,
    })),
    steps: ladder.steps.map(({ above, below, end, rule, sphere, spheres, summary }) => ({
      above: ligand(above),
      below: ligand(below),
      end,
      rule,
      sphere,
      summary,
      spheres: spheres.map(each => ({
        sphere: each.sphere,
        above: nodes(each.above),
        below: nodes(each.below),
        difference: each.difference,
      })),
    })),
    auxiliary: ladder.auxiliary.map(({ atoms, descriptor }) => ({
      atoms: atoms.map(atom => atom + 1),
      descriptor,
    })),
    nodes: ladder.nodes,
    letterChanges: context.changes.map(({ atom, distance, change, descriptor }) => ({
      atom: atom + 1,
      distance,
      change,
      descriptor,
    })),
    molecules: context.statements,
  };
}
