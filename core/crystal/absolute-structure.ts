/**
 * What the diffraction data say of the absolute structure, read from the Flack (or Hooft) parameter and its standard
 * uncertainty by the criteria of H. D. Flack and G. Bernardinelli, J. Appl. Cryst. 2000, 33, 1143.
 */
import type { Measured } from '../formats/cif-syntax.ts';
import type { CrystalDescription } from './description.ts';

export type AbsoluteStructure =
  | 'established'
  | 'conditional'
  | 'wrong-hand'
  | 'twinned'
  | 'undetermined'
  | 'not-applicable';

export interface AbsoluteStructureVerdict {
  readonly verdict: AbsoluteStructure;
  /** A sentence for people. */
  readonly reason: string;
  /** The parameter the verdict rests on. */
  readonly parameter: 'flack' | 'hooft' | null;
  /** x/u and (1 − x)/u; null without a usable parameter. */
  readonly deviations: { readonly fromZero: number; readonly fromOne: number } | null;
}

/** Below this u the data decide by themselves (Flack & Bernardinelli 2000). */
const STRONG = 0.04;
/** Below this u they decide for a sample known to be enantiopure (Flack & Bernardinelli 2000). */
const ENANTIOPURE_SUFFICIENT = 0.1;
/** Multiples of u that count as agreement. */
const REACH = 3;
/** Rounding of decimal figures in binary. */
const ROUNDING = 1e-9;

/** A value with its u as figures are written: 0.02(4), -0.042(13); u has two digits where the first is a 1. */
function figure(value: number, u: number): string {
  let digits = Math.max(0, -Math.floor(Math.log10(u) + ROUNDING));
  const leading = u * 10 ** digits;
  if (leading < 2 - ROUNDING && Math.abs(leading - Math.round(leading)) > 1e-6) digits++;
  return `${value.toFixed(digits)}(${Math.round(u * 10 ** digits)})`;
}

function usable(parameter: Measured | null): (Measured & { uncertainty: number }) | null {
  if (!parameter || parameter.uncertainty === null || !(parameter.uncertainty > 0)) return null;
  return { value: parameter.value, uncertainty: parameter.uncertainty };
}

/** Reads x with its u. */
function judge(
  x: number,
  u: number,
  name: string,
  enantiopure: boolean,
): Omit<AbsoluteStructureVerdict, 'parameter'> {
  const shown = `${name} ${figure(x, u)}`;
  const deviations = { fromZero: x / u, fromOne: (1 - x) / u };
  if (u >= ENANTIOPURE_SUFFICIENT - ROUNDING) {
    return {
      verdict: 'undetermined',
      reason: `${shown}: u is 0.10 or more, the data do not tell the hands apart`,
      deviations,
    };
  }
  if (Math.abs(x) <= REACH * u + ROUNDING) {
    if (u < STRONG - ROUNDING) {
      return { verdict: 'established', reason: `${shown}: within 3u of 0, u below 0.04`, deviations };
    }
    return enantiopure
      ? {
          verdict: 'established',
          reason: `${shown}: within 3u of 0, u below 0.10, the sample stated to be enantiopure`,
          deviations,
        }
      : {
          verdict: 'conditional',
          reason: `${shown}: within 3u of 0, but u from 0.04 to 0.10 suffices only for a sample known to be enantiopure`,
          deviations,
        };
  }
  if (Math.abs(1 - x) <= REACH * u + ROUNDING) {
    if (u < STRONG - ROUNDING) {
      return {
        verdict: 'wrong-hand',
        reason: `${shown}: within 3u of 1, u below 0.04: the crystal has the opposite hand; invert the model and refine again`,
        deviations,
      };
    }
    return enantiopure
      ? {
          verdict: 'wrong-hand',
          reason: `${shown}: within 3u of 1, u below 0.10, the sample stated to be enantiopure: invert the model and refine again`,
          deviations,
        }
      : {
          verdict: 'conditional',
          reason: `${shown}: within 3u of 1, which points to the opposite hand, but u from 0.04 to 0.10 suffices only for a sample known to be enantiopure`,
          deviations,
        };
  }
  if (x > 0 && x < 1) {
    return {
      verdict: 'twinned',
      reason: `${shown}: more than 3u from both 0 and 1: an inversion twin, both hands in the crystal`,
      deviations,
    };
  }
  return {
    verdict: 'undetermined',
    reason: `${shown}: outside the range from 0 to 1 by more than 3u; check the data and the s.u.`,
    deviations,
  };
}

/**
 * The verdict on the absolute structure.
 *
 * @param enantiopure whether the user states that the sample is enantiopure.
 */
