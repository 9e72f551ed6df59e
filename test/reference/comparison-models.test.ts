/**
 * Found against intended over published three-dimensional models, spoiled as files spoil them, with known inversions.
 *
 * The intention of each model is its own configuration written as a notation, some centres of it inverted; so which
 * centres must be found inverted is known beforehand.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { assembleMolecule, type Molecule, type StatedStereo } from '../../core/chemistry/molecule.ts';
import { compareEntry, type Examined } from '../../core/comparison/compare.ts';
import { Intention } from '../../core/comparison/intention.ts';
import { fragmentsOf } from '../../core/comparison/fragment.ts';
import { initialColours, refine } from '../../core/comparison/refinement.ts';
import { isAskedFor } from '../../core/comparison/units.ts';
import type { Docket } from '../../core/docket.ts';
import { examine } from '../../core/examine.ts';
import { DEFAULT_LIMITS } from '../../core/formats/format.ts';
import { sdfFormat } from '../../core/formats/sdf.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';
import { randomNumbers, type Spoiling, spoil } from './perturbed.ts';

const files = ['poses/cdk2.sdf', 'mmff94/structures.sdf'].map(name => sharedData(name));
const available = files.every(file => file !== null);
const ROUNDS = 4;

const examined = (molecule: Molecule): Examined => ({ molecule, docket: examine(molecule) });

function modelsOf(path: string): Molecule[] {
  return readFileSync(path, 'utf8')
    .split(/(?<=^\$\$\$\$\r?\n)/m)
    .flatMap(text => {
      const bytes = new TextEncoder().encode(text);
      const [entry] = text.trim() === '' ? [] : sdfFormat.parse({ entry: 1, line: 1, bytes }, DEFAULT_LIMITS);
      return entry?.molecule ? [entry.molecule] : [];
    });
}

/** The configuration of a docket as a notation, the given units inverted. */
function notation(molecule: Molecule, docket: Docket, inverted: ReadonlySet<number>): Molecule {
  const stated: StatedStereo[] = [];
  docket.units.forEach(({ unit }, u) => {
    const sense = inverted.has(u) ? -unit.sense : unit.sense;
    const [first, second] = unit.ends;
    if (sense === 0 || !first) return;
    if (unit.kind === 'centre') {
      const [a, b, c, d] = first.ligands;
      // A unit's sense looks with the last ligand away; a notation looks from the first: an even permutation of the four.
      stated.push({
        kind: 'centre',
        atom: first.atom,
        ligands: [d!, c!, b!, a!],
        turn: sense === 1 ? 'clockwise' : 'anticlockwise',
      });
    } else if (unit.kind === 'double-bond' && second) {
      stated.push({
        kind: 'double-bond',
        ends: [first.atom, second.atom],
        references: [first.ligands[0]!, second.ligands[0]!],
        side: sense === 1 ? 'same' : 'opposite',
      });
    }
  });
  return assembleMolecule({ ...molecule, coordinates: null, dimension: 0, stated });
}

/**
 * Whether no two atoms on which the units rest are alike, stereochemistry aside: then no exchange of atoms can call other
 * centres inverted than those that were.
 */
function withoutSymmetry(molecule: Molecule, docket: Docket, asked: readonly number[]): boolean {
  const { list, nodeOf } = fragmentsOf(molecule);
  const [fragment] = list;
  if (!fragment) return false;
  const { colours } = refine(fragment, initialColours(fragment, 'skeletal'));
  const nodes = new Set<number>();
  for (const u of asked) {
    for (const { atom, ligands } of docket.units[u]!.unit.ends) {
      for (const each of [atom, ...ligands]) if (each >= 0 && nodeOf[each]! >= 0) nodes.add(nodeOf[each]!);
    }
  }
  return new Set([...nodes].map(node => colours[node])).size === nodes.size;
}

/** Whether every centre keeps three located neighbours when hydrogens are left out (a P-H phosphine does not). */
function heavyEnough(molecule: Molecule, docket: Docket, centres: readonly number[]): boolean {
  return centres.every(u => {
    const ligands = docket.units[u]!.unit.ends[0]!.ligands;
    return ligands.filter(ligand => ligand >= 0 && molecule.elements[ligand] !== 1).length >= 3;
  });
}

describe('found against intended over published models', () => {
  it.skipIf(!available)(`names exactly the inverted centres (skipped when ${SHARED_DATA_ABSENT})`, () => {
    const random = randomNumbers(4);
    const differing: string[] = [];
    let compared = 0;
    for (const molecule of files.flatMap(file => modelsOf(file!))) {
      const docket = examine(molecule);
      const asked = docket.units.flatMap((unit, u) => (isAskedFor(unit) ? [u] : []));
      const centres = asked.filter(u => docket.units[u]!.unit.kind === 'centre');
      if (centres.length === 0 || docket.molecules.length > 1) continue;
      if (!withoutSymmetry(molecule, docket, asked) || !heavyEnough(molecule, docket, centres)) continue;
      for (let round = 0; round < ROUNDS; round++) {
        const wrong = new Set(
          round === 0 ? [] : round === 1 ? centres : centres.filter(() => random() < 0.4),
        );
        const intended = notation(molecule, docket, wrong);
        const spoiling: Spoiling = {
          withoutHydrogens: random() < 1 / 3,
          orders:
            random() < 0.25
              ? 'single'
              : random() < 0.3
                ? 'aromatic'
                : random() < 0.3
                  ? 'wrong'
                  : 'as written',
          protonatedOtherwise: random() < 0.3,
        };
        const spoiled = spoil(molecule, spoiling, random);
        const result = compareEntry(
          examined(spoiled.molecule),
          new Intention('', intended, examine(intended)),
          examined,
        );
        compared++;
        const found = result.units
          .filter(({ verdict }) => verdict === 'inverted')
          .flatMap(({ modelAtoms }) => modelAtoms ?? [])
          .map(atom => spoiled.order[atom]!)
          .sort((a, b) => a - b);
        const expected = [...wrong].map(u => docket.units[u]!.unit.atoms[0]!).sort((a, b) => a - b);
        const lettered = centres.filter(u => 'RS'.includes(docket.units[u]!.descriptor ?? '-'));
        const relation =
          wrong.size === 0
            ? 'same'
            : wrong.size === centres.length
              ? 'enantiomer'
              : wrong.size === 1 && lettered.length >= 2
                ? 'epimer'
                : 'diastereomer';
        if (result.relation !== relation || found.join(' ') !== expected.join(' ')) {
          differing.push(
            `${molecule.name} ${JSON.stringify(spoiling)}: ${result.relation} ${result.difference ?? ''} [${found.join(' ')}] expected ${relation} [${expected.join(' ')}] ${result.warnings.join('; ')}`,
          );
        }
      }
    }
    expect(compared).toBeGreaterThan(500);
    expect(differing).toEqual([]);
  });
});
