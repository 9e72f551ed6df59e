/**
 * Relations against an outside witness: centres of published structures are inverted in the SMILES text, and rdkit.js says
 * by canonical SMILES whether two texts are the same compound in the same configuration.
 */
import { readFileSync } from 'node:fs';
import initRDKit from '@rdkit/rdkit';
import { describe, expect, it } from 'vitest';
import { renumbered, compared } from '../unit/comparison/models.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';
import { randomNumbers, shuffled } from './perturbed.ts';
import { invertedText, witnessOf } from './witness.ts';

const list = sharedData('chembl-chiral/chembl-20-chiral.smi');
/** Every so many of the 5,000 structures, to keep the run short. */
const STRIDE = 4;
/** Structures with more centres than this are left out: every subset of them is tried. */
const MOST_CENTRES = 6;

/**
 * Where we differ from the witness, and why.
 *
 * - The cyclotriphosphazene with two P(NHMe)(aziridinyl): a mirror plane through the third phosphorus exchanges the two,
 *   so that the cis compound is meso, as we say; the witness keeps one Kekulé structure, in which the plane is lost.
 */
const EXPLAINED: ReadonlySet<string> = new Set(['CNp1(NC)n[p@@](NC)(n[p@@](NC)(n1)N2CC2)N3CC3']);

describe('relations', () => {
  it.skipIf(list === null)(`are those the witness implies (skipped when ${SHARED_DATA_ABSENT})`, async () => {
    const rdkit = await initRDKit();
    const random = randomNumbers(2013);
    const smiles = readFileSync(list!, 'utf8')
      .split('\n')
      .flatMap((line, k) => (k % STRIDE === 0 && line.trim() !== '' ? [line.split(/\s/)[0]!] : []));
    const differing: string[] = [];
    const counts = new Map<string, number>();
    for (const found of smiles) {
      const centres = (found.match(/@@?/g) ?? []).length;
      if (centres === 0 || centres > MOST_CENTRES || EXPLAINED.has(found)) continue;
      const all = (1 << centres) - 1;
      const choice = random();
      const bits = choice < 0.25 ? 0 : choice < 0.5 ? all : 1 + Math.floor(random() * all);
      const intended = invertedText(found, bits);
      const model = witnessOf(rdkit, found);
      const wanted = witnessOf(rdkit, intended);
      if (!model || !wanted) continue;
      let fewest = Number.POSITIVE_INFINITY;
      for (let subset = 0; subset <= all; subset++) {
        let size = 0;
        for (let k = 0; k < centres; k++) size += (subset >> k) & 1;
        if (size < fewest && witnessOf(rdkit, invertedText(intended, subset))?.canonical === model.canonical)
          fewest = size;
      }
      const mirrored = witnessOf(rdkit, invertedText(intended, all))?.canonical === model.canonical;
      const expected =
        fewest === 0
          ? 'same'
          : mirrored
            ? 'enantiomer'
            : fewest === 1 && wanted.letters >= 2
              ? 'epimer'
              : 'diastereomer';
      const { molecule } = parseSmiles(found);
      const order = shuffled(molecule.atomCount, random);
      const result = compared(renumbered(molecule, order), intended);
      const wrong = result.units.filter(({ verdict }) => verdict === 'inverted').length;
      counts.set(expected, (counts.get(expected) ?? 0) + 1);
      if (result.relation !== expected || wrong !== fewest) {
        differing.push(
          `${result.relation} ${wrong}, expected ${expected} ${fewest}: ${found} against ${intended}`,
        );
      }
    }
    for (const relation of ['same', 'enantiomer', 'epimer', 'diastereomer']) {
      expect(counts.get(relation) ?? 0).toBeGreaterThan(50);
    }
    expect(differing).toEqual([]);
  });
});
