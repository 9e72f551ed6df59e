/**
 * Compounds whose names carry their descriptors: examples of the kinds P-92 and P-93 treat (IUPAC Recommendations 2013)
 * and well-known natural products and drugs. Structures and names are from memory unless a derivation stands beside them.
 */
import { describe, expect, it } from 'vitest';
import { examine } from '../../core/examine.ts';
import { parseSmiles } from '../../core/formats/smiles.ts';

/** The letters of all units that settle something, in the order of their atoms in the string. */
function letters(smiles: string): string {
  return examine(parseSmiles(smiles).molecule)
    .units.filter(({ unit, descriptor }) => descriptor !== null && unit.labile === null)
    .map(({ unit, descriptor }) => ({ at: Math.min(...unit.atoms), descriptor }))
    .sort((a, b) => a.at - b.at)
    .map(({ descriptor }) => descriptor)
    .join(' ');
}

/** Name with its descriptors, SMILES, the descriptors in the order of the string, source. */
type Row = readonly [string, string, string, string];

const AMINO_ACIDS: readonly Row[] = [
  ['L-alanine, 2S', 'C[C@H](N)C(=O)O', 'S', 'P-103.1.3.1'],
  ['L-cysteine, 2R', 'N[C@@H](CS)C(=O)O', 'R', 'P-103.1.3.1'],
  ['L-selenocysteine, 2R', 'N[C@@H](C[SeH])C(=O)O', 'R', 'P-103.1.3.1'],
  ['L-serine, 2S', 'N[C@@H](CO)C(=O)O', 'S', 'P-103.1.3.1'],
  ['L-threonine, 2S,3R', 'C[C@@H](O)[C@H](N)C(=O)O', 'R S', 'P-103.1.3.1'],
  ['L-allothreonine, 2S,3S', 'C[C@H](O)[C@H](N)C(=O)O', 'S S', 'P-103.1.3.1'],
  ['L-isoleucine, 2S,3S', 'CC[C@H](C)[C@H](N)C(=O)O', 'S S', 'P-103.1.3.1'],
  ['trans-4-hydroxy-L-proline, 2S,4R', 'O[C@H]1CN[C@@H](C1)C(=O)O', 'R S', 'P-103.1.3.1'],
  ['L-cystine, 2R,2′R', 'N[C@@H](CSSC[C@H](N)C(=O)O)C(=O)O', 'R R', 'P-103.1.3.1'],
  ['aspartame, 2S,3S', 'COC(=O)[C@H](Cc1ccccc1)NC(=O)[C@H](CC(=O)O)N', 'S S', 'from memory'],
];

const SUGARS_AND_ACIDS: readonly Row[] = [
  ['D-glyceraldehyde, 2R', 'OC[C@@H](O)C=O', 'R', 'P-102.3.1'],
  ['D-glucose, 2R,3S,4R,5R', 'OC[C@@H](O)[C@@H](O)[C@H](O)[C@@H](O)C=O', 'R R S R', 'P-102.3.4'],
  [
    'β-D-glucopyranose, oxane 6R,2R,3R,4S,5S',
    'OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O',
    'R R R S S',
    'from memory',
  ],
  [
    'α-D-glucopyranose, oxane 6R,2S,3R,4S,5S',
    'OC[C@H]1O[C@H](O)[C@H](O)[C@@H](O)[C@@H]1O',
    'R S R S S',
    'from memory',
  ],
  ['D-ribose, 2R,3R,4R', 'O=C[C@H](O)[C@H](O)[C@H](O)CO', 'R R R', 'P-102.3.4'],
  ['D-xylose, 2R,3S,4R', 'O=C[C@H](O)[C@@H](O)[C@H](O)CO', 'R S R', 'P-102.3.4'],
  ['ribitol, 2R,3s,4S (D-ribose reduced)', 'OC[C@H](O)[C@H](O)[C@H](O)CO', 'S s R', 'P-93.4.1.2'],
  ['xylitol, 2R,3r,4S (D-xylose reduced)', 'OC[C@H](O)[C@@H](O)[C@H](O)CO', 'S r R', 'P-93.4.1.2'],
  ['L-tartaric acid, 2R,3R', 'O[C@H]([C@@H](O)C(=O)O)C(=O)O', 'R R', 'P-65.1.1.2.2'],
  ['meso-tartaric acid, 2R,3S', 'O[C@H]([C@H](O)C(=O)O)C(=O)O', 'R S', 'P-65.1.1.2.2'],
  ['L-lactic acid, 2S', 'C[C@H](O)C(=O)O', 'S', 'from memory'],
  ['L-malic acid, 2S', 'OC(=O)C[C@H](O)C(=O)O', 'S', 'from memory'],
  ['L-ascorbic acid, (1S)-1,2-dihydroxyethyl and 2R', 'OC[C@H](O)[C@H]1OC(=O)C(O)=C1O', 'S R', 'from memory'],
  ['shikimic acid, 5R,4S,3R', 'C1[C@H]([C@@H]([C@@H](C=C1C(=O)O)O)O)O', 'R S R', 'from memory'],
];

