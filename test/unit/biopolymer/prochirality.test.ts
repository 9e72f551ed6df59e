/** Sides of prochiral atoms, and names of like atoms. */
import { describe, expect, it } from 'vitest';
import { checkResidues } from '../../../core/biopolymer/checks.ts';
import { faceFrom, proRS, type RankNeighbours } from '../../../core/biopolymer/prochirality.ts';
import { templateNames, templateOf } from '../../../core/biopolymer/templates.ts';
import {
  buildMolecule,
  type Molecule,
  neighboursOf,
  type ResidueAtom,
} from '../../../core/chemistry/molecule.ts';

/** By atomic number: enough for the molecules of this file. */
const byElement: RankNeighbours = (molecule, atom) => {
  const list = [...neighboursOf(molecule, atom)];
  const numbers = [...new Set(list.map(other => molecule.elements[other]!))].sort((a, b) => b - a);
  return list.map(other => ({ atom: other, rank: 1 + numbers.indexOf(molecule.elements[other]!) }));
};

/** Bromochloromethane: Br up front, Cl to its right, two hydrogens. */
function dihalide(sign: 1 | -1): Molecule {
  return buildMolecule({
    dimension: 3,
    atoms: [
      { element: 6, x: 0, y: 0, z: 0 },
      { element: 35, x: sign, y: 1, z: 1 },
      { element: 17, x: -sign, y: -1, z: 1 },
      { element: 1, x: -sign, y: 1, z: -1 },
      { element: 1, x: sign, y: -1, z: -1 },
    ],
    bonds: [
      [0, 1, 1],
      [0, 2, 1],
      [0, 3, 1],
      [0, 4, 1],
    ],
  });
}

describe('pro-R and pro-S', () => {
  it('are those that make the centre R and S when ranked above their twin', () => {
    const sides = proRS(dihalide(1), 0, byElement);
    // Seen from opposite H5, the sequence Br, Cl, H4: worked by hand, V = (1,1,1)·[(−1,−1,1)×(−1,1,−1)] = −4, R with H4 raised.
    expect(sides).toEqual({ proR: 3, proS: 4 });
    expect(proRS(dihalide(-1), 0, byElement)).toEqual({ proR: 4, proS: 3 });
  });

  it('are none where no two, or more than two, ligands are alike', () => {
    const methane = dihalide(1);
    expect(proRS({ ...methane, elements: Uint8Array.of(6, 35, 17, 9, 1) }, 0, byElement)).toBeNull();
    expect(proRS({ ...methane, elements: Uint8Array.of(6, 35, 1, 1, 1) }, 0, byElement)).toBeNull();
    expect(proRS({ ...methane, elements: Uint8Array.of(6, 35, 35, 1, 1) }, 0, byElement)).toBeNull();
  });
});

describe('Re and Si', () => {
  const carbonyl = buildMolecule({
    dimension: 3,
    atoms: [
      { element: 6, x: 0, y: 0, z: 0 },
      { element: 8, x: 0, y: 1.2, z: 0 },
      { element: 6, x: 1.3, y: -0.75, z: 0 },
      { element: 1, x: -0.9, y: -0.5, z: 0 },
    ],
    bonds: [
      [0, 1, 2],
      [0, 2, 1],
      [0, 3, 1],
    ],
  });

  it('are the faces from which the ligands run clockwise and anticlockwise', () => {
    // Seen from +z: O at the top, C to the lower right, H to the lower left: clockwise, Re.
    expect(faceFrom(carbonyl, 0, [0, 0, 3], byElement)).toBe('Re');
    expect(faceFrom(carbonyl, 0, [0, 0, -3], byElement)).toBe('Si');
    expect(faceFrom(carbonyl, 0, [1, 1, 0], byElement)).toBeNull();
  });
});

describe('names of like atoms', () => {
  const residue = (names: readonly string[], name: string): readonly ResidueAtom[] =>
    names.map(atomName => ({ chain: 'A', residue: name, number: '1', atomName, hetero: false }));

  /** An invented valine side chain; CB with CA, CG1, CG2 in the order given. */
  function valine(first: string, second: string): Molecule {
    const molecule = buildMolecule({
      dimension: 3,
      atoms: [
        { element: 6, x: 0, y: 0, z: 0 },
        { element: 6, x: 0.9, y: 0.9, z: 0.9 },
        { element: 6, x: -0.9, y: -0.9, z: 0.9 },
        { element: 6, x: -0.9, y: 0.9, z: -0.9 },
      ],
      bonds: [
        [0, 1, 1],
        [0, 2, 1],
        [0, 3, 1],
      ],
    });
    return { ...molecule, residues: residue(['CB', 'CA', first, second], 'VAL') };
  }

  it('are told apart by parity: CG1 of valine is pro-R (Markley et al. 1998)', () => {
    expect(checkResidues(valine('CG1', 'CG2')).findings).toEqual([]);
    expect(checkResidues(valine('CG2', 'CG1')).findings).toMatchObject([
      { kind: 'exchanged-names', residue: 'A/VAL/1', atom: 'CB' },
    ]);
  });
});

describe('residue templates', () => {
  it('name every atom of a bond once, and close the rings they have', () => {
    // Rings by residue: bonds − atoms + 1 for a connected template.
    const rings: Readonly<Record<string, number>> = {
      PRO: 1,
      PHE: 1,
      TYR: 1,
      HIS: 1,
      TRP: 2,
      DA: 3,
      G: 3,
      C: 2,
      GLC: 1,
      NAD: 5,
      ATP: 3,
    };
    for (const name of templateNames()) {
      const template = templateOf(name)!;
      const pairs = template.bonds.map(({ first, second }) => [first, second].sort().join(' '));
      // DT lists both names of its methyl carbon, of which a file has one.
      expect(new Set(pairs).size, name).toBe(pairs.length);
      const expected = rings[name];
      if (expected !== undefined) expect(pairs.length - template.atoms.size + 1, name).toBe(expected);
    }
  });
});
