/**
 * The bonds of standard residues by atom name: amino acids, nucleotides with their common modifications, sugars, cofactors.
 *
 * Constitution and atom names as in the wwPDB Chemical Component Dictionary. Heavy atoms only; `-` is a single, `=` a
 * double bond. Acids, amines and phosphates are uncharged: protonation has no bearing on handedness.
 */

/** A bond between two atom names. */
export interface TemplateBond {
  readonly first: string;
  readonly second: string;
  readonly order: 1 | 2;
}

export type ResidueClass = 'amino acid' | 'nucleotide' | 'sugar' | 'cofactor' | 'water';

export interface ResidueTemplate {
  readonly name: string;
  readonly residueClass: ResidueClass;
  readonly bonds: readonly TemplateBond[];
  readonly atoms: ReadonlySet<string>;
  /** Formal charges other than 0. */
  readonly charges: ReadonlyMap<string, number>;
}

const BACKBONE = 'N-CA CA-C C=O C-OXT';
const RING6 = 'CG=CD1 CD1-CE1 CE1=CZ CZ-CE2 CE2=CD2 CD2-CG';

const AMINO_ACIDS: Readonly<Record<string, string>> = {
  GLY: '',
  ALA: 'CA-CB',
  VAL: 'CA-CB CB-CG1 CB-CG2',
  LEU: 'CA-CB CB-CG CG-CD1 CG-CD2',
  ILE: 'CA-CB CB-CG1 CB-CG2 CG1-CD1',
  MET: 'CA-CB CB-CG CG-SD SD-CE',
  MSE: 'CA-CB CB-CG CG-SE SE-CE',
  PRO: 'CA-CB CB-CG CG-CD CD-N',
  HYP: 'CA-CB CB-CG CG-CD CD-N CG-OD1',
  PHE: `CA-CB CB-CG ${RING6}`,
  TYR: `CA-CB CB-CG ${RING6} CZ-OH`,
  TRP: 'CA-CB CB-CG CG=CD1 CD1-NE1 NE1-CE2 CE2=CD2 CD2-CG CE2-CZ2 CZ2=CH2 CH2-CZ3 CZ3=CE3 CE3-CD2',
  SER: 'CA-CB CB-OG',
  THR: 'CA-CB CB-OG1 CB-CG2',
  CYS: 'CA-CB CB-SG',
  SEC: 'CA-CB CB-SE',
  ASP: 'CA-CB CB-CG CG=OD1 CG-OD2',
  ASN: 'CA-CB CB-CG CG=OD1 CG-ND2',
  GLU: 'CA-CB CB-CG CG-CD CD=OE1 CD-OE2',
  GLN: 'CA-CB CB-CG CG-CD CD=OE1 CD-NE2',
  LYS: 'CA-CB CB-CG CG-CD CD-CE CE-NZ',
  ARG: 'CA-CB CB-CG CG-CD CD-NE NE-CZ CZ-NH1 CZ=NH2',
  HIS: 'CA-CB CB-CG CG=CD2 CD2-NE2 NE2-CE1 CE1=ND1 ND1-CG',
};

/** D-amino acids by the name of their L counterpart, whose atom names they share. */
export const D_AMINO_ACIDS: Readonly<Record<string, string>> = {
  DAL: 'ALA',
  DAR: 'ARG',
  DSG: 'ASN',
  DAS: 'ASP',
  DCY: 'CYS',
  DGN: 'GLN',
  DGL: 'GLU',
  DHI: 'HIS',
  DIL: 'ILE',
  DLE: 'LEU',
  DLY: 'LYS',
  MED: 'MET',
  DPN: 'PHE',
  DPR: 'PRO',
  DSN: 'SER',
  DTH: 'THR',
  DTR: 'TRP',
  DTY: 'TYR',
  DVA: 'VAL',
};

const RIBOSE =
  "P=OP1 P-OP2 P-OP3 P-O5' O5'-C5' C5'-C4' C4'-O4' C4'-C3' C3'-O3' C3'-C2' C2'-O2' C2'-C1' C1'-O4'";
