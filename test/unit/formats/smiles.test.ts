/** SMILES by value: hydrogens, charges, aromatic forms, configuration, and what is wrong with a bad one (OpenSMILES 1.0). */
import { describe, expect, it } from 'vitest';
import {
  bondBetween,
  IMPLICIT_HYDROGEN,
  LONE_PAIR,
  type Molecule,
} from '../../../core/chemistry/molecule.ts';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { examine } from '../../../core/examine.ts';
import { parseSmiles, SmilesError } from '../../../core/formats/smiles.ts';

const read = (text: string): Molecule => parseSmiles(text).molecule;
const hydrogens = (text: string): number[] => [...read(text).hydrogens];

/** "atom letter" for every unit with a letter that settles something, 1-based. */
function letters(text: string): string {
  return examine(read(text))
    .units.filter(({ unit, descriptor }) => descriptor !== null && unit.labile === null)
    .map(({ unit, descriptor }) => `${unit.atoms.map(atom => atom + 1).join('-')}${descriptor}`)
    .join(' ');
}

/** Sum of bond orders and hydrogens at an atom. */
function valenceOf(molecule: Molecule, atom: number): number {
  let sum = molecule.hydrogens[atom]!;
  for (let b = 0; b < molecule.bondCount; b++) {
    if (molecule.bondAtoms[2 * b] === atom || molecule.bondAtoms[2 * b + 1] === atom)
      sum += molecule.bondOrders[b]!;
  }
  return sum;
}

describe('hydrogens that a SMILES leaves out (OpenSMILES 1.0, Hydrogens)', () => {
  it.each([
    ['C', [4]],
    ['N', [3]],
    ['O', [2]],
    ['P', [3]],
    ['S', [2]],
    ['F', [1]],
    ['Cl', [1]],
    ['Br', [1]],
    ['I', [1]],
    ['B', [3]],
    ['C=C', [2, 2]],
    ['C#N', [1, 0]],
    ['C#C', [1, 1]],
    ['N(=O)=O', [1, 0, 0]],
    ['CP(C)(C)(C)C', [3, 0, 3, 3, 3, 3]],
    ['CP(C)(C)C', [3, 1, 3, 3, 3]],
    ['CS(C)C', [3, 1, 3, 3]],
    ['CS(=O)(=O)C', [3, 0, 0, 0, 3]],
    ['[C]', [0]],
    ['[CH3]', [3]],
    ['[H]', [0]],
    ['[2H]', [0]],
    ['*', [0]],
    ['[NH4+]', [4]],
    ['[OH-]', [1]],
    ['[Na+].[Cl-]', [0, 0]],
  ] as const)('%s', (text, expected) => {
    expect(hydrogens(text)).toEqual(expected);
  });
});

describe('bracket atoms', () => {
  it.each([
    ['[13CH4]', { element: 6, isotope: 13, charge: 0, hydrogens: 4 }],
    ['[2H]', { element: 1, isotope: 2, charge: 0, hydrogens: 0 }],
    ['[Fe+3]', { element: 26, isotope: 0, charge: 3, hydrogens: 0 }],
    ['[Fe+++]', { element: 26, isotope: 0, charge: 3, hydrogens: 0 }],
    ['[Fe++]', { element: 26, isotope: 0, charge: 2, hydrogens: 0 }],
    ['[O--]', { element: 8, isotope: 0, charge: -2, hydrogens: 0 }],
    ['[S-2]', { element: 16, isotope: 0, charge: -2, hydrogens: 0 }],
    ['[OH3+]', { element: 8, isotope: 0, charge: 1, hydrogens: 3 }],
    ['[35Cl-]', { element: 17, isotope: 35, charge: -1, hydrogens: 0 }],
    ['[238U]', { element: 92, isotope: 238, charge: 0, hydrogens: 0 }],
    ['[SeH2:7]', { element: 34, isotope: 0, charge: 0, hydrogens: 2 }],
    ['[*+]', { element: 0, isotope: 0, charge: 1, hydrogens: 0 }],
  ] as const)('%s', (text, expected) => {
    const m = read(text);
    expect({
      element: m.elements[0],
      isotope: m.isotopes[0],
      charge: m.charges[0],
      hydrogens: m.hydrogens[0],
    }).toEqual(expected);
  });
});

