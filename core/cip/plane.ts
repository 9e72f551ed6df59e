/**
 * The descriptor of a chirality plane: which pilot atom, and which neighbour in the ring, have the higher priority
 * (IUPAC 1996, Basic Terminology of Stereochemistry: planar chirality; Rp is P, Sp is M).
 */
import { bondBetween, type Molecule } from '../chemistry/molecule.ts';
import type { Descriptor, LabelledUnit, RankedLigand, Settings } from '../docket.ts';
import type { StereoUnit } from '../perception/unit.ts';
import { Branches } from './branches.ts';
import { Digraph } from './digraph.ts';
import { isComplete, type Ranking, rankByConstitution } from './ranking.ts';
import { rankingGraph } from './ranking-graph.ts';
import { withAtom } from './trial-molecule.ts';

const PHANTOM = 0;

/** A bridge that leaves the ring by C=C: which atoms the plane holds, and so which is the pilot, is not laid down; the published suite (VS155) names its double bonds alone. */
const NO_LETTER =
  'no descriptor: the bridge leaves the ring by a double bond, for which no pilot atom is laid down; the arrangement is compared all the same';

/** Labels a plane whose `ends` list the two ring neighbours, the plane atom and the pilot atom; null when its neighbours cannot be told apart. */
export function labelPlane(molecule: Molecule, unit: StereoUnit, settings: Settings): LabelledUnit | null {
  const [first, second] = unit.ends;
  if (first === undefined || second === undefined) return null;
  const pilotAtoms = [first.ligands[3]!, second.ligands[3]!];
  // A phantom bound to both lets their branches be compared.
  const pilots = rankOn(withAtom(molecule, PHANTOM, 0, pilotAtoms), molecule.atomCount, pilotAtoms, settings);
  // Pilot atoms that are alike are exchanged by a twofold axis: either gives the same descriptor.
  const end = pilots.order[0]!;
  const chosen = end === 0 ? first : second;
  const neighbours = [chosen.ligands[0]!, chosen.ligands[1]!];
  const sides = rankOn(molecule, chosen.atom, neighbours, settings);
  if (!isComplete(sides)) return null;
  const turned = (end === 1) !== (sides.order[0] === 1);
  const sense = turned ? -unit.sense : unit.sense;
  const descriptor: Descriptor | null = sense === 0 ? null : sense > 0 ? 'P' : 'M';
  const top = neighbours[sides.order[0]!]!;
  const unsaturated = unit.ends.some(
    end => molecule.bondOrders[bondBetween(molecule, end.ligands[2]!, end.ligands[3]!)] !== 1,
  );
  const ranking: RankedLigand[] = sides.order.map((place, k) => ({
    ligand: neighbours[place]!,
    rank: k + 1,
    decidedBy: sides.rules[k]!,
    sphere: sides.spheres[k]!,
    end: null,
  }));
  return {
    unit,
    descriptor: unsaturated ? null : descriptor,
    ranking,
    signedVolume: null,
    torsion: unit.torsion === null ? null : turned ? -unit.torsion : unit.torsion,
    torsionAtoms: [chosen.ligands[3]!, chosen.ligands[2]!, chosen.atom, top],
    warnings: unsaturated ? [...unit.warnings, NO_LETTER] : unit.warnings,
  };
}

function rankOn(molecule: Molecule, root: number, ligands: readonly number[], settings: Settings): Ranking {
  const digraph = new Digraph(molecule, rankingGraph(molecule), settings.digraphLimit);
  digraph.reset(root);
  digraph.expand(0);
  const nodes = ligands.map(ligand => digraph.ligandNode(0, ligand));
  return rankByConstitution(new Branches(digraph), 0, nodes);
}
