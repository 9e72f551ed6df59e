/** Benchmark: time and energy of our first model of a molecule beside openchemlib's conformer generator with its MMFF94, on the same molecules in the same run. */
import { readFileSync } from 'node:fs';
import { resolve } from 'node:path';
import { embed } from '../../core/embedding/embed.ts';
import { loadTables } from '../../core/embedding/resources.ts';
import { writeMolfile } from '../../core/formats/molfile-writer.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';

const MOLECULES = 60;
const WARM_UP = 10;
const SEED = 1;
const SMALL = [
  'CCO',
  'CC(=O)C',
  'c1ccccc1',
  'C[C@H](N)C(=O)O',
  'C1CCCCC1',
  'CC(C)CO',
  'OCC(O)CO',
  'CN1CCCC1',
];

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[values.length >> 1] ?? Number.NaN;
const mean = (values: readonly number[]): number => values.reduce((a, b) => a + b, 0) / values.length;

/** Runs the benchmark. */
export async function run(report: (line: string) => void): Promise<void> {
  // Found from the project's root, where benchmarks are run: bundles lie elsewhere than sources.
  const data = resolve('../shared/data/chembl-chiral/chembl-20-chiral.smi');
  let lines: string[];
  try {
    lines = readFileSync(data, 'utf8').trim().split('\n');
  } catch {
    report('embedding: the published check data (../shared/data) is not beside this checkout; skipped');
    return;
  }
  const openchemlib = await import('openchemlib');
  openchemlib.Resources.registerFromNodejs(resolve('node_modules/openchemlib/dist/resources.json'));
  const tables = await loadTables();
  const chosen = lines.slice(0, WARM_UP + MOLECULES).map(line => line.split(/\s/)[0]!);
  const small: number[] = [];
  for (let round = 0; round < 5; round++) {
    for (const smiles of SMALL) {
      const start = performance.now();
      embed(parseSmiles(smiles).molecule, tables, { seed: SEED });
      if (round > 0) small.push(performance.now() - start);
    }
  }
  const ours: number[] = [];
  const theirs: number[] = [];
  const gains: number[] = [];
  let skipped = 0;
  chosen.forEach((smiles, at) => {
    const start = performance.now();
    const result = embed(parseSmiles(smiles).molecule, tables, { seed: SEED });
    const own = performance.now() - start;
    const begin = performance.now();
    let energy: number | null = null;
    try {
      const molecule = openchemlib.Molecule.fromSmiles(smiles);
      const conformer = new openchemlib.ConformerGenerator(SEED).getOneConformerAsMolecule(molecule);
      if (conformer) {
        const field = new openchemlib.ForceFieldMMFF94(conformer, 'MMFF94');
        field.minimise();
        energy = field.getTotalEnergy();
      }
    } catch {
      // It cannot build the molecule, or has no types for it: counted among those left out.
    }
    const other = performance.now() - begin;
    if (at < WARM_UP) return;
    if (!result.ok || energy === null || !Number.isFinite(energy)) {
      skipped++;
      return;
    }
    ours.push(own);
    theirs.push(other);
    // Both energies by the same code, on the coordinates of each; separate parts are not compared.
    if (!smiles.includes('.')) {
      const judged = new openchemlib.ForceFieldMMFF94(
        openchemlib.Molecule.fromMolfile(writeMolfile(result.molecule)),
        'MMFF94',
      ).getTotalEnergy();
      gains.push(judged - energy);
    }
  });
  report(
    `embedding: ${ours.length} chiral drug-like molecules, ${skipped} left out; relaxed with MMFF94 by both`,
  );
  report(`  ours         median ${median(ours).toFixed(1)} ms, mean ${mean(ours).toFixed(1)} ms a molecule`);
  report(
    `  openchemlib  median ${median(theirs).toFixed(1)} ms, mean ${mean(theirs).toFixed(1)} ms a molecule (first conformer)`,
  );
  report(`  ratio        ${(mean(theirs) / mean(ours)).toFixed(1)} of the means`);
  report(
    `  energy       ours less theirs: median ${median(gains).toFixed(2)} kcal/mol; at most equal in ${gains.filter(gain => gain <= 0.01).length} of ${gains.length}`,
  );
  report(
    `  small        median ${median(small).toFixed(2)} ms over ${SMALL.length} molecules of 3 to 7 heavy atoms`,
  );
}
