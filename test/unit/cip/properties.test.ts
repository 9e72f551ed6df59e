/** What must hold of descriptors whatever the molecule: reflection, renumbering, exchange of ligands. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../../core/chemistry/molecule.ts';
import type { Docket } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';
import { mirrored, randomMolecule, renumbered, seeded, shuffled } from '../../molecules.ts';

const RUNS = 1000;

const REFLECTED: Readonly<Record<string, string>> = {
  R: 'S',
  S: 'R',
  M: 'P',
  P: 'M',
  e: 'z',
  z: 'e',
};

/** Letters by the atoms of the unit, sorted, each atom replaced by its place. */
function letters(docket: Docket, place: (atom: number) => number = atom => atom): string[] {
  return docket.units
    .map(({ unit, descriptor }) => {
      const atoms = unit.atoms.map(place).sort((a, b) => a - b);
      return `${unit.kind} ${atoms.join('-')} ${descriptor ?? '?'}`;
    })
    .sort();
}

const reflectedLetters = (docket: Docket): string[] =>
  letters(docket).map(line => {
    const [kind, atoms, letter] = line.split(' ') as [string, string, string];
    return `${kind} ${atoms} ${REFLECTED[letter] ?? letter}`;
  });

describe('descriptors of random molecules', () => {
  it('reflection swaps R/S, M/P, e/z and leaves r/s, m/p, E/Z (design.md, Conventions of measurement)', () => {
    fc.assert(
      fc.property(randomMolecule, molecule => {
        expect(letters(examine(mirrored(molecule)))).toEqual(reflectedLetters(examine(molecule)).sort());
      }),
      { numRuns: RUNS },
    );
  });

  it('renumbering atoms and bonds changes nothing', () => {
    fc.assert(
      fc.property(randomMolecule, fc.nat(), (molecule, seed) => {
        const random = seeded(seed);
        const place = shuffled(molecule.atomCount, random);
        const before = letters(examine(molecule), atom => place[atom]!);
        expect(letters(examine(renumbered(molecule, place, random)))).toEqual(before);
      }),
      { numRuns: RUNS },
    );
  });

  it('an exchange of two ligands flips the letter of that centre, a second exchange restores it (common practice, no source)', () => {
    fc.assert(
      fc.property(randomMolecule, fc.nat(), fc.nat(), (molecule, which, pair) => {
        const docket = examine(molecule);
        const centres = docket.units.filter(u => u.unit.kind === 'centre' && u.descriptor !== null);
        fc.pre(centres.length > 0);
        const centre = centres[which % centres.length]!;
        const atom = centre.unit.atoms[0]!;
        const [i, j] = [pair % 4, (pair + 1 + (pair % 3)) % 4];
        const once = exchanged(molecule, atom, i, j);
        const letter = (m: Molecule): string | null | undefined =>
          examine(m).units.find(u => u.unit.kind === 'centre' && u.unit.atoms[0] === atom)?.descriptor;
        const flipped = centre.descriptor === centre.descriptor!.toUpperCase() ? 'RS' : 'rs';
        // Rankings by Rules 3 to 6 look at the configuration of other units, which an exchange here may turn.
        const constitutional = centre.ranking.every(r => r.decidedBy === null || r.decidedBy < '3');
        if (constitutional && i !== j) {
          expect(letter(once)).toBe(flipped[1 - flipped.indexOf(centre.descriptor!)]);
        }
        expect(letter(exchanged(once, atom, i, j))).toBe(centre.descriptor);
      }),
      { numRuns: RUNS },
    );
  });
});

function exchanged(molecule: Molecule, atom: number, i: number, j: number): Molecule {
  return {
    ...molecule,
    stated: molecule.stated.map(stereo => {
      if (stereo.kind !== 'centre' || stereo.atom !== atom) return stereo;
      const ligands = [...stereo.ligands] as [number, number, number, number];
      [ligands[i], ligands[j]] = [ligands[j]!, ligands[i]!];
      return { ...stereo, ligands };
    }),
  };
}