export function absoluteStructure(
  crystal: Pick<CrystalDescription, 'sohncke' | 'centrosymmetric' | 'macromolecule' | 'flack' | 'hooft'>,
  enantiopure = false,
): AbsoluteStructureVerdict {
  const x = usable(crystal.flack);
  const y = usable(crystal.hooft);
  const none = { parameter: null, deviations: null } as const;
  if (crystal.macromolecule) {
    return {
      verdict: 'not-applicable',
      reason: 'a macromolecule: its hand is known from its residues',
      ...none,
    };
  }
  if (crystal.sohncke === false) {
    const flack =
      crystal.flack && !crystal.centrosymmetric
        ? `; the Flack parameter ${x ? figure(x.value, x.uncertainty) : crystal.flack.value} then describes the orientation of the crystal, not the hand of a molecule`
        : '';
    return {
      verdict: 'not-applicable',
      reason: `${crystal.centrosymmetric ? 'a centrosymmetric group' : 'the group has operations of the second kind'}: both hands of every molecule are in the cell${flack}`,
      ...none,
    };
  }
  if (crystal.sohncke === null) {
    return { verdict: 'undetermined', reason: 'the file gives no usable symmetry', ...none };
  }
  if (!x && !y) {
    const stated = crystal.flack ?? crystal.hooft;
    return {
      verdict: 'undetermined',
      reason: stated
        ? `the file gives ${crystal.flack ? 'a Flack' : 'a Hooft'} parameter of ${stated.value} without a standard uncertainty`
        : 'the file gives no Flack or Hooft parameter',
      ...none,
    };
  }
  if (x && y) {
    const apart = Math.abs(x.value - y.value);
    if (apart > REACH * Math.hypot(x.uncertainty, y.uncertainty) + ROUNDING) {
      return {
        verdict: 'undetermined',
        reason: `Flack x ${figure(x.value, x.uncertainty)} and Hooft y ${figure(y.value, y.uncertainty)} contradict each other`,
        ...none,
      };
    }
  }
  // Where both are given, the one with the smaller u.
  const hooft = y !== null && (x === null || y.uncertainty < x.uncertainty);
  const used = hooft ? y : x!;
  return {
    ...judge(used.value, used.uncertainty, hooft ? 'Hooft y' : 'Flack x', enantiopure),
    parameter: hooft ? 'hooft' : 'flack',
  };
}

/** What the letters of a crystal structure stand for. */
export interface Standing {
  /** `absolute`; `relative`: only the relation between the centres is fixed; `racemic`: both hands are in the cell. */
  readonly scope: 'absolute' | 'relative' | 'racemic';
  /** A sentence to stand beside every descriptor. */
  readonly text: string;
}

/** `_chemical_absolute_configuration` in words (core CIF dictionary). */
const DECLARED: Readonly<Record<'ad' | 'rm' | 'rmad' | 'syn' | 'unk', string>> = {
  ad: 'declared by the author to be established by anomalous dispersion',
  rm: 'declared by reference to a known centre',
  rmad: 'declared by reference to a known centre and by anomalous dispersion',
  syn: 'declared from the synthesis',
  unk: 'declared unknown by the author',
};

/** What one crystal does not tell. */
export const ONE_CRYSTAL = 'One crystal is not the bulk: the sample may hold the other hand.';

/** What stands beside the descriptors of a crystal structure. */
export function standing(crystal: CrystalDescription, judged: AbsoluteStructureVerdict): Standing {
  if (crystal.macromolecule) {
    return { scope: 'absolute', text: 'the hand of a macromolecule is known from its residues' };
  }
  if (crystal.sohncke === false) {
    return {
      scope: 'racemic',
      text: 'both hands are in the cell: the letters hold for the molecule as listed and its mirror image alike',
    };
  }
  const declared = crystal.declared ? DECLARED[crystal.declared] : null;
  const reference = crystal.declared === 'rm' || crystal.declared === 'rmad' || crystal.declared === 'syn';
  switch (judged.verdict) {
    case 'established':
      return {
        scope: 'absolute',
        text: `established by diffraction${declared ? `; ${declared}` : ''}. ${ONE_CRYSTAL}`,
      };
    case 'wrong-hand':
      return {
        scope: 'absolute',
        text: `the data fix the opposite hand: every R is S in the crystal${declared ? `; ${declared}` : ''}. ${ONE_CRYSTAL}`,
      };
    case 'twinned':
      return {
        scope: 'relative',
        text: `an inversion twin: both hands in the crystal${declared ? `; ${declared}` : ''}`,
      };
    default: {
      const first =
        judged.verdict === 'conditional'
          ? 'established by diffraction only if the sample is enantiopure'
          : 'not established by diffraction';
      if (reference && declared) return { scope: 'absolute', text: `${first}; ${declared}. ${ONE_CRYSTAL}` };
      return {
        scope: 'relative',
        text: `${first}${declared ? `; ${declared}` : ''}: the letters are relative. ${ONE_CRYSTAL}`,
      };
    }
  }
}
