/**
 * Found against intended over 500 drug-like chiral molecules: embedded in space here, spoiled as files spoil models,
 * and set against their SMILES with none, one, some or all centres inverted in the text.
 *
 * Which centres must be found inverted, and the relation, follow from canonical SMILES of rdkit.js alone.
 */
import { readFileSync } from 'node:fs';
import initRDKit from '@rdkit/rdkit';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { compareEntry, type Examined } from '../../core/comparison/compare.ts';
import { Intention } from '../../core/comparison/intention.ts';
import { embed } from '../../core/embedding/embed.ts';
import { loadTables } from '../../core/embedding/resources.ts';
import { examine } from '../../core/examine.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';
import { randomNumbers, type Spoiling, spoil } from './perturbed.ts';
import { invertedText, witnessOf } from './witness.ts';

const list = sharedData('chembl-chiral/chembl-20-chiral.smi');
const MOLECULES = 500;
/** Drug-like here: these many heavy atoms, these many centres. */
const SIZE = { least: 12, most: 36, centres: 5 } as const;

const examined = (molecule: Molecule): Examined => ({ molecule, docket: examine(molecule) });

/** The atom of each `@` mark of a SMILES, in order. */
function centreAtoms(smiles: string): number[] {
  const atoms: number[] = [];
  let atom = -1;
  for (const [token] of smiles.matchAll(/\[[^\]]*\]|Br|Cl|[BCNOPSFIbcnops]/g)) {
    atom++;
    if (token.includes('@')) atoms.push(atom);
  }
  return atoms;
}

/**
 * Left out: adamantanes with marks at the bridgeheads. Inverted in the text they are in-out isomers that cannot be made; the
 * witness tells the texts apart, while nothing is asked for at centres that are not stereogenic.
 */
const ADAMANTANE = /C34C\[C@@?H\]5C\[C@@?H\]\(C\[C@@?H\]\(C5\)C3\)C4/;

interface Case {
  readonly smiles: string;
  readonly centres: readonly number[];
}

function casesOf(path: string): Case[] {
  const cases: Case[] = [];
  for (const line of readFileSync(path, 'utf8').split('\n')) {
    const smiles = line.split(/\s/)[0] ?? '';
    const centres = centreAtoms(smiles);
    if (centres.length === 0 || centres.length > SIZE.centres || smiles.includes('.')) continue;
    if (ADAMANTANE.test(smiles)) continue;
    const heavy = smiles.match(/\[[^\]]*\]|Br|Cl|[BCNOPSFIbcnops]/g)?.length ?? 0;
    if (heavy < SIZE.least || heavy > SIZE.most) continue;
    cases.push({ smiles, centres });
  }
  return cases;
}

