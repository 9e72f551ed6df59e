/** Hydrogens made explicit and taken out again: the same molecule, the same configuration. */
import { describe, expect, it } from 'vitest';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { addHydrogens, stripHydrogens } from '../../../core/chemistry/hydrogens.ts';
import { BondMark, buildMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { writeSmiles } from '../../../core/formats/smiles-writer.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';
import { rdkitModule } from '../../rdkit.ts';

function moleculeOf(smiles: string): Molecule {
  return parseSmiles(smiles).molecule;
}

const STRUCTURES = [
  'N[C@@H](C)C(=O)O',
  '[C@H](F)(Cl)Br',
  'C[S@](=O)CC',
  'C/C=C/C=C\\C',
  'C/C=N/O',
  'CC=[C@]=CC',
  'C/C=C=C=C/C',
  '[NH3+][C@@H](CC1=CNC=N1)C([O-])=O',
  '[2H][C@H](O)C',
  'O',
];

describe('hydrogens', () => {
  it.each(STRUCTURES)('%s: added and stripped again, nothing has changed', smiles => {
    const molecule = moleculeOf(smiles);
    const { molecule: full, parents } = addHydrogens(molecule);
    expect(full.hydrogens.every(count => count === 0)).toBe(true);
    expect(full.atomCount).toBe(molecule.atomCount + parents.length);
    expect(hillFormula(full)).toBe(hillFormula(molecule));
    const { molecule: stripped, kept, place } = stripHydrogens(full);
    expect(stripped).toEqual(molecule);
    expect([...kept]).toEqual(Array.from({ length: molecule.atomCount }, (_, i) => i));
    expect([...place].filter(at => at >= 0)).toHaveLength(molecule.atomCount);
  });

  it.each(STRUCTURES.filter(smiles => !smiles.includes('=C=') && !smiles.includes('=[C@]=')))(
    '%s: rdkit.js reads the form with all hydrogens as the same molecule',
    async smiles => {
      const rdkit = await rdkitModule();
      const canonical = (text: string): string => {
        const molecule = rdkit.get_mol(text);
        const out = molecule?.get_smiles() ?? 'unreadable';
        molecule?.delete();
        return out;
      };
      expect(canonical(writeSmiles(addHydrogens(moleculeOf(smiles)).molecule))).toBe(canonical(smiles));
    },
  );

  it('a double bond stated by its hydrogens is stated by the other ligands', () => {
    const { molecule } = stripHydrogens(moleculeOf('C(\\[H])(F)=C(/[H])Cl'));
    expect(molecule.atomCount).toBe(4);
    expect(writeSmiles(molecule)).toBe(writeSmiles(moleculeOf('C(/F)=C(\\Cl)')));
  });

  it('what is not a plain hydrogen stays', () => {
    for (const smiles of ['[2H]C', '[H][H]', '[H+]', '[H-]', '[H]']) {
      const molecule = moleculeOf(smiles);
      expect(stripHydrogens(molecule).molecule).toEqual(molecule);
    }
    const marked = buildMolecule({
      dimension: 2,
      atoms: [
        { element: 6, hydrogens: 3, x: 0, y: 0 },
        { element: 1, x: 1, y: 0 },
      ],
      bonds: [[0, 1, 1, BondMark.wedge]],
    });
    expect(stripHydrogens(marked).molecule).toEqual(marked);
  });

  it('added hydrogens are not located', () => {
    const carbon = buildMolecule({
      dimension: 3,
      atoms: [{ element: 6, hydrogens: 4, x: 1, y: 2, z: 3 }],
      bonds: [],
    });
    const { molecule } = addHydrogens(carbon);
    expect([...molecule.coordinates!.subarray(0, 3)]).toEqual([1, 2, 3]);
    expect(molecule.coordinates!.subarray(3).every(Number.isNaN)).toBe(true);
  });
});