describe('aromatic forms are resolved to a Kekulé structure', () => {
  // Name, aromatic SMILES, Hill formula; formulas are those of the named compounds.
  it.each([
    ['benzene', 'c1ccccc1', 'C6H6'],
    ['pyridine', 'n1ccccc1', 'C5H5N'],
    ['pyrrole', '[nH]1cccc1', 'C4H5N'],
    ['N-methylpyrrole', 'Cn1cccc1', 'C5H7N'],
    ['imidazole', 'c1c[nH]cn1', 'C3H4N2'],
    ['pyrazole', 'c1cn[nH]c1', 'C3H4N2'],
    ['tetrazole', 'c1nnn[nH]1', 'CH2N4'],
    ['purine', 'c1c2c(nc[nH]2)ncn1', 'C5H4N4'],
    ['caffeine', 'Cn1cnc2c1c(=O)n(C)c(=O)n2C', 'C8H10N4O2'],
    ['furan', 'o1cccc1', 'C4H4O'],
    ['thiophene', 's1cccc1', 'C4H4S'],
    ['selenophene', '[se]1cccc1', 'C4H4Se'],
    ['phosphole', '[pH]1cccc1', 'C4H5P'],
    ['phosphinine', 'p1ccccc1', 'C5H5P'],
    ['indole', 'c1ccc2[nH]ccc2c1', 'C8H7N'],
    ['isoindole anion', 'c1ccc2c[n-]cc2c1', 'C8H6N-'],
    ['azulene', 'c1ccc2cccc2cc1', 'C10H8'],
    ['naphthalene', 'c1ccc2ccccc2c1', 'C10H8'],
    ['anthracene', 'c1ccc2cc3ccccc3cc2c1', 'C14H10'],
    ['pyrene', 'c1cc2ccc3cccc4ccc(c1)c2c34', 'C16H10'],
    ['tropone', 'O=c1cccccc1', 'C7H6O'],
    ['tropylium', 'c1ccc[cH+]cc1', 'C7H7+'],
    ['cyclopentadienide', '[cH-]1cccc1', 'C5H5-'],
    ['4-pyridone', 'O=c1cc[nH]cc1', 'C5H5NO'],
    ['pyridine N-oxide, charged', '[O-][n+]1ccccc1', 'C5H5NO'],
    ['pyridine N-oxide, doubly bonded', 'O=n1ccccc1', 'C5H5NO'],
    ['N-methylpyridinium', 'C[n+]1ccccc1', 'C6H8N+'],
    ['thiophene S-oxide', 'O=s1cccc1', 'C4H4OS'],
    ['pyrylium', '[o+]1ccccc1', 'C5H5O+'],
    ['biphenyl', 'c1ccccc1c1ccccc1', 'C12H10'],
    ['biphenyl, single bond written', 'c1ccccc1-c1ccccc1', 'C12H10'],
    ['fluorene', 'c1ccc2c(c1)Cc1ccccc12', 'C13H10'],
    ['carbazole', 'c1ccc2c(c1)[nH]c1ccccc12', 'C12H9N'],
    ['borabenzene anion', '[bH-]1ccccc1', 'C5H6B-'],
    ['coronene', 'c1cc2ccc3ccc4ccc5ccc6ccc1c1c2c3c4c5c61', 'C24H12'],
    ['benzodifuran', 'c1cc2occc2c2ccoc12', 'C10H6O2'],
    ['quinoline N-oxide', '[O-][n+]1cccc2ccccc12', 'C9H7NO'],
  ])('%s', (_, text, formula) => {
    const { molecule, warnings } = parseSmiles(text);
    expect(hillFormula(molecule)).toBe(formula);
    expect(warnings).toEqual([]);
    for (let i = 0; i < molecule.atomCount; i++) {
      if (molecule.elements[i] === 6) expect(valenceOf(molecule, i)).toBe(molecule.charges[i] === 0 ? 4 : 3);
      else if (molecule.elements[i] === 8) expect(valenceOf(molecule, i)).toBe(2 + molecule.charges[i]!);
    }
    for (const order of molecule.bondOrders) expect([1, 2, 3]).toContain(order);
  });

  it('a bond that only joins two aromatic rings is single, written or not', () => {
    for (const text of ['c1ccccc1c1ccccc1', 'c1ccccc1-c1ccccc1']) {
      const m = read(text);
      expect(m.bondOrders[bondBetween(m, 5, 6)]).toBe(1);
    }
  });

  it('no Kekulé structure: the atom and its column are named', () => {
    expect(() => read('c1cccn1')).toThrow(/column \d: no Kekulé structure.*\[nH\]/u);
    expect(() => read('c1cccc1')).toThrow(SmilesError);
  });
});

