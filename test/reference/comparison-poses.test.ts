/** The published poses and crystal ligands against their compounds: PDB files without bond orders, aligned ligands in SDF. */
import { readFileSync } from 'node:fs';
import initRDKit from '@rdkit/rdkit';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { compareEntry, type EntryComparison, type Examined } from '../../core/comparison/compare.ts';
import { Intention } from '../../core/comparison/intention.ts';
import { examine } from '../../core/examine.ts';
import { type Entry, DEFAULT_LIMITS } from '../../core/formats/format.ts';
import { detectFormat } from '../../core/formats/registry.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const absent = sharedData('poses') === null;

const examined = (molecule: Molecule): Examined => ({ molecule, docket: examine(molecule) });

async function entriesOf(name: string): Promise<{ entry: Entry; text: string }[]> {
  const bytes = readFileSync(sharedData(`poses/${name}`)!);
  const format = detectFormat(bytes.subarray(0, 65_536), name)!;
  const entries: { entry: Entry; text: string }[] = [];
  async function* chunks(): AsyncGenerator<Uint8Array> {
    await Promise.resolve();
    yield bytes;
  }
  for await (const raw of format.split(chunks(), DEFAULT_LIMITS)) {
    for (const entry of format.parse(raw, DEFAULT_LIMITS))
      entries.push({ entry, text: new TextDecoder().decode(raw.bytes) });
  }
  return entries;
}

async function moleculeIn(name: string): Promise<Molecule> {
  const [first] = await entriesOf(name);
  return first!.entry.molecule!;
}

function against(model: Molecule, intended: Molecule): EntryComparison {
  return compareEntry(examined(model), new Intention('', intended, examine(intended)), examined);
}

/** The ligands by their trade names; the SMILES are from memory, held to the formula of the file by the comparison itself. */
const COMPOUNDS = {
  AKI: 'O=C(Nc1ccccc1)Nc1ccc(CCNc2ncnc3oc(-c4ccccc4)c(-c4ccccc4)c23)cc1',
  SKE: 'Nc1nc(Nc2ccc(cc2)S(N)(=O)=O)nn1C(=O)c1c(F)cccc1F',
} as const;

describe('published poses', () => {
  it.skipIf(absent).each([
    ['3m11_AKI.pdb', 'AKI'],
    ['docked_2c6e_AKI_pH74_netcharge1.pdb', 'AKI'],
    ['docked_2c6e_SKE_pH74_netcharge1.pdb', 'SKE'],
  ] as const)(
    `%s is its compound, without bond orders in the file (skipped when ${SHARED_DATA_ABSENT})`,
    async (file, name) => {
      const model = await moleculeIn(file);
      const intended = parseSmiles(COMPOUNDS[name]).molecule;
      const result = against(model, intended);
      expect(result.difference).toBeNull();
      expect(result.relation).toBe('same');
      // None of these has a stereogenic unit that is configurationally stable.
      expect(result.units.filter(({ verdict }) => verdict !== 'open')).toEqual([]);
      for (let atom = 0; atom < model.atomCount; atom++) {
        const to = result.mapping![atom]!;
        expect(to === -1 ? 1 : intended.elements[to]).toBe(model.elements[atom]);
      }
    },
  );

  it.skipIf(absent).each([
    ['docked_2c6e_AKI_pH74_netcharge1.pdb', '3m11_AKI.pdb'],
    ['docked_2c6e_N15_pH74_netcharge1.pdb', '3w2c_N15.pdb'],
  ])(`%s is the ligand of the crystal %s (skipped when ${SHARED_DATA_ABSENT})`, async (docked, crystal) => {
    const result = against(await moleculeIn(docked), await moleculeIn(crystal));
    expect(result.relation).toBe('same');
  });

  it.skipIf(absent)(
    `tells one ligand from another, with the reason (skipped when ${SHARED_DATA_ABSENT})`,
    async () => {
      const result = against(
        await moleculeIn('docked_2c6e_SKE_pH74_netcharge1.pdb'),
        parseSmiles(COMPOUNDS.AKI).molecule,
      );
      expect(result.relation).toBe('other compound');
      expect(result.difference).toBe('the model has 15 C, the intention 33');
    },
  );

  it.skipIf(absent)(
    `aligned ligands are what rdkit.js writes of them, and the mirror image of what it writes inverted (skipped when ${SHARED_DATA_ABSENT})`,
    async () => {
      const rdkit = await initRDKit();
      let chiral = 0;
      for (const { entry, text } of await entriesOf('cdk2.sdf')) {
        const witness = rdkit.get_mol(text);
        expect(witness).not.toBeNull();
        const smiles = witness!.get_smiles();
        witness!.delete();
        const model = entry.molecule!;
        const same = against(model, parseSmiles(smiles).molecule);
        expect([entry.name, same.relation]).toEqual([entry.name, 'same']);
        const mirrored = smiles.replace(/@@?/g, mark => (mark === '@' ? '@@' : '@'));
        const centres = (smiles.match(/@@?/g) ?? []).length;
        chiral += Math.min(1, centres);
        const other = against(model, parseSmiles(mirrored).molecule);
        const expected = centres === 0 ? ['same'] : ['enantiomer', 'same'];
        expect(expected).toContain(other.relation);
      }
      expect(chiral).toBeGreaterThan(10);
    },
  );
});
