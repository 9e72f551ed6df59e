/** Finding what a command line names: an entry of a file, a unit of a docket, two atoms of a molecule. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, IMPLICIT_HYDROGEN, LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import type { Docket } from '../docket.ts';
import { DEFAULT_LIMITS, type Entry } from '../formats/format.ts';
import { type CommandIo, UsageError } from './io.ts';
import { openInput } from './reading.ts';

/** The entry of a file by its number. @throws UsageError when the file cannot be opened or has no such entry. */
export async function findEntry(io: CommandIo, file: string, wanted: number): Promise<Entry> {
  let opened: Awaited<ReturnType<typeof openInput>>;
  try {
    opened = await openInput(io, file, DEFAULT_LIMITS);
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
  let count = 0;
  for await (const raw of opened.entries) {
    // A file of one raw entry may hold several models, so that only reading tells their numbers.
    if (raw.entry > wanted) break;
    for (const entry of opened.format.parse(raw, DEFAULT_LIMITS)) {
      count = Math.max(count, entry.entry);
      if (entry.entry === wanted) return entry;
    }
  }
  throw new UsageError(`${file}: there is no entry ${wanted}; the last is ${count}`);
}

/** What a ligand is called in text. */
export function labelOf(molecule: Molecule, ligand: number): string {
  if (ligand === IMPLICIT_HYDROGEN) return 'H';
  if (ligand === LONE_PAIR) return 'lone pair';
  return atomLabel(molecule, ligand, elementSymbol);
}

/** All names under which an atom can be given: its label, number, symbol and number, place in a macromolecule. */
function namesOf(molecule: Molecule, atom: number): string[] {
  const symbol = elementSymbol(molecule.elements[atom]!);
  const residue = molecule.residues?.[atom];
  const all = [labelOf(molecule, atom), String(atom + 1), `${symbol}${atom + 1}`];
  if (residue) all.push(`${residue.chain}/${residue.residue}/${residue.number}/${residue.atomName}`);
  return all;
}

/** Index in the docket of the unit named by an atom of it, or by two. @throws UsageError that lists the units there are. */
export function findUnit(molecule: Molecule, docket: Docket, wanted: string): number {
  const names = (atom: number): string[] => namesOf(molecule, atom);
  const matches: number[] = [];
  docket.units.forEach(({ unit }, u) => {
    const single = unit.atoms.some(atom => names(atom).includes(wanted));
    const [first, second] = unit.atoms;
    const pair =
      first !== undefined &&
      second !== undefined &&
      names(first).some(a => names(second).some(b => wanted === `${a}-${b}` || wanted === `${b}-${a}`));
    if (single || pair) matches.push(u);
  });
  const own = matches.filter(u => docket.units[u]!.unit.atoms.length === 1);
  const only = matches.length === 1 ? matches[0] : own.length === 1 ? own[0] : undefined;
  if (only !== undefined) return only;
  const said = (list: readonly number[]): string =>
    list.map(u => docket.units[u]!.unit.atoms.map(atom => labelOf(molecule, atom)).join('-')).join(', ');
  if (matches.length > 1)
    throw new UsageError(`--unit ${wanted}: several units have this atom: ${said(matches)}`);
  const all = docket.units.map((_, u) => u);
  throw new UsageError(
    `--unit ${wanted}: no stereogenic unit there; ${all.length > 0 ? `the units are ${said(all)}` : 'the entry has none'}`,
  );
}
