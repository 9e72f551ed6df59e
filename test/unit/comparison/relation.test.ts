import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compared, moleculeOf, renumbered } from './models.ts';

/** Found, intended, relation, number of inverted units reported. Relations by the definitions of design.md. */
const CASES: readonly (readonly [string, string, string, string, number])[] = [
  ['one centre, same', 'C[C@H](N)C(=O)O', 'N[C@@H](C)C(=O)O', 'same', 0],
  ['one centre, inverted: an enantiomer', 'C[C@@H](N)C(=O)O', 'N[C@@H](C)C(=O)O', 'enantiomer', 1],
  ['protonated otherwise', 'C[C@H]([NH3+])C(=O)[O-]', 'N[C@@H](C)C(=O)O', 'same', 0],
  ['another atom', 'C[C@H](N)C(=O)S', 'N[C@@H](C)C(=O)O', 'other compound', 0],
  ['a methyl more', 'CC[C@H](N)C(=O)O', 'N[C@@H](C)C(=O)O', 'other compound', 0],
  ['oxidised', 'O=C1C=CC(=O)C=C1', 'Oc1ccc(O)cc1', 'other compound', 0],
  ['threonine against allothreonine', 'C[C@@H](O)[C@H](N)C(=O)O', 'C[C@H](O)[C@H](N)C(=O)O', 'epimer', 1],
  ['both centres inverted', 'C[C@@H](O)[C@H](N)C(=O)O', 'C[C@H](O)[C@@H](N)C(=O)O', 'enantiomer', 2],
  [
    'two of three inverted',
    'C[C@H](F)[C@H](O)[C@@H](N)C(=O)O',
    'C[C@@H](F)[C@@H](O)[C@@H](N)C(=O)O',
    'diastereomer',
    2,
  ],
  ['double bond alone', 'C/C=C/[C@H](O)F', 'C/C=C\\[C@H](O)F', 'diastereomer', 1],
  ['meso against itself', 'OC(=O)[C@H](O)[C@H](O)C(=O)O', 'OC(=O)[C@@H](O)[C@@H](O)C(=O)O', 'same', 0],
  ['meso against chiral', 'OC(=O)[C@H](O)[C@@H](O)C(=O)O', 'OC(=O)[C@H](O)[C@H](O)C(=O)O', 'epimer', 1],
  [
    'the two chiral tartaric acids',
    'OC(=O)[C@H](O)[C@@H](O)C(=O)O',
    'OC(=O)[C@@H](O)[C@H](O)C(=O)O',
    'enantiomer',
    2,
  ],
  [
    'a meso part with one more centre',
    'C[C@@H]1C[C@H](C)CN(C1)C(=O)[C@H](C)CC',
    'C[C@@H]1C[C@H](C)CN(C1)C(=O)[C@@H](C)CC',
    'enantiomer',
    1,
  ],
  [
    'pseudoasymmetric centre inverted',
    'C[C@H](O)[C@H](O)[C@@H](C)O',
    'C[C@H](O)[C@@H](O)[C@@H](C)O',
    'epimer',
    1,
  ],
  ['pseudoasymmetric against chiral', 'C[C@H](O)C(O)[C@H](C)O', 'C[C@H](O)[C@@H](O)[C@@H](C)O', 'epimer', 1],
  ['C2-symmetric diamine', 'N[C@@H]1CCCC[C@H]1N', 'N[C@H]1CCCC[C@@H]1N', 'enantiomer', 2],
  ['C2-symmetric against meso', 'N[C@@H]1CCCC[C@@H]1N', 'N[C@H]1CCCC[C@@H]1N', 'epimer', 1],
  ['cis against trans cyclohexane', 'C[C@H]1CC[C@@H](O)CC1', 'C[C@H]1CC[C@H](O)CC1', 'diastereomer', 1],
  [
    'cyclic tripeptide with one residue inverted',
    'C[C@H]1NC(=O)[C@H](C)NC(=O)[C@H](C)NC1=O',
    'C[C@@H]1NC(=O)[C@H](C)NC(=O)[C@H](C)NC1=O',
    'epimer',
    1,
  ],
  [
    'mirrored cyclic tripeptide',
    'C[C@H]1NC(=O)[C@@H](C)NC(=O)[C@@H](C)NC1=O',
    'C[C@@H]1NC(=O)[C@H](C)NC(=O)[C@H](C)NC1=O',
    'enantiomer',
    3,
  ],
  [
    'racemic pair of groups: all inverted agrees',
    'C[C@@H](O)[C@H](N)CC |&1:1,3|',
    'C[C@H](O)[C@@H](N)CC |&1:1,3|',
    'same',
    0,
  ],
  ['"or" group: all inverted agrees', 'C[C@@H](O)[C@H](N)CC', 'C[C@H](O)[C@@H](N)CC |o1:1,3|', 'same', 0],
  [
    '"and" group: mixed is inverted as a whole',
    'C[C@@H](O)[C@@H](N)CC',
    'C[C@H](O)[C@@H](N)CC |&1:1,3|',
    'epimer',
    2,
  ],
  ['undefined centre stays open', 'C[C@@H](O)[C@H](N)CC', 'CC(O)[C@H](N)CC', 'same', 0],
  ['salt left out', 'C[C@H](N)c1ccccc1', 'C[C@H](N)c1ccccc1.Cl', 'same', 0],
  ['salt and water added', 'C[C@H]([NH3+])c1ccccc1.[Cl-].O', 'C[C@H](N)c1ccccc1', 'same', 0],
  ['two molecules, one inverted', 'C[C@H](N)C(=O)O.C[C@@H](N)C(=O)O', 'C[C@H](N)C(=O)O', 'mixed', 1],
  ['two molecules, both as intended', 'C[C@H](N)C(=O)O.OC(=O)[C@@H](N)C', 'C[C@H](N)C(=O)O', 'same', 0],
  [
    'a racemate written out, in the other order',
    'C[C@@H](N)C(=O)O.C[C@H](N)C(=O)O',
    'C[C@H](N)C(=O)O.C[C@@H](N)C(=O)O',
    'same',
    0,
  ],
  [
    'the salt of an achiral acid, inverted',
    'C[C@@H](N)c1ccccc1.OC(=O)/C=C/C(=O)O',
    'C[C@H](N)c1ccccc1.OC(=O)/C=C/C(=O)O',
    'enantiomer',
    1,
  ],
  [
    'the salt of a chiral acid, its base inverted',
    'C[C@@H](N)c1ccccc1.OC(=O)[C@H](O)[C@@H](O)C(=O)O',
    'C[C@H](N)c1ccccc1.OC(=O)[C@H](O)[C@@H](O)C(=O)O',
    'mixed',
    1,
  ],
  ['another tautomer', 'C[C@H](N)Cc1c[nH]cn1', 'C[C@H](N)Cc1cnc[nH]1', 'same', 0],
  [
    'chain reversed is another sugar: glucose against gulose',
    'OC[C@@H](O)[C@@H](O)[C@H](O)[C@@H](O)C=O',
    'OC[C@H](O)[C@@H](O)[C@H](O)[C@H](O)C=O',
    'diastereomer',
    2,
  ],
];

