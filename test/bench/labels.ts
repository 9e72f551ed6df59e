/**
 * Benchmark of labels: time a label and time an entry beside rdkit.js on the same molecules in the same run, what each
 * step takes, and the largest hierarchical digraphs.
 *
 * Molecules: 5,000 SMILES of ChEMBL and the 200 models in space of the CIP validation suite, from `../shared/data`.
 */
import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import initRDKit from '@rdkit/rdkit';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { Labeller, labelUnits } from '../../core/cip/label.ts';
import { DEFAULT_SETTINGS } from '../../core/docket.ts';
import { examine } from '../../core/examine.ts';
import { DEFAULT_LIMITS, type RawEntry } from '../../core/formats/format.ts';
import { sdfFormat } from '../../core/formats/sdf.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { perceiveUnits } from '../../core/perception/perceive.ts';
import { each, ratio, timeInTurn } from './statistics.ts';

const ROUNDS = 7;

/** Texts that each program reads for itself, and the molecules we make of them. */
interface Sample {
  readonly name: string;
  readonly texts: readonly string[];
  readonly read: (text: string) => Molecule;
}

const shared = (name: string): string => join(process.cwd(), '..', 'shared', 'data', name);

function smilesSample(): Sample {
  const texts = readFileSync(shared('chembl-chiral/chembl-20-chiral.smi'), 'utf8')
    .split('\n')
    .map(line => line.split(/\s/u)[0]!)
    .filter(text => text !== '');
  return { name: 'ChEMBL, SMILES', texts, read: text => parseSmiles(text).molecule };
}

function spaceSample(): Sample {
  const encoder = new TextEncoder();
  const texts = readFileSync(shared('cip/suite-3d.sdf'), 'utf8')
    .split(/(?<=^\$\$\$\$\r?\n)/mu)
    .filter(text => text.trim() !== '');
  const read = (text: string): Molecule => {
    const raw: RawEntry = { entry: 1, line: 1, bytes: encoder.encode(text) };
    return sdfFormat.parse(raw, DEFAULT_LIMITS)[0]!.molecule!;
  };
  return { name: 'CIP validation suite, SDF in space', texts, read };
}

type RDKit = Awaited<ReturnType<typeof initRDKit>>;

function timeSample(rdkit: RDKit, { name, texts, read }: Sample, report: (line: string) => void): void {
  const details = JSON.stringify({ removeHs: false });
  const molecules = texts.map(read);
  const perceived = molecules.map(molecule => perceiveUnits(molecule, DEFAULT_SETTINGS).units);
  const labels = molecules.reduce(
    (sum, molecule) => sum + examine(molecule).units.filter(u => u.descriptor !== null).length,
    0,
  );
  const theirs = texts.map(text => rdkit.get_mol(text, details));
  const readTheirs = (): void => {
    for (const text of texts) rdkit.get_mol(text, details)?.delete();
  };
  const times = timeInTurn(
    {
      reading: () => texts.forEach(read),
      perception: () => {
        for (const molecule of molecules) perceiveUnits(molecule, DEFAULT_SETTINGS);
      },
      ranking: () =>
        molecules.forEach((molecule, i) => labelUnits(molecule, perceived[i]!, DEFAULT_SETTINGS)),
      entry: () => {
        for (const text of texts) examine(read(text));
      },
      theirReading: readTheirs,
      theirLabels: () => {
        for (const molecule of theirs) molecule?.get_stereo_tags();
      },
      theirEntry: () => {
        for (const text of texts) {
          const molecule = rdkit.get_mol(text, details);
          if (molecule === null) continue;
          molecule.get_stereo_tags();
          molecule.delete();
        }
      },
    },
    ROUNDS,
  );
  for (const molecule of theirs) molecule?.delete();
  report(
    `labels: ${name}: ${texts.length} entries, ${labels} labels, median of ${ROUNDS} rounds (least to most)`,
  );
  report(
    `  a label: ${each(times.ranking, labels)}; rdkit.js ${each(times.theirLabels, labels)}: ${ratio(times.ranking, times.theirLabels)}`,
  );
  report(
    `  an entry: ${each(times.entry, texts.length)}; rdkit.js ${each(times.theirEntry, texts.length)}: ${ratio(times.entry, times.theirEntry)}`,
  );
  report(
    `  of an entry: reading ${each(times.reading, texts.length)}, perception ${each(times.perception, texts.length)}, ranking ${each(times.ranking, texts.length)}; rdkit.js reading ${each(times.theirReading, texts.length)}`,
  );
}

/** The largest digraph of each molecule, in nodes. */
function peakNodes(molecule: Molecule): number {
  const { units } = perceiveUnits(molecule, DEFAULT_SETTINGS);
  const labeller = new Labeller(molecule, units, DEFAULT_SETTINGS);
  let peak = 0;
  units.forEach((_, index) => {
    labeller.label(index);
    peak = Math.max(peak, labeller.digraph.count);
  });
  return peak;
}

function reportPeaks({ name, texts, read }: Sample, report: (line: string) => void): void {
  const peaks = texts.map(text => peakNodes(read(text))).sort((a, b) => a - b);
  const at = (share: number): number => peaks[Math.min(peaks.length - 1, Math.floor(share * peaks.length))]!;
  report(`digraphs: ${name}: largest of an entry, nodes: median ${at(0.5)}, 99 % ${at(0.99)}, most ${at(1)}`);
}

/** β-Cyclodextrin: seven glucose units in a ring, a hard case for a digraph. */
function cyclodextrin(units: number): string {
  let text = '';
  for (let k = 1; k <= units; k++) {
    const join = k === units ? '%99' : '';
    const ring = `%${10 + k}`;
    text += `${k === 1 ? 'O%99' : 'O'}[C@H]${ring}[C@H](O)[C@@H](O)[C@@H]${join}([C@@H](CO)O${ring})`;
  }
  return text;
}

/** Hard molecules, with the time each takes. */
const HARD: readonly (readonly [string, string])[] = [
  ['β-cyclodextrin', cyclodextrin(7)],
  ['a ring of 20 glucose units', cyclodextrin(20)],
  ['cholesterol', 'C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC=C4[C@@]3(CC[C@@H](C4)O)C)C'],
  ['an in/out isomer of adamantane', 'C1[C@H]2C[C@@H]3C[C@H]1C[C@@H](C2)C3'],
];

/** Runs the benchmark and reports line by line. */
export async function run(report: (line: string) => void): Promise<void> {
  if (!existsSync(shared('cip/suite-3d.sdf')) || !existsSync(shared('chembl-chiral'))) {
    report('labels: skipped, the published structures (../shared/data) are not beside this checkout');
    return;
  }
  const rdkit = await initRDKit();
  for (const sample of [smilesSample(), spaceSample()]) {
    timeSample(rdkit, sample, report);
    reportPeaks(sample, report);
  }
  for (const [name, text] of HARD) {
    const molecule = parseSmiles(text).molecule;
    const started = performance.now();
    const { units } = examine(molecule);
    const took = performance.now() - started;
    const letters = units.filter(unit => unit.descriptor !== null).length;
    report(
      `digraphs: ${name}: ${molecule.atomCount} atoms, ${letters} of ${units.length} units with a letter, largest ${peakNodes(molecule)} nodes of ${DEFAULT_SETTINGS.digraphLimit}, ${took.toFixed(0)} ms in all`,
    );
  }
}
