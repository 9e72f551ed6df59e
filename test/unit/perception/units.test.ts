/**
 * Which stereogenic units are found, and which are not: each class of centre and bond with an example that has one and
 * the classic false positives that have none. Letters are tested elsewhere.
 */
import { describe, expect, it } from 'vitest';
import { examine } from '../../../core/examine.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';

/** Units as "centre 2", "double-bond 2-3", 1-based; labile ones with "labile" after them. */
function units(text: string): string[] {
  return examine(parseSmiles(text).molecule).units.map(
    ({ unit }) =>
      `${unit.kind} ${unit.atoms.map(atom => atom + 1).join('-')}${unit.labile === null ? '' : ' labile'}`,
  );
}

describe('centres are found at', () => {
  it.each([
    ['carbon', 'CC(F)Cl', ['centre 2']],
    ['carbon with deuterium for a hydrogen', 'CC(O)[2H]', ['centre 2']],
    ['carbon with two isotopes of carbon', 'CC([13CH3])(O)F', ['centre 2']],
    ['silicon', 'C[SiH](F)Cl', ['centre 2']],
    ['germanium', 'C[Ge](F)(Cl)Br', ['centre 2']],
    ['tin, a metal in name, of four bonds', 'C[Sn](F)(Cl)Br', ['centre 2']],
    ['four-coordinate boron', 'F[B-](C)(Cl)Br', ['centre 2']],
    ['quaternary nitrogen', 'C[N+](CC)(CCC)CCCC', ['centre 2']],
    ['amine oxide', 'C[N+]([O-])(CC)CCC', ['centre 2']],
    ['amine oxide drawn with a double bond', 'CN(=O)(CC)CCC', ['centre 2']],
    ['phosphine', 'CP(CC)CCC', ['centre 2']],
    ['phosphonium', 'C[P+](CC)(CCC)C(C)C', ['centre 2']],
    ['phosphine oxide', 'CP(=O)(CC)CCC', ['centre 2']],
    ['phosphine sulfide', 'CP(=S)(CC)CCC', ['centre 2']],
    ['phosphonic amidate', 'COP(=O)(C)N', ['centre 3']],
    ['phosphoric ester amide', 'COP(=O)(N)OCC', ['centre 3']],
    ['phosphorothioate, charge on oxygen', 'COP(=S)([O-])OCC', ['centre 3']],
    ['phosphorothioate, charge on sulfur', 'COP(=O)([S-])OCC', ['centre 3']],
    ['secondary phosphine oxide', 'CP(=O)OC', ['centre 2']],
    ['arsine', 'C[As](CC)CCC', ['centre 2']],
    ['stibine', 'C[Sb](CC)CCC', ['centre 2']],
    ['sulfoxide', 'CS(=O)CC', ['centre 2']],
    ['sulfoxide written with charges', 'C[S+]([O-])CC', ['centre 2']],
    ['selenoxide', 'C[Se](=O)CC', ['centre 2']],
    ['sulfonium', 'C[S+](CC)CCC', ['centre 2']],
    ['selenonium', 'C[Se+](CC)CCC', ['centre 2']],
    ['sulfinate', 'COS(=O)C', ['centre 3']],
    ['sulfinamide', 'CS(=O)N', ['centre 2']],
    ['sulfilimine', 'CS(CC)=NC', ['centre 2']],
    ['sulfoximine', 'CS(=O)(=N)CC', ['centre 2']],
    ['sulfonimidamide', 'CNS(=O)(=N)C', ['centre 3']],
    ['thiosulfinate', 'CS(=O)SC', ['centre 2']],
    ['unsymmetrical sulfite', 'COS(=O)OCC', ['centre 3']],
    ['nitrogen of an N-chloroaziridine', 'ClN1CC1(C)C', ['centre 2']],
    ['nitrogen of an oxaziridine', 'CC1(CC)ON1C', ['centre 2', 'centre 6']],
    // Tröger's base: both nitrogens are bridgeheads of a bicycle.
    ['bridgehead nitrogen', 'Cc1ccc2N3CN(Cc2c1)c4ccc(C)cc4C3', ['centre 6', 'centre 8']],
  ] as const)('%s', (_, text, expected) => {
    expect(units(text)).toEqual(expected);
  });
});

