/** Judgements of perception: which axes cannot turn, which nitrogens are held, what resonance makes alike, which drawings say nothing. */
import { describe, expect, it } from 'vitest';
import { BondMark, buildMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { symmetryClasses } from '../../../core/chemistry/symmetry.ts';
import { DEFAULT_SETTINGS } from '../../../core/docket.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';
import { perceiveUnits } from '../../../core/perception/perceive.ts';
import type { StereoUnit } from '../../../core/perception/unit.ts';

const unitsOf = (molecule: Molecule): StereoUnit[] => perceiveUnits(molecule, DEFAULT_SETTINGS).units;
const read = (text: string): StereoUnit[] => unitsOf(parseSmiles(text).molecule);

/** `held`, `turns` or `none`: what is said of the axis of a molecule that has one at most. */
function axis(text: string): 'held' | 'turns' | 'none' {
  const found = read(text).filter(unit => unit.kind === 'axis');
  expect(found.length).toBeLessThanOrEqual(1);
  if (found.length === 0) return 'none';
  return found[0]!.labile === null ? 'held' : 'turns';
}

describe('hindered axes', () => {
  // Classes: S. R. LaPlante et al., J. Med. Chem. 2011, 54, 7005; the examples and their behaviour are from memory.
  it.each([
    ['3-(2-methylphenyl)quinazolin-4-one (methaqualone)', 'Cc1ccccc1N1C(=O)c2ccccc2N=C1C'],
    ['N-(2-tert-butylphenyl)-N-methylacetamide', 'CN(C(C)=O)c1ccccc1C(C)(C)C'],
    ['chloroacetanilide with 2-ethyl and 6-methyl (metolachlor)', 'CCc1cccc(C)c1N(C(=O)CCl)CCOC'],
    ['2-methyl-N,N-diisopropyl-1-naphthamide', 'Cc1ccc2ccccc2c1C(=O)N(C(C)C)C(C)C'],
    ['N-pyridyl quinazolinone with 2-isopropyl and 4-methyl', 'Cc1ccnc(C(C)C)c1-n1c(=O)ncc2ccccc12'],
    ['2,2′-bis(trifluoromethyl)biphenyl', 'FC(F)(F)c1ccccc1-c1ccccc1C(F)(F)F'],
    [
      'dinitro-bridged biaryl with both outer flanks occupied (P-93.5.4.1)',
      'O=C1Cc2c(c3c(C1)cccc3[N+]([O-])=O)c(ccc2)[N+]([O-])=O',
    ],
  ])('%s is held', (_, text) => expect(axis(text)).toBe('held'));

  it.each([
    ['2,2′-dimethylbiphenyl', 'Cc1ccccc1-c1ccccc1C'],
    ['N-methyl-2′-methylacetanilide', 'CN(C(C)=O)c1ccccc1C'],
    [
      'tricycle of colchicine, one outer flank free',
      'COc1cc2CC[C@H](NC(C)=O)C3=CC(=O)C(OC)=CC=C3c2c(OC)c1OC',
    ],
    ['ester flanked by trifluoromethyl and ring fusion', 'COC(=O)C1=C(C(F)(F)F)CCC2N1C(=O)C2N'],
    ['arylisoxazole with fluorine and chlorine', 'Cc1onc(c1CC)-c1c(F)cccc1Cl'],
  ])('%s turns, and the reason is given', (_, text) => expect(axis(text)).toBe('turns'));

  it.each([
    ['biphenyl', 'c1ccccc1-c1ccccc1'],
    ['2-methylbiphenyl', 'Cc1ccccc1-c1ccccc1'],
    ['carboxylic acid, however flanked: its oxygens exchange', 'OC(=O)c1c(C)cccc1C(F)(F)F'],
    [
      '2,6-dimethylbiphenyl with two groups on the other ring: alike at one end',
      'Cc1cccc(C)c1-c1c(Cl)cccc1Br',
    ],
  ])('%s has none', (_, text) => expect(axis(text)).toBe('none'));
});

describe('nitrogen', () => {
  it('is held at a small bridgehead, its lactam included', () => {
    expect(read('CC1CN2CC(O)C1CC2').some(unit => unit.atoms[0] === 3 && unit.labile === null)).toBe(true);
    expect(read('CC1C(=O)N2CC(O)C1CC2').some(unit => unit.atoms[0] === 4 && unit.labile === null)).toBe(true);
  });

  it('of a macrocycle across an indole is planar, that of a cryptand turns in and out', () => {
    expect(read('CC1CCCCCn2cc(CCC1)c1ccccc12').map(unit => unit.atoms[0])).toEqual([1]);
    const cryptand = read('C1CN2CCOCCN(CCO1)CCSCC2').filter(unit => unit.labile === null);
    expect(cryptand).toEqual([]);
  });
});

describe('bridged rings of which nothing is stated', () => {
  it.each([
    ['bicyclo[2.2.2]octane', 'C1CC2CCC1CC2', []],
    ['adamantane', 'C1C2CC3CC1CC(C2)C3', []],
    ['cubane', 'C12C3C4C1C5C2C3C45', []],
    ['7-methylnorbornane, its two bridges alike', 'CC1C2CCC1CC2', []],
    ['7-methylnorbornene, syn or anti', 'CC1C2CCC1C=C2', [1, 2, 5]],
    ['tropine, endo or exo', 'OC1CC2CCC(C1)N2C', [1, 3, 6]],
    ['2-methylnorbornane', 'CC1CC2CCC1C2', [1, 3, 6]],
    ['decalin', 'C1CCC2CCCCC2C1', [3, 8]],
  ])('%s', (_, text, centres) => {
    const found = read(text).filter(unit => unit.labile === null);
    expect(found.map(unit => unit.atoms[0])).toEqual(centres);
  });
});

describe('what cannot be a tetrahedron', () => {
  it('a sulfurane of four single bonds is none, a sulfoximine is', () => {
    expect(read('CS(F)(Cl)CC')).toEqual([]);
    expect(read('CS(=O)(=N)CC').map(unit => unit.atoms[0])).toEqual([1]);
  });
});

describe('double bonds of large rings', () => {
  it('of cyclooctene and [10]annulene are candidates; of cycloheptene and porphine not', () => {
    expect(read('C1=CCCCCCC1')).toHaveLength(1);
    expect(read('C1=CC=CC=CC=CC=C1')).toHaveLength(5);
    expect(read('C1=CCCCCC1')).toEqual([]);
    expect(read('C1=CC2=CC3=CC=C(N3)C=C4C=CC(=N4)C=C5C=CC(=CC1=N2)N5')).toEqual([]);
  });
});

describe('resonance', () => {
  it.each([
    ['amidinium', 'CNC(=[NH+]C)C', 1, 3],
    ['carboxylate', 'CC(=O)[O-]', 2, 3],
    ['triazolium of a bicycle', 'OC1C[n+]2cncn2C1', 2, 8],
    ['enolate of a 1,3-diketone', 'CC1CC(=O)C=C([O-])C1', 2, 8],
    ['allyl cation', '[CH2+]C=C', 0, 2],
    ['imidazolide', 'Cc1ncc[n-]1', 2, 5],
  ])('%s: the two ends of the charge are alike', (_, text, first, second) => {
    const classes = symmetryClasses(parseSmiles(text).molecule);
    expect(classes[first]).toBe(classes[second]);
  });

  it('no centre between two ends that share a charge', () => {
    expect(read('OC1C[n+]2cncn2C1')).toEqual([]);
    expect(read('CC1CC(=O)C=C([O-])C1')).toEqual([]);
    // The neutral enol is taken as it is drawn.
    expect(read('CC1CC(=O)C=C(O)C1')).toHaveLength(1);
  });

  it.each([
    ['amide and ester oxygen', 'NC(=O)CC(=O)O', 0, 6],
    ['ammonium and amine', '[NH3+]CCN', 0, 3],
    ['aldehyde and alcohol', 'O=CCO', 0, 3],
  ])('%s stay apart', (_, text, first, second) => {
    const classes = symmetryClasses(parseSmiles(text).molecule);
    expect(classes[first]).not.toBe(classes[second]);
  });
});

describe('helices', () => {
  it('six rings that wind are one, five invert, phenanthrene and saturated rings are none', () => {
    const hexahelicene = 'c1ccc2c(c1)ccc1ccc3ccc4ccc5ccccc5c4c3c12';
    expect(read(hexahelicene).map(unit => [unit.kind, unit.labile])).toEqual([['helix', null]]);
    const pentahelicene = read('c1ccc2c(c1)ccc1c2c2c3ccccc3ccc2cc1');
    expect(pentahelicene.map(unit => [unit.kind, typeof unit.labile])).toEqual([['helix', 'string']]);
    expect(read('c1ccc2c(c1)ccc1ccccc12')).toEqual([]);
    expect(read('C1CCC2C(C1)CCC1C2C2C3CCCCC3CCC2CC1').every(unit => unit.kind === 'centre')).toBe(true);
  });
});

describe('three bonds drawn to one side', () => {
  /** Carbon with F, Cl, Br at the given angles (degrees, unit bonds) and an implicit hydrogen; one bond a wedge. */
  function drawing(angles: readonly [number, number, number], wedged: number): StereoUnit {
    const ligands = [9, 17, 35].map((element, i) => {
      const angle = (angles[i]! * Math.PI) / 180;
      return { element, x: Math.cos(angle), y: Math.sin(angle) };
    });
    const molecule = buildMolecule({
      atoms: [{ element: 6, hydrogens: 1, x: 0, y: 0 }, ...ligands],
      bonds: [0, 1, 2].map(i => [0, i + 1, 1, i === wedged ? BondMark.wedge : BondMark.none] as const),
      dimension: 2,
    });
    return unitsOf(molecule)[0]!;
  }

  // Graphical representation of stereochemical configuration (IUPAC Recommendations 2006, Pure Appl. Chem. 78, 1897).
  it('the middle bond marked says nothing, with a warning', () => {
    const unit = drawing([60, 0, -60], 1);
    expect([unit.state, unit.sense]).toEqual(['unspecified', 0]);
    expect(unit.warnings).toHaveLength(1);
  });

  it('an outer bond marked is read, and as it would be with the bonds spread evenly', () => {
    for (const wedged of [0, 2]) {
      const narrow = drawing([60, 0, -60], wedged);
      const even = drawing([120, 0, -120], wedged);
      expect(even.state).toBe('clear');
      expect([narrow.state, narrow.sense]).toEqual([even.state, even.sense]);
    }
  });
});
