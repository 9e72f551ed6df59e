/** The docket: every stereogenic unit of one model with its descriptor, its ranking and what the comparison says of it. */
import type { Ligand, StereoUnit } from './perception/unit.ts';

export type Descriptor = 'R' | 'S' | 'r' | 's' | 'M' | 'P' | 'm' | 'p' | 'E' | 'Z' | 'e' | 'z';

/** The sequence rules in their order of application (IUPAC 2013, P-92; Rule 6: J. Chem. Inf. Model. 2018, 58, 1755). */
export type RuleName = '1a' | '1b' | '2' | '3' | '4a' | '4b' | '4c' | '5' | '6';

export type Verdict = 'agrees' | 'inverted' | 'relabelled' | 'flat' | 'open' | 'missing';
export type Relation =
  | 'same'
  | 'enantiomer'
  | 'epimer'
  | 'diastereomer'
  | 'other compound'
  | 'undecided'
  | 'unmatched'
  | 'mixed';

/** One ranked ligand: its place and what separated it from the one above. */
export interface RankedLigand {
  readonly ligand: Ligand;
  /** 1 is the highest; two that no rule separates share a rank. */
  readonly rank: number;
  /** The rule and sphere that separated it from the ligand above; null for the first. */
  readonly decidedBy: RuleName | null;
  readonly sphere: number | null;
  /** Which end of a two-ended unit, 1 or 2; null for one-ended units. */
  readonly end: 1 | 2 | null;
}

/** A node of the digraph as the ladder shows it. */
export interface LadderNode {
  /** 0-based atom, or `IMPLICIT_HYDROGEN`, `LONE_PAIR`. */
  readonly atom: number;
  /** `real`; `duplicate` of a multiple bond or a ring closure; `implicit` hydrogen or lone pair. */
  readonly nature: 'real' | 'multiple-bond duplicate' | 'ring duplicate' | 'implicit';
  /** What was compared, ready to read: "O", "(C)", "13C", "R", "l". */
  readonly text: string;
}

/** One compared sphere: for each of the two ligands the sets, in the order in which they were compared. */
export interface LadderSphere {
  readonly sphere: number;
  /** One list for each set; sets stand in order of rank of the atom they hang on. */
  readonly above: readonly (readonly LadderNode[])[];
  readonly below: readonly (readonly LadderNode[])[];
  /** Index of the first set and of the place in it that differ; null where the sphere is the same. */
  readonly difference: { readonly set: number; readonly place: number } | null;
}

/** The comparison of two neighbours in rank, sphere by sphere, to the first difference. */
export interface LadderStep {
  readonly above: Ligand;
  readonly below: Ligand;
  readonly end: 1 | 2 | null;
  /** Null: no rule separates them. */
  readonly rule: RuleName | null;
  readonly sphere: number | null;
  readonly spheres: readonly LadderSphere[];
  /** A sentence: "Rule 1a, sphere 2: (O,O,H) before (O,H,H)". */
  readonly summary: string;
}

/** The account of how the ligands of a unit were ranked. */
export interface Ladder {
  readonly steps: readonly LadderStep[];
  /** Auxiliary descriptors used by Rules 3 to 5: atom, end atom for bonds, and letter. */
  readonly auxiliary: readonly { readonly atoms: readonly number[]; readonly descriptor: string }[];
  /** Size of the digraph when the ranking was done. */
  readonly nodes: number;
}

/** A stereogenic unit with its ranking. */
export interface LabelledUnit {
  readonly unit: StereoUnit;
  readonly descriptor: Descriptor | null;
  readonly ranking: readonly RankedLigand[];
  /** Signed volume with the ligands in order of priority, Å³: negative is R. */
  readonly signedVolume: number | null;
  /** Torsion between the top-ranked ligands of both ends, degrees. */
  readonly torsion: number | null;
  readonly torsionAtoms: readonly [number, number, number, number] | null;
  readonly warnings: readonly string[];
}

/** Statements about a whole molecule (one connected component). */
export interface MoleculeStatement {
  /** 1-based number of the component within the entry. */
  readonly id: number;
  readonly atoms: readonly number[];
  readonly formula: string;
}

export interface Settings {
  /** Firmness below which geometry counts as flat; the default is ours, no source. */
  readonly flatFirmness: number;
  /** Multiples of σ below which a signed volume counts as flat. */
  readonly flatSigmas: number;
  /** Most nodes a digraph may grow to before the ranking stops without a letter. */
  readonly digraphLimit: number;
  /** Labile units get letters and count in the ranking of others, as if they were configurationally stable. */
  readonly labileToo: boolean;
}

export const DEFAULT_SETTINGS: Settings = {
  flatFirmness: 0.2,
  flatSigmas: 3,
  digraphLimit: 20_000,
  labileToo: false,
};

/** The stereogenic units of one model. */
export interface Docket {
  readonly units: readonly LabelledUnit[];
  /** All that perception took for a possible unit, the stereogenic ones among them; the ladder needs them. */
  readonly candidates: readonly StereoUnit[];
  readonly molecules: readonly MoleculeStatement[];
  readonly warnings: readonly string[];
}