const NATURAL_PRODUCTS: readonly Row[] = [
  ['(−)-menthol, 5R,2S,1R', 'C[C@@H]1CC[C@H]([C@@H](C1)O)C(C)C', 'R S R', 'P-93.5.1.3'],
  ['(+)-camphor, 4R,1R', 'CC1(C)[C@@H]2CC[C@@]1(C)C(=O)C2', 'R R', 'P-93.5.2.1'],
  // Isopropenyl > the ring arm to C=C > the other arm > H: with H away they run clockwise.
  ['(+)-limonene, R', 'CC1=CC[C@@H](CC1)C(C)=C', 'R', 'from memory, checked by hand'],
  ['(+)-carvone, S', 'CC1=CC[C@@H](CC1=O)C(C)=C', 'S', 'from memory'],
  [
    'cholesterol, 20R,17R,14S,13R,9S,8S,10R,3S',
    'C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC=C4[C@@]3(CC[C@@H](C4)O)C)C',
    'R R S R S S R S',
    'P-101.2.6',
  ],
  [
    'testosterone, 13S,9S,8R,14S,17S,10R',
    'C[C@]12CC[C@H]3[C@H]([C@@H]1CC[C@@H]2O)CCC4=CC(=O)CC[C@]34C',
    'S S R S S R',
    'P-101.2.6',
  ],
  [
    'morphine, 12bS,4aR,4R,7aR,7S',
    'CN1CC[C@]23[C@@H]4[C@H]1CC5=C2C(=C(C=C5)O)O[C@H]3[C@H](C=C4)O',
    'S R R R S',
    'from memory',
  ],
  [
    'quinine, R,2S,4S,5R',
    'COc1ccc2nccc(c2c1)[C@H]([C@@H]3C[C@@H]4CCN3C[C@@H]4C=C)O',
    'R S S R',
    'from memory',
  ],
  ['(−)-ephedrine, 2S,1R', 'C[C@@H]([C@@H](c1ccccc1)O)NC', 'S R', 'from memory'],
  ['(−)-adrenaline, R', 'CNC[C@@H](c1ccc(O)c(O)c1)O', 'R', 'from memory'],
];

const DRUGS: readonly Row[] = [
  [
    'penicillin G, 2S,5R,6R',
    'CC1([C@@H](N2[C@H](S1)[C@@H](C2=O)NC(=O)Cc3ccccc3)C(=O)O)C',
    'S R R',
    'from memory',
  ],
  ['(S)-ibuprofen', 'C[C@@H](c1ccc(cc1)CC(C)C)C(=O)O', 'S', 'from memory'],
  ['(S)-naproxen', 'C[C@@H](c1ccc2cc(ccc2c1)OC)C(=O)O', 'S', 'from memory'],
  ['levofloxacin, S', 'C[C@H]1COc2c3N1C=C(C(=O)c3cc(c2N4CCN(CC4)C)F)C(=O)O', 'S', 'from memory'],
  ['escitalopram, S', 'CN(C)CCC[C@@]1(c2ccc(cc2CO1)C#N)c3ccc(cc3)F', 'S', 'from memory'],
  ['clopidogrel, S', 'COC(=O)[C@H](c1ccccc1Cl)N2CCc3c(C2)ccs3', 'S', 'from memory'],
  ['sitagliptin, R', 'C1CN2C(=NN=C2C(F)(F)F)CN1C(=O)C[C@@H](Cc3cc(c(cc3F)F)F)N', 'R', 'from memory'],
  ['chloramphenicol, 1R,2R', 'c1cc(ccc1[C@H]([C@@H](CO)NC(=O)C(Cl)Cl)O)[N+](=O)[O-]', 'R R', 'from memory'],
  ['oseltamivir, 3R,5S,4R', 'CCC(CC)O[C@@H]1C=C(C[C@@H]([C@H]1NC(=O)C)N)C(=O)OCC', 'R S R', 'from memory'],
  ['esomeprazole, S', 'Cc1cnc(c(c1OC)C)C[S@](=O)c2nc3ccc(cc3[nH]2)OC', 'S', 'from memory'],
  [
    'sofosbuvir, 2S, SP, 2R,3R,4R,5R',
    'C[C@@H](C(=O)OC(C)C)N[P@](=O)(OC[C@@H]1[C@H]([C@@]([C@@H](O1)N2C=CC(=O)NC2=O)(C)F)O)Oc3ccccc3',
    'S S R R R R',
    'from memory',
  ],
];

