/** Rings, symmetry classes, formulas, valences and components: by value and against plain definitions. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { connectedComponents, moleculeStatements } from '../../../core/chemistry/components.ts';
import {
  atomicWeight,
  elementNumber,
  elementSymbol,
  isMetal,
  LAST_ELEMENT,
} from '../../../core/chemistry/elements.ts';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { assembleMolecule, buildMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { ringBonds, ringInfo } from '../../../core/chemistry/rings.ts';
import { symmetryClasses } from '../../../core/chemistry/symmetry.ts';
import {
  defaultHydrogens,
  isUnusualValence,
  organicSubsetHydrogens,
} from '../../../core/chemistry/valence.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';
import { randomMolecule, renumbered, seeded, shuffled } from '../../molecules.ts';

const read = (text: string): Molecule => parseSmiles(text).molecule;

/** Distance between two atoms without one bond, by plain breadth-first search; Infinity when parted. */
function distanceWithout(molecule: Molecule, from: number, to: number, without: number): number {
  let front = [from];
  const seen = new Set(front);
  for (let steps = 0; front.length > 0; steps++) {
    if (front.includes(to)) return steps;
    const next: number[] = [];
    for (let b = 0; b < molecule.bondCount; b++) {
      if (b === without) continue;
      const i = molecule.bondAtoms[2 * b]!;
      const j = molecule.bondAtoms[2 * b + 1]!;
      for (const [x, y] of [
        [i, j],
        [j, i],
      ] as const) {
        if (front.includes(x) && !seen.has(y)) {
          seen.add(y);
          next.push(y);
        }
      }
    }
    front = next;
  }
  return Number.POSITIVE_INFINITY;
}

/** Number of classes of equal values. */
const distinct = (values: Int32Array): number => new Set(values).size;

describe('rings', () => {
  it('a bond is in a ring when its ends stay joined without it; the smallest ring is one more than the distance', () => {
    fc.assert(
      fc.property(randomMolecule, molecule => {
        const info = ringInfo(molecule);
        for (let b = 0; b < molecule.bondCount; b++) {
          const d = distanceWithout(molecule, molecule.bondAtoms[2 * b]!, molecule.bondAtoms[2 * b + 1]!, b);
          expect(info.bondInRing[b]).toBe(Number.isFinite(d) ? 1 : 0);
          expect(info.bondRingSize[b]).toBe(Number.isFinite(d) ? d + 1 : 0);
        }
        expect([...ringBonds(molecule)]).toEqual([...info.bondInRing]);
      }),
      { numRuns: 300 },
    );
  });

  it('each listed ring is a cycle of bonds, and the atoms know their smallest', () => {
    fc.assert(
      fc.property(randomMolecule, molecule => {
        const { rings, ringsAt, atomRingSize, atomInRing } = ringInfo(molecule);
        const bonded = (i: number, j: number): boolean =>
          [
            ...molecule.neighbours.subarray(molecule.neighbourStart[i], molecule.neighbourStart[i + 1]),
          ].includes(j);
        const keys = new Set<string>();
        rings.forEach((ring, r) => {
          expect(new Set(ring).size).toBe(ring.length);
          ring.forEach((atom, k) => {
            expect(bonded(atom, ring[(k + 1) % ring.length]!)).toBe(true);
            expect(ringsAt[atom]).toContain(r);
          });
          keys.add([...ring].sort((a, b) => a - b).join());
        });
        expect(keys.size).toBe(rings.length);
        for (let i = 0; i < molecule.atomCount; i++) {
          const sizes = ringsAt[i]!.map(r => rings[r]!.length);
          expect(atomRingSize[i]).toBe(sizes.length === 0 ? 0 : Math.min(...sizes));
          expect(atomInRing[i]).toBe(sizes.length === 0 ? 0 : 1);
        }
      }),
      { numRuns: 300 },
    );
  });

  it.each([
    ['norbornane', 'C1CC2CCC1C2', [5, 5]],
    ['cubane', 'C12C3C4C1C5C2C3C45', [4, 4, 4, 4, 4, 4]],
    ['naphthalene', 'c1ccc2ccccc2c1', [6, 6]],
    ['spiro[4.4]nonane', 'C1CCC2(C1)CCCC2', [5, 5]],
    ['ring and chain', 'CC1CC1', [3]],
  ] as const)('%s', (_, text, sizes) => {
    expect(
      ringInfo(read(text))
        .rings.map(ring => ring.length)
        .sort((a, b) => a - b),
    ).toEqual(sizes);
  });

  it('rings that share a bond or a spiro atom are one system', () => {
    const systems = (text: string): number => {
      const { system } = ringInfo(read(text));
      return new Set([...system].filter(s => s >= 0)).size;
    };
    expect(systems('C1CC1C1CC1')).toBe(2);
    expect(systems('C1CC2(C1)CCC2')).toBe(1);
    expect(systems('c1ccc2ccccc2c1')).toBe(1);
  });

  it('a long chain and a large ring do not exhaust the stack', () => {
    const n = 50_000;
    const bondAtoms = new Uint32Array(2 * n);
    for (let i = 0; i < n; i++) {
      bondAtoms[2 * i] = i;
      bondAtoms[2 * i + 1] = (i + 1) % n;
    }
    const one = read('C');
    const ring = assembleMolecule({
      ...one,
      elements: new Uint8Array(n).fill(6),
      charges: new Int8Array(n),
      isotopes: new Uint16Array(n),
      radicals: new Uint8Array(n),
      hydrogens: new Uint8Array(n).fill(2),
      bondAtoms,
      bondOrders: new Uint8Array(n).fill(1),
      bondMarks: new Uint8Array(n),
    });
    expect(ringBonds(ring).every(flag => flag === 1)).toBe(true);
    expect(connectedComponents(ring).count).toBe(1);
  });
});