const DEOXYRIBOSE = RIBOSE.replace(" C2'-O2'", '');
const ADENINE = "C1'-N9 N9-C8 C8=N7 N7-C5 C5=C4 C4-N9 C5-C6 C6-N6 C6=N1 N1-C2 C2=N3 N3-C4";
const GUANINE = "C1'-N9 N9-C8 C8=N7 N7-C5 C5=C4 C4-N9 C5-C6 C6=O6 C6-N1 N1-C2 C2-N2 C2=N3 N3-C4";
const HYPOXANTHINE = GUANINE.replace(' C2-N2', '');
const CYTOSINE = "C1'-N1 N1-C2 C2=O2 C2-N3 N3=C4 C4-N4 C4-C5 C5=C6 C6-N1";
const URACIL = "C1'-N1 N1-C2 C2=O2 C2-N3 N3-C4 C4=O4 C4-C5 C5=C6 C6-N1";

const NUCLEOTIDES: Readonly<Record<string, string>> = {
  A: `${RIBOSE} ${ADENINE}`,
  G: `${RIBOSE} ${GUANINE}`,
  C: `${RIBOSE} ${CYTOSINE}`,
  U: `${RIBOSE} ${URACIL}`,
  I: `${RIBOSE} ${HYPOXANTHINE}`,
  DA: `${DEOXYRIBOSE} ${ADENINE}`,
  DG: `${DEOXYRIBOSE} ${GUANINE}`,
  DC: `${DEOXYRIBOSE} ${CYTOSINE}`,
  DU: `${DEOXYRIBOSE} ${URACIL}`,
  DT: `${DEOXYRIBOSE} ${URACIL} C5-C7 C5-C5M`,
  DI: `${DEOXYRIBOSE} ${HYPOXANTHINE}`,
  '1MA': `${RIBOSE} ${ADENINE.replace('C6-N6 C6=N1', 'C6=N6 C6-N1')} N1-CM1`,
  '2MG': `${RIBOSE} ${GUANINE} N2-CM2`,
  M2G: `${RIBOSE} ${GUANINE} N2-CM1 N2-CM2`,
  '7MG': `${RIBOSE} ${GUANINE} N7-CM7`,
  OMG: `${RIBOSE} ${GUANINE} O2'-CM2`,
  OMC: `${RIBOSE} ${CYTOSINE} O2'-CM2`,
  '5MC': `${RIBOSE} ${CYTOSINE} C5-CM5`,
  '5MU': `${RIBOSE} ${URACIL} C5-C5M`,
  H2U: `${RIBOSE} ${URACIL.replace('C5=C6', 'C5-C6')}`,
  PSU: `${RIBOSE} C1'-C5 N1-C2 C2=O2 C2-N3 N3-C4 C4=O4 C4-C5 C5=C6 C6-N1`,
};

const PYRANOSE = 'C1-C2 C2-C3 C3-C4 C4-C5 C5-O5 O5-C1 C1-O1 C3-O3 C4-O4';
const HEXOSE = `${PYRANOSE} C2-O2 C5-C6 C6-O6`;
const ACETAMIDO = `${PYRANOSE} C5-C6 C6-O6 C2-N2 N2-C7 C7=O7 C7-C8`;

const SUGARS: Readonly<Record<string, string>> = {
  GLC: HEXOSE,
  BGC: HEXOSE,
  GAL: HEXOSE,
  GLA: HEXOSE,
  MAN: HEXOSE,
  BMA: HEXOSE,
  NAG: ACETAMIDO,
  NDG: ACETAMIDO,
  NGA: ACETAMIDO,
  A2G: ACETAMIDO,
  FUC: `${PYRANOSE} C2-O2 C5-C6`,
  FUL: `${PYRANOSE} C2-O2 C5-C6`,
  XYS: `${PYRANOSE} C2-O2`,
  XYP: `${PYRANOSE} C2-O2`,
};

const NUCLEOSIDE = "O5'-C5' C5'-C4' C4'-O4' C4'-C3' C3'-O3' C3'-C2' C2'-O2' C2'-C1' C1'-O4'";
const MONOPHOSPHATE = "P=O1P P-O2P P-O3P P-O5'";
const DIPHOSPHATE = "PB=O1B PB-O2B PB-O3B PB-O3A PA=O1A PA-O2A PA-O3A PA-O5'";
const TRIPHOSPHATE = `PG=O1G PG-O2G PG-O3G PG-O3B ${DIPHOSPHATE}`;

