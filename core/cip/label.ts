/**
 * Descriptors for the candidate units of a molecule: which of them are stereogenic, how their ligands rank, and the
 * letter that follows.
 */
import { LONE_PAIR, type Molecule } from '../chemistry/molecule.ts';
import { symmetryClasses } from '../chemistry/symmetry.ts';
import type { Descriptor, LabelledUnit, RankedLigand, Settings } from '../docket.ts';
import type { StereoUnit, UnitEnd } from '../perception/unit.ts';
import { type AuxiliaryDescriptor, centreLetter, labelAuxiliary, pairLetter } from './auxiliary.ts';
import { Branches } from './branches.ts';
import { Digraph, DigraphLimitError } from './digraph.ts';
import { descriptorOf, isReflectionInvariant, Letter } from './letter.ts';
import { labelPlane } from './plane.ts';
import {
  NO_NODE,
  type Ranking,
  copyOf,
  isComplete,
  permutationParity,
  rankByConfiguration,
  rankByConstitution,
  rankByReference,
} from './ranking.ts';
import { rankingGraph } from './ranking-graph.ts';
import { resonanceForms } from './resonance.ts';
import { type UnitTable, unitTable } from './unit-table.ts';

/** How many ways undecided units are tried before a ranking that may rest on them is given up. */
const MOST_TRIALS = 16;

const UNSTATED_NEIGHBOUR =
  'the letter counts another unit, of which no configuration is stated, as none; once that is stated the letter may be another';

/** What the ranking of one unit came to. */
interface Outcome {
  readonly rankings: readonly Ranking[];
  readonly letter: Letter;
  /** Whether Rules 3 to 6 had a say, so that the configuration of other units matters. */
  readonly configurational: boolean;
  readonly nodes: number;
}

/** Ranks units of one molecule; keeps the digraph arrays from one unit to the next. */
export class Labeller {
  readonly digraph: Digraph;
  readonly table: UnitTable;
  readonly view: Branches;
  private readonly scratch: Branches;
  private readonly undecided: readonly number[];
  private readonly settings: Settings;
  private readonly labileToo: boolean;
  private classes: Int32Array | null = null;
  private readonly beyondLimit = new Set<string>();
  /** The auxiliary descriptors of the ranking done last. */
  auxiliary: readonly AuxiliaryDescriptor[] = [];

  constructor(molecule: Molecule, units: readonly StereoUnit[], settings: Settings) {
    this.digraph = new Digraph(molecule, rankingGraph(molecule), settings.digraphLimit);
    this.view = new Branches(this.digraph);
    this.scratch = new Branches(this.digraph);
    this.table = unitTable(molecule, units, settings.labileToo);
    this.labileToo = settings.labileToo;
    this.settings = settings;
    this.undecided = units.flatMap((unit, i) =>
      unit.sense === 0 && (settings.labileToo || unit.labile === null) ? [i] : [],
    );
  }

  /** Labels one unit; null when it is not stereogenic. A labile unit gets its ranking and, unless the settings ask for it, no letter. */
  label(index: number): LabelledUnit | null {
    const unit = this.table.units[index]!;
    const result = this.labelStable(index, unit);
    return result === null || unit.labile === null || this.labileToo
      ? result
      : { ...result, descriptor: null };
  }

  private labelStable(index: number, unit: StereoUnit): LabelledUnit | null {
    if (unit.kind === 'helix') return labelByTurn(unit);
    if (this.isBeyondLimit(unit)) return this.unfinished(unit);
    try {
      return unit.kind === 'plane'
        ? labelPlane(this.digraph.molecule, unit, this.settings)
        : this.labelByRank(index, unit);
    } catch (error) {
      if (!(error instanceof DigraphLimitError)) throw error;
      this.classes ??= symmetryClasses(this.digraph.molecule);
      this.beyondLimit.add(this.classOf(unit));
      return this.unfinished(unit);
    }
  }

