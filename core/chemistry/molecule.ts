/**
 * A molecule: atoms, bonds and what a file says of them, as a structure of arrays.
 *
 * Everything downstream (perception, ranking, comparison, embedding) reads this and nothing else. It is
 * plain data: it passes to a worker by structured clone and is never changed once built.
 */

/** A neighbour that is not an atom of the list: a hydrogen the file leaves implicit. */
export const IMPLICIT_HYDROGEN = -1;
/** A neighbour that is not an atom of the list: the lone pair of a three-coordinate centre. */
export const LONE_PAIR = -2;

/** Order of a bond: 1, 2, 3, 4; 0 for a bond without a localised order (coordination, hydrogen, "any"). */
export type BondOrder = 0 | 1 | 2 | 3 | 4;

/** What a drawing says of a bond, seen from its first atom (the narrow end of a wedge). */
export const BondMark = {
  none: 0,
  /** Solid wedge: the second atom is nearer to the reader. */
  wedge: 1,
  /** Hashed wedge: the second atom is further from the reader. */
  hash: 2,
  /** Wavy single bond: either configuration, or a mixture. */
  wavy: 3,
  /** Crossed double bond: either configuration, or unknown. */
  crossed: 4,
} as const;
export type BondMark = (typeof BondMark)[keyof typeof BondMark];

/**
 * Configuration as a notation states it (SMILES, InChI, a parity list), before any ranking.
 *
 * - `centre`: seen from the first of `ligands`, the other three run `clockwise` or `anticlockwise`.
 * - `double-bond`: also an extended cis-trans cumulene; `ends` are the end atoms, `references` one ligand of
 *   each; `same` when both references lie on one side.
 * - `allene`: an extended tetrahedral cumulene; `ends` are the end atoms, `ligands` the two ligands of the first
 *   end and then the two of the second; seen from the first ligand, the other three run as `turn` says
 *   (OpenSMILES `@AL1` is anticlockwise).
 */
export type StatedStereo =
  | {
      readonly kind: 'centre';
      readonly atom: number;
      readonly ligands: readonly [number, number, number, number];
      readonly turn: 'clockwise' | 'anticlockwise';
    }
  | {
      readonly kind: 'double-bond';
      readonly ends: readonly [number, number];
      readonly references: readonly [number, number];
      readonly side: 'same' | 'opposite';
    }
  | {
      readonly kind: 'allene';
      readonly ends: readonly [number, number];
      readonly ligands: readonly [number, number, number, number];
      readonly turn: 'clockwise' | 'anticlockwise';
    };

/** A set of centres whose configurations belong together (V3000 `STEABS`, `STERACn`, `STERELn`; CXSMILES `a:`, `&n:`, `on:`). */
export interface StereoGroup {
  readonly kind: 'absolute' | 'and' | 'or';
  /** The file's own number of the group; 0 for `absolute`. */
  readonly number: number;
  /** 0-based atom indices. */
  readonly atoms: readonly number[];
}

/**
 * Standard uncertainties of the coordinates, ready for first-order propagation.
 *
 * The variance of a function f of the coordinates with gradient g is
 * Σ(atoms) gᵀ C g + Σ(modes) (sigma · Σ g · displacement)².
 */
export interface CoordinateUncertainty {
  /** Cartesian covariance of each atom, Å², six numbers an atom: xx yy zz xy xz yz. */
  readonly covariances: Float64Array;
  /** Errors that all atoms share, such as a cell length: its s.u. and the shift of every coordinate for one unit of it. */
  readonly modes: readonly { readonly sigma: number; readonly displacement: Float64Array }[];
}

/** Where an atom belongs in a macromolecule. */
export interface ResidueAtom {
  readonly chain: string;
  /** Residue (component) name, `ALA`. */
  readonly residue: string;
  /** Residue number with its insertion code, `123`, `123A`. */
  readonly number: string;
  readonly atomName: string;
  /** Not part of a polymer. */
  readonly hetero: boolean;
}

