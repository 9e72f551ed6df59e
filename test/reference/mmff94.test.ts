/**
 * MMFF94 against its published validation suite.
 *
 * Source of the energies: T. A. Halgren, J. Comput. Chem. 1996, 17, 490 and 1999, 20, 720 (500 structures, coordinates as they stand).
 */
import { describe, expect, it } from 'vitest';
import { Mmff94 } from '../../core/embedding/mmff94/energy.ts';
import { loadTables } from '../../core/embedding/resources.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';
import { readSuite } from '../unit/embedding/suite.ts';

const folder = sharedData('mmff94');

describe.skipIf(folder === null)(`MMFF94 validation suite${folder ? '' : ` (${SHARED_DATA_ABSENT})`}`, () => {
  it('gives the published energy of every structure within 0.01 kcal/mol', async () => {
    const { mmff94 } = await loadTables();
    const suite = await readSuite(folder!);
    expect(suite).toHaveLength(500);
    const off: unknown[] = [];
    for (const { name, molecule, energy } of suite) {
      const x = molecule.coordinates!;
      const field = new Mmff94(molecule, mmff94);
      const found = field.energy(x, new Float64Array(x.length));
      if (!(Math.abs(found - energy) < 0.01)) off.push({ name, found, energy, terms: field.terms(x) });
    }
    expect(off).toEqual([]);
  });

  it('has an analytic gradient equal to finite differences', async () => {
    const { mmff94 } = await loadTables();
    const suite = await readSuite(folder!);
    const step = 1e-5;
    let worst = 0;
    for (const { molecule } of suite.filter((_, at) => at % 10 === 0)) {
      const x = molecule.coordinates!.slice();
      const field = new Mmff94(molecule, mmff94);
      const g = new Float64Array(x.length);
      const spare = new Float64Array(x.length);
      field.energy(x, g);
      const scale = Math.max(1, ...g.map(Math.abs));
      for (let i = 0; i < x.length; i++) {
        const kept = x[i]!;
        x[i] = kept + step;
        const above = field.energy(x, spare);
        x[i] = kept - step;
        const below = field.energy(x, spare);
        x[i] = kept;
        worst = Math.max(worst, Math.abs((above - below) / (2 * step) - g[i]!) / scale);
      }
    }
    expect(worst).toBeLessThan(1e-5);
  });

  it('conserves the total charge', async () => {
    const { mmff94 } = await loadTables();
    for (const { name, molecule } of await readSuite(folder!)) {
      // 13 files charge a sulfoxide's S +2 beside a double bond to O, against the neutral molecule that the energies are for.
      if (molecule.charges.some((charge, i) => charge === 2 && molecule.elements[i] === 16)) continue;
      const formal = molecule.charges.reduce((a, b) => a + b, 0);
      const partial = new Mmff94(molecule, mmff94).charges.reduce((a, b) => a + b, 0);
      expect(Math.abs(formal - partial), name).toBeLessThan(1e-6);
    }
  });
});
