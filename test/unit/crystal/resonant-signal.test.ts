/** The expected resonant signal. */
import { describe, expect, it } from 'vitest';
import { friedif, parseFormula, tabulatedDispersion } from '../../../core/crystal/resonant-signal.ts';
import { elementNumber } from '../../../core/chemistry/elements.ts';
import { seeded } from '../../molecules.ts';

const values = (wavelength: number) => {
  const table = tabulatedDispersion(wavelength);
  if (!table) throw new Error('no table');
  return table;
};
const formula = (text: string): Map<string, number> => {
  const counts = parseFormula(text);
  if (!counts) throw new Error(text);
  return counts;
};

describe('Friedif', () => {
  it('is 34 for alanine with copper radiation (Flack & Bernardinelli, Chirality 2008, 20, 681; from memory)', () => {
    expect(Math.round(friedif(formula('C3 H7 N O2'), values(1.54184)) ?? 0)).toBe(34);
  });

  it('agrees with a sum over random structures and reflections', () => {
    // ⟨D²⟩ and ⟨A⟩ taken over random phases: the definition, not the closed formula.
    const counts = formula('C4 H9 N O2 S');
    const table = values(1.54184);
    const atoms = [...counts].flatMap(([symbol, count]) =>
      Array.from({ length: count }, () => ({
        f: (elementNumber(symbol) ?? 0) + (table.get(symbol)?.real ?? 0),
        g: table.get(symbol)?.imaginary ?? 0,
      })),
    );
    const random = seeded(7);
    let squares = 0;
    let mean = 0;
    const rounds = 40_000;
    for (let round = 0; round < rounds; round++) {
      let [a, b, c, d] = [0, 0, 0, 0];
      for (const { f, g } of atoms) {
        const phase = 2 * Math.PI * random();
        const [cos, sin] = [Math.cos(phase), Math.sin(phase)];
        a += f * cos - g * sin;
        b += f * sin + g * cos;
        c += f * cos + g * sin;
        d += -f * sin + g * cos;
      }
      const plus = a * a + b * b;
      const minus = c * c + d * d;
      squares += (plus - minus) ** 2;
      mean += (plus + minus) / 2;
    }
    const measured = (1e4 * Math.sqrt(squares / rounds)) / (mean / rounds);
    const closed = friedif(counts, table) ?? 0;
    expect(Math.abs(measured / closed - 1)).toBeLessThan(0.03);
  });

  it('vanishes for one element alone, and needs values for every element', () => {
    expect(friedif(formula('S8'), values(0.71073))).toBeCloseTo(0);
    expect(friedif(formula('C Os'), values(0.71073))).toBeNull();
    expect(tabulatedDispersion(1.2)).toBeNull();
  });

  it('reads formulas and refuses what is none', () => {
    expect(formula('C24 H30 Br0.5 O8')).toEqual(
      new Map([
        ['C', 24],
        ['H', 30],
        ['Br', 0.5],
        ['O', 8],
      ]),
    );
    expect(parseFormula('C24 Q3')).toBeNull();
    expect(parseFormula('')).toBeNull();
  });
});