export interface Molecule {
  readonly name: string;
  readonly atomCount: number;
  readonly bondCount: number;
  /** Atomic number of each atom; 0 for a dummy atom or an attachment point. */
  readonly elements: Uint8Array;
  readonly charges: Int8Array;
  /** Mass number of each atom; 0 where none is stated. */
  readonly isotopes: Uint16Array;
  /** Unpaired electrons of each atom. */
  readonly radicals: Uint8Array;
  /** Hydrogens of each atom that are not atoms of the list. */
  readonly hydrogens: Uint8Array;
  /** Two atoms a bond, in the order of the file. */
  readonly bondAtoms: Uint32Array;
  /** A Kekulé order for each bond; aromatic input is kekulised on reading. */
  readonly bondOrders: Uint8Array;
  /** A `BondMark` for each bond. */
  readonly bondMarks: Uint8Array;
  /** x, y, z of each atom in Å (drawing units when `dimension` is 2), NaN where an atom is not located; null without coordinates. */
  readonly coordinates: Float64Array | null;
  /** 3 a model in space, 2 a drawing, 0 no coordinates. */
  readonly dimension: 0 | 2 | 3;
  /** Neighbours of atom i: `neighbours[neighbourStart[i]] … neighbours[neighbourStart[i + 1] - 1]`. */
  readonly neighbourStart: Uint32Array;
  readonly neighbours: Uint32Array;
  /** The bond to each entry of `neighbours`. */
  readonly neighbourBonds: Uint32Array;
  /** The file's own labels ("C12", "CA"), null where it has none. */
  readonly labels: readonly string[] | null;
  readonly stated: readonly StatedStereo[];
  readonly stereoGroups: readonly StereoGroup[];
  readonly residues: readonly ResidueAtom[] | null;
  readonly uncertainty: CoordinateUncertainty | null;
  /** Site occupancies, 0 to 1; null where all are full. */
  readonly occupancies: Float32Array | null;
  /** Atoms for which the bond orders are guesses (bonds from coordinates); null where all orders are the file's. */
  readonly doubtfulBonding: Uint8Array | null;
}

/** One atom on its way into a molecule; what is left out has the plain value. */
export interface AtomInput {
  readonly element: number;
  readonly charge?: number;
  readonly isotope?: number;
  readonly radical?: number;
  readonly hydrogens?: number;
  readonly label?: string;
  readonly x?: number;
  readonly y?: number;
  readonly z?: number;
}

export interface MoleculeInput {
  readonly name?: string;
  readonly atoms: readonly AtomInput[];
  /** First atom, second atom, order, mark. */
  readonly bonds: readonly (readonly [number, number, BondOrder, BondMark?])[];
  readonly dimension?: 0 | 2 | 3;
  readonly stated?: readonly StatedStereo[];
  readonly stereoGroups?: readonly StereoGroup[];
}

/** The arrays from which `assembleMolecule` completes a molecule. */
export type MoleculeArrays = Omit<
  Molecule,
  'atomCount' | 'bondCount' | 'neighbourStart' | 'neighbours' | 'neighbourBonds'
>;

/** Neighbours of each atom, as a molecule holds them. */
export type Adjacency = Pick<Molecule, 'neighbourStart' | 'neighbours' | 'neighbourBonds'>;

/** Lists the neighbours of each atom from two atoms a bond. @throws RangeError when a bond names an atom that is not there, or joins an atom to itself. */
export function adjacencyOf(atomCount: number, bondAtoms: Uint32Array): Adjacency {
  const bondCount = bondAtoms.length / 2;
  const neighbourStart = new Uint32Array(atomCount + 1);
  for (let b = 0; b < bondCount; b++) {
    const first = bondAtoms[2 * b]!;
    const second = bondAtoms[2 * b + 1]!;
    if (first >= atomCount || second >= atomCount || first === second) {
      throw new RangeError(`bond ${b + 1} joins atoms ${first + 1} and ${second + 1} of ${atomCount}`);
    }
    neighbourStart[first + 1]!++;
    neighbourStart[second + 1]!++;
  }
  for (let i = 0; i < atomCount; i++) neighbourStart[i + 1]! += neighbourStart[i]!;
  const fill = neighbourStart.slice(0, atomCount);
  const neighbours = new Uint32Array(2 * bondCount);
  const neighbourBonds = new Uint32Array(2 * bondCount);
  for (let b = 0; b < bondCount; b++) {
    const first = bondAtoms[2 * b]!;
    const second = bondAtoms[2 * b + 1]!;
    let at = fill[first]!++;
    neighbours[at] = second;
    neighbourBonds[at] = b;
    at = fill[second]!++;
    neighbours[at] = first;
    neighbourBonds[at] = b;
  }
  return { neighbourStart, neighbours, neighbourBonds };
}

