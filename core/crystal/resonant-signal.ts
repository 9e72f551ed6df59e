/**
 * The resonant signal to be expected from composition and wavelength: Friedif, the r.m.s. difference between Friedel
 * opposites over their mean, in units of 10⁻⁴ (H. D. Flack & G. Bernardinelli, Acta Cryst. 2008, A64, 484; H. D. Flack &
 * U. Shmueli, Acta Cryst. 2007, A63, 257).
 *
 * For atoms without a centrosymmetric substructure, ⟨D²⟩ = 8[Σf² Σf″² − (Σff″)²] and ⟨A⟩ = Σ(f² + f″²), f being Z + f′: the
 * value at sin θ/λ = 0. It is an expectation before the experiment and overrules no measured u.
 */
import { elementNumber } from '../chemistry/elements.ts';
import type { CrystalDescription, Dispersion } from './description.ts';

/** Elements and their numbers in a formula such as `C24 H30 O8`; null where it cannot be read. */
export function parseFormula(text: string): Map<string, number> | null {
  const counts = new Map<string, number>();
  for (const word of text.trim().split(/[\s,]+/u)) {
    if (word === '') continue;
    // Charges stand at the end of a formula.
    if (/^(?:\d*[+-]|[+-]\d*)$/u.test(word)) continue;
    const match = /^([A-Z][a-z]?)(\d+(?:\.\d+)?)?$/u.exec(word);
    const symbol = match?.[1];
    if (symbol === undefined || elementNumber(symbol) === undefined) return null;
    counts.set(symbol, (counts.get(symbol) ?? 0) + Number(match?.[2] ?? 1));
  }
  return counts.size > 0 ? counts : null;
}

/** f′ and f″ for two laboratory wavelengths (International Tables C, 4.2.6.8 and 6.1.1.4). */
const TABLE_MO = `H 0 0;Li -0.0003 0.0001;B 0.0013 0.0007;C 0.0033 0.0016;N 0.0061 0.0033;O 0.0106 0.006;F 0.0171 0.0103;
Na 0.0362 0.0249;Mg 0.0486 0.0363;Al 0.0645 0.0514;Si 0.0817 0.0704;P 0.1023 0.0942;S 0.1246 0.1234;Cl 0.1484 0.1585;
K 0.2009 0.2494;Ca 0.2262 0.3064;Mn 0.3368 0.7283;Fe 0.3463 0.8444;Co 0.3494 0.9721;Ni 0.3393 1.1124;Cu 0.3201 1.2651;
Zn 0.2839 1.4301;Se -0.0929 2.2259;Br -0.2901 2.4595;Ru -1.2594 0.8363;Pd -0.9988 1.0072;I -0.4742 1.8119;
Pt -1.7033 8.3905`;
const TABLE_CU = `H 0 0;C 0.0181 0.0091;N 0.0311 0.018;O 0.0492 0.0322;F 0.0727 0.0534;Na 0.1353 0.1239;Mg 0.1719 0.1771;
Al 0.213 0.2455;Si 0.2541 0.3302;P 0.2955 0.4335;S 0.3331 0.5567;Cl 0.3639 0.7018;K 0.3868 1.0657;Ca 0.3641 1.2855;
Br -0.6763 1.2805;I -0.3257 6.8362`;

function table(text: string): ReadonlyMap<string, Dispersion> {
  return new Map(
    text.split(';').map(entry => {
      const [symbol = '', real = '', imaginary = ''] = entry.trim().split(' ');
      return [symbol, { real: Number(real), imaginary: Number(imaginary) }];
    }),
  );
}

/** Wavelengths of the tables, Å (mean of Kα1 and Kα2), and how near an experiment's must be. */
const RADIATIONS = [
  { name: 'Mo Kα', wavelength: 0.71073, values: table(TABLE_MO) },
  { name: 'Cu Kα', wavelength: 1.54184, values: table(TABLE_CU) },
] as const;
const WAVELENGTH_REACH = 0.003;

/** Dispersion values from the built-in tables; null where there are none for the wavelength. */
export function tabulatedDispersion(wavelength: number): ReadonlyMap<string, Dispersion> | null {
  return RADIATIONS.find(each => Math.abs(each.wavelength - wavelength) < WAVELENGTH_REACH)?.values ?? null;
}

export interface ResonantSignal {
  /** 10⁴ times the r.m.s. Friedel difference over the mean; null where it cannot be said. */
  readonly friedif: number | null;
  /** Where the dispersion values come from, or why there is no figure. */
  readonly source: string;
}

/** Friedif of a composition. */
export function friedif(
  counts: ReadonlyMap<string, number>,
  values: ReadonlyMap<string, Dispersion>,
): number | null {
  let ff = 0;
  let gg = 0;
  let fg = 0;
  for (const [symbol, count] of counts) {
    const dispersion =
      values.get(symbol === 'D' ? 'H' : symbol) ?? (symbol === 'H' ? { real: 0, imaginary: 0 } : null);
    if (!dispersion) return null;
    const f = elementNumber(symbol)! + dispersion.real;
    const g = dispersion.imaginary;
    ff += count * f * f;
    gg += count * g * g;
    fg += count * f * g;
  }
  return ff > 0 ? (1e4 * Math.sqrt(Math.max(0, 8 * (ff * gg - fg * fg)))) / (ff + gg) : null;
}

/** The expected signal of a crystal: values from its CIF first, from the tables else. */
export function resonantSignal(crystal: CrystalDescription): ResonantSignal {
  if (crystal.formula === null) return { friedif: null, source: 'the file gives no formula' };
  const counts = parseFormula(crystal.formula);
  if (!counts) return { friedif: null, source: `the formula ${crystal.formula} cannot be read` };
  const own = friedif(counts, crystal.dispersion);
  if (own !== null) return { friedif: own, source: 'dispersion values of the file' };
  if (crystal.wavelength === null) return { friedif: null, source: 'the file gives no wavelength' };
  const values = tabulatedDispersion(crystal.wavelength);
  if (!values) return { friedif: null, source: `no dispersion values for ${crystal.wavelength} Å` };
  const tabulated = friedif(counts, new Map([...values, ...crystal.dispersion]));
  return tabulated === null
    ? { friedif: null, source: 'no dispersion values for an element of the formula' }
    : { friedif: tabulated, source: 'dispersion values of International Tables C' };
}
