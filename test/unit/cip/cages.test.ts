/** Cages of high symmetry: letters of a molecule with mirror planes never change by reflection, whatever rule gives them. */
import { describe, expect, it } from 'vitest';
import {
  type AtomInput,
  type BondOrder,
  buildMolecule,
  type Molecule,
} from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';

/** C–C of cubane, Å (E. B. Fleischer, J. Am. Chem. Soc. 1964, 86, 3889: 1.551; from memory). */
const EDGE = 1.551;

/** Cubane; the listed corners bear chlorine for hydrogen. */
function cubane(chlorinated: readonly number[]): Molecule {
  const corner = (i: number, scale: number): AtomInput => ({
    element: scale === 1 ? 6 : 17,
    x: EDGE * scale * ((i & 1) - 0.5),
    y: EDGE * scale * (((i >> 1) & 1) - 0.5),
    z: EDGE * scale * (((i >> 2) & 1) - 0.5),
  });
  const atoms: AtomInput[] = Array.from({ length: 8 }, (_, i) => ({
    ...corner(i, 1),
    hydrogens: chlorinated.includes(i) ? 0 : 1,
  }));
  const bonds: [number, number, BondOrder][] = [];
  for (let i = 0; i < 8; i++) for (const bit of [1, 2, 4]) if ((i & bit) === 0) bonds.push([i, i | bit, 1]);
  for (const i of chlorinated) {
    bonds.push([i, atoms.length, 1]);
    atoms.push(corner(i, 2.3));
  }
  return buildMolecule({ atoms, bonds, dimension: 3 });
}

const letters = (molecule: Molecule): (string | null)[] => examine(molecule).units.map(u => u.descriptor);

describe('cubanes', () => {
  it.each([
    ['cubane', []],
    ['chlorocubane', [0]],
    ['1,4-dichlorocubane', [0, 7]],
    ['1,2-dichlorocubane', [0, 1]],
    ['1,3-dichlorocubane', [0, 3]],
  ])('%s has a mirror plane through every corner that lies on it: r and s only there', (_, chlorinated) => {
    const molecule = cubane(chlorinated);
    const docket = examine(molecule);
    // Corners on the plane that exchanges x and y keep their letter in the mirror: it must be reflection-invariant.
    for (const { unit, descriptor } of docket.units) {
      const corner = unit.atoms[0]!;
      const exchanged = (i: number): number => (i & 4) | ((i & 1) << 1) | ((i >> 1) & 1);
      const planeHolds = chlorinated.every(i => chlorinated.includes(exchanged(i)));
      if (planeHolds && exchanged(corner) === corner) expect(['r', 's', null]).toContain(descriptor);
    }
  });

  it.each([[[]], [[0]], [[0, 1, 7]], [[0, 1, 3, 7]], [[0, 1, 2, 4]], [[0, 3, 5, 6]]])(
    'with chlorine at %j: reflection exchanges R and S, corner by corner, and keeps r and s',
    chlorinated => {
      const one = cubane(chlorinated);
      const other: Molecule = {
        ...one,
        coordinates: one.coordinates!.map((c, k) => (k % 3 === 0 ? -c : c)),
      };
      const swapped = letters(one).map(letter => (letter === 'R' ? 'S' : letter === 'S' ? 'R' : letter));
      expect(letters(other)).toEqual(swapped);
    },
  );
});

describe('auxiliary descriptors in small cages', () => {
  it('Rule 1b counts the root distance from the root of the digraph (P-92.2.2; test/reference/DIFFERENCES.md)', () => {
    // Its two ring branches differ by Rule 5 alone; which is R rests on duplicates of the root beside duplicates of nearer atoms.
    const { molecule } = parseSmiles('F[C@@H]1[C@@H]2[C@@H]3[C@@H]2[C@H]13');
    const unit = examine(molecule).units.find(({ unit: { atoms } }) => atoms[0] === 1);
    expect(unit?.descriptor).toBe('s');
  });

  it('auxiliary descriptors at a double bond, by hand: S and R by Rule 1a, R on the side of F, so z (P-92.6)', () => {
    const { molecule } = parseSmiles('[C@@H]12/C(=C/F)[C@@H]1[C@@H]2Br');
    const unit = examine(molecule).units.find(({ unit: { kind } }) => kind === 'double-bond');
    expect(unit?.descriptor).toBe('z');
  });
});
