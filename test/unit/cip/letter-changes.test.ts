/** A letter follows from the ranking: changes of a substituent that flip it while nothing moves. */
import { describe, expect, it } from 'vitest';
import { letterChanges } from '../../../core/cip/letter-changes.ts';
import { DEFAULT_SETTINGS } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';

function changes(smiles: string): string[] {
  const { molecule } = parseSmiles(smiles);
  return letterChanges(molecule, examine(molecule), 0, DEFAULT_SETTINGS).map(
    ({ change, descriptor }) => `${change}: ${descriptor}`,
  );
}

describe('changes that give another letter', () => {
  it('finds the oxygen of L-serine: with sulfur in its place the same arrangement is R (L-cysteine; common practice, no source)', () => {
    expect(changes('N[C@@H](CO)C(=O)O')).toContain('O4 replaced by S: R');
  });

  it('names none where no single exchange reverses two ranks', () => {
    expect(changes('F[C@](Cl)(Br)I').filter(change => change.startsWith('H on'))).toEqual([]);
  });

  it('agrees with the molecule really changed', () => {
    expect(changes('C[C@H](O)CC')).toContain('H on C1 replaced by F: R');
    expect(examine(parseSmiles('C[C@H](O)CC').molecule).units[0]?.descriptor).toBe('S');
    expect(examine(parseSmiles('FC[C@H](O)CC').molecule).units[0]?.descriptor).toBe('R');
  });
});
