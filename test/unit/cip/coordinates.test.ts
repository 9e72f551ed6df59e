/** A model in space answers alike however it is numbered, placed and turned, and in the mirror answers mirrored. */
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';
import { readEntries } from '../../../core/formats/registry.ts';
import { mirrored, moved, renumbered, seeded, shuffled } from '../../molecules.ts';

const TRIALS = 1000;
const demo = fileURLToPath(new URL('../../../assets/demo/lantern-models.sdf', import.meta.url));

async function models(): Promise<Molecule[]> {
  async function* once(): AsyncGenerator<Uint8Array> {
    yield readFileSync(demo);
  }
  const molecules: Molecule[] = [];
  for await (const { molecule } of readEntries(once(), demo)) if (molecule) molecules.push(molecule);
  return molecules;
}

interface Answer {
  readonly unit: string;
  readonly letter: string;
  readonly volume: string;
  readonly firmness: string;
}

function answers(molecule: Molecule, place: readonly number[] | null): Answer[] {
  return examine(molecule)
    .units.map(({ unit, descriptor, signedVolume }) => ({
      unit: `${unit.kind} ${unit.atoms
        .map(atom => place?.[atom] ?? atom)
        .sort((a, b) => a - b)
        .join('-')}`,
      letter: descriptor ?? unit.state,
      volume: signedVolume === null ? '' : signedVolume.toFixed(6),
      firmness: unit.firmness?.toFixed(6) ?? '',
    }))
    .sort((a, b) => (a.unit < b.unit ? -1 : 1));
}

const SWAPPED: Readonly<Record<string, string>> = { R: 'S', S: 'R', M: 'P', P: 'M', e: 'z', z: 'e' };

describe('a model in space', () => {
  it(`gives mirrored and identical answers over ${TRIALS} random trials`, async () => {
    const all = await models();
    expect(all).toHaveLength(3);
    const random = seeded(20261201);
    for (let trial = 0; trial < TRIALS; trial++) {
      const molecule = all[trial % all.length]!;
      const place = shuffled(molecule.atomCount, random);
      const reflect = random() < 0.5;
      const other = renumbered(moved(reflect ? mirrored(molecule) : molecule, random), place, random);
      const expected = answers(molecule, place).map(answer =>
        reflect
          ? {
              ...answer,
              letter: SWAPPED[answer.letter] ?? answer.letter,
              volume: answer.volume === '' ? '' : (-Number(answer.volume)).toFixed(6),
            }
          : answer,
      );
      expect(answers(other, null)).toEqual(expected);
    }
  });
});
