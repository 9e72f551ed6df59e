/** The independent molecules of one crystal (Z′ > 1) compared with each other: the same hand, opposite hands, or other stereoisomers. */
import { connectedComponents } from '../chemistry/components.ts';
import { assembleMolecule, type Molecule } from '../chemistry/molecule.ts';
import { identityOf } from '../comparison/consistency.ts';
import type { Docket } from '../docket.ts';
import { applyOperator, type SymmetryOperator } from './operator.ts';
import { type Cell, cellMatrix, type Matrix, multiply } from './cell.ts';

export interface IndependentRelation {
  /** 1-based numbers of two molecules of the entry. */
  readonly first: number;
  readonly second: number;
  readonly relation: 'same hand' | 'opposite hands' | 'other stereoisomers' | 'undecided';
  /** R.m.s. distance in Å after an inversion that would map one onto the other, where they have opposite hands. */
  readonly pseudoInversion: number | null;
  readonly message: string;
}

/** R.m.s. distance below which two molecules of opposite hands are related by a pseudo-inversion, Å (ours, no source). */
const PSEUDO_INVERSION = 0.5;

/** One component of a molecule as a molecule of its own. */
export function componentOf(molecule: Molecule, atoms: readonly number[]): Molecule {
  const place = new Map(atoms.map((atom, i) => [atom, i]));
  const bonds: number[] = [];
  for (let b = 0; b < molecule.bondCount; b++) {
    if (place.has(molecule.bondAtoms[2 * b]!) && place.has(molecule.bondAtoms[2 * b + 1]!)) bonds.push(b);
  }
  const r = molecule.coordinates;
  const coordinates = r ? new Float64Array(3 * atoms.length) : null;
  if (r && coordinates)
    atoms.forEach((atom, i) => coordinates.set(r.subarray(3 * atom, 3 * atom + 3), 3 * i));
  return assembleMolecule({
    name: molecule.name,
    elements: Uint8Array.from(atoms, atom => molecule.elements[atom]!),
    charges: Int8Array.from(atoms, atom => molecule.charges[atom]!),
    isotopes: Uint16Array.from(atoms, atom => molecule.isotopes[atom]!),
    radicals: Uint8Array.from(atoms, atom => molecule.radicals[atom]!),
    hydrogens: Uint8Array.from(atoms, atom => molecule.hydrogens[atom]!),
    bondAtoms: Uint32Array.from(
      bonds.flatMap(b => [
        place.get(molecule.bondAtoms[2 * b]!)!,
        place.get(molecule.bondAtoms[2 * b + 1]!)!,
      ]),
    ),
    bondOrders: Uint8Array.from(bonds, b => molecule.bondOrders[b]!),
    bondMarks: new Uint8Array(bonds.length),
    coordinates,
    dimension: molecule.dimension,
    labels: molecule.labels ? atoms.map(atom => molecule.labels![atom]!) : null,
    stated: [],
    stereoGroups: [],
    residues: null,
    uncertainty: null,
    occupancies: null,
    doubtfulBonding: null,
  });
}

function reflected(molecule: Molecule): Molecule {
  return { ...molecule, coordinates: molecule.coordinates?.map(value => -value) ?? null };
}

/** Compares every molecule with the first of its compound. Molecules without stereogenic units are left out. */
export function compareIndependent(
  molecule: Molecule,
  operators: readonly SymmetryOperator[],
  cell: Cell | null,
  examineOne: (molecule: Molecule) => Docket,
): IndependentRelation[] {
  const { count, of } = connectedComponents(molecule);
  if (count < 2) return [];
  const lists: number[][] = Array.from({ length: count }, () => []);
  for (let atom = 0; atom < molecule.atomCount; atom++) lists[of[atom]!]!.push(atom);
  const firsts = new Map<string, { id: number; part: Molecule; own: string | null; mirror: string | null }>();
  const relations: IndependentRelation[] = [];
  lists.forEach((atoms, index) => {
    const part = componentOf(molecule, atoms);
    const docket = examineOne(part);
    if (!docket.units.some(({ unit }) => unit.labile === null)) return;
    const { compound, configuration } = identityOf(part, docket);
    const id = index + 1;
    const earlier = firsts.get(compound);
    if (!earlier) {
      const other = reflected(part);
      firsts.set(compound, {
        id,
        part,
        own: configuration,
        mirror: identityOf(other, examineOne(other)).configuration,
      });
      return;
    }
    relations.push(relationOf(earlier, { id, part, configuration }, operators, cell));
  });
  return relations;
}