describe('nothing is found at', () => {
  it.each([
    ['methylcyclopropane', 'CC1CC1'],
    ['methylcyclohexane', 'CC1CCCCC1'],
    ['a gem-dimethyl group', 'CC(C)(O)CC'],
    ['1,1-dimethylcyclohexane', 'CC1(C)CCCCC1'],
    ['phosphoric acid monoester', 'COP(=O)(O)O'],
    ['phosphate diester anion', 'COP(=O)([O-])OCC'],
    ['phosphate diester acid', 'COP(=O)(O)OCC'],
    ['phosphonic acid monoester', 'CCOP(=O)(O)C'],
    ['sulfonate', 'CS(=O)(=O)[O-]'],
    ['sulfone', 'CS(=O)(=O)CC'],
    ['sulfonamide', 'CS(=O)(=O)NC'],
    ['sulfinic acid: oxygen and hydroxyl exchange', 'CS(=O)O'],
    ['sulfinate anion', 'CCS(=O)[O-]'],
    ['dimethyl sulfoxide', 'CS(=O)C'],
    ['symmetrical sulfite', 'COS(=O)OC'],
    ['sulfur diimide', 'CS(=N)(=N)C'],
    ['carboxylate', 'CC(=O)[O-]'],
    ['guanidinium', 'CNC(=[NH2+])N'],
    ['amidinium', 'CC(=[NH2+])NC'],
    ['nitro group', 'CC[N+](=O)[O-]'],
    ['amide nitrogen', 'CC(=O)N(C)CC'],
    ['aniline nitrogen', 'CN(CC)c1ccccc1'],
    ['secondary amine', 'CNCC'],
    ['1,4-diazabicyclo[2.2.2]octane', 'C1CN2CCN1CC2'],
    ['quinuclidine', 'C1CN2CCC1CC2'],
    ['norbornane', 'C1CC2CCC1C2'],
    ['adamantane', 'C1C2CC3CC1CC(C2)C3'],
    ['bicyclo[1.1.1]pentane', 'C1C2CC1C2'],
    ['bicyclo[2.2.2]octane', 'C1CC2CCC1CC2'],
    ['iron: metals are not judged', 'C[Fe](F)(Cl)Br'],
    ['spiro[3.3]heptane', 'C1CC2(C1)CCC2'],
    ['sulfur hexafluoride and its like', 'CS(F)(F)(F)(F)F'],
  ])('%s', (_, text) => {
    expect(units(text)).toEqual([]);
  });
});

describe('nitrogen that inverts is found and marked labile', () => {
  it.each([
    ['tertiary amine', 'CN(CC)C(C)C', ['centre 2 labile']],
    ['N-alkyl aziridine', 'CN1CC1C', ['centre 2 labile', 'centre 4']],
    ['nitrogen of ring fusion', 'C1CCC2CCCN2C1', ['centre 4', 'centre 8 labile']],
    ['ammonium with a hydrogen', 'C[NH+](CC)CCC', ['centre 2 labile']],
  ] as const)('%s', (_, text, expected) => {
    expect(units(text)).toEqual(expected);
  });
});

describe('rings whose arms only the arrangement tells apart', () => {
  it.each([
    ['1,4-dimethylcyclohexane', 'CC1CCC(C)CC1', ['centre 2', 'centre 5']],
    ['1,3-dimethylcyclobutane', 'CC1CC(C)C1', ['centre 2', 'centre 4']],
    ['1,3-dimethylcyclopentane', 'CC1CCC(C)C1', ['centre 2', 'centre 5']],
    ['decalin', 'C1CCC2CCCCC2C1', ['centre 4', 'centre 9']],
    ['spiro[2.2]pentane with two marks', 'FC1CC12CC2F', ['centre 2', 'centre 4', 'centre 6']],
    ['meso-tartaric acid or its kin', 'OC(C(=O)O)C(O)C(=O)O', ['centre 2', 'centre 6']],
    // The third centre is stereogenic when its two arms differ in configuration (pseudoasymmetric).
    ['ribaric acid', 'OC(=O)[C@H](O)[C@H](O)[C@H](O)C(=O)O', ['centre 4', 'centre 6', 'centre 8']],
    [
      'arabinaric acid: its arms are alike',
      'OC(=O)[C@H](O)[C@H](O)[C@@H](O)C(=O)O',
      ['centre 4', 'centre 8'],
    ],
    ['1-ethylidene-4-methylcyclohexane', 'CC=C1CCC(C)CC1', ['centre 6', 'double-bond 2-3']],
  ] as const)('%s', (_, text, expected) => {
    expect(units(text)).toEqual(expected);
  });

  it('a change of cis for trans is seen in both letters', () => {
    const letters = (text: string): string =>
      examine(parseSmiles(text).molecule)
        .units.map(u => u.descriptor)
        .join('');
    const cyclohexane = new Set(['C[C@H]1CC[C@H](O)CC1', 'C[C@H]1CC[C@@H](O)CC1'].map(letters));
    expect([...cyclohexane].sort()).toEqual(['rr', 'ss']);
    const cyclobutane = new Set(['C[C@H]1C[C@H](O)C1', 'C[C@H]1C[C@@H](O)C1'].map(letters));
    expect([...cyclobutane].sort()).toEqual(['rr', 'ss']);
    // 1,3-Disubstituted cyclopentane: both hands of cis, and both of trans.
    expect(letters('C[C@H]1CC[C@H](O)C1')).not.toBe(letters('C[C@H]1CC[C@@H](O)C1'));
  });
});

