/** The tail of CXSMILES, and lists of SMILES with names. */
import { describe, expect, it } from 'vitest';
import { DEFAULT_LIMITS, type Entry } from '../../../core/formats/format.ts';
import { parseSmiles, smilesFormat } from '../../../core/formats/smiles.ts';
import { bytesOf, chunksOf } from './streams.ts';

async function entries(text: string, sizes: readonly number[] = []): Promise<Entry[]> {
  const list: Entry[] = [];
  for await (const raw of smilesFormat.split(chunksOf(bytesOf(text), sizes), DEFAULT_LIMITS)) {
    list.push(...smilesFormat.parse(raw, DEFAULT_LIMITS));
  }
  return list;
}

describe('the tail of CXSMILES', () => {
  it('groups of centres: absolute, and, or', () => {
    const { molecule, warnings } = parseSmiles('C[C@H](F)[C@H](Cl)[C@H](Br)[C@H](I)N |a:1,&1:3,o2:5,7|');
    expect(molecule.stereoGroups).toEqual([
      { kind: 'absolute', number: 0, atoms: [1] },
      { kind: 'and', number: 1, atoms: [3] },
      { kind: 'or', number: 2, atoms: [5, 7] },
    ]);
    expect(warnings).toEqual([]);
  });

  it('labels, radicals, wavy bonds; coordinates are passed over', () => {
    const { molecule } = parseSmiles('C[C@H](F)Cl |(0,0,;1,0,;2,1,;2,-1,),$first;C&#42;2;;$,^1:0,w:1.0|');
    expect(molecule.labels?.slice(0, 2)).toEqual(['first', 'C*2']);
    expect(molecule.radicals[0]).toBe(1);
    expect(molecule.stated).toEqual([]);
    expect(molecule.dimension).toBe(0);
    const triplet = parseSmiles('[CH2] |^3:0|').molecule;
    expect(triplet.radicals[0]).toBe(2);
  });

  it('an atom that is not there is a warning with its number', () => {
    const { molecule, warnings } = parseSmiles('C[C@H](F)Cl |&1:9,1|');
    expect(molecule.stereoGroups).toEqual([{ kind: 'and', number: 1, atoms: [1] }]);
    expect(warnings.join()).toMatch(/no atom 9/u);
  });
});

describe('a list of SMILES', () => {
  it('a SMILES, white space, the name up to the next tab (design.md, The command line)', async () => {
    const list = await entries('CCO ethyl alcohol\tignored\nC\tmethane\nCC\n[NH4+]   ammonium  \n');
    expect(list.map(({ name }) => name)).toEqual(['ethyl alcohol', 'methane', '', 'ammonium']);
    expect(list.map(({ entry, line }) => [entry, line])).toEqual([
      [1, 1],
      [2, 2],
      [3, 3],
      [4, 4],
    ]);
  });

  it('the tail stands between the SMILES and the name', async () => {
    const [one, two] = await entries('C[C@H](F)Cl |&1:1| racemate\tx\nC[C@H](F)Cl |o1:1|\tone or the other');
    expect(one!.name).toBe('racemate');
    expect(one!.molecule?.stereoGroups).toEqual([{ kind: 'and', number: 1, atoms: [1] }]);
    expect(two!.name).toBe('one or the other');
    expect(two!.molecule?.stereoGroups[0]?.kind).toBe('or');
  });

  it('blank lines, comments and a header line are no entries; lines count from the file', async () => {
    const list = await entries('smiles name\n\n# note\nCCO a\n   \nCC(C b\nC c\n');
    expect(list.map(({ name, line, error }) => [name, line, error?.code ?? null])).toEqual([
      ['a', 4, null],
      ['b', 6, 'bad-smiles'],
      ['c', 7, null],
    ]);
    expect(list[1]!.error?.line).toBe(6);
    expect(list[1]!.error?.message).toMatch(/column 3.*not closed/u);
  });

  it('any line ending, cut anywhere', async () => {
    const text = 'CCO a b\rC c\r\nN d\n\nO e';
    const whole = (await entries(text)).map(({ name, line }) => `${name} ${line}`);
    expect(whole).toEqual(['a b 1', 'c 2', 'd 3', 'e 5']);
    for (let cut = 0; cut <= text.length; cut++) {
      expect((await entries(text, [cut])).map(({ name, line }) => `${name} ${line}`)).toEqual(whole);
    }
  });
});