  /** Ranks one end's ligands as they stand now and leaves the digraph and its view in place, for the ladder. */
  rankEnd(unitIndex: number, end: UnitEnd, reflected = false): { ranking: Ranking; ligands: number[] } {
    const ligands = this.start(end);
    const ranking = rankByConstitution(this.view, 0, ligands);
    this.auxiliary = [];
    if (!isComplete(ranking)) this.finish(unitIndex, ranking, ligands, reflected);
    return { ranking, ligands };
  }

  /** Whether a unit of the same symmetry class, so with the same digraph, has been found to outgrow the limit. */
  private isBeyondLimit(unit: StereoUnit): boolean {
    return this.beyondLimit.size > 0 && this.beyondLimit.has(this.classOf(unit));
  }

  private classOf(unit: StereoUnit): string {
    return unit.atoms
      .map(atom => this.classes![atom]!)
      .sort((a, b) => a - b)
      .join();
  }

  private unfinished(unit: StereoUnit): LabelledUnit {
    const { limit } = this.digraph;
    return withoutLetter(unit, [
      `no descriptor: the hierarchical digraph has more than ${limit} nodes (setting digraphLimit); the ranking was not finished`,
    ]);
  }

  private labelByRank(index: number, unit: StereoUnit): LabelledUnit | null {
    const own = this.table.sense[index]!;
    const outcome = this.outcome(index, unit);
    if (outcome !== null && !outcome.configurational) return labelled(unit, outcome, []);
    const others = this.undecided.filter(i => i !== index);
    if (others.length === 0) return outcome === null ? null : labelled(unit, outcome, []);
    // The ranking may rest on units that nothing decides: the letter stands only if it is the same whatever they are.
    const trials = Math.min(MOST_TRIALS, 2 ** others.length);
    const outcomes: (Outcome | null)[] = [];
    const before = this.table.sense.slice();
    for (let trial = 0; trial < trials; trial++) {
      others.forEach((other, bit) => {
        const scrambled = trials < MOST_TRIALS ? trial >> bit : (trial * 0x9e37 + bit * 0x79b9) >> (bit % 13);
        this.table.sense[other] = scrambled & 1 ? 1 : -1;
      });
      outcomes.push(this.outcome(index, unit));
    }
    this.table.sense.set(before);
    this.table.sense[index] = own;
    const stereogenic = outcomes.find(o => o !== null);
    if (stereogenic === undefined) return null;
    if (outcomes.every(o => o !== null && o.letter === stereogenic.letter))
      return labelled(unit, stereogenic, []);
    // In a drawing or a notation a unit of which nothing is stated counts as none, as in names (P-92.5.1: not stereogenic
    // comes last), and the reader is told. Coordinates that do not decide are another matter: no letter.
    const unstated = others.every(other => this.table.units[other]!.basis !== 'coordinates');
    if (outcome !== null && unstated && unit.basis !== 'coordinates')
      return labelled(unit, outcome, [UNSTATED_NEIGHBOUR]);
    return withoutLetter(unit, [
      'no descriptor: the ranking depends on another unit whose configuration is not decided',
    ]);
  }

  /** Ranks and labels a unit with the senses that the table has now; null when ligands remain tied. */
  private outcome(index: number, unit: StereoUnit): Outcome | null {
    const sense = unit.sense;
    const rankings: Ranking[] = [];
    let nodes = 0;
    let configurational = false;
    const tiedEnds: UnitEnd[] = [];
    for (const end of unit.ends) {
      const { ranking } = this.rankEnd(index, end);
      nodes = Math.max(nodes, this.digraph.count);
      rankings.push(ranking);
      if (ranking.rules.some(rule => rule !== null && rule >= '3')) configurational = true;
      if (!isComplete(ranking)) tiedEnds.push(end);
    }
    if (tiedEnds.length > 0) {
      const resolved = this.byReference(index, unit, rankings);
      return resolved === null ? null : { ...resolved, nodes, configurational: true };
    }
    return { rankings, letter: letterOf(unit, sense, rankings), configurational, nodes };
  }

