/** The stereogenic units of a fragment in terms of its nodes, ready to be compared under any mapping. */
import { IMPLICIT_HYDROGEN, LONE_PAIR } from '../chemistry/molecule.ts';
import type { Descriptor, LabelledUnit } from '../docket.ts';
import type { StereoUnit, UnitKind } from '../perception/unit.ts';
import { type Fragments, HYDROGEN_NODE, LONE_PAIR_NODE, OUTSIDE_NODE } from './fragment.ts';

/** A unit whose ligands are nodes, or `HYDROGEN_NODE`, `LONE_PAIR_NODE`, `OUTSIDE_NODE`. */
export interface NodeUnit {
  readonly kind: UnitKind;
  readonly planar: boolean;
  /** The nodes of `StereoUnit.ends`. */
  readonly ends: readonly number[];
  readonly ligands: readonly (readonly number[])[];
  readonly unit: StereoUnit;
}

/** A unit whose configuration is asked for. */
export interface IntendedUnit extends NodeUnit {
  /** Index in the docket of the intention. */
  readonly index: number;
  readonly descriptor: Descriptor | null;
  /** Whether the mirror image has the other arrangement of the same ligands (all but planar units). */
  readonly chiral: boolean;
  /** Whether it is one of the R/S units that the word epimer counts. */
  readonly countsForEpimer: boolean;
  /** Index of its stereo group among the groups of the fragment, -1 for none. */
  readonly group: number;
}

/** Puts a unit in terms of the nodes of one fragment; null when its own atoms are not nodes of that fragment. */
export function nodeUnit(unit: StereoUnit, fragments: Fragments, fragment: number): NodeUnit | null {
  const ends: number[] = [];
  const ligands: number[][] = [];
  for (const end of unit.ends) {
    const node = fragments.nodeOf[end.atom]!;
    if (node < 0 || fragments.fragmentOf[end.atom] !== fragment) return null;
    ends.push(node);
    ligands.push(
      end.ligands.map(ligand => {
        if (ligand === IMPLICIT_HYDROGEN) return HYDROGEN_NODE;
        if (ligand === LONE_PAIR) return LONE_PAIR_NODE;
        // A ligand across a left-out metal bond belongs to another fragment.
        const at = fragments.nodeOf[ligand]!;
        return at >= 0 && fragments.fragmentOf[ligand] !== fragment ? OUTSIDE_NODE : at;
      }),
    );
  }
  return { kind: unit.kind, planar: unit.planar, ends, ligands, unit };
}

/**
 * Whether a docket's unit asks for a configuration: its arrangement is decided and configurationally stable.
 *
 * A letter is not needed: where the ranking of one unit rests on another that is undecided (1,4-disubstituted
 * cyclohexanes beside an open centre), the arrangements still compare.
 */
export function isAskedFor({ unit }: LabelledUnit): boolean {
  return unit.sense !== 0 && unit.labile === null;
}

/** Whether a mirror image shows the unit with the other sense: all kinds but double bonds and planar cumulenes. */
export function isChiralKind(unit: StereoUnit): boolean {
  return unit.kind !== 'double-bond' && !(unit.kind === 'cumulene' && unit.planar);
}

/** The node units of a model, found by their end nodes. */
export interface UnitTable {
  readonly units: readonly NodeUnit[];
  /** Node to units that have it as an end. */
  readonly at: readonly (readonly number[] | undefined)[];
  /**
   * Nodes that could bear a centre but, two of their ligands being alike, have no arrangement to state: in a notation
   * such a centre matches either arrangement, the exchange of the two ligands changing nothing else.
   */
  readonly free: ReadonlySet<number>;
}

export function unitTable(
  units: readonly NodeUnit[],
  count: number,
  free: ReadonlySet<number> = new Set(),
): UnitTable {
  const at: number[][] = Array.from({ length: count });
  units.forEach((unit, u) => {
    for (const end of unit.ends) (at[end] ??= []).push(u);
  });
  return { units, at, free };
}
