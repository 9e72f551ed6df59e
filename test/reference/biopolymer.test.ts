/** Residues of published models against their names. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { checkResidues, type ResidueReport } from '../../core/biopolymer/checks.ts';
import { expectedCentres, volumeFrom } from '../../core/biopolymer/expected.ts';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { examine } from '../../core/examine.ts';
import { readEntries } from '../../core/formats/registry.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const folder = sharedData('macromolecule');

async function moleculeOf(name: string): Promise<Molecule> {
  const bytes = readFileSync(`${folder ?? ''}/${name}`);
  async function* chunks(): AsyncGenerator<Uint8Array> {
    yield await Promise.resolve(bytes);
  }
  for await (const { molecule } of readEntries(chunks(), name)) if (molecule) return molecule;
  throw new Error(name);
}

const messages = ({ findings }: ResidueReport): string[] =>
  findings.map(({ kind, residue, atom }) => `${kind} ${residue} ${atom}`);

function mirrored(molecule: Molecule): Molecule {
  return { ...molecule, coordinates: molecule.coordinates?.map(value => -value) ?? null };
}

describe('ideal chiral volumes', () => {
  it('follow from the geometry of Engh & Huber (Acta Cryst. 1991, A47, 392)', () => {
    // From their lengths and angles by hand: 1.458 × 1.525 × 1.530 × 0.7358.
    expect(expectedCentres('LYS')?.[0]?.ideal).toBeCloseTo(2.503, 2);
    // A tetrahedral centre with unit bonds: 4/(3√3).
    const angle = (180 / Math.PI) * Math.acos(-1 / 3);
    expect(volumeFrom([1, 1, 1], [angle, angle, angle])).toBeCloseTo(4 / (3 * Math.sqrt(3)), 10);
    expect(volumeFrom([1, 1, 1], [120, 120, 119.999])).toBeCloseTo(0, 1);
  });
});

describe.skipIf(folder === null)(`residues (${folder === null ? SHARED_DATA_ABSENT : 'wwPDB'})`, () => {
  it.each([
    // 1ORC: one α carbon of a designed hairpin, 1.82 Å³ by hand from N, C, CB.
    ['1orc.pdb', ['strained A/GLU/56C CA'], 59, 0],
    // The D-serines of the DNA-binding depsipeptide.
    ['1pfe.cif.gz', ['dextro B/DSN/1 CA', 'dextro B/DSN/5 CA'], 6, 2],
    ['4TNA.pdb', [], 0, 0],
    ['4oz7.pdb', [], 14, 0],
    ['5dpv.pdb', [], 242, 0],
    ['5i55.cif', [], 20, 0],
    // α carbons alone.
    ['1lzh.pdb.gz', [], 0, 0],
  ])('of %s', async (name, expected, levo, dextro) => {
    const report = checkResidues(await moleculeOf(name));
    expect(messages(report)).toEqual(expected);
    expect([report.levo, report.dextro]).toEqual([levo, dextro]);
  });

  it('are all found in the wrong hand in a mirrored model, side chains and names of like atoms too', async () => {
    const molecule = await moleculeOf('5dpv.pdb');
    const before = checkResidues(molecule);
    const after = checkResidues(mirrored(molecule));
    expect(after.centres).toBe(before.centres);
    expect(after.findings.filter(({ kind }) => kind === 'wrong-hand')).toHaveLength(before.centres);
    expect(after.findings.filter(({ kind }) => kind === 'exchanged-names')).toHaveLength(before.pairs);
    const rna = await moleculeOf('4TNA.pdb');
    const sugars = checkResidues(mirrored(rna)).findings.filter(({ kind }) => kind === 'wrong-hand');
    expect(sugars).toHaveLength(checkResidues(rna).centres);
  });

  it('have the letters their names promise: R cysteines, S others, (2S,3S)-isoleucine, (2S,3R)-threonine', async () => {
    for (const name of ['1orc.pdb', '5dpv.pdb']) {
      const molecule = await moleculeOf(name);
      for (const { unit, descriptor } of examine(molecule).units) {
        const residue = molecule.residues![unit.atoms[0]!]!;
        if (unit.kind !== 'centre' || residue.hetero || unit.state !== 'clear') continue;
        const expected =
          residue.atomName === 'CA'
            ? residue.residue === 'CYS'
              ? 'R'
              : 'S'
            : residue.residue === 'THR'
              ? 'R'
              : 'S';
        expect(descriptor, `${name} ${residue.residue} ${residue.number} ${residue.atomName}`).toBe(expected);
      }
    }
  });
});