describe('double bonds', () => {
  it.each([
    ['alkene', 'CC=CC', ['double-bond 2-3']],
    ['deuterated ethene', '[2H]C=C[2H]', ['double-bond 2-3']],
    ['terminal alkene', 'C=CC', []],
    ['isobutene', 'CC(C)=CC', []],
    ['oxime', 'CC(CC)=NO', ['double-bond 2-5']],
    ['symmetrical oxime', 'CC(C)=NO', []],
    ['aldoxime of formaldehyde', 'C=NO', []],
    ['imine with hydrogen', 'CC(=N)CC', ['double-bond 2-3']],
    ['hydrazone', 'CC=NN', ['double-bond 2-3']],
    ['azo compound', 'CN=NC', ['double-bond 2-3']],
    ['iminium', 'CC=[N+](C)CC', ['double-bond 2-3']],
    ['nitrone', 'CC=[N+](C)[O-]', ['double-bond 2-3']],
    ['diazo compound', 'CC=[N+]=[N-]', []],
    ['isocyanate', 'CN=C=O', []],
    ['carbonyl, thiocarbonyl', 'CC(=O)CC(=S)C', []],
    ['amidine without hydrogen on its doubly bonded nitrogen', 'CC(N(C)C)=NC', ['double-bond 2-6']],
    ['amidine that exchanges its hydrogen', 'CC(=N)NC', ['double-bond 2-3 labile']],
    ['ring of six', 'C1CCCC=C1', []],
    ['ring of seven', 'C1CCCCC=C1', []],
    ['ring of eight', 'C1CCCCCC=C1', ['double-bond 7-8']],
    ['ring of eleven', 'C1CCCCCCCC=CC1', ['double-bond 9-10']],
    ['1,5-cyclooctadiene', 'C1CC=CCCC=C1', ['double-bond 3-4', 'double-bond 7-8']],
    ['cyclooctatetraene: no double bond of fixed place', 'C1=CC=CC=CC=C1', []],
    ['benzene ring', 'Cc1ccccc1', []],
    ['exocyclic to a symmetrical ring', 'CC=C1CCCCC1', []],
    ['ylide drawn with P=C', 'CP(C)(C)=CC', []],
    ['allene', 'CC=C=CC', ['cumulene 2-4']],
    ['terminal allene', 'CC=C=C', []],
    ['butatriene', 'CC=C=C=CC', ['cumulene 2-5']],
    ['carbodiimide', 'CN=C=NC', ['cumulene 2-4 labile']],
    ['ketenimine', 'CC(F)=C=NC', ['cumulene 2-5 labile']],
  ] as const)('%s', (_, text, expected) => {
    expect(units(text)).toEqual(expected);
  });
});

describe('axes', () => {
  it.each([
    ['2,2′-binaphthol', 'Oc1ccc2ccccc2c1-c1c(O)ccc2ccccc12', ['axis 11-12']],
    ['biphenyl with four groups, two alike at neither end', 'Cc1cccc(Cl)c1-c1c(C)cccc1F', ['axis 8-9']],
    ['four groups, alike at one end', 'Cc1cccc(C)c1-c1c(C)cccc1F', []],
    ['biphenyl', 'c1ccccc1-c1ccccc1', []],
    ['two fluorines do not hinder and are not mentioned', 'Fc1ccccc1-c1ccccc1F', []],
    ['two methyl groups turn past each other', 'Cc1ccccc1-c1ccccc1C', ['axis 7-8 labile']],
    ['anilide with two ortho groups', 'CC(=O)N(CC)c1c(C)cccc1Cl', ['axis 4-7']],
    ['arene with one ortho group on a symmetrical imide', 'Cc1ccccc1N1C(=O)CCC1=O', []],
    ['toluene has no axis', 'Cc1ccccc1', []],
    ['fluorene: the ring holds it', 'Cc1cccc2c1-c1c(C)cccc1C2', []],
  ] as const)('%s', (_, text, expected) => {
    expect(units(text)).toEqual(expected);
  });
});