describe('relation of a found molecule to the intended one', () => {
  it.each(CASES)('%s', (_, found, intended, relation, inverted) => {
    const result = compared(found, intended);
    expect(result.relation).toBe(relation);
    expect(result.units.filter(({ verdict }) => verdict === 'inverted')).toHaveLength(inverted);
  });

  it('does not depend on the numbering of the atoms', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...CASES),
        fc.infiniteStream(fc.nat()),
        ([, found, intended, relation, inverted], stream) => {
          const model = moleculeOf(found);
          const order = Array.from({ length: model.atomCount }, (_, i) => i);
          for (let i = order.length - 1; i > 0; i--) {
            const j = stream.next().value % (i + 1);
            [order[i], order[j]] = [order[j]!, order[i]!];
          }
          const result = compared(renumbered(model, order), intended);
          expect(result.relation).toBe(relation);
          expect(result.units.filter(({ verdict }) => verdict === 'inverted')).toHaveLength(inverted);
        },
      ),
      { numRuns: 300 },
    );
  });

  it('names every choice of inverted centres that symmetry leaves', () => {
    // Either centre of the chiral diol may be called the inverted one of the meso compound.
    const result = compared('C[C@@H](O)[C@@H](C)O', 'C[C@H](O)[C@@H](C)O');
    expect(result.relation).toBe('epimer');
    expect(result.equivalentMappings).toBe(2);
    expect(new Set(result.choices.map(choice => choice.flat().join(',')))).toEqual(new Set(['1', '3']));
    // One residue of the other hand among three: three mappings, but the same residue under each.
    const peptide = compared(
      'C[C@H]1NC(=O)[C@H](C)NC(=O)[C@H](C)NC1=O',
      'C[C@@H]1NC(=O)[C@H](C)NC(=O)[C@H](C)NC1=O',
    );
    expect(peptide.equivalentMappings).toBe(3);
    expect(peptide.choices).toEqual([]);
    expect(peptide.units.find(({ verdict }) => verdict === 'inverted')?.modelAtoms).toEqual([1]);
  });

  it('tells the nine inositols apart, seven of them meso and two mirror images', () => {
    // Nine stereoisomers of 1,2,3,4,5,6-cyclohexanehexol, one pair of enantiomers (chiro): common practice, no source.
    const all = Array.from({ length: 64 }, (_, bits) => {
      const at = (k: number): string => ((bits >> k) & 1 ? '@' : '@@');
      return `O[C${at(0)}H]1[C${at(1)}H](O)[C${at(2)}H](O)[C${at(3)}H](O)[C${at(4)}H](O)[C${at(5)}H]1O`;
    });
    const kinds: string[] = [];
    for (const each of all)
      if (!kinds.some(kind => compared(each, kind).relation === 'same')) kinds.push(each);
    expect(kinds).toHaveLength(9);
    const mirrored = kinds.filter(a => kinds.some(b => compared(a, b).relation === 'enantiomer'));
    expect(mirrored).toHaveLength(2);
  });

  it('is quick about symmetry beyond counting', () => {
    // Four arms that branch three times, 32 chiral ends: more than 10 to the 23 automorphisms.
    const dendrimer = (inverted: ReadonlySet<number>): string => {
      let ends = 0;
      const end = (): string => `[C${inverted.has(ends++) ? '@@' : '@'}H](F)Cl`;
      const branch = (depth: number): string => {
        const arm = depth === 0 ? end : (): string => branch(depth - 1);
        return `c${7 + depth}cc(${arm()})cc(${arm()})c${7 + depth}`;
      };
      return `C(${branch(2)})(${branch(2)})(${branch(2)})${branch(2)}`;
    };
    const intended = dendrimer(new Set());
    expect(compared(dendrimer(new Set()), intended).relation).toBe('same');
    expect(compared(dendrimer(new Set([3])), intended).relation).toBe('epimer');
    const some = compared(dendrimer(new Set([0, 5, 9, 13, 20])), intended);
    expect(some.relation).toBe('diastereomer');
    expect(some.units.filter(({ verdict }) => verdict === 'inverted')).toHaveLength(5);
    const all = new Set(Array.from({ length: 32 }, (_, k) => k));
    expect(compared(dendrimer(all), intended).relation).toBe('enantiomer');
  });

  it('names the first difference of another compound', () => {
    expect(compared('C[C@H](N)C(=O)S', 'C[C@H](N)C(=O)O').difference).toMatch(/1 O, the intention 2/);
    expect(compared('CC(C)CO', 'CCCCO').difference).toMatch(/no counterpart/);
    expect(compared('C=CCCO', 'CCCCO').difference).toMatch(/π/);
  });

  it('keeps a changed letter apart from a changed arrangement', () => {
    // The label sits on the other arm: the ranking differs, the arrangement in space need not.
    const result = compared('F[C@](Cl)([13CH3])C', 'F[C@](Cl)(C)[13CH3]');
    expect(result.units.map(({ verdict }) => verdict)).toEqual(['inverted']);
  });
});