describe('bonds and rings', () => {
  it('ring closures with one digit, %nn and %(nnn), reused and ordered', () => {
    expect(hillFormula(read('C1CCCCC1'))).toBe('C6H12');
    expect(hillFormula(read('C%12CCCCC%12'))).toBe('C6H12');
    expect(hillFormula(read('C%(123)CCCCC%(123)'))).toBe('C6H12');
    expect(hillFormula(read('C1CC1C1CC1'))).toBe('C6H10');
    expect(hillFormula(read('C0CC0'))).toBe('C3H6');
    expect(hillFormula(read('C12CC1C2'))).toBe('C4H6');
  });

  it('the order of a ring bond may stand at either end or both', () => {
    for (const text of ['C=1CCCCC1', 'C1CCCCC=1', 'C=1CCCCC=1']) {
      const m = read(text);
      expect(m.bondOrders[bondBetween(m, 0, 5)]).toBe(2);
    }
    expect(() => read('C=1CCCCC#1')).toThrow(/different bonds/u);
  });

  it('quadruple, aromatic and dotted bonds', () => {
    const m = read('[Re]$[Re]');
    expect(m.bondOrders[0]).toBe(4);
    expect(hillFormula(read('c:1:c:c:c:c:c1'))).toBe('C6H6');
    expect(read('CC.O').bondCount).toBe(1);
    expect(read('C1.C1').bondCount).toBe(1);
  });

  it('closures across a dot join two parts (OpenSMILES 1.0, Disconnected structures)', () => {
    expect(hillFormula(read('C1.O2.C12'))).toBe('C2H6O');
  });
});

describe('configuration', () => {
  it('keeps the ligands in the order of the notation', () => {
    expect(read('N[C@@H](C)C(=O)O').stated).toEqual([
      { kind: 'centre', atom: 1, ligands: [0, IMPLICIT_HYDROGEN, 2, 3], turn: 'clockwise' },
    ]);
    expect(read('[C@H](N)(C)O').stated).toEqual([
      { kind: 'centre', atom: 0, ligands: [IMPLICIT_HYDROGEN, 1, 2, 3], turn: 'anticlockwise' },
    ]);
    expect(read('C[S@](=O)CC').stated).toEqual([
      { kind: 'centre', atom: 1, ligands: [0, LONE_PAIR, 2, 3], turn: 'anticlockwise' },
    ]);
    // A closure stands where its digit stands: first 1 (the last atom), then 2 (the fifth).
    expect(read('[C@]12(F)C(O)C2CC1').stated).toEqual([
      { kind: 'centre', atom: 0, ligands: [6, 4, 1, 2], turn: 'anticlockwise' },
    ]);
  });

  // The same compound written from many sides; the first of each row carries the descriptor of its name.
  it.each([
    // L-Alanine is 2S, L-cysteine 2R (P-103.1.3.1).
    [
      'S',
      [
        'N[C@@H](C)C(=O)O',
        'C[C@H](N)C(=O)O',
        'OC(=O)[C@@H](N)C',
        '[C@H](N)(C)C(O)=O',
        '[C@@](C)(N)([H])C(O)=O',
        '[H][C@](C)(C(O)=O)N',
        'N[C@TH2H](C)C(=O)O',
        '[C@H]1(N)C.C1(=O)O',
        'C[C@@]([H])(C(O)=O)N',
        '[C@@H]12C.N1.C2(=O)O',
      ],
    ],
    ['R', ['N[C@@H](CS)C(=O)O', 'SC[C@H](N)C(O)=O']],
    // Seen from F, Cl Br I run anticlockwise; from the other side I Br Cl run anticlockwise: S.
    ['S', ['F[C@](Cl)(Br)I', '[C@@](F)(Cl)(I)Br', 'I[C@](Br)(Cl)F', '[C@]1(Cl)(Br)I.F1']],
  ] as const)('%s', (letter, texts) => {
    const found = texts.map(text => `${text} ${letters(text).replace(/\d+/gu, '')}`);
    expect(found).toEqual(texts.map(text => `${text} ${letter}`));
  });

  it.each([
    [
      'E',
      [
        'F/C=C/F',
        'F\\C=C\\F',
        'C(\\F)=C/F',
        'F/C=C(/F)[H]',
        'C(/F)=C\\F',
        'F/C=C1.F\\1',
        '[H]/C(F)=C(/[H])F',
        'F/C([H])=C/F',
        '[H]\\C(F)=C/F',
      ],
    ],
    ['Z', ['F/C=C\\F', 'F\\C=C/F', 'C(/F)=C/F', '[H]/C(F)=C(\\[H])F', 'F/C=C1.F/1']],
  ] as const)('double bonds: %s', (letter, texts) => {
    for (const text of texts)
      expect(`${text} ${letters(text).replace(/[\d-]+/gu, '')}`).toBe(`${text} ${letter}`);
  });

  it('a directed ring bond counts from the atom it is written at', () => {
    expect(letters('C/1=C/CCCCCC1').replace(/[\d-]+/gu, '')).toBe(
      letters('C1=C/CCCCCC\\1').replace(/[\d-]+/gu, ''),
    );
  });

  it('allenes and longer rows (OpenSMILES 1.0, Allene-like systems)', () => {
    const one = letters('OC(Cl)=[C@]=C(C)F');
    expect(one).toMatch(/^2-5[MP]$/u);
    const other = letters('OC(Cl)=[C@@]=C(C)F');
    expect(other).toMatch(/^2-5[MP]$/u);
    expect(other).not.toBe(one);
    expect(letters('OC(Cl)=[C@AL1]=C(C)F')).toBe(one);
    expect(letters('ClC(O)=[C@@]=C(C)F').slice(-1)).toBe(one.slice(-1));
    expect(letters('OC(Cl)=[C@@]=C(F)C').slice(-1)).toBe(one.slice(-1));
    expect(letters('CC(F)=[C@@]=C(Cl)O').slice(-1)).toBe(one.slice(-1));
    // Hydrogen implied at both ends: it follows the atom before it (C[CH]) or leads (=CC).
    expect(letters('CC=[C@]=CC').slice(-1)).toBe(letters('C[CH]=[C@]=[CH]C').slice(-1));
    expect(letters('CC=[C@]=CC').slice(-1)).toBe(letters('CC([H])=[C@]=C([H])C').slice(-1));
    // The same rule as for a double bond: F/C=C/F has its ligands on opposite sides.
    expect(letters('F/C(C)=C=C=C(/F)C').replace(/[\d-]+/gu, '')).toBe('E');
    expect(letters('F/C(C)=C=C=C(\\F)C').replace(/[\d-]+/gu, '')).toBe('Z');
  });

  it('contradictory directions are unspecified, with a warning', () => {
    const { molecule, warnings } = parseSmiles('F/C(\\Cl)=C/F');
    expect(molecule.stated).toEqual([]);
    expect(warnings.join()).toMatch(/column 3.*contradict/u);
  });

  it('square planar and octahedral marks are read and not judged', () => {
    const { molecule, warnings } = parseSmiles('F[Pt@SP1](Cl)(Br)I');
    expect(molecule.stated).toEqual([]);
    expect(warnings.join()).toMatch(/not judged/u);
  });
});

