/** What the record of an entry says of its crystal. */
import { absoluteStructure, type AbsoluteStructure, standing } from './absolute-structure.ts';
import type { CrystalDescription, DeclaredConfiguration } from './description.ts';
import { resonantSignal } from './resonant-signal.ts';

interface ParameterRecord {
  readonly x: number;
  readonly u: number | null;
}

export interface CrystalRecord {
  readonly spaceGroup: string | null;
  readonly sohncke: boolean | null;
  readonly flack: ParameterRecord | null;
  readonly hooft?: ParameterRecord;
  readonly absoluteStructure: AbsoluteStructure;
  readonly reason: string;
  /** x/u and (1 − x)/u. */
  readonly deviations?: { readonly fromZero: number; readonly fromOne: number };
  /** What the author declared. */
  readonly declared?: DeclaredConfiguration;
  /** What stands beside every descriptor. */
  readonly standing: string;
  readonly scope: 'absolute' | 'relative' | 'racemic';
  /** Expected resonant signal; the figure is 10⁴ times the r.m.s. Friedel difference over the mean. */
  readonly expectedSignal?: { readonly friedif: number | null; readonly source: string };
}

function parameter(measured: CrystalDescription['flack']): ParameterRecord | null {
  return measured ? { x: measured.value, u: measured.uncertainty } : null;
}

/** The record of a crystal. `enantiopure` is what the user states of the sample. */
export function crystalRecord(crystal: CrystalDescription, enantiopure: boolean): CrystalRecord {
  const judged = absoluteStructure(crystal, enantiopure);
  const { scope, text } = standing(crystal, judged);
  const hooft = parameter(crystal.hooft);
  const signal = crystal.macromolecule ? null : resonantSignal(crystal);
  const round = (value: number): number => Math.round(value * 100) / 100;
  return {
    spaceGroup: crystal.spaceGroup,
    sohncke: crystal.sohncke,
    flack: parameter(crystal.flack),
    ...(hooft && { hooft }),
    absoluteStructure: judged.verdict,
    reason: judged.reason,
    ...(judged.deviations && {
      deviations: { fromZero: round(judged.deviations.fromZero), fromOne: round(judged.deviations.fromOne) },
    }),
    ...(crystal.declared && { declared: crystal.declared }),
    standing: text,
    scope,
    ...(signal && {
      expectedSignal: {
        friedif: signal.friedif === null ? null : round(signal.friedif),
        source: signal.source,
      },
    }),
  };
}
