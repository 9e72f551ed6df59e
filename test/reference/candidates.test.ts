/**
 * Perception against the CIP validation suite: every labelled unit is among the candidates with its arrangement clear,
 * and what is found does not depend on numbering, place or hand.
 *
 * Source: R. M. Hanson, S. Musacchio, J. W. Mayfield, M. J. Vainio, A. Yerin, D. Redkin, J. Chem. Inf. Model. 2018, 58, 1755.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { Molecule } from '../../core/chemistry/molecule.ts';
import { DEFAULT_SETTINGS } from '../../core/docket.ts';
import { DEFAULT_LIMITS, type Entry } from '../../core/formats/format.ts';
import { readEntries } from '../../core/formats/registry.ts';
import { perceiveUnits } from '../../core/perception/perceive.ts';
import { orderParity } from '../../core/perception/stated.ts';
import type { StereoUnit } from '../../core/perception/unit.ts';
import { mirrored, moved, renumbered, seeded, shuffled } from '../molecules.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

async function entriesOf(path: string): Promise<Entry[]> {
  async function* once(): AsyncGenerator<Uint8Array> {
    yield readFileSync(path);
  }
  const entries: Entry[] = [];
  for await (const entry of readEntries(once(), path, DEFAULT_LIMITS)) entries.push(entry);
  return entries;
}

const unitsOf = (molecule: Molecule): StereoUnit[] => perceiveUnits(molecule, DEFAULT_SETTINGS).units;

const keyOf = (unit: StereoUnit): string => `${unit.kind} ${[...unit.atoms].sort((a, b) => a - b).join('-')}`;

/** Whether a unit changes its sense in the mirror. */
const isChiralSense = (unit: StereoUnit): boolean =>
  unit.kind !== 'double-bond' && !(unit.kind === 'cumulene' && unit.planar);

const space = sharedData('cip/suite-3d.sdf');
const reason = `(skipped where ${SHARED_DATA_ABSENT})`;

describe.each(['cip/suite-3d.sdf', 'cip/suite-2d.sdf'])('%s', name => {
  const path = sharedData(name);
  it.skipIf(path === null)(
    `every labelled atom belongs to a stable candidate that is clear ${reason}`,
    async () => {
      const lacking: string[] = [];
      let candidates = 0;
      let labels = 0;
      for (const entry of await entriesOf(path!)) {
        const clear = unitsOf(entry.molecule!).filter(unit => unit.labile === null && unit.state === 'clear');
        candidates += clear.length;
        const atoms = new Set(clear.flatMap(unit => unit.atoms.map(atom => atom + 1)));
        const published = entry.data.find(data => data.name === 'CIP_LABELS')?.value.trim() ?? '';
        for (const label of published === '' ? [] : published.split(/\s+/u)) {
          labels++;
          if (!atoms.has(Number.parseInt(label, 10))) lacking.push(`${entry.name} ${label}`);
        }
      }
      expect(lacking).toEqual([]);
      // Ranking is the expensive step: candidates stay near in number to what the suite labels.
      expect(labels).toBeGreaterThan(400);
      expect(candidates).toBeLessThan(1.5 * labels);
    },
  );
});

describe('what is found in space', () => {
  it.skipIf(space === null)(
    `is the same for any numbering and place, and reversed in the mirror ${reason}`,
    async () => {
      const random = seeded(11);
      for (const entry of await entriesOf(space!)) {
        const molecule = entry.molecule!;
        const place = shuffled(molecule.atomCount, random);
        const here = unitsOf(molecule);
        const there = new Map(
          unitsOf(moved(renumbered(molecule, place, random), random)).map(unit => [keyOf(unit), unit]),
        );
        const image = new Map(unitsOf(mirrored(molecule)).map(unit => [keyOf(unit), unit]));
        expect(there.size, entry.name).toBe(here.length);
        expect(image.size, entry.name).toBe(here.length);
        const map = (ligand: number): number => (ligand < 0 ? ligand : place[ligand]!);
        for (const unit of here) {
          const label = `${entry.name} ${keyOf(unit)}`;
          const reflected = image.get(keyOf(unit))!;
          expect(reflected.sense === unit.sense, label).toBe(unit.sense === 0 || !isChiralSense(unit));
          const same = there.get(keyOf({ ...unit, atoms: unit.atoms.map(map) }))!;
          expect(same, label).toBeDefined();
          expect(same.state, label).toBe(unit.state);
          expect(same.labile === null, label).toBe(unit.labile === null);
          if (unit.firmness !== null) expect(same.firmness!, label).toBeCloseTo(unit.firmness, 6);
          if (unit.kind === 'helix' || unit.kind === 'plane') continue;
          let parity = 1;
          for (const end of unit.ends) {
            const other = same.ends.find(candidate => candidate.atom === map(end.atom))!;
            parity *= orderParity(end.ligands.map(map), other.ligands);
          }
          expect(same.sense * parity, label).toBe(unit.sense);
          if (unit.signedVolume !== null) {
            expect(same.signedVolume! * parity, label).toBeCloseTo(unit.signedVolume, 6);
          }
        }
      }
    },
  );
});
