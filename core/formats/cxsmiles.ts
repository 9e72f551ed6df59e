/**
 * The tail of CXSMILES, between bars after the SMILES: labels, stereo groups, radicals, wavy bonds.
 *
 * Its coordinates are a drawing of what the SMILES states already and are passed over.
 */
import type { StereoGroup } from '../chemistry/molecule.ts';

export interface CxTail {
  readonly groups: readonly StereoGroup[];
  readonly labels: readonly string[] | null;
  /** Unpaired electrons by atom. */
  readonly radicals: ReadonlyMap<number, number>;
  /** Centres with a wavy bond: either configuration. */
  readonly unspecified: ReadonlySet<number>;
  readonly warnings: readonly string[];
}

/** What a SMILES without a tail has. */
export const NO_TAIL: CxTail = {
  groups: [],
  labels: null,
  radicals: new Map(),
  unspecified: new Set(),
  warnings: [],
};

/** Unpaired electrons for each code of `^`: 1 monovalent, 2 to 4 divalent, 5 to 7 trivalent. */
const RADICAL_ELECTRONS: readonly number[] = [0, 1, 2, 2, 2, 3, 3, 3];

/** Reads a tail, bars included. Fields that do not bear on configuration are passed over; a malformed one is a warning. */
export function readCxTail(tail: string, atomCount: number): CxTail {
  const groups: StereoGroup[] = [];
  const radicals = new Map<number, number>();
  const unspecified = new Set<number>();
  const warnings: string[] = [];
  let labels: string[] | null = null;
  const inner = tail.slice(1, -1);
  const atomList = (text: string, field: string): number[] => {
    const atoms: number[] = [];
    for (const part of text.split(',')) {
      if (part === '') continue;
      const atom = Number(part.split('.')[0]);
      if (Number.isInteger(atom) && atom >= 0 && atom < atomCount) atoms.push(atom);
      else warnings.push(`CXSMILES field ${field}: there is no atom ${part}, atoms count from 0`);
    }
    return atoms;
  };
  const labelMatch = /\$([^$]*)\$/u.exec(inner);
  if (labelMatch && !labelMatch[1]!.startsWith('_AV')) {
    // A semicolon parts two labels unless it ends an escaped character, as in &#59;.
    labels = labelMatch[1]!
      .split(/(?<!&#\d{1,7});/u)
      .map(label => label.replace(/&#(\d+);?/gu, (_, code: string) => String.fromCodePoint(Number(code))));
  }
  const fields = inner.replace(/\([^)]*\)/u, '').replace(/\$[^$]*\$/gu, '');
  for (const match of fields.matchAll(
    /(?:^|,)(a|&\d+|o\d+|\^[1-7]|w[UD]?):(\d+(?:\.\d+)?(?:,\d+(?:\.\d+)?)*)/gu,
  )) {
    const [, key, list] = match as unknown as [string, string, string];
    if (key === 'a') groups.push({ kind: 'absolute', number: 0, atoms: atomList(list, key) });
    else if (key[0] === '&')
      groups.push({ kind: 'and', number: Number(key.slice(1)), atoms: atomList(list, key) });
    else if (key[0] === 'o')
      groups.push({ kind: 'or', number: Number(key.slice(1)), atoms: atomList(list, key) });
    else if (key[0] === '^') {
      for (const atom of atomList(list, key)) radicals.set(atom, RADICAL_ELECTRONS[Number(key[1])]!);
    } else if (key === 'w') for (const atom of atomList(list, key)) unspecified.add(atom);
  }
  return { groups, labels, radicals, unspecified, warnings };
}
