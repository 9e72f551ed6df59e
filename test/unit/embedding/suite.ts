/** Reads the published structures of the force field's validation suite for tests. */
import { readFileSync } from 'node:fs';
import type { Molecule } from '../../../core/chemistry/molecule.ts';
import { readEntries } from '../../../core/formats/registry.ts';

export interface SuiteStructure {
  readonly name: string;
  readonly molecule: Molecule;
  /** Published total energy, kcal/mol. */
  readonly energy: number;
}

/** The structures of a folder with `structures.sdf` and `energies.tsv`. */
export async function readSuite(folder: string): Promise<SuiteStructure[]> {
  const energies = new Map(
    readFileSync(`${folder}/energies.tsv`, 'utf8')
      .trim()
      .split('\n')
      .slice(1)
      .map(line => line.split('\t') as [string, string]),
  );
  const bytes = new Uint8Array(readFileSync(`${folder}/structures.sdf`));
  async function* chunks(): AsyncGenerator<Uint8Array> {
    yield bytes;
  }
  const list: SuiteStructure[] = [];
  for await (const entry of readEntries(chunks(), 'structures.sdf')) {
    if (!entry.molecule) throw new Error(`${entry.name}: ${entry.error?.message ?? 'no molecule'}`);
    const energy = energies.get(entry.name);
    if (energy === undefined) throw new Error(`${entry.name}: no published energy`);
    list.push({ name: entry.name, molecule: entry.molecule, energy: Number(energy) });
  }
  return list;
}
