/** Molecules for tests: random ones, and the same molecule renumbered, mirrored, rotated or with ligands exchanged. */
import fc from 'fast-check';
import {
  type AtomInput,
  assembleMolecule,
  type BondOrder,
  buildMolecule,
  IMPLICIT_HYDROGEN,
  type Molecule,
  type StatedStereo,
} from '../core/chemistry/molecule.ts';

/** A source of pseudo-random numbers from 0 to 1 that a seed fixes (mulberry32). */
export function seeded(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** A random permutation of 0 … n - 1. */
export function shuffled(n: number, random: () => number): number[] {
  const order = Array.from({ length: n }, (_, i) => i);
  for (let i = n - 1; i > 0; i--) {
    const j = Math.floor(random() * (i + 1));
    [order[i], order[j]] = [order[j]!, order[i]!];
  }
  return order;
}

/** The same molecule with atom i at place `place[i]` and its bonds in another order. */
export function renumbered(molecule: Molecule, place: readonly number[], random: () => number): Molecule {
  const n = molecule.atomCount;
  const at = <T extends Uint8Array | Int8Array | Uint16Array>(old: T, fresh: T): T => {
    for (let i = 0; i < n; i++) fresh[place[i]!] = old[i]!;
    return fresh;
  };
  const bondOrder = shuffled(molecule.bondCount, random);
  const bondAtoms = new Uint32Array(2 * molecule.bondCount);
  const bondOrders = new Uint8Array(molecule.bondCount);
  const bondMarks = new Uint8Array(molecule.bondCount);
  bondOrder.forEach((to, from) => {
    bondAtoms[2 * to] = place[molecule.bondAtoms[2 * from]!]!;
    bondAtoms[2 * to + 1] = place[molecule.bondAtoms[2 * from + 1]!]!;
    bondOrders[to] = molecule.bondOrders[from]!;
    bondMarks[to] = molecule.bondMarks[from]!;
  });
  let coordinates: Float64Array | null = null;
  if (molecule.coordinates) {
    coordinates = new Float64Array(3 * n);
    for (let i = 0; i < n; i++) {
      for (let c = 0; c < 3; c++) coordinates[3 * place[i]! + c] = molecule.coordinates[3 * i + c]!;
    }
  }
  const move = (ligand: number): number => (ligand < 0 ? ligand : place[ligand]!);
  return assembleMolecule({
    ...molecule,
    elements: at(molecule.elements, new Uint8Array(n)),
    charges: at(molecule.charges, new Int8Array(n)),
    isotopes: at(molecule.isotopes, new Uint16Array(n)),
    radicals: at(molecule.radicals, new Uint8Array(n)),
    hydrogens: at(molecule.hydrogens, new Uint8Array(n)),
    bondAtoms,
    bondOrders,
    bondMarks,
    coordinates,
    labels: null,
    stated: molecule.stated.map(stereo => movedStereo(stereo, move)),
    stereoGroups: molecule.stereoGroups.map(group => ({ ...group, atoms: group.atoms.map(move) })),
    occupancies: null,
    residues: null,
    uncertainty: null,
    doubtfulBonding: null,
  });
}

function movedStereo(stereo: StatedStereo, move: (ligand: number) => number): StatedStereo {
  switch (stereo.kind) {
    case 'centre':
      return { ...stereo, atom: move(stereo.atom), ligands: four(stereo.ligands.map(move)) };
    case 'double-bond':
      return { ...stereo, ends: two(stereo.ends.map(move)), references: two(stereo.references.map(move)) };
    default:
      return { ...stereo, ends: two(stereo.ends.map(move)), ligands: four(stereo.ligands.map(move)) };
  }
}

const four = (list: readonly number[]): [number, number, number, number] => [
  list[0]!,
  list[1]!,
  list[2]!,
  list[3]!,
];
const two = (list: readonly number[]): [number, number] => [list[0]!, list[1]!];

/** The mirror image: coordinates reflected in the plane z = 0, every stated turn reversed. */
export function mirrored(molecule: Molecule): Molecule {
  const coordinates = molecule.coordinates?.slice() ?? null;
  if (coordinates && molecule.dimension === 3) {
    for (let i = 2; i < coordinates.length; i += 3) coordinates[i] = -coordinates[i]!;
  }
  const bondMarks = molecule.bondMarks.map(mark => (mark === 1 ? 2 : mark === 2 ? 1 : mark));
  return {
    ...molecule,
    coordinates,
    bondMarks: molecule.dimension === 2 ? bondMarks : molecule.bondMarks,
    stated: molecule.stated.map(stereo =>
      stereo.kind === 'double-bond'
        ? stereo
        : { ...stereo, turn: stereo.turn === 'clockwise' ? 'anticlockwise' : 'clockwise' },
    ),
  };
}

/** The molecule in another place and orientation; `random` gives the rotation (uniform, after Shoemake 1992) and the shift. */
export function moved(molecule: Molecule, random: () => number): Molecule {
  const r = molecule.coordinates;
  if (!r) return molecule;
  const [u, v, w] = [random(), 2 * Math.PI * random(), 2 * Math.PI * random()];
  const a = Math.sqrt(1 - u) * Math.sin(v);
  const b = Math.sqrt(1 - u) * Math.cos(v);
  const c = Math.sqrt(u) * Math.sin(w);
  const d = Math.sqrt(u) * Math.cos(w);
  const m = [
    [1 - 2 * (b * b + c * c), 2 * (a * b - c * d), 2 * (a * c + b * d)],
    [2 * (a * b + c * d), 1 - 2 * (a * a + c * c), 2 * (b * c - a * d)],
    [2 * (a * c - b * d), 2 * (b * c + a * d), 1 - 2 * (a * a + b * b)],
  ] as const;
  const shift = [100 * random() - 50, 100 * random() - 50, 100 * random() - 50];
  const coordinates = new Float64Array(r.length);
  for (let i = 0; i < molecule.atomCount; i++) {
    for (let k = 0; k < 3; k++) {
      coordinates[3 * i + k] =
        m[k]![0] * r[3 * i]! + m[k]![1] * r[3 * i + 1]! + m[k]![2] * r[3 * i + 2]! + shift[k]!;
    }
  }
  return { ...molecule, coordinates };
}

const VALENCES: readonly (readonly [number, number])[] = [
  [6, 4],
  [6, 4],
  [6, 4],
  [6, 4],
  [7, 3],
  [8, 2],
  [9, 1],
  [17, 1],
  [35, 1],
];

/** Random molecules without coordinates: trees with up to three ring closures, some double bonds, isotopes now and then, and every possible centre stated. */
export const randomMolecule: fc.Arbitrary<Molecule> = fc
  .record({ seed: fc.nat(), size: fc.integer({ min: 5, max: 16 }), rings: fc.integer({ min: 0, max: 3 }) })
  .map(({ seed, size, rings }) => moleculeFrom(seeded(seed), size, rings));

function moleculeFrom(random: () => number, size: number, rings: number): Molecule {
  const pick = <T>(list: readonly T[]): T => list[Math.floor(random() * list.length)]!;
  const atoms: { element: number; free: number; isotope: number }[] = [{ element: 6, free: 4, isotope: 0 }];
  const bonds: [number, number, BondOrder][] = [];
  while (atoms.length < size) {
    const open = atoms.flatMap((atom, i) => (atom.free > 0 ? [i] : []));
    if (open.length === 0) break;
    const parent = pick(open);
    const [element, valence] = pick(VALENCES);
    atoms[parent]!.free--;
    const isotope = element === 6 && random() < 0.03 ? 13 : 0;
    atoms.push({ element, free: valence - 1, isotope });
    bonds.push([parent, atoms.length - 1, 1]);
  }
  const bonded = (a: number, b: number): boolean =>
    bonds.some(([x, y]) => (x === a && y === b) || (x === b && y === a));
  for (let i = 0; i < rings; i++) {
    const a = Math.floor(random() * atoms.length);
    const b = Math.floor(random() * atoms.length);
    if (a === b || bonded(a, b) || atoms[a]!.free === 0 || atoms[b]!.free === 0) continue;
    atoms[a]!.free--;
    atoms[b]!.free--;
    bonds.push([a, b, 1]);
  }
  for (const bond of bonds) {
    if (random() < 0.12 && atoms[bond[0]]!.free > 0 && atoms[bond[1]]!.free > 0) {
      atoms[bond[0]]!.free--;
      atoms[bond[1]]!.free--;
      bond[2] = 2;
    }
  }
  const inputs: AtomInput[] = atoms.map(({ element, free, isotope }) => ({
    element,
    isotope,
    hydrogens: free,
  }));
  return statedAtRandom(buildMolecule({ atoms: inputs, bonds }), random);
}

/** The molecule with a configuration stated at random for every carbon of four ligands and every double bond. */
export function statedAtRandom(plain: Molecule, random: () => number): Molecule {
  const stated: StatedStereo[] = [];
  for (let i = 0; i < plain.atomCount; i++) {
    const ligands = [...plain.neighbours.subarray(plain.neighbourStart[i], plain.neighbourStart[i + 1])];
    if (plain.elements[i] !== 6 || plain.hydrogens[i]! + ligands.length !== 4 || ligands.length < 3) continue;
    if (plain.hydrogens[i] === 1) ligands.push(IMPLICIT_HYDROGEN);
    stated.push({
      kind: 'centre',
      atom: i,
      ligands: four(ligands),
      turn: random() < 0.5 ? 'clockwise' : 'anticlockwise',
    });
  }
  for (let bond = 0; bond < plain.bondCount; bond++) {
    if (plain.bondOrders[bond] !== 2) continue;
    const a = plain.bondAtoms[2 * bond]!;
    const b = plain.bondAtoms[2 * bond + 1]!;
    const x = side(plain, a, b);
    const y = side(plain, b, a);
    if (x < 0 || y < 0) continue;
    stated.push({
      kind: 'double-bond',
      ends: [a, b],
      references: [x, y],
      side: random() < 0.5 ? 'same' : 'opposite',
    });
  }
  return { ...plain, stated };
}

/** Random molecules of two or three like branches on one carbon, so that rankings come to the rules beyond the first; rings of the branches closed through the core now and then. */
export const symmetricMolecule: fc.Arbitrary<Molecule> = fc
  .record({ seed: fc.nat(), size: fc.integer({ min: 2, max: 6 }), copies: fc.integer({ min: 2, max: 3 }) })
  .map(({ seed, size, copies }) => symmetricFrom(seeded(seed), size, copies));

function symmetricFrom(random: () => number, size: number, copies: number): Molecule {
  const pick = <T>(list: readonly T[]): T => list[Math.floor(random() * list.length)]!;
  const branch: { element: number; free: number }[] = [{ element: 6, free: 3 }];
  const inner: [number, number, BondOrder][] = [];
  while (branch.length < size) {
    const open = branch.flatMap((atom, i) => (atom.free > 0 ? [i] : []));
    if (open.length === 0) break;
    const parent = pick(open);
    const [element, valence] = pick(VALENCES);
    const double = valence > 1 && branch[parent]!.free > 1 && random() < 0.25;
    branch[parent]!.free -= double ? 2 : 1;
    inner.push([parent, branch.length, double ? 2 : 1]);
    branch.push({ element, free: valence - (double ? 2 : 1) });
  }
  const atoms: AtomInput[] = [{ element: 6, hydrogens: 4 - copies }];
  const bonds: [number, number, BondOrder][] = [];
  for (let copy = 0; copy < copies; copy++) {
    const first = atoms.length;
    atoms.push(...branch.map(({ element, free }) => ({ element, hydrogens: free })));
    bonds.push(
      [0, first, 1],
      ...inner.map(([a, b, order]) => [first + a, first + b, order] as [number, number, BondOrder]),
    );
  }
  // A heteroatom on the core, or the last carbons of two branches joined.
  const last = branch.findLastIndex(({ element, free }) => element === 6 && free > 0);
  if (last > 0 && random() < 0.4) {
    const [one, other] = [1 + last, 1 + branch.length + last];
    bonds.push([one, other, 1]);
    for (const atom of [one, other]) atoms[atom] = { element: 6, hydrogens: branch[last]!.free - 1 };
  }
  if (random() < 0.7) {
    atoms[0] = { element: 6, hydrogens: 3 - copies };
    bonds.push([0, atoms.length, 1]);
    atoms.push({ element: pick([9, 17, 35]) });
  }
  return statedAtRandom(buildMolecule({ atoms, bonds }), random);
}

function side(molecule: Molecule, atom: number, other: number): number {
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    if (molecule.neighbours[k] !== other) return molecule.neighbours[k]!;
  }
  return -1;
}
