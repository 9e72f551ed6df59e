/**
 * Descriptors from the ideal coordinates of chemical components against the configuration flags of the wwPDB Chemical
 * Component Dictionary (`_chem_comp_atom.pdbx_stereo_config`, `_chem_comp_bond.pdbx_stereo_config`), flag by flag; and
 * bonds, orders and hydrogens found from the coordinates against those the dictionary lists.
 */
import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { examine } from '../../core/examine.ts';
import { cifFormat } from '../../core/formats/cif.ts';
import { DEFAULT_LIMITS, type Entry } from '../../core/formats/format.ts';
import { bondOrders } from '../../core/perception/bond-orders.ts';
import { bondsFromCoordinates } from '../../core/perception/bonds-from-coordinates.ts';
import { checkResidues } from '../../core/biopolymer/checks.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const folder = sharedData('ccd');

/**
 * Where the flags and our letters differ, and why. `ours` is what we must give; `flag` what the dictionary has.
 */
const ADJUDICATED: Readonly<
  Record<string, { readonly flag: string | null; readonly ours: string | null; readonly reason: string }>
> = {
  '03R C31-N33': {
    flag: 'Z',
    ours: null,
    reason:
      'an amidine C=N–H: hydrogen and double bond exchange between its two nitrogens, so the configuration settles nothing; the unit is found and marked labile (design, Conventions of measurement; common practice)',
  },
  '11R CAK': {
    flag: 'S',
    ours: 'R',
    reason:
      'V = −2.37 Å³ in the ideal coordinates with CAB (N,C,C) before CAL (C,C,C) before CAJ (C,C,H), Rule 1a, P-92.2.1.1: R. The model coordinates are flat at all five centres (|V| ≤ 0.01 Å³) and can have given no flag; the flag fits neither set',
  },
  '11R CCG': {
    flag: 'S',
    ours: 'R',
    reason:
      'V = −2.43 Å³ in the ideal coordinates with NCL before CCF (N,C,H) before CCH (C,C,H), Rule 1a, P-92.2.1.1: R; model coordinates as for CAK',
  },
  '6KK C53': {
    flag: null,
    ours: 'R',
    reason:
      'the 3, 5 and 7 positions of a 1-adamantyl group on a chiral chain: its two ways round the cage differ by Rule 4b, P-92.5.2. The component’s own systematic name has the same letters, (3R,5R,7R); the flags leave them out',
  },
  '6KK C55': { flag: null, ours: 'R', reason: 'as C53' },
  '6KK C57': { flag: null, ours: 'R', reason: 'as C53' },
  'ATP PA': {
    flag: 'R',
    ours: null,
    reason:
      'the two terminal oxygens of the phosphate share proton and double bond: no centre (common practice, no source)',
  },
  'ATP PB': { flag: 'R', ours: null, reason: 'as PA' },
  'NAD PA': { flag: 'S', ours: null, reason: 'as PA of ATP' },
  'CDL CA4': {
    flag: 'R',
    ours: 'S',
    reason:
      'V = +2.62 Å³ in the ideal coordinates, S, with OA6 before CA3 before CA6 (Rule 1a, P-92.2.1.1); the model coordinates give R as flagged: the dictionary’s two sets of coordinates have opposite hands here, which our alternatives report',
  },
  'CDL C1': {
    flag: null,
    ours: 's',
    reason:
      'follows from CA4: with CA4 S and CB4 R in the ideal coordinates C1 is pseudoasymmetric (Rule 5, P-92.6); with both R, as in the model coordinates, it is no centre, as flagged',
  },
};

function componentsOf(path: string): { id: string; entry: Entry }[] {
  return readdirSync(path)
    .filter(name => name.endsWith('.cif'))
    .map(name => {
      const [entry] = cifFormat.parse(
        { entry: 1, line: 1, bytes: readFileSync(`${path}/${name}`) },
        DEFAULT_LIMITS,
      );
      if (!entry) throw new Error(name);
      return { id: name.slice(0, -4), entry };
    });
}

function flagsOf(entry: Entry): Map<string, string> {
  const text = entry.data.find(({ name }) => name === 'configuration flags')?.value ?? '';
  return new Map(
    text
      .split('\n')
      .filter(line => line !== '')
      .map(line => {
        const [atoms = '', flag = ''] = line.split(' ');
        return [atoms.split('-').sort().join('-'), flag];
      }),
  );
}

