/**
 * What a residue's name promises of its centres, and which of two like atoms at a prochiral centre has which name.
 *
 * Each statement is a sign: that of the signed volume V = (a − centre) · [(b − centre) × (c − centre)] of three neighbours
 * in the order given, with its ideal size in Å³. Signs of L-amino acids, D-ribose and the sugars: IUPAC–IUBMB
 * recommendations (Pure Appl. Chem. 1984, 56, 595; 1996, 68, 1919); those of atom names: J. L. Markley et al., Pure Appl.
 * Chem. 1998, 70, 117. Ideal volumes: bond lengths and angles of R. A. Engh & R. Huber, Acta Cryst. 1991, A47, 392 for
 * amino acids; tetrahedral angles and mean bond lengths for the others.
 */
import { D_AMINO_ACIDS } from './templates.ts';

export interface ExpectedCentre {
  readonly atom: string;
  readonly neighbours: readonly [string, string, string];
  readonly sign: 1 | -1;
  /** |V| of an ideal centre, Å³. */
  readonly ideal: number;
}

/** Two like atoms whose names the arrangement fixes: V(centre; a, b, named) has the sign. */
export interface NamedPair {
  readonly centre: string;
  readonly others: readonly [string, string];
  readonly named: readonly [string, string];
  readonly sign: 1 | -1;
}

/** |V| from three bond lengths (Å) and the three angles between them (degrees): 1–2, 1–3, 2–3. */
export function volumeFrom(
  lengths: readonly [number, number, number],
  angles: readonly [number, number, number],
): number {
  const [x, y, z] = angles.map(angle => Math.cos((angle * Math.PI) / 180)) as [number, number, number];
  return lengths[0] * lengths[1] * lengths[2] * Math.sqrt(1 + 2 * x * y * z - x * x - y * y - z * z);
}

/** Engh & Huber 1991, tables 2 and 3: N–CA, CA–C, CA–CB; N–CA–C, N–CA–CB, C–CA–CB. */
function alphaVolume(residue: string): number {
  switch (residue) {
    case 'PRO':
    case 'HYP':
      return volumeFrom([1.466, 1.525, 1.53], [111.8, 103, 110.1]);
    case 'ALA':
      return volumeFrom([1.458, 1.525, 1.521], [111.2, 110.4, 110.5]);
    case 'ILE':
    case 'VAL':
    case 'THR':
      return volumeFrom([1.458, 1.525, 1.54], [111.2, 111.5, 109.1]);
    default:
      return volumeFrom([1.458, 1.525, 1.53], [111.2, 110.5, 110.1]);
  }
}

const ILE_BETA = volumeFrom([1.54, 1.53, 1.521], [110.4, 110.5, 110.7]);
const THR_BETA = volumeFrom([1.54, 1.433, 1.521], [109.6, 110.5, 109.3]);
const TETRAHEDRAL = 109.47;
const RING_CENTRE = volumeFrom([1.42, 1.53, 1.53], [TETRAHEDRAL, TETRAHEDRAL, TETRAHEDRAL]);
const ANOMERIC = volumeFrom([1.42, 1.4, 1.53], [TETRAHEDRAL, TETRAHEDRAL, TETRAHEDRAL]);

function aminoAcid(name: string, sign: 1 | -1): ExpectedCentre[] {
  const centres: ExpectedCentre[] = [
    { atom: 'CA', neighbours: ['N', 'C', 'CB'], sign, ideal: alphaVolume(name) },
  ];
  if (name === 'ILE') centres.push({ atom: 'CB', neighbours: ['CA', 'CG1', 'CG2'], sign, ideal: ILE_BETA });
  if (name === 'THR') centres.push({ atom: 'CB', neighbours: ['CA', 'OG1', 'CG2'], sign, ideal: THR_BETA });
  if (name === 'HYP')
    centres.push({ atom: 'CG', neighbours: ['OD1', 'CD', 'CB'], sign: -1, ideal: RING_CENTRE });
  return centres;
}

const L_AMINO_ACIDS = new Set(
  'ALA VAL LEU ILE MET MSE PRO HYP PHE TYR TRP SER THR CYS SEC ASP ASN GLU GLN LYS ARG HIS'.split(' '),
);

/** β-D-ribose; 2′-deoxyribose lacks the second. */
function ribose(base: string, deoxy: boolean): ExpectedCentre[] {
  return [
    { atom: "C1'", neighbours: ["O4'", base, "C2'"], sign: -1, ideal: RING_CENTRE },
    ...(deoxy
      ? []
      : [{ atom: "C2'", neighbours: ["O2'", "C1'", "C3'"] as const, sign: -1 as const, ideal: RING_CENTRE }]),
    { atom: "C3'", neighbours: ["O3'", "C4'", "C2'"], sign: 1, ideal: RING_CENTRE },
    { atom: "C4'", neighbours: ["O4'", "C3'", "C5'"], sign: -1, ideal: RING_CENTRE },
  ];
}

/** Base atom on C1′ of the nucleotides, and whether they are deoxyribonucleotides. */
const NUCLEOTIDES: Readonly<Record<string, readonly [string, boolean]>> = {
  A: ['N9', false],
  G: ['N9', false],
  I: ['N9', false],
  C: ['N1', false],
  U: ['N1', false],
  DA: ['N9', true],
  DG: ['N9', true],
  DI: ['N9', true],
  DC: ['N1', true],
  DT: ['N1', true],
  DU: ['N1', true],
  '1MA': ['N9', false],
  '2MG': ['N9', false],
  M2G: ['N9', false],
  '7MG': ['N9', false],
  OMG: ['N9', false],
  YG: ['N9', false],
  OMC: ['N1', false],
  '5MC': ['N1', false],
  '5MU': ['N1', false],
  H2U: ['N1', false],
  PSU: ['C5', false],
  AMP: ['N9', false],
  ADP: ['N9', false],
  ATP: ['N9', false],
  GDP: ['N9', false],
  GTP: ['N9', false],
};

