/** The SMILES reader against rdkit.js over published structures: hydrogens, formula and charge agree. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { hillFormula } from '../../core/chemistry/formula.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { rdkitModule } from '../rdkit.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

/** Hydrogens of each atom that is listed, and charge, as rdkit.js has them in its JSON (commonchem). */
interface Witness {
  readonly molecules: readonly {
    readonly atoms: readonly { readonly impHs?: number; readonly chg?: number }[];
  }[];
  readonly defaults: { readonly atom: { readonly impHs: number; readonly chg: number } };
}

describe('SMILES against the witness', () => {
  const list = sharedData('chembl-chiral/chembl-20-chiral.smi');
  it.skipIf(list === null)(
    `every hydrogen and charge of 5,000 structures (skipped where ${SHARED_DATA_ABSENT})`,
    async () => {
      const rdkit = await rdkitModule();
      const differing: string[] = [];
      let read = 0;
      for (const line of readFileSync(list!, 'utf8').split('\n')) {
        const smiles = line.split(/\s/u)[0]!;
        if (smiles === '') continue;
        const witness = rdkit.get_mol(smiles);
        if (witness === null) continue;
        const json = JSON.parse(witness.get_json()) as Witness;
        witness.delete();
        const { molecule } = parseSmiles(smiles);
        read++;
        const { atoms } = json.molecules[0]!;
        const theirs = atoms.map(
          a => `${a.impHs ?? json.defaults.atom.impHs},${a.chg ?? json.defaults.atom.chg}`,
        );
        const ours = Array.from(
          { length: molecule.atomCount },
          (_, i) => `${molecule.hydrogens[i]},${molecule.charges[i]}`,
        );
        if (ours.join(' ') !== theirs.join(' ')) differing.push(`${smiles} ${hillFormula(molecule)}`);
      }
      expect(read).toBeGreaterThan(4900);
      expect(differing).toEqual([]);
    },
  );
});