describe('a bad SMILES says what is wrong and in which column', () => {
  it.each([
    ['', 1, /empty/u],
    ['C1CC', 2, /ring closure 1/u],
    ['C(C', 2, /not closed/u],
    ['CC)C', 3, /closing parenthesis/u],
    ['C()C', 3, /empty branch/u],
    ['CX', 2, /"X"/u],
    ['C[Xx]', 2, /Xx/u],
    ['C[C', 2, /not closed/u],
    ['C[C@H2@]C', 2, /bracket/u],
    // One digit of hydrogens, no more: a long number must not be taken for a count.
    ['C[CH99999999]', 2, /CH99999999/u],
    ['C==C', 3, /two bonds/u],
    ['C=', 2, /nowhere/u],
    ['=C', 1, /without an atom/u],
    ['(C)C', 1, /branch/u],
    ['1CC1', 1, /ring closure/u],
    ['C11', 3, /same atom/u],
    ['C1C1', 4, /bonded already/u],
    ['C%1CC', 2, /two digits/u],
    ['CC.=C', 4, /without an atom|nowhere/u],
    ['C=.C', 2, /nowhere/u],
    ['C(=)C', 3, /nowhere/u],
    ['C.(C)', 3, /branch/u],
    ['CCé', 3, /é/u],
  ] as const)('%s', (text, column, message) => {
    let caught: unknown = null;
    try {
      read(text);
    } catch (error) {
      caught = error;
    }
    expect(caught).toBeInstanceOf(SmilesError);
    expect((caught as SmilesError).message).toMatch(message);
    expect((caught as SmilesError).column).toBe(column);
  });

  it('stops at the limit of atoms', () => {
    expect(() => parseSmiles('C'.repeat(11), 10)).toThrow(/more than 10 atoms/u);
  });
});
