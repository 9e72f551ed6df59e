/**
 * The validation suite for the CIP rules, label for label, from coordinates, from drawings and from SMILES.
 *
 * Source: R. M. Hanson, S. Musacchio, J. W. Mayfield, M. J. Vainio, A. Yerin, D. Redkin, J. Chem. Inf. Model. 2018, 58, 1755.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { examine } from '../../core/examine.ts';
import { DEFAULT_LIMITS, type Entry } from '../../core/formats/format.ts';
import { readEntries } from '../../core/formats/registry.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';

async function entriesOf(path: string): Promise<Entry[]> {
  async function* once(): AsyncGenerator<Uint8Array> {
    yield readFileSync(path);
  }
  const entries: Entry[] = [];
  for await (const entry of readEntries(once(), path, DEFAULT_LIMITS)) entries.push(entry);
  return entries;
}

/** Labels as the suite writes them: `<1-based atom><descriptor>`, both ends of a unit that spans several atoms. */
function labelsOf(entry: Entry): string {
  const labels: [number, string][] = [];
  for (const { unit, descriptor } of examine(entry.molecule!).units) {
    if (unit.labile !== null || descriptor === null) continue;
    for (const atom of unit.atoms) labels.push([atom + 1, descriptor]);
  }
  labels.sort((a, b) => a[0] - b[0] || (a[1] < b[1] ? -1 : 1));
  return labels.map(([atom, letter]) => `${atom}${letter}`).join(' ');
}

const item = (entry: Entry, name: string): string =>
  entry.data.find(data => data.name === name)?.value.trim() ?? '';

/** Helices and biaryl axes cannot be written in SMILES. */
const BEYOND_SMILES = new Set(['VS010', 'VS011', 'VS023', 'VS055', 'VS073', 'VS086', 'VS158']);

describe('the CIP validation suite', () => {
  const space = sharedData('cip/suite-3d.sdf');
  it.skipIf(space === null)(`from coordinates in space (skipped where ${SHARED_DATA_ABSENT})`, async () => {
    const entries = await entriesOf(space!);
    expect(entries).toHaveLength(200);
    const differing = entries
      .map(entry => ({ id: entry.name, expected: item(entry, 'CIP_LABELS'), found: labelsOf(entry) }))
      .filter(({ expected, found }) => expected !== found);
    expect(differing).toEqual([]);
  });

  const drawings = sharedData('cip/suite-2d.sdf');
  it.skipIf(drawings === null)(`from drawings (skipped where ${SHARED_DATA_ABSENT})`, async () => {
    const entries = await entriesOf(drawings!);
    expect(entries).toHaveLength(200);
    const differing = entries
      .map(entry => ({ id: entry.name, expected: item(entry, 'CIP_LABELS'), found: labelsOf(entry) }))
      .filter(({ expected, found }) => expected !== found);
    expect(differing).toEqual([]);
  });

  const smiles = sharedData('cip/suite.smi');
  it.skipIf(smiles === null)(`from SMILES (skipped where ${SHARED_DATA_ABSENT})`, async () => {
    const expected = new Map(
      readFileSync(smiles!, 'utf8')
        .trim()
        .split('\n')
        .map(line => line.split('\t'))
        .map(([, id, labels]) => [id!, labels!]),
    );
    const entries = await entriesOf(smiles!);
    expect(entries).toHaveLength(200);
    const differing = entries
      .filter(entry => !BEYOND_SMILES.has(entry.name))
      .map(entry => ({ id: entry.name, expected: expected.get(entry.name), found: labelsOf(entry) }))
      .filter(labels => labels.expected !== labels.found);
    expect(differing).toEqual([]);
  });
});