/** Completes a molecule from its arrays: counts and adjacency. @throws RangeError as `adjacencyOf`. */
export function assembleMolecule(arrays: MoleculeArrays): Molecule {
  const atomCount = arrays.elements.length;
  const bondCount = arrays.bondOrders.length;
  return { ...arrays, atomCount, bondCount, ...adjacencyOf(atomCount, arrays.bondAtoms) };
}

/** Builds a molecule from lists of atoms and bonds. @throws RangeError as `assembleMolecule`. */
export function buildMolecule(input: MoleculeInput): Molecule {
  const { atoms, bonds } = input;
  const n = atoms.length;
  const dimension = input.dimension ?? 0;
  const coordinates = dimension === 0 ? null : new Float64Array(3 * n);
  const labelled = atoms.some(atom => atom.label !== undefined);
  if (coordinates) {
    atoms.forEach((atom, i) => {
      coordinates[3 * i] = atom.x ?? Number.NaN;
      coordinates[3 * i + 1] = atom.y ?? Number.NaN;
      coordinates[3 * i + 2] = atom.z ?? (dimension === 2 ? 0 : Number.NaN);
    });
  }
  const elements = new Uint8Array(n);
  const charges = new Int8Array(n);
  const isotopes = new Uint16Array(n);
  const radicals = new Uint8Array(n);
  const hydrogens = new Uint8Array(n);
  for (let i = 0; i < n; i++) {
    const atom = atoms[i]!;
    elements[i] = atom.element;
    charges[i] = atom.charge ?? 0;
    isotopes[i] = atom.isotope ?? 0;
    radicals[i] = atom.radical ?? 0;
    hydrogens[i] = atom.hydrogens ?? 0;
  }
  const bondAtoms = new Uint32Array(2 * bonds.length);
  const bondOrders = new Uint8Array(bonds.length);
  const bondMarks = new Uint8Array(bonds.length);
  for (let b = 0; b < bonds.length; b++) {
    const [first, second, order, mark] = bonds[b]!;
    bondAtoms[2 * b] = first;
    bondAtoms[2 * b + 1] = second;
    bondOrders[b] = order;
    bondMarks[b] = mark ?? BondMark.none;
  }
  return assembleMolecule({
    name: input.name ?? '',
    elements,
    charges,
    isotopes,
    radicals,
    hydrogens,
    bondAtoms,
    bondOrders,
    bondMarks,
    coordinates,
    dimension,
    labels: labelled ? atoms.map((atom, i) => atom.label ?? String(i + 1)) : null,
    stated: input.stated ?? [],
    stereoGroups: input.stereoGroups ?? [],
    residues: null,
    uncertainty: null,
    occupancies: null,
    doubtfulBonding: null,
  });
}

/** Number of bonds of an atom to other atoms of the list. */
export function degree(molecule: Molecule, atom: number): number {
  return molecule.neighbourStart[atom + 1]! - molecule.neighbourStart[atom]!;
}

/** Neighbours of an atom, a view without copying. */
export function neighboursOf(molecule: Molecule, atom: number): Uint32Array {
  return molecule.neighbours.subarray(molecule.neighbourStart[atom], molecule.neighbourStart[atom + 1]);
}

/** The bond between two atoms, or -1. */
export function bondBetween(molecule: Molecule, first: number, second: number): number {
  for (let k = molecule.neighbourStart[first]!; k < molecule.neighbourStart[first + 1]!; k++) {
    if (molecule.neighbours[k] === second) return molecule.neighbourBonds[k]!;
  }
  return -1;
}

/** Hydrogens of an atom, listed ones (of any isotope) and implicit ones together. */
export function hydrogenCount(molecule: Molecule, atom: number): number {
  let count = molecule.hydrogens[atom]!;
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.elements[molecule.neighbours[k]!] === 1) count++;
  }
  return count;
}

/** Whether an atom has three finite coordinates. */
export function isLocated(molecule: Molecule, atom: number): boolean {
  const r = molecule.coordinates;
  return r !== null && Number.isFinite(r[3 * atom]! + r[3 * atom + 1]! + r[3 * atom + 2]!);
}

/** The label people see: the file's own, or element symbol and 1-based number. */
export function atomLabel(molecule: Molecule, atom: number, symbol: (element: number) => string): string {
  return molecule.labels?.[atom] ?? `${symbol(molecule.elements[atom]!)}${atom + 1}`;
}