describe('found against intended over embedded molecules', () => {
  it.skipIf(list === null)(
    `finds relation and inverted centres (skipped when ${SHARED_DATA_ABSENT})`,
    { timeout: 900_000 },
    async () => {
      const rdkit = await initRDKit();
      const tables = await loadTables();
      const random = randomNumbers(500);
      const cases = casesOf(list!);
      const stride = Math.max(1, Math.floor(cases.length / MOLECULES));
      const differing: string[] = [];
      const unbuilt: string[] = [];
      const counts = new Map<string, number>();
      let done = 0;
      for (let at = 0; at < cases.length && done < MOLECULES; at += stride) {
        const { smiles, centres } = cases[at]!;
        const built = embed(parseSmiles(smiles).molecule, tables, { seed: at + 1 });
        if (!built.ok) {
          unbuilt.push(`${smiles}: ${built.reason}`);
          continue;
        }
        const all = (1 << centres.length) - 1;
        const kind = done % 4;
        const bits =
          kind === 0
            ? 0
            : kind === 1
              ? 1 << Math.floor(random() * centres.length)
              : kind === 2
                ? all
                : Math.floor(random() * (all + 1));
        const spoiling: Spoiling = {
          withoutHydrogens: done % 3 === 0,
          orders:
            random() < 0.25
              ? 'single'
              : random() < 0.35
                ? 'aromatic'
                : random() < 0.25
                  ? 'wrong'
                  : 'as written',
          protonatedOtherwise: random() < 0.3,
        };
        done++;
        const text = invertedText(smiles, bits);
        const found = witnessOf(rdkit, smiles)!;
        const wanted = witnessOf(rdkit, text)!;
        let fewest = Number.POSITIVE_INFINITY;
        let sets: string[] = [];
        for (let subset = 0; subset <= all; subset++) {
          const atoms = centres.filter((_, k) => (subset >> k) & 1);
          if (atoms.length > fewest) continue;
          if (witnessOf(rdkit, invertedText(text, subset))?.canonical !== found.canonical) continue;
          if (atoms.length < fewest) sets = [];
          fewest = atoms.length;
          sets.push(atoms.join(' '));
        }
        const mirrored = witnessOf(rdkit, invertedText(text, all))?.canonical === found.canonical;
        const relation =
          fewest === 0
            ? 'same'
            : mirrored
              ? 'enantiomer'
              : fewest === 1 && wanted.letters >= 2
                ? 'epimer'
                : 'diastereomer';
        counts.set(relation, (counts.get(relation) ?? 0) + 1);
        const spoiled = spoil(built.molecule, spoiling, random);
        const intended = parseSmiles(text).molecule;
        const result = compareEntry(
          examined(spoiled.molecule),
          new Intention('', intended, examine(intended)),
          examined,
        );
        const inverted = result.units
          .filter(({ verdict }) => verdict === 'inverted')
          .flatMap(({ intendedAtoms }) => intendedAtoms ?? [])
          .sort((a, b) => a - b)
          .join(' ');
        if (result.relation !== relation || !sets.includes(inverted)) {
          differing.push(
            `${result.relation} [${inverted}], expected ${relation} [${sets.join(' | ')}]: ${smiles} against ${text} ${JSON.stringify(spoiling)} ${result.difference ?? ''} ${result.warnings.join('; ')}`,
          );
        }
      }
      expect(unbuilt).toEqual([]);
      expect(done).toBe(MOLECULES);
      expect([...counts.keys()].sort((a, b) => (a < b ? -1 : 1))).toEqual([
        'diastereomer',
        'enantiomer',
        'epimer',
        'same',
      ]);
      expect(differing).toEqual([]);
    },
  );
});

describe('compounds near to the intended one', () => {
  it.each([
    ['C[C@H](N)C1CCCCC1', 'C[C@H](N)c1ccccc1'],
    ['CC(C)[C@@H](O)CC(C)CN', 'CC(C)[C@@H](O)C=C(C)CN'],
  ])(
    '%s, written without bond orders and hydrogens, is told from %s by its geometry',
    async (found, intended) => {
      const built = embed(parseSmiles(found).molecule, await loadTables(), { seed: 3 });
      if (!built.ok) throw new Error(built.reason);
      const spoiling: Spoiling = { withoutHydrogens: true, orders: 'single', protonatedOtherwise: false };
      const { molecule } = spoil(built.molecule, spoiling, randomNumbers(1));
      const wanted = parseSmiles(intended).molecule;
      const itself = parseSmiles(found).molecule;
      const relation = (each: Molecule): string =>
        compareEntry(examined(molecule), new Intention('', each, examine(each)), examined).relation;
      expect(relation(itself)).toBe('same');
      expect(relation(wanted)).toBe('other compound');
    },
  );

  it('warns where the geometry shows multiple bonds that neither file nor intention has', async () => {
    const built = embed(parseSmiles('O=C1CC[C@H](C)CN1').molecule, await loadTables(), { seed: 3 });
    if (!built.ok) throw new Error(built.reason);
    const spoiling: Spoiling = { withoutHydrogens: true, orders: 'single', protonatedOtherwise: false };
    const { molecule } = spoil(built.molecule, spoiling, randomNumbers(1));
    const intended = parseSmiles('OC1CC[C@H](C)CN1').molecule;
    const result = compareEntry(examined(molecule), new Intention('', intended, examine(intended)), examined);
    expect(result.warnings.join()).toMatch(/the geometry at C\d+ is that of multiple bonds/);
  });
});
