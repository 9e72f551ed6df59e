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

/** Numbers from 0 to 1, the same in every run (mulberry32, public domain). */
function randomNumbers(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** The SMILES with the centres of a bit set inverted. */
function inverted(smiles: string, bits: number): string {
  let at = 0;
  return smiles.replace(/@@?/g, mark => ((bits >> at++) & 1 ? (mark === '@' ? '@@' : '@') : mark));
}

type RDKitModule = Awaited<ReturnType<typeof initRDKit>>;

interface Witness {
  readonly canonical: string;
  /** Number of atoms labelled R or S. */
  readonly letters: number;
}

function witnessOf(rdkit: RDKitModule, smiles: string): Witness | null {
  const molecule = rdkit.get_mol(smiles);
  if (!molecule) return null;
  const canonical = molecule.get_smiles();
  const tags = JSON.parse(molecule.get_stereo_tags()) as { CIP_atoms: [number, string][] };
  molecule.delete();
  return { canonical, letters: tags.CIP_atoms.filter(([, letter]) => /[RS]/.test(letter)).length };
}

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
      const intended = inverted(found, bits);
      const model = witnessOf(rdkit, found);
      const wanted = witnessOf(rdkit, intended);
      if (!model || !wanted) continue;
      let fewest = Number.POSITIVE_INFINITY;
      for (let subset = 0; subset <= all; subset++) {
        let size = 0;
        for (let k = 0; k < centres; k++) size += (subset >> k) & 1;
        if (size < fewest && witnessOf(rdkit, inverted(intended, subset))?.canonical === model.canonical)
          fewest = size;
      }
      const mirrored = witnessOf(rdkit, inverted(intended, all))?.canonical === model.canonical;
      const expected =
        fewest === 0
          ? 'same'
          : mirrored
            ? 'enantiomer'
            : fewest === 1 && wanted.letters >= 2
              ? 'epimer'
              : 'diastereomer';
      const { molecule } = parseSmiles(found);
      const order = Array.from({ length: molecule.atomCount }, (_, i) => i);
      for (let i = order.length - 1; i > 0; i--) {
        const j = Math.floor(random() * (i + 1));
        [order[i], order[j]] = [order[j]!, order[i]!];
      }
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