function relationOf(
  earlier: { id: number; part: Molecule; own: string | null; mirror: string | null },
  later: { id: number; part: Molecule; configuration: string | null },
  operators: readonly SymmetryOperator[],
  cell: Cell | null,
): IndependentRelation {
  const base = { first: earlier.id, second: later.id, pseudoInversion: null };
  const said = `molecules ${earlier.id} and ${later.id}`;
  if (earlier.own === null || later.configuration === null) {
    return { ...base, relation: 'undecided', message: `${said}: a centre is not decided` };
  }
  if (later.configuration === earlier.own) {
    return {
      ...base,
      relation: 'same hand',
      message:
        earlier.own === earlier.mirror
          ? `${said}: the same, and achiral`
          : `${said}: the same compound in the same hand`,
    };
  }
  if (later.configuration !== earlier.mirror) {
    return {
      ...base,
      relation: 'other stereoisomers',
      message: `${said}: other stereoisomers of one compound`,
    };
  }
  const distance = cell ? inversionDistance(earlier.part, later.part, operators, cell) : null;
  const near = distance !== null && distance < PSEUDO_INVERSION;
  return {
    ...base,
    relation: 'opposite hands',
    pseudoInversion: distance === null ? null : Math.round(100 * distance) / 100,
    message: `${said}: opposite hands of one compound${
      near
        ? `, related by a pseudo-inversion (${distance.toFixed(2)} Å r.m.s.): check for missed symmetry`
        : ', not related by an inversion: a racemate in this group'
    }`,
  };
}

/** Least r.m.s. distance of the heavy atoms of one molecule, inverted, to the nearest of the same element of an image of the other, Å. */
function inversionDistance(
  a: Molecule,
  b: Molecule,
  operators: readonly SymmetryOperator[],
  cell: Cell,
): number | null {
  const m = cellMatrix(cell);
  const inverse = inverted(m);
  const centred = (
    molecule: Molecule,
    operator: SymmetryOperator | null,
  ): [number, number, number, number][] => {
    const points: [number, number, number, number][] = [];
    for (let i = 0; i < molecule.atomCount; i++) {
      if (molecule.elements[i] === 1) continue;
      const r = molecule.coordinates!;
      let p: [number, number, number] = [r[3 * i]!, r[3 * i + 1]!, r[3 * i + 2]!];
      if (operator) p = multiply(m, applyOperator(operator, multiply(inverse, p)));
      points.push([...p, molecule.elements[i]!]);
    }
    const mean = [0, 1, 2].map(k => points.reduce((sum, p) => sum + p[k]!, 0) / points.length);
    return points.map(p => [p[0] - mean[0]!, p[1] - mean[1]!, p[2] - mean[2]!, p[3]]);
  };
  const first = centred(a, null);
  let best: number | null = null;
  for (const operator of operators) {
    const second = centred(b, operator);
    let sum = 0;
    for (const p of first) {
      let nearest = Infinity;
      for (const q of second) {
        if (q[3] !== p[3]) continue;
        nearest = Math.min(nearest, (p[0] + q[0]) ** 2 + (p[1] + q[1]) ** 2 + (p[2] + q[2]) ** 2);
      }
      sum += nearest;
    }
    const rms = Math.sqrt(sum / first.length);
    if (Number.isFinite(rms) && (best === null || rms < best)) best = rms;
  }
  return best;
}

function inverted(m: Matrix): Matrix {
  // Upper triangular.
  const [a, b, c, , e, f, , , i] = m as [
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  return [1 / a, -b / (a * e), (b * f - c * e) / (a * e * i), 0, 1 / e, -f / (e * i), 0, 0, 1 / i];
}
