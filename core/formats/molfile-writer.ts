/**
 * Writes Molfiles and SDF entries (CTfile Formats, BIOVIA 2020): V2000, and V3000 for what V2000 cannot hold.
 *
 * The same molecule gives the same bytes: no date is written. Configuration that only a notation states is not in a
 * Molfile; it follows from coordinates or wedges.
 */
import { elementSymbol } from '../chemistry/elements.ts';
import { BondMark, type Molecule } from '../chemistry/molecule.ts';
import { molfileHydrogens } from '../chemistry/valence.ts';
import type { DataItem } from './format.ts';

export interface MolfileOptions {
  /** First line; the name of the molecule by default. */
  readonly title?: string;
  /** Third line. */
  readonly comment?: string;
  /** V3000 by itself for more than 999 atoms or bonds, stereo groups, and coordinates that overflow their columns. */
  readonly version?: 'V2000' | 'V3000';
}

export interface SdfOptions extends MolfileOptions {
  readonly data?: readonly DataItem[];
}

const MOST_IN_THREE_COLUMNS = 999;
const COORDINATE_COLUMNS = 10;
const DECIMALS = 4;
/** Atoms in one line of `M  CHG` and its like. */
const PER_PROPERTY_LINE = 8;
const ANY_BOND = 8;
const ZERO_VALENCE_V2000 = 15;
const V3000_LINE = 80;

const MARKS_V2000: Readonly<Record<BondMark, number>> = {
  [BondMark.none]: 0,
  [BondMark.wedge]: 1,
  [BondMark.hash]: 6,
  [BondMark.wavy]: 4,
  [BondMark.crossed]: 3,
};
const MARKS_V3000: Readonly<Record<BondMark, number>> = {
  [BondMark.none]: 0,
  [BondMark.wedge]: 1,
  [BondMark.hash]: 3,
  [BondMark.wavy]: 2,
  [BondMark.crossed]: 2,
};

/** A Molfile, its last line `M  END`. @throws RangeError when an atom is not located, or V2000 is asked for what it cannot hold. */
export function writeMolfile(molecule: Molecule, options: MolfileOptions = {}): string {
  const { atomCount, bondCount } = molecule;
  const coordinates = coordinateTexts(molecule);
  const fits =
    atomCount <= MOST_IN_THREE_COLUMNS &&
    bondCount <= MOST_IN_THREE_COLUMNS &&
    coordinates.every(text => text.length <= COORDINATE_COLUMNS);
  if (options.version === 'V2000' && !fits) {
    throw new RangeError(`${atomCount} atoms and ${bondCount} bonds do not fit V2000; V3000 is wanted`);
  }
  const version = options.version ?? (fits && molecule.stereoGroups.length === 0 ? 'V2000' : 'V3000');
  const code = molecule.dimension === 3 ? '3D' : '2D';
  const header = [
    oneLine(options.title ?? molecule.name),
    `  Deasil  ${' '.repeat(10)}${code}`,
    oneLine(options.comment ?? ''),
  ];
  const body = version === 'V2000' ? v2000(molecule, coordinates) : v3000(molecule, coordinates);
  return `${[...header, ...body, 'M  END'].join('\n')}\n`;
}

/** An SDF entry: a Molfile, its data items, `$$$$`. @throws RangeError as `writeMolfile`. */
export function writeSdfEntry(molecule: Molecule, options: SdfOptions = {}): string {
  const items = (options.data ?? []).map(({ name, value }) => {
    const lines = value
      .split(/\r\n|\n|\r/u)
      // A blank line would end the item, a terminator the entry, a header would begin another item.
      .filter(line => line.trim() !== '')
      .map(line => (/^(?:\$\$\$\$|>)/u.test(line) ? ` ${line}` : line));
    return `> <${name.replace(/[<>\r\n]/gu, ' ').trim()}>\n${lines.map(line => `${line}\n`).join('')}\n`;
  });
  return `${writeMolfile(molecule, options)}${items.join('')}$$$$\n`;
}

function oneLine(text: string): string {
  const line = text.replace(/[\r\n]+/gu, ' ');
  return line.startsWith('$$$$') ? ` ${line}` : line;
}

/** x, y and z of every atom as text, zeros where there are no coordinates. */
function coordinateTexts(molecule: Molecule): string[] {
  const { coordinates, atomCount } = molecule;
  return Array.from({ length: 3 * atomCount }, (_, k) => {
    const value = coordinates?.[k] ?? 0;
    if (!Number.isFinite(value)) {
      throw new RangeError(`atom ${Math.floor(k / 3) + 1} is not located; a Molfile needs every coordinate`);
    }
    const text = value.toFixed(DECIMALS);
    return /^-0\.?0*$/u.test(text) ? text.slice(1) : text;
  });
}

/** Sum of the bond orders of each atom. */
function bondSums(molecule: Molecule): Uint16Array {
  const sums = new Uint16Array(molecule.atomCount);
  for (let bond = 0; bond < molecule.bondCount; bond++) {
    for (const end of [2 * bond, 2 * bond + 1]) sums[molecule.bondAtoms[end]!]! += molecule.bondOrders[bond]!;
  }
  return sums;
}

/** The valence to be stated for each atom so that its implicit hydrogens are read back; -1 where the default gives them. */
function statedValences(molecule: Molecule): Int16Array {
  const sums = bondSums(molecule);
  return Int16Array.from(sums, (sum, atom) => {
    const hydrogens = molecule.hydrogens[atom]!;
    const given = molfileHydrogens(
      molecule.elements[atom]!,
      molecule.charges[atom]!,
      molecule.radicals[atom]!,
      sum,
    );
    return given === hydrogens ? -1 : sum + hydrogens;
  });
}

