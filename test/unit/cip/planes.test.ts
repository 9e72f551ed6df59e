/**
 * Planar chirality on models built here.
 *
 * Witness: IUPAC 1996, Basic Terminology of Stereochemistry, entries planar chirality and pilot atom: seen from the
 * pilot atom, a to b to c clockwise is Rp, which is P. The published validation suite holds no example.
 */
import { describe, expect, it } from 'vitest';
import {
  type AtomInput,
  type BondOrder,
  buildMolecule,
  type Molecule,
} from '../../../core/chemistry/molecule.ts';
import { examine } from '../../../core/examine.ts';
import { mirrored, moved, renumbered, seeded, shuffled } from '../../molecules.ts';

/** A para-bridged benzene ring in the plane z = 0, the bridge above it, a bromine at `place` (1 to 4 of the free positions). */
function cyclophane(bridge: number, bromines: readonly number[]): Molecule {
  const atoms: AtomInput[] = [];
  const bonds: [number, number, BondOrder][] = [];
  for (let i = 0; i < 6; i++) {
    const angle = (i * Math.PI) / 3;
    atoms.push({ element: 6, x: 1.4 * Math.cos(angle), y: 1.4 * Math.sin(angle), z: 0 });
    bonds.push([i, (i + 1) % 6, i % 2 === 0 ? 2 : 1]);
  }
  // The plane atoms, then the chain between them, arched over the ring.
  const first = atoms.push({ element: 6, hydrogens: 2, x: 2.8, y: 0, z: 0.3 }) - 1;
  bonds.push([0, first, 1]);
  let previous = first;
  for (let k = 1; k <= bridge; k++) {
    const t = (k / (bridge + 1)) * Math.PI;
    const at =
      atoms.push({ element: 6, hydrogens: 2, x: 2.8 * Math.cos(t), y: 0, z: 1.2 + 2 * Math.sin(t) }) - 1;
    bonds.push([previous, at, 1]);
    previous = at;
  }
  const last = atoms.push({ element: 6, hydrogens: 2, x: -2.8, y: 0, z: 0.3 }) - 1;
  bonds.push([previous, last, 1], [3, last, 1]);
  const free = [1, 2, 4, 5];
  for (const place of free) {
    const angle = (place * Math.PI) / 3;
    const bromine = bromines.includes(place);
    const radius = bromine ? 3.3 : 2.5;
    const at =
      atoms.push({
        element: bromine ? 35 : 1,
        x: radius * Math.cos(angle),
        y: radius * Math.sin(angle),
        z: 0,
      }) - 1;
    bonds.push([place, at, 1]);
  }
  return buildMolecule({ atoms, bonds, dimension: 3 });
}

const planes = (molecule: Molecule): (string | null)[] =>
  examine(molecule)
    .units.filter(({ unit }) => unit.kind === 'plane')
    .map(({ descriptor }) => descriptor);

describe('planar chirality', () => {
  it('follows the rule: pilot above, a at +x, b the ring atom, c the brominated neighbour', () => {
    // Pilot atom over the ring, reached from a = (2.8, 0, 0.3); b = C1 at (1.4, 0, 0). The bromine on C2 (60° from x)
    // lies at positive y: seen from above, a to b runs to -x and c turns to +y, which is a turn to the right: clockwise, Rp.
    expect(planes(cyclophane(6, [1]))).toEqual(['P']);
    expect(planes(cyclophane(6, [5]))).toEqual(['M']);
  });

  it('gives the half turn about the pilot side the same answer and the mirror image the other', () => {
    expect(planes(cyclophane(6, [4]))).toEqual(['P']);
    expect(planes(cyclophane(6, [2]))).toEqual(['M']);
    expect(planes(mirrored(cyclophane(6, [1])))).toEqual(['M']);
  });

  it('finds none where reflection exchanges the sides or the ends', () => {
    expect(planes(cyclophane(6, []))).toEqual([]);
    expect(planes(cyclophane(6, [1, 5]))).toEqual([]);
    expect(planes(cyclophane(6, [1, 2]))).toEqual([]);
  });

  it('finds one where only a twofold axis relates the bromines', () => {
    expect(planes(cyclophane(6, [1, 4]))).toEqual(['P']);
  });

  it('does not depend on numbering or place', () => {
    const random = seeded(7);
    for (let trial = 0; trial < 50; trial++) {
      const molecule = cyclophane(6, [1]);
      const other = renumbered(moved(molecule, random), shuffled(molecule.atomCount, random), random);
      expect(planes(other)).toEqual(['P']);
    }
  });

  it('calls a plane labile where the bridge is long enough for the ring to turn', () => {
    const [unit] = examine(cyclophane(11, [1])).units;
    expect(unit?.unit.labile).toMatch(/bridge of 13 atoms/u);
    expect(unit?.descriptor).toBeNull();
  });
});