describe('symmetry classes', () => {
  it('do not depend on the numbering', () => {
    fc.assert(
      fc.property(randomMolecule, fc.nat(), (molecule, seed) => {
        const random = seeded(seed);
        const place = shuffled(molecule.atomCount, random);
        const before = symmetryClasses(molecule);
        const after = symmetryClasses(renumbered(molecule, place, random));
        for (let i = 0; i < molecule.atomCount; i++) expect(after[place[i]!]).toBe(before[i]);
      }),
      { numRuns: 500 },
    );
  });

  it.each([
    ['benzene', 'c1ccccc1', 1],
    ['toluene', 'Cc1ccccc1', 5],
    ['neopentane', 'CC(C)(C)C', 2],
    ['butane', 'CCCC', 2],
    ['isotope breaks it', '[13CH3]CCC', 4],
    ['cubane', 'C12C3C4C1C5C2C3C45', 1],
    ['o-xylene, whichever Kekulé structure', 'CC1=C(C)C=CC=C1', 4],
    ['o-xylene, the other Kekulé structure', 'CC1=CC=CC=C1C', 4],
    ['phosphate: the oxygens share charge, proton and double bond', 'COP(=O)([O-])O', 4],
    ['sulfonate', 'CS(=O)(=O)[O-]', 3],
    ['acid and its ester oxygen', 'CC(=O)OC', 5],
  ] as const)('%s', (_, text, count) => {
    expect(distinct(symmetryClasses(read(text)))).toBe(count);
  });
});

describe('Hill formulas (E. A. Hill, J. Am. Chem. Soc. 1900, 22, 478)', () => {
  it.each([
    ['CCO', 'C2H6O'],
    ['C(Br)(Cl)(F)I', 'CBrClFI'],
    ['[NH4+]', 'H4N+'],
    ['OS(=O)(=O)O', 'H2O4S'],
    ['[O-]P([O-])([O-])=O', 'O4P-3'],
    ['[2H]C([2H])([2H])O', 'CH4O'],
    ['*C', 'CH3*'],
    ['[Na+].[Cl-]', 'ClNa'],
    ['[Ca+2]', 'Ca+2'],
    ['C[N+](C)(C)CC([O-])=O', 'C5H11NO2'],
  ])('%s', (text, formula) => {
    expect(hillFormula(read(text))).toBe(formula);
  });

  it('of each molecule of an entry', () => {
    const statements = moleculeStatements(read('[Na+].CC(=O)[O-].O'));
    expect(statements.map(({ id, formula, atoms }) => [id, formula, atoms])).toEqual([
      [1, 'Na+', [0]],
      [2, 'C2H3O2-', [1, 2, 3, 4]],
      [3, 'H2O', [5]],
    ]);
  });
});