const DERIVED: readonly Row[] = [
  // From F, Cl Br I run anticlockwise; seen from the far side I Br Cl run anticlockwise.
  ['(S)-bromochlorofluoroiodomethane', 'F[C@](Cl)(Br)I', 'S', 'P-92.1.4.1, by hand'],
  // O > C > D > H: from C, H O D run anticlockwise, so with H away O C D run clockwise.
  ['(R)-(1-²H)ethanol', 'C[C@H](O)[2H]', 'R', 'P-92.3, by hand'],
  // O > aryl > methyl > lone pair: with the lone pair away O, aryl, methyl run clockwise.
  ['(R)-methyl 4-tolyl sulfoxide', 'Cc1ccc(cc1)[S@](=O)C', 'R', 'P-93.3, by hand'],
  // Cl > F > ¹³C > ¹²C: from CH3, ¹³C F Cl run clockwise; seen from the far side Cl F ¹³C run clockwise.
  ['(R)-2-chloro-2-fluoro(1-¹³C)propane', 'C[C@@]([13CH3])(F)Cl', 'R', 'P-92.3, by hand'],
  // Ring seen from above, both marked groups below it.
  ['cis-4-methylcyclohexan-1-ol, 1s,4s', 'C[C@@H]1CC[C@H](O)CC1', 's s', 'P-93.5.1.2, by hand'],
  ['trans-4-methylcyclohexan-1-ol, 1r,4r', 'C[C@H]1CC[C@H](O)CC1', 'r r', 'P-93.5.1.2, by hand'],
  ['cis-3-methylcyclobutan-1-ol, 1s,3s', 'C[C@@H]1C[C@H](O)C1', 's s', 'P-93.5.1.2, by hand'],
];

const DOUBLE_BONDS: readonly Row[] = [
  ['maleic acid, Z', 'OC(=O)/C=C\\C(=O)O', 'Z', 'P-93.4.2.1.1'],
  ['fumaric acid, E', 'OC(=O)/C=C/C(=O)O', 'E', 'P-93.4.2.1.1'],
  ['oleic acid, 9Z', 'CCCCCCCC/C=C\\CCCCCCCC(=O)O', 'Z', 'from memory'],
  ['elaidic acid, 9E', 'CCCCCCCC/C=C/CCCCCCCC(=O)O', 'E', 'from memory'],
  ['geraniol, 2E', 'CC(=CCC/C(=C/CO)/C)C', 'E', 'from memory'],
  ['nerol, 2Z', 'CC(=CCC/C(=C\\CO)/C)C', 'Z', 'from memory'],
  ['retinal, all E', 'CC1=C(C(CCC1)(C)C)/C=C/C(=C/C=C/C(=C/C=O)/C)/C', 'E E E E', 'from memory'],
  ['tamoxifen, Z', 'CC/C(=C(\\c1ccccc1)/c2ccc(cc2)OCCN(C)C)/c3ccccc3', 'Z', 'from memory'],
  ['(E)-azobenzene', 'c1ccc(cc1)/N=N/c1ccccc1', 'E', 'P-93.4.2.1.1'],
  ['(E)-acetaldehyde oxime', 'C/C=N/O', 'E', 'P-93.4.2.1.1'],
  // Br > Cl at one end, Cl > F at the other: Br and F are on one side, so Br and Cl on opposite ones.
  ['(E)-1-bromo-1,2-dichloro-2-fluoroethene', 'Br/C(Cl)=C(Cl)\\F', 'E', 'P-93.4.2.1.1, by hand'],
];

describe.each([
  ['amino acids', AMINO_ACIDS],
  ['sugars and hydroxy acids', SUGARS_AND_ACIDS],
  ['natural products', NATURAL_PRODUCTS],
  ['drugs', DRUGS],
  ['derived by hand', DERIVED],
  ['double bonds', DOUBLE_BONDS],
])('%s', (_, rows) => {
  it.each(rows)('%s', (_name, smiles, expected) => {
    expect(letters(smiles)).toBe(expected);
  });
});
