/** InChI against its outside witness: rdkit.js writes the InChI of a SMILES, and both must read as the same configuration. */
import { readFileSync } from 'node:fs';
import initRDKit from '@rdkit/rdkit';
import { describe, expect, it } from 'vitest';
import { compareEntry, type Examined } from '../../core/comparison/compare.ts';
import { Intention } from '../../core/comparison/intention.ts';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { examine } from '../../core/examine.ts';
import { readInchi } from '../../core/formats/inchi.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const list = sharedData('chembl-chiral/chembl-20-chiral.smi');
/** Every so many of the 5,000 structures, to keep the run short. */
const STRIDE = 5;

const examined = (molecule: Molecule): Examined => ({ molecule, docket: examine(molecule) });

describe('InChI', () => {
  it.skipIf(list === null)(
    `reads as the configuration that was written (skipped when ${SHARED_DATA_ABSENT})`,
    async () => {
      const rdkit = await initRDKit();
      const smiles = readFileSync(list!, 'utf8')
        .split('\n')
        .flatMap((line, k) => (k % STRIDE === 0 && line.trim() !== '' ? [line.split(/\s/)[0]!] : []));
      const differing: string[] = [];
      let compared = 0;
      for (const each of smiles) {
        const witness = rdkit.get_mol(each);
        if (!witness) continue;
        const identifier = witness.get_inchi();
        witness.delete();
        const { molecule: intended } = readInchi(identifier);
        const { molecule } = parseSmiles(each);
        const model = examined(molecule);
        const result = compareEntry(model, new Intention('', intended, examine(intended)), examined);
        compared++;
        // A standard InChI states no configuration for double bonds in which hydrogens are mobile: these stay open.
        const centres = model.docket.units.filter(
          ({ unit, descriptor }) => unit.kind === 'centre' && descriptor !== null && unit.labile === null,
        );
        const judged = result.units.filter(({ kind, verdict }) => kind === 'centre' && verdict === 'agrees');
        if (judged.length < centres.length)
          differing.push(`${judged.length} of ${centres.length} centres ${each} ${identifier}`);
        compared++;
        if (result.relation !== 'same')
          differing.push(`${result.relation} ${result.difference ?? ''} ${each} ${identifier}`);
      }
      expect(compared).toBeGreaterThan(900);
      expect(differing).toEqual([]);
    },
  );
});