/** Signs at C1 to C5 as V(C1; O5, O1, C2), V(C2; X2, C1, C3), V(C3; O3, C2, C4), V(C4; O4, C5, C3), V(C5; O5, C4, C6). */
const SUGARS: Readonly<Record<string, string>> = {
  GLC: '+-++-',
  BGC: '--++-',
  MAN: '++++-',
  BMA: '-+++-',
  GLA: '+-+--',
  GAL: '--+--',
  NDG: '+-++-',
  NAG: '--++-',
  A2G: '+-+--',
  NGA: '--+--',
  FUC: '-+-++',
  FUL: '++-++',
  XYS: '+-++',
  XYP: '--++',
};

function sugar(name: string, signs: string): ExpectedCentre[] {
  const amino = name === 'NAG' || name === 'NDG' || name === 'NGA' || name === 'A2G';
  const neighbours: readonly (readonly [string, string, string])[] = [
    ['O5', 'O1', 'C2'],
    [amino ? 'N2' : 'O2', 'C1', 'C3'],
    ['O3', 'C2', 'C4'],
    ['O4', 'C5', 'C3'],
    ['O5', 'C4', 'C6'],
  ];
  return Array.from(signs, (sign, k) => ({
    atom: `C${k + 1}`,
    neighbours: neighbours[k]!,
    sign: sign === '+' ? 1 : -1,
    ideal: k === 0 ? ANOMERIC : RING_CENTRE,
  }));
}

/** The centres that a residue's name promises; null for names that are not known. */
export function expectedCentres(residue: string): readonly ExpectedCentre[] | null {
  if (L_AMINO_ACIDS.has(residue)) return aminoAcid(residue, 1);
  const levo = D_AMINO_ACIDS[residue];
  if (levo !== undefined) return aminoAcid(levo, -1);
  const nucleotide = NUCLEOTIDES[residue];
  if (nucleotide) return ribose(...nucleotide);
  const signs = SUGARS[residue];
  return signs === undefined ? null : sugar(residue, signs);
}

/** Whether a name is one of a D-amino acid. */
export function isDextro(residue: string): boolean {
  return Object.hasOwn(D_AMINO_ACIDS, residue);
}

/** Methylene hydrogens: the second branch number, seen along the chain, always stands on the same side. */
const METHYLENES: readonly (readonly [string, string, string, string])[] = [
  ['CB', 'CA', 'G', 'HB'],
  ['CG', 'CB', 'D', 'HG'],
  ['CD', 'CG', 'E', 'HD'],
  ['CE', 'CD', 'NZ', 'HE'],
];

const BRANCHES: Readonly<Record<string, readonly (readonly string[])[]>> = {
  // Next atom of the chain after CB, CG, CD, CE of residues with methylene groups there.
  ARG: [['CG'], ['CD'], ['NE']],
  ASN: [['CG']],
  ASP: [['CG']],
  CYS: [['SG']],
  SEC: [['SE']],
  GLN: [['CG'], ['CD']],
  GLU: [['CG'], ['CD']],
  HIS: [['CG']],
  LEU: [['CG']],
  LYS: [['CG'], ['CD'], ['CE'], ['NZ']],
  MET: [['CG'], ['SD']],
  MSE: [['CG'], ['SE']],
  PHE: [['CG']],
  PRO: [['CG'], ['CD'], ['N']],
  SER: [['OG']],
  TRP: [['CG']],
  TYR: [['CG']],
};

/** The pairs of like atoms of a residue whose names its arrangement fixes. */
export function namedPairs(residue: string): readonly NamedPair[] {
  const pairs: NamedPair[] = [];
  const levo = D_AMINO_ACIDS[residue] ?? (L_AMINO_ACIDS.has(residue) || residue === 'GLY' ? residue : null);
  if (levo !== null) {
    // The names of a D-residue's atoms mirror those of the L-residue.
    const hand = levo === residue ? 1 : -1;
    const add = (centre: string, a: string, b: string, first: string, second: string, sign: 1 | -1): void => {
      pairs.push({ centre, others: [a, b], named: [first, second], sign: (sign * hand) as 1 | -1 });
    };
    if (levo === 'VAL') add('CB', 'CA', 'CG1', 'CG1', 'CG2', -1);
    if (levo === 'LEU') add('CG', 'CB', 'CD1', 'CD1', 'CD2', -1);
    if (levo === 'ILE') add('CG1', 'CB', 'CD1', 'HG12', 'HG13', -1);
    if (levo === 'GLY') add('CA', 'N', 'C', 'HA2', 'HA3', -1);
    (BRANCHES[levo] ?? []).forEach((next, k) => {
      const [centre, before, , hydrogen] = METHYLENES[k]!;
      add(centre, before, next[0]!, `${hydrogen}2`, `${hydrogen}3`, -1);
    });
  }
  const nucleotide = NUCLEOTIDES[residue];
  if (nucleotide) {
    pairs.push({ centre: 'P', others: ["O5'", 'OP1'], named: ['OP1', 'OP2'], sign: -1 });
    pairs.push({ centre: "C5'", others: ["O5'", "C4'"], named: ["H5'", "H5''"], sign: 1 });
    if (nucleotide[1]) {
      pairs.push({ centre: "C2'", others: ["C1'", "C3'"], named: ["H2'", "H2''"], sign: 1 });
    }
  }
  return pairs;
}
