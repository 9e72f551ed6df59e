/** Molfiles for reader tests, written from short descriptions. */

export interface MolfileAtom {
  readonly x?: number | string;
  readonly y?: number | string;
  readonly z?: number | string;
  readonly symbol: string;
  /** Columns 35 to 69 of a V2000 atom line: mass difference, charge code, parity, hydrogens, box, valence …; keywords of a V3000 line. */
  readonly mass?: number;
  readonly charge?: number;
  readonly valence?: number;
  readonly keywords?: string;
}

/** First atom, second atom (1-based), type, mark. */
export type MolfileBond = readonly [number, number, number, number?];

const right = (value: number | string, width: number): string => String(value).padStart(width);
const coordinate = (value: number | string | undefined): string =>
  right(typeof value === 'string' ? value : (value ?? 0).toFixed(4), 10);

/** Lines of a V2000 table, `M  END` and the lines of `properties` before it included. */
export function v2000(
  name: string,
  atoms: readonly MolfileAtom[],
  bonds: readonly MolfileBond[],
  properties: readonly string[] = [],
): string[] {
  return [
    name,
    '  test',
    '',
    `${right(atoms.length, 3)}${right(bonds.length, 3)}  0  0  0  0  0  0  0  0999 V2000`,
    ...atoms.map(
      ({ x, y, z, symbol, mass, charge, valence }) =>
        `${coordinate(x)}${coordinate(y)}${coordinate(z)} ${symbol.padEnd(3)}${right(mass ?? 0, 2)}${right(charge ?? 0, 3)}  0  0  0${right(valence ?? 0, 3)}  0  0  0  0  0  0`,
    ),
    ...bonds.map(
      ([first, second, type, mark]) =>
        `${right(first, 3)}${right(second, 3)}${right(type, 3)}${right(mark ?? 0, 3)}`,
    ),
    ...properties,
    'M  END',
  ];
}

/** Lines of a V3000 table. */
export function v3000(
  name: string,
  atoms: readonly MolfileAtom[],
  bonds: readonly MolfileBond[],
  collection: readonly string[] = [],
): string[] {
  return [
    name,
    '  test',
    '',
    '  0  0  0     0  0            999 V3000',
    'M  V30 BEGIN CTAB',
    `M  V30 COUNTS ${atoms.length} ${bonds.length} 0 0 0`,
    'M  V30 BEGIN ATOM',
    ...atoms.map(
      ({ x, y, z, symbol, keywords }, i) =>
        `M  V30 ${i + 1} ${symbol} ${x ?? 0} ${y ?? 0} ${z ?? 0} 0${keywords === undefined ? '' : ` ${keywords}`}`,
    ),
    'M  V30 END ATOM',
    'M  V30 BEGIN BOND',
    ...bonds.map(
      ([first, second, type, mark], i) =>
        `M  V30 ${i + 1} ${type} ${first} ${second}${mark === undefined ? '' : ` CFG=${mark}`}`,
    ),
    'M  V30 END BOND',
    ...(collection.length === 0
      ? []
      : ['M  V30 BEGIN COLLECTION', ...collection.map(line => `M  V30 ${line}`), 'M  V30 END COLLECTION']),
    'M  V30 END CTAB',
    'M  END',
  ];
}

/** Bromochlorofluoromethane in space, R: seen from H (z upward), Br Cl F run anticlockwise, so from the other side clockwise. */
export const CHIRAL: { readonly atoms: readonly MolfileAtom[]; readonly bonds: readonly MolfileBond[] } = {
  atoms: [
    { x: 0, y: 0, z: 0, symbol: 'C' },
    { x: 0, y: 0, z: 1.09, symbol: 'H' },
    { x: 1.82, y: 0, z: -0.64, symbol: 'Br' },
    { x: -0.83, y: 1.44, z: -0.59, symbol: 'Cl' },
    { x: -0.64, y: -1.1, z: -0.45, symbol: 'F' },
  ],
  bonds: [
    [1, 2, 1],
    [1, 3, 1],
    [1, 4, 1],
    [1, 5, 1],
  ],
};

/** Entries of an SDF with a terminator after each. */
export function sdf(entries: readonly (readonly string[])[], ending = '\n'): string {
  return entries.map(lines => [...lines, '$$$$'].join(ending) + ending).join('');
}
