/** Cages in space whose symmetry exchanges the ligands of every atom have no stereogenic unit (common practice, no source). */
import { describe, expect, it } from 'vitest';
import { type BondOrder, buildMolecule, type Molecule } from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';

type Point = readonly [number, number, number];

/** A hydrocarbon cage: carbons at the points, bonds where they are closer than `reach`, hydrogens left implicit. */
function cage(
  points: readonly Point[],
  reach: number,
  extra: readonly { element: number; at: Point; on: number }[] = [],
): Molecule {
  const bonds: [number, number, BondOrder][] = [];
  const degree = points.map(() => 0);
  const join = (i: number, j: number): void => {
    bonds.push([i, j, 1]);
    degree[i] = (degree[i] ?? 0) + 1;
    if (j < points.length) degree[j] = (degree[j] ?? 0) + 1;
  };
  for (let i = 0; i < points.length; i++) {
    for (let j = i + 1; j < points.length; j++) {
      const [a, b] = [points[i]!, points[j]!];
      if (Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]) < reach) join(i, j);
    }
  }
  extra.forEach(({ on }, k) => join(on, points.length + k));
  return buildMolecule({
    atoms: [
      ...points.map(([x, y, z], i) => ({ element: 6, hydrogens: 4 - degree[i]!, x, y, z })),
      ...extra.map(({ element, at: [x, y, z] }) => ({ element, hydrogens: element === 7 ? 2 : 0, x, y, z })),
    ],
    bonds,
    dimension: 3,
  });
}

/** Bridgeheads on the corners of a tetrahedron, CH2 on those of an octahedron. */
const ADAMANTANE: readonly Point[] = [
  [0.89, 0.89, 0.89],
  [0.89, -0.89, -0.89],
  [-0.89, 0.89, -0.89],
  [-0.89, -0.89, 0.89],
  [1.76, 0, 0],
  [-1.76, 0, 0],
  [0, 1.76, 0],
  [0, -1.76, 0],
  [0, 0, 1.76],
  [0, 0, -1.76],
];

const CUBANE: readonly Point[] = [0, 1, 2, 3, 4, 5, 6, 7].map(
  k => [1.56 * (k & 1), 1.56 * ((k >> 1) & 1), 1.56 * (k >> 2)] as const,
);

describe('symmetric cages in space', () => {
  it('adamantane and cubane have no unit', () => {
    expect(examine(cage(ADAMANTANE, 1.7)).units).toEqual([]);
    expect(examine(cage(CUBANE, 1.7)).units).toEqual([]);
  });

  it('a substituted bridgehead of adamantane is no unit either', () => {
    const amantadine = cage(ADAMANTANE, 1.7, [{ element: 7, at: [1.7, 1.7, 1.7], on: 0 }]);
    expect(examine(amantadine).units.filter(({ unit }) => unit.atoms[0] === 0)).toEqual([]);
  });
});