  /**
   * Rule 6: takes each of the tied ligands of the highest rank as the reference in turn. A descriptor results only
   * when every choice separates all ligands and gives the same letter.
   */
  private byReference(
    index: number,
    unit: StereoUnit,
    partial: readonly Ranking[],
  ): { rankings: readonly Ranking[]; letter: Letter } | null {
    const endIndex = partial.findIndex(ranking => !isComplete(ranking));
    const ranking = partial[endIndex]!;
    const end = unit.ends[endIndex]!;
    const first = ranking.tied.indexOf(true) - 1;
    let last = first + 1;
    while (last + 1 < ranking.order.length && ranking.tied[last + 1]) last++;
    // A single pair that nothing tells apart can be exchanged without change: no stereogenic unit.
    const ties = partial.reduce((sum, r) => sum + r.tied.filter(Boolean).length, 0);
    if (ties < 2) return null;
    let result: { rankings: readonly Ranking[]; letter: Letter } | null = null;
    for (let place = first; place <= last; place++) {
      const reference = end.ligands[ranking.order[place]!]!;
      if (reference < 0) return null;
      const rankings = unit.ends.map(e => {
        // Inside the branches the order of the sets may rest on Rule 5; what reflection turns round then is pseudoasymmetric.
        const mirrored = this.rankWithReference(index, e, reference, true);
        const own = this.rankWithReference(index, e, reference, false);
        own.pseudo = permutationParity(own.order) !== permutationParity(mirrored.order);
        return own;
      });
      if (!rankings.every(isComplete)) return null;
      const letter = letterOf(unit, unit.sense === 0 ? 1 : unit.sense, rankings);
      // A letter that reflection leaves as it is would mean that the ligands left tied are exchanged by symmetry, as the three
      // at a bridgehead of adamantane: no stereogenic unit.
      if (isReflectionInvariant(letter)) return null;
      if (result !== null && result.letter !== letter) return null;
      result ??= { rankings, letter };
    }
    if (result === null) return null;
    return unit.sense === 0 ? { ...result, letter: Letter.none } : result;
  }

  private rankWithReference(index: number, end: UnitEnd, reference: number, reflected: boolean): Ranking {
    const { ranking, ligands } = this.rankEnd(index, end, reflected);
    const extended = copyOf(ranking);
    if (!isComplete(extended)) rankByReference(this.view, extended, ligands, reference);
    return extended;
  }

  private start(end: UnitEnd): number[] {
    this.digraph.reset(end.atom);
    this.digraph.expand(0);
    return end.ligands.map(ligand => (ligand === LONE_PAIR ? NO_NODE : this.ligandOfRoot(ligand)));
  }

  private ligandOfRoot(ligand: number): number {
    const node = this.digraph.ligandNode(0, ligand);
    if (node < 0)
      throw new RangeError(`ligand ${ligand + 1} is not a neighbour of the atom it is said to be on`);
    return node;
  }

  private finish(unitIndex: number, ranking: Ranking, ligands: readonly number[], reflected: boolean): void {
    const tiedLigands = ranking.order.flatMap((ligand, k) =>
      ranking.tied[k] || ranking.tied[k + 1] === true ? [ligands[ligand]!] : [],
    );
    this.auxiliary = labelAuxiliary(this.view, this.scratch, tiedLigands, this.table, unitIndex);
    if (this.auxiliary.length > 0) rankByConfiguration(this.view, ranking, ligands, reflected);
  }
}

function letterOf(unit: StereoUnit, sense: number, rankings: readonly Ranking[]): Letter {
  if (sense === 0) return Letter.none;
  return rankings.length === 1
    ? centreLetter(sense, rankings)
    : pairLetter(unit, sense, rankings[0]!, rankings[1]!);
}

function labelByTurn(unit: StereoUnit): LabelledUnit {
  const descriptor: Descriptor | null = unit.sense === 0 ? null : unit.sense > 0 ? 'P' : 'M';
  return {
    unit,
    descriptor,
    ranking: [],
    signedVolume: null,
    torsion: unit.torsion,
    torsionAtoms: null,
    warnings: unit.warnings,
  };
}

