/**
 * The reasons beside the letters: the sequence rules that the validation suite says an entry needs are the rules our
 * rankings name, for the units that carry a label.
 *
 * Source: R. M. Hanson et al., J. Chem. Inf. Model. 2018, 58, 1755; column "rules" of `cip/suite.smi`, data item of the 3D file.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { examine, explainUnit } from '../../core/examine.ts';
import { DEFAULT_LIMITS } from '../../core/formats/format.ts';
import { readEntries } from '../../core/formats/registry.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

const ORDER = ['1a', '1b', '2', '3', '4a', '4b', '4c', '5', '6'];

/** The suite lists both ends of the two cumulenes here (Rule 1a at one, 5 at the other); elsewhere, as at VS188 or VS299, it lists only the last rule of a unit. */
const BOTH_ENDS: ReadonlyMap<string, string> = new Map([['VS232', '5']]);

describe('rules named by the ladder', () => {
  const space = sharedData('cip/suite-3d.sdf');
  const list = sharedData('cip/suite.smi');
  it.skipIf(space === null || list === null)(
    `are those the suite says each entry needs (skipped where ${SHARED_DATA_ABSENT})`,
    async () => {
      const needed = new Map(
        readFileSync(list!, 'utf8')
          .trim()
          .split('\n')
          .map(line => line.split('\t'))
          .map(columns => [columns[1]!, columns[5] ?? ''] as const),
      );
      async function* once(): AsyncGenerator<Uint8Array> {
        yield readFileSync(space!);
      }
      const differing: string[] = [];
      let entries = 0;
      let ladders = 0;
      for await (const entry of readEntries(once(), 'suite-3d.sdf', DEFAULT_LIMITS)) {
        const molecule = entry.molecule!;
        const docket = examine(molecule);
        const used = new Set<string>();
        docket.units.forEach((labelled, index) => {
          if (labelled.descriptor === null || labelled.unit.labile !== null) return;
          // The suite names the last rule each unit needs.
          const last = Math.max(...labelled.ranking.map(r => ORDER.indexOf(r.decidedBy ?? '1a')));
          used.add(ORDER[last]!);
          if (labelled.unit.kind === 'helix' || labelled.unit.kind === 'plane') return;
          // The ladder names the same rules as the ranking.
          const ladder = explainUnit(molecule, docket, index);
          ladders++;
          const named = ladder.steps.map(step => step.rule).filter(rule => rule !== null);
          const ranked = labelled.ranking.map(r => r.decidedBy).filter(rule => rule !== null);
          if (named.sort().join() !== ranked.sort().join())
            differing.push(
              `${entry.name} unit ${index + 1}: ladder ${named.join()}, ranking ${ranked.join()}`,
            );
        });
        const rules = ORDER.filter(rule => used.has(rule)).join();
        const expected = BOTH_ENDS.get(entry.name) ?? needed.get(entry.name)!;
        entries++;
        if (rules !== expected) differing.push(`${entry.name}: ${rules}, suite ${expected}`);
      }
      expect(entries).toBe(200);
      expect(ladders).toBeGreaterThan(400);
      expect(differing).toEqual([]);
    },
  );
});