function symbolOf(molecule: Molecule, atom: number): string {
  const z = molecule.elements[atom]!;
  if (z !== 0) return elementSymbol(z);
  return /^R\d{1,2}$/u.test(molecule.labels?.[atom] ?? '') ? 'R#' : '*';
}

/** Bond type: a bond without a localised order, and one of order 4, for which the format has no number, are "any". */
function bondType(order: number): number {
  return order >= 1 && order <= 3 ? order : ANY_BOND;
}

/** Code of `M  RAD` and `RAD=`: 2 a doublet, 3 a triplet. */
function radicalCode(unpaired: number): number {
  return unpaired === 0 ? 0 : unpaired === 1 ? 2 : 3;
}

function v2000(molecule: Molecule, coordinates: readonly string[]): string[] {
  const { atomCount, bondCount, bondAtoms, bondOrders, bondMarks } = molecule;
  const three = (value: number): string => String(value).padStart(3);
  const valences = statedValences(molecule);
  const lines = [`${three(atomCount)}${three(bondCount)}  0  0  0  0  0  0  0  0999 V2000`];
  for (let atom = 0; atom < atomCount; atom++) {
    const place = coordinates
      .slice(3 * atom, 3 * atom + 3)
      .map(text => text.padStart(COORDINATE_COLUMNS))
      .join('');
    const stated = valences[atom]!;
    const valence = stated < 0 ? 0 : stated === 0 ? ZERO_VALENCE_V2000 : stated;
    lines.push(
      `${place} ${symbolOf(molecule, atom).padEnd(3)} 0  0  0  0  0${three(valence)}  0  0  0  0  0  0`,
    );
  }
  for (let bond = 0; bond < bondCount; bond++) {
    const mark = MARKS_V2000[bondMarks[bond]! as BondMark];
    const ends = [bondAtoms[2 * bond]! + 1, bondAtoms[2 * bond + 1]! + 1];
    lines.push(`${[...ends, bondType(bondOrders[bond]!), mark].map(three).join('')}  0  0  0`);
  }
  lines.push(
    ...propertyLines('CHG', atomCount, atom => molecule.charges[atom]!),
    ...propertyLines('ISO', atomCount, atom => molecule.isotopes[atom]!),
    ...propertyLines('RAD', atomCount, atom => radicalCode(molecule.radicals[atom]!)),
  );
  return lines;
}

function propertyLines(key: string, atomCount: number, valueOf: (atom: number) => number): string[] {
  const pairs: string[] = [];
  for (let atom = 0; atom < atomCount; atom++) {
    const value = valueOf(atom);
    if (value !== 0) pairs.push(`${String(atom + 1).padStart(4)}${String(value).padStart(4)}`);
  }
  const lines: string[] = [];
  for (let at = 0; at < pairs.length; at += PER_PROPERTY_LINE) {
    const some = pairs.slice(at, at + PER_PROPERTY_LINE);
    lines.push(`M  ${key}${String(some.length).padStart(3)}${some.join('')}`);
  }
  return lines;
}

function v3000(molecule: Molecule, coordinates: readonly string[]): string[] {
  const { atomCount, bondCount, bondAtoms, bondOrders, bondMarks } = molecule;
  const valences = statedValences(molecule);
  const keyword = (name: string, value: number): string => (value === 0 ? '' : ` ${name}=${value}`);
  const lines = ['  0  0  0     0  0            999 V3000'];
  const add = (text: string): void => {
    lines.push(...continued(text));
  };
  add('BEGIN CTAB');
  add(`COUNTS ${atomCount} ${bondCount} 0 0 0`);
  add('BEGIN ATOM');
  for (let atom = 0; atom < atomCount; atom++) {
    const place = coordinates.slice(3 * atom, 3 * atom + 3).join(' ');
    const stated = valences[atom]!;
    add(
      `${atom + 1} ${symbolOf(molecule, atom)} ${place} 0${keyword('CHG', molecule.charges[atom]!)}${keyword('RAD', radicalCode(molecule.radicals[atom]!))}${keyword('MASS', molecule.isotopes[atom]!)}${stated < 0 ? '' : ` VAL=${stated === 0 ? -1 : stated}`}`,
    );
  }
  add('END ATOM');
  if (bondCount > 0) {
    add('BEGIN BOND');
    for (let bond = 0; bond < bondCount; bond++) {
      const mark = MARKS_V3000[bondMarks[bond]! as BondMark];
      add(
        `${bond + 1} ${bondType(bondOrders[bond]!)} ${bondAtoms[2 * bond]! + 1} ${bondAtoms[2 * bond + 1]! + 1}${keyword('CFG', mark)}`,
      );
    }
    add('END BOND');
  }
  if (molecule.stereoGroups.length > 0) {
    add('BEGIN COLLECTION');
    for (const { kind, number, atoms } of molecule.stereoGroups) {
      const name = kind === 'absolute' ? 'STEABS' : kind === 'and' ? `STERAC${number}` : `STEREL${number}`;
      add(`MDLV30/${name} ATOMS=(${[atoms.length, ...atoms.map(atom => atom + 1)].join(' ')})`);
    }
    add('END COLLECTION');
  }
  add('END CTAB');
  return lines;
}

/** A logical line cut into lines of at most 80 characters, all but the last ending in a hyphen. */
function continued(text: string): string[] {
  const room = V3000_LINE - 'M  V30 -'.length;
  const lines: string[] = [];
  let rest = text;
  while (rest.length > room) {
    const space = rest.lastIndexOf(' ', room - 1);
    const cut = space > 0 ? space + 1 : room;
    lines.push(`M  V30 ${rest.slice(0, cut)}-`);
    rest = rest.slice(cut);
  }
  lines.push(`M  V30 ${rest}`);
  return lines;
}