function lettersOf(molecule: Molecule): Map<string, string | null> {
  return new Map(
    examine(molecule).units.map(({ unit, descriptor }) => [
      unit.atoms
        .map(atom => molecule.labels?.[atom] ?? '')
        .sort()
        .join('-'),
      descriptor,
    ]),
  );
}

describe.skipIf(folder === null)(
  `chemical components (${folder === null ? SHARED_DATA_ABSENT : 'wwPDB'})`,
  () => {
    const components = folder === null ? [] : componentsOf(folder);

    it('are all read', () => {
      expect(components.length).toBeGreaterThan(40);
      for (const { id, entry } of components) expect(entry.error, id).toBeNull();
    });

    it('carry our letters on every flag, or the difference is adjudicated', () => {
      const differences: Record<string, { flag: string | null; ours: string | null }> = {};
      let agreeing = 0;
      for (const { id, entry } of components) {
        const flags = flagsOf(entry);
        const ours = lettersOf(entry.molecule!);
        for (const key of new Set([...flags.keys(), ...ours.keys()])) {
          const flag = flags.get(key) ?? null;
          const letter = ours.get(key) ?? null;
          if (flag === letter) agreeing++;
          else differences[`${id} ${key}`] = { flag, ours: letter };
        }
      }
      const expected = Object.fromEntries(
        Object.entries(ADJUDICATED).map(([key, { flag, ours }]) => [key, { flag, ours }]),
      );
      expect(differences).toEqual(expected);
      expect(agreeing).toBeGreaterThanOrEqual(76);
    });

    it('of CDL differ between ideal and model coordinates exactly where adjudicated', () => {
      const cdl = components.find(({ id }) => id === 'CDL')!.entry;
      const model = lettersOf(cdl.alternatives![0]!.molecule);
      expect(model.get('CA4')).toBe('R');
      expect(model.get('C1') ?? null).toBeNull();
    });

    it('have the hands their residue names promise', () => {
      for (const { id, entry } of components) {
        const findings = checkResidues(entry.molecule!).findings.filter(({ kind }) => kind !== 'dextro');
        expect(findings, id).toEqual([]);
      }
    });

    it('have their bonds, orders and hydrogens found from the coordinates alone', () => {
      // Not compared: metal clusters and porphyrins, whose coordination and charges are conventions; XD1 and XD2 of ASX are no
      // atoms; the ends of SO4, whose charge no hydrogen tells; carbon monoxide.
      const left = new Set([
        '0KA',
        '0OD',
        '11R',
        'G2O',
        'HDD',
        'HEB',
        'HEC',
        'HEM',
        'HME',
        'SF4',
        'VIA',
        'ASX',
        'SO4',
        'CMO',
      ]);
      const differing: string[] = [];
      let compared = 0;
      for (const { id, entry } of components) {
        const molecule = entry.molecule!;
        if (left.has(id) || molecule.dimension !== 3) continue;
        compared++;
        const { elements, bondAtoms } = molecule;
        const coordinates = molecule.coordinates!;
        const { pairs } = bondsFromCoordinates({ elements, coordinates });
        const key = (list: Uint32Array): string[] =>
          Array.from({ length: list.length / 2 }, (_, b) =>
            [list[2 * b]!, list[2 * b + 1]!].sort((x, y) => x - y).join('-'),
          ).sort();
        const orders = bondOrders({ elements, coordinates, pairs });
        const bonding = key(pairs).join() === key(bondAtoms).join();
        const hydrogens = orders.hydrogens.every(count => count === 0);
        const unsaturation = (list: Uint8Array): number =>
          list.reduce((sum, order) => sum + Math.max(0, order - 1), 0);
        const multiple = unsaturation(orders.orders) === unsaturation(molecule.bondOrders);
        if (!bonding || !hydrogens || !multiple) differing.push(`${id} ${bonding} ${hydrogens} ${multiple}`);
      }
      expect(compared).toBeGreaterThanOrEqual(27);
      expect(differing).toEqual([]);
    });
  },
);