const COFACTORS: Readonly<Record<string, string>> = {
  AMP: `${MONOPHOSPHATE} ${NUCLEOSIDE} ${ADENINE}`,
  ADP: `${DIPHOSPHATE} ${NUCLEOSIDE} ${ADENINE}`,
  ATP: `${TRIPHOSPHATE} ${NUCLEOSIDE} ${ADENINE}`,
  GDP: `${DIPHOSPHATE} ${NUCLEOSIDE} ${GUANINE}`,
  GTP: `${TRIPHOSPHATE} ${NUCLEOSIDE} ${GUANINE}`,
  NAD:
    'PA=O1A PA-O2A PA-O5B O5B-C5B C5B-C4B C4B-O4B C4B-C3B C3B-O3B C3B-C2B C2B-O2B C2B-C1B C1B-O4B C1B-N9A ' +
    'N9A-C8A C8A=N7A N7A-C5A C5A=C4A C4A-N9A C5A-C6A C6A-N6A C6A=N1A N1A-C2A C2A=N3A N3A-C4A ' +
    'PA-O3 O3-PN PN=O1N PN-O2N PN-O5D O5D-C5D C5D-C4D C4D-O4D C4D-C3D C3D-O3D C3D-C2D C2D-O2D C2D-C1D C1D-O4D ' +
    'C1D-N1N N1N=C2N C2N-C3N C3N=C4N C4N-C5N C5N=C6N C6N-N1N C3N-C7N C7N=O7N C7N-N7N',
};

const WATERS = ['HOH', 'WAT', 'DOD', 'H2O'];

function parse(name: string, residueClass: ResidueClass, text: string): ResidueTemplate {
  const atoms = new Set<string>();
  const bonds = text
    .split(' ')
    .filter(word => word !== '')
    .map((word): TemplateBond => {
      const [first = '', second = ''] = word.split(/[-=]/u);
      atoms.add(first);
      atoms.add(second);
      return { first, second, order: word.includes('=') ? 2 : 1 };
    });
  const charges = new Map(residueClass === 'amino acid' && atoms.has('NH2') ? [['NH2', 1]] : []);
  return { name, residueClass, bonds, atoms, charges };
}

const TEMPLATES: ReadonlyMap<string, ResidueTemplate> = new Map(
  [
    ...Object.entries(AMINO_ACIDS).map(([name, text]) => parse(name, 'amino acid', `${BACKBONE} ${text}`)),
    ...Object.entries(D_AMINO_ACIDS).map(([name, as]) =>
      parse(name, 'amino acid', `${BACKBONE} ${AMINO_ACIDS[as] ?? ''}`),
    ),
    ...Object.entries(NUCLEOTIDES).map(([name, text]) => parse(name, 'nucleotide', text)),
    ...Object.entries(SUGARS).map(([name, text]) => parse(name, 'sugar', text)),
    ...Object.entries(COFACTORS).map(([name, text]) => parse(name, 'cofactor', text)),
    ...WATERS.map(name => parse(name, 'water', '')),
  ].map(template => [template.name, template]),
);

/** The template of a residue name; null where there is none. */
export function templateOf(residue: string): ResidueTemplate | null {
  return TEMPLATES.get(residue) ?? null;
}

/** Names of all residues with a template. */
export function templateNames(): string[] {
  return [...TEMPLATES.keys()];
}

/** Today's name of an atom of a nucleotide: C5* is C5', O1P is OP1 (PDB format before version 3). */
export function currentAtomName(name: string, residueClass: ResidueClass | null): string {
  if (residueClass !== 'nucleotide') return name;
  const primed = name.replace(/\*/gu, "'");
  switch (primed) {
    case 'O1P':
      return 'OP1';
    case 'O2P':
      return 'OP2';
    case 'O3P':
      return 'OP3';
    default:
      return primed;
  }
}
