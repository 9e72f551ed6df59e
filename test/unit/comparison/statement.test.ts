/** Statements about whole molecules, by value. */
import { describe, expect, it } from 'vitest';
import { stereoStatements } from '../../../core/comparison/statement.ts';
import { examine } from '../../../core/examine.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';

function statement(smiles: string): string {
  const { molecule } = parseSmiles(smiles);
  const [first] = stereoStatements(molecule, examine(molecule));
  return `${first!.units} ${first!.stereoisomers} ${first!.chirality}`;
}

describe('statements about the whole molecule', () => {
  // Counts of stereoisomers: E. L. Eliel, S. H. Wilen, Stereochemistry of Organic Compounds, 1994, chapter 3 (from memory).
  it.each([
    ['(2R,3R)-tartaric acid', 'OC(=O)[C@H](O)[C@@H](O)C(=O)O', '2 3 chiral'],
    ['meso-tartaric acid', 'OC(=O)[C@H](O)[C@H](O)C(=O)O', '2 3 meso'],
    [
      'a 2,3,4-trihydroxyglutaric acid with a pseudoasymmetric centre',
      'OC(=O)[C@H](O)[C@H](O)[C@H](O)C(=O)O',
      '3 4 meso',
    ],
    ['the same with like ends', 'OC(=O)[C@H](O)[C@H](O)[C@@H](O)C(=O)O', '2 4 chiral'],
    ['cis-1,4-dimethylcyclohexane', 'C[C@H]1CC[C@@H](C)CC1', '2 2 achiral'],
    ['an aldohexose in its open form', 'OC[C@@H](O)[C@@H](O)[C@H](O)[C@@H](O)C=O', '4 16 chiral'],
    ['an inositol', 'O[C@H]1[C@H](O)[C@@H](O)[C@H](O)[C@H](O)[C@@H]1O', '6 9 meso'],
    ['but-2-ene', 'C/C=C/C', '1 2 achiral'],
    ['a single centre', 'O[C@@H](F)Cl', '1 2 chiral'],
    ['nothing stereogenic', 'CC(C)C', '0 1 achiral'],
    ['penta-2,3-diene', 'CC=[C@]=CC', '1 2 chiral'],
  ])('%s', (_name, smiles, expected) => {
    expect(statement(smiles)).toBe(expected);
  });

  it('is undecided where a unit has no arrangement', () => {
    expect(statement('OC(=O)[C@H](O)C(O)C(=O)O')).toBe('2 3 undecided');
  });
});