function withoutLetter(unit: StereoUnit, warnings: readonly string[]): LabelledUnit {
  return {
    unit,
    descriptor: null,
    ranking: [],
    signedVolume: unit.signedVolume,
    torsion: unit.torsion,
    torsionAtoms: null,
    warnings: [...unit.warnings, ...warnings],
  };
}

function labelled(unit: StereoUnit, outcome: Outcome, warnings: readonly string[]): LabelledUnit {
  const ranking: RankedLigand[] = [];
  outcome.rankings.forEach((r, e) => {
    const end = unit.ends.length === 2 ? ((e + 1) as 1 | 2) : null;
    let rank = 0;
    r.order.forEach((ligand, k) => {
      if (!r.tied[k]) rank = k + 1;
      ranking.push({
        ligand: unit.ends[e]!.ligands[ligand]!,
        rank,
        decidedBy: r.rules[k]!,
        sphere: r.spheres[k]!,
        end,
      });
    });
  });
  return {
    unit,
    descriptor: descriptorOf(outcome.letter),
    ranking,
    signedVolume: rankedVolume(unit, outcome.rankings),
    ...rankedTorsion(unit, outcome.rankings),
    warnings: [...unit.warnings, ...warnings],
  };
}

function rankedVolume(unit: StereoUnit, rankings: readonly Ranking[]): number | null {
  if (unit.signedVolume === null || rankings.length !== 1) return unit.signedVolume;
  return unit.signedVolume * permutationParity(rankings[0]!.order) + 0;
}

/** The torsion between the top-ranked ligands; taken from the other ligand of an end, half a turn away, where the top one is not an atom. */
function rankedTorsion(
  unit: StereoUnit,
  rankings: readonly Ranking[],
): { torsion: number | null; torsionAtoms: readonly [number, number, number, number] | null } {
  if (rankings.length !== 2 || unit.torsion === null) return { torsion: unit.torsion, torsionAtoms: null };
  const [first, second] = unit.ends as readonly [UnitEnd, UnitEnd];
  const top = [first.ligands[rankings[0]!.order[0]!]!, second.ligands[rankings[1]!.order[0]!]!] as const;
  let torsion = unit.torsion;
  for (const r of rankings) if (r.order[0] !== 0) torsion += 180;
  torsion = ((((torsion + 180) % 360) + 360) % 360) - 180;
  if (torsion === -180) torsion = 180;
  return {
    torsion,
    torsionAtoms: top[0] >= 0 && top[1] >= 0 ? [top[0], first.atom, second.atom, top[1]] : null,
  };
}

/** Labels the candidates of a molecule and leaves out those that are not stereogenic. */
export function labelUnits(
  molecule: Molecule,
  units: readonly StereoUnit[],
  settings: Settings,
): { readonly units: LabelledUnit[]; readonly peakNodes: number } {
  const labeller = new Labeller(molecule, units, settings);
  const indices: number[] = [];
  let result: LabelledUnit[] = [];
  units.forEach((_, index) => {
    const one = labeller.label(index);
    if (one === null) return;
    result.push(one);
    indices.push(index);
  });
  if (result.length > 0) {
    for (const form of resonanceForms(molecule)) {
      const other = new Labeller(form, units, settings);
      result = result.map((one, i) => withFormNoted(one, other.label(indices[i]!)));
    }
  }
  return { units: result, peakNodes: labeller.digraph.peak };
}

function withFormNoted(one: LabelledUnit, other: LabelledUnit | null): LabelledUnit {
  if (one.descriptor === null || other === null || other.descriptor === one.descriptor) return one;
  const letter = other.descriptor ?? 'no letter';
  const warning = `the letter holds for the resonance form drawn; another form of the same compound gives ${letter}`;
  return one.warnings.includes(warning) ? one : { ...one, warnings: [...one.warnings, warning] };
}