describe('elements', () => {
  it('symbols and numbers', () => {
    for (let z = 1; z <= LAST_ELEMENT; z++) expect(elementNumber(elementSymbol(z))).toBe(z);
    expect(LAST_ELEMENT).toBe(118);
    expect([1, 6, 17, 26, 53, 79, 92].map(elementSymbol)).toEqual(['H', 'C', 'Cl', 'Fe', 'I', 'Au', 'U']);
    expect(elementNumber('D')).toBe(1);
    expect(elementNumber('Xx')).toBeUndefined();
  });

  it('weights (IUPAC 2021)', () => {
    expect([1, 6, 8, 16, 35, 78].map(atomicWeight)).toEqual([1.008, 12.011, 15.999, 32.06, 79.904, 195.08]);
  });

  it('metals and the others', () => {
    expect(['Li', 'Na', 'Al', 'Fe', 'Sn', 'Pt', 'U', 'Bi'].every(s => isMetal(elementNumber(s)!))).toBe(true);
    expect(
      ['H', 'He', 'B', 'C', 'Si', 'P', 'As', 'Sb', 'Te', 'I', 'Ge', 'Se', 'Xe'].some(s =>
        isMetal(elementNumber(s)!),
      ),
    ).toBe(false);
  });
});

describe('valences', () => {
  it('fills up to the default valence', () => {
    // Element, charge, sum of bond orders, hydrogens (isoelectronic rule, common practice, no source).
    for (const [z, charge, sum, hydrogens] of [
      [6, 0, 2, 2],
      [6, 1, 0, 3],
      [6, -1, 0, 3],
      [7, 1, 0, 4],
      [7, -1, 0, 2],
      [8, 1, 0, 3],
      [8, -1, 0, 1],
      [5, -1, 0, 4],
      [16, 0, 3, 1],
      [16, 1, 0, 3],
      [15, 0, 4, 1],
      [15, 1, 0, 4],
      [17, 0, 0, 1],
      [17, -1, 0, 0],
      [11, 0, 0, 0],
      [26, 0, 0, 0],
      [14, 0, 1, 3],
    ] as const) {
      expect([z, charge, sum, defaultHydrogens(z, charge, sum)]).toEqual([z, charge, sum, hydrogens]);
    }
  });

  it('tells what is unusual', () => {
    expect(isUnusualValence(6, 0, 5)).toBe(true);
    expect(isUnusualValence(8, 0, 3)).toBe(true);
    expect(isUnusualValence(7, 0, 5)).toBe(false);
    expect(isUnusualValence(7, 0, 4)).toBe(true);
    expect(isUnusualValence(7, 1, 4)).toBe(false);
    expect(isUnusualValence(16, 0, 6)).toBe(false);
    expect(isUnusualValence(26, 0, 9)).toBe(false);
    expect(isUnusualValence(17, 0, 7)).toBe(false);
  });

  it('organic subset (OpenSMILES 1.0)', () => {
    expect(organicSubsetHydrogens(7, 4, false)).toBe(1);
    expect(organicSubsetHydrogens(6, 2, true)).toBe(1);
    expect(organicSubsetHydrogens(16, 5, false)).toBe(1);
    expect(organicSubsetHydrogens(26, 0, false)).toBe(0);
  });
});

describe('molecules from lists', () => {
  it('refuses a bond to an atom that is not there, or to itself', () => {
    const atoms = [{ element: 6 }, { element: 6 }];
    expect(() => buildMolecule({ atoms, bonds: [[0, 2, 1]] })).toThrow(RangeError);
    expect(() => buildMolecule({ atoms, bonds: [[1, 1, 1]] })).toThrow(RangeError);
  });
});
