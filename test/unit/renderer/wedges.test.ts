/** Wedges drawn for what a model shows are read back to the same letters. */
import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { assembleMolecule, bondBetween, type Molecule } from '../../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';
import { DEFAULT_LIMITS } from '../../../core/formats/format.ts';
import { smilesOf } from '../../../core/formats/smiles-writer.ts';
import { smilesFormat } from '../../../core/formats/smiles.ts';
import { type Layout, skeletonOf, wedgesFor } from '../../../renderer/drawing/skeleton.ts';
import { rdkitModule } from '../../rdkit.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../../shared.ts';

function read(smiles: string): Molecule {
  const [entry] = smilesFormat.parse(
    { entry: 1, line: 1, bytes: new TextEncoder().encode(`${smiles}\n`) },
    DEFAULT_LIMITS,
  );
  if (!entry?.molecule) throw new Error(`${smiles}: ${entry?.error?.message ?? 'nothing'}`);
  return entry.molecule;
}

async function layoutOf(molecule: Molecule, units: readonly LabelledUnit[]): Promise<Layout | null> {
  const rdkit = await rdkitModule();
  const skeleton = skeletonOf(molecule, units);
  const { smiles, order } = smilesOf(skeleton.molecule);
  const laid = rdkit.get_mol(smiles, JSON.stringify({ removeHs: false, sanitize: false }));
  if (!laid) return null;
  try {
    laid.set_new_coords();
    const json = JSON.parse(laid.get_json()) as {
      molecules: { conformers: { coords: number[][] }[] }[];
    };
    const layout = new Float64Array(2 * molecule.atomCount).fill(Number.NaN);
    order.forEach((atom, k) => {
      const own = skeleton.atoms[atom];
      const point = json.molecules[0]?.conformers[0]?.coords[k];
      if (own !== undefined && point) layout.set(point.slice(0, 2), 2 * own);
    });
    return layout;
  } finally {
    laid.delete();
  }
}

/** The molecule as it would stand in a file of drawings. */
function drawn(molecule: Molecule, units: readonly LabelledUnit[], layout: Layout): Molecule {
  const bondAtoms = molecule.bondAtoms.slice();
  const bondMarks = new Uint8Array(molecule.bondCount);
  for (const { from, to, mark } of wedgesFor(molecule, units, layout)) {
    const bond = bondBetween(molecule, from, to);
    bondAtoms[2 * bond] = from;
    bondAtoms[2 * bond + 1] = to;
    bondMarks[bond] = mark;
  }
  const coordinates = new Float64Array(3 * molecule.atomCount);
  for (let i = 0; i < molecule.atomCount; i++) {
    coordinates[3 * i] = layout[2 * i]!;
    coordinates[3 * i + 1] = layout[2 * i + 1]!;
  }
  return assembleMolecule({ ...molecule, bondAtoms, bondMarks, coordinates, dimension: 2, stated: [] });
}

const letters = (molecule: Molecule): string[] =>
  examine(molecule)
    .units.filter(({ unit }) => unit.labile === null)
    .map(({ descriptor, unit }) => `${unit.atoms.join('-')} ${descriptor ?? unit.state}`);

describe('wedges', () => {
  // Amino acids and the demo's compound, written by hand.
  test.each([
    'C[C@H](N)C(=O)O',
    'C[C@@H](N)C(=O)O',
    'C[C@@H]1C[C@H](O)[C@@H](F)CN1C(=O)/C=C/c1ccc(nc1)[S@@](C)=O',
    'F[C@](Cl)(Br)I',
    'O[C@H]1CCCC[C@@H]1O',
    'CC[P@](=O)(OC)c1ccccc1',
  ])('of %s are read back to the same letters', async smiles => {
    const molecule = read(smiles);
    const { units } = examine(molecule);
    const layout = await layoutOf(molecule, units);
    expect(layout).not.toBeNull();
    expect(letters(drawn(molecule, units, layout!))).toEqual(letters(molecule));
  });

  const data = sharedData('chembl-chiral/chembl-20-chiral.smi');
  test.skipIf(data === null)(
    `of published structures are read back to the same letters${data === null ? `: ${SHARED_DATA_ABSENT}` : ''}`,
    async () => {
      const lines = readFileSync(data!, 'utf8')
        .split('\n')
        .filter(line => line.trim() !== '')
        .slice(1, 301);
      let same = 0;
      let compared = 0;
      const different: string[] = [];
      for (const line of lines) {
        const smiles = line.split(/\s/u)[0]!;
        let molecule: Molecule;
        try {
          molecule = read(smiles);
        } catch {
          continue;
        }
        const { units } = examine(molecule);
        if (units.length === 0) continue;
        const layout = await layoutOf(molecule, units);
        if (!layout) continue;
        compared++;
        const before = letters(molecule);
        const after = letters(drawn(molecule, units, layout));
        // A wedge may find no unambiguous bond (several centres in a row of rings): then the drawing says less, never another letter.
        const wrong = before.filter((text, k) => {
          const [atoms, letter] = text.split(' ');
          const again = after.find(one => one.startsWith(`${atoms} `)) ?? after[k];
          return /^[RSEZ]$/u.test(letter!) && /^[RSEZ]$/u.test(again?.split(' ')[1] ?? '') && again !== text;
        });
        if (wrong.length > 0) different.push(`${smiles}: ${before.join(', ')} became ${after.join(', ')}`);
        if (before.join() === after.join()) same++;
      }
      expect(compared).toBeGreaterThan(100);
      expect(different).toEqual([]);
      expect(same / compared).toBeGreaterThan(0.9);
    },
  );

  test('turn with the drawing: a rotated layout has the same sense', () => {
    const molecule = read('C[C@H](N)C(=O)O');
    const { units } = examine(molecule);
    fc.assert(
      fc.property(fc.double({ min: 0, max: 2 * Math.PI, noNaN: true }), angle => {
        const base = [-1.2, 0, 0, 0, 0, 1.1, 1.1, -0.5, 1.9, 0.2, 1.2, -1.6];
        const layout = new Float64Array(base.length);
        for (let k = 0; k < base.length; k += 2) {
          layout[k] = base[k]! * Math.cos(angle) - base[k + 1]! * Math.sin(angle);
          layout[k + 1] = base[k]! * Math.sin(angle) + base[k + 1]! * Math.cos(angle);
        }
        expect(letters(drawn(molecule, units, layout))).toEqual(letters(molecule));
      }),
    );
  });
});
