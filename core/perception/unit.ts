/** A stereogenic unit as the coordinates (or a drawing, or a notation) show it, before any ranking. */

/** `centre`; `double-bond`; `cumulene` (extended tetrahedral or extended cis-trans); `axis` (hindered single bond); `helix`; `plane`. */
export type UnitKind = 'centre' | 'double-bond' | 'cumulene' | 'axis' | 'helix' | 'plane';

/** What the geometry supports: a decision, no decision because it is too near flat, or nothing to decide from. */
export type UnitState = 'clear' | 'flat' | 'unspecified';

/** Where the arrangement was read from. */
export type UnitBasis = 'coordinates' | 'drawing' | 'notation';

/** An atom index (0-based), or `IMPLICIT_HYDROGEN` or `LONE_PAIR` of `chemistry/molecule.ts`. */
export type Ligand = number;

/**
 * One end of a unit with the ligands that are ranked there.
 *
 * A centre, a helix and a plane have one end; the others two.
 */
export interface UnitEnd {
  readonly atom: number;
  readonly ligands: readonly Ligand[];
}

/**
 * A stereogenic unit, or a candidate for one.
 *
 * `sense` is the arrangement of the ligands in the order in which `ends` lists them, 0 when `state` is not `clear`:
 *
 * - `centre`: 1 when, with the last ligand pointing away, the first three run clockwise (OpenSMILES `@@` of that
 *   order); so 1 is R once the ligands stand in order of priority. -1 anticlockwise.
 * - `double-bond` and extended cis-trans `cumulene`: 1 when the first ligand of each end lie on the same side, -1 on opposite sides.
 * - extended tetrahedral `cumulene`, `axis`: 1 when the torsion first ligand – end – end – first ligand is positive
 *   (clockwise from the front to the rear, P once ranked), -1 when negative.
 * - `helix`: 1 for P (clockwise), -1 for M.
 * - `plane`: the sign of the torsion pilot atom – plane atom – ring atom – first ligand at the first end; each end lists its two
 *   ring neighbours, the plane atom and the pilot atom, and the first neighbours of both ends lie on one side. It changes
 *   sign with the end and with the neighbour from which it is taken; 1 is P for the ones of higher priority.
 */
export interface StereoUnit {
  readonly kind: UnitKind;
  /** 0-based: the centre, or the two end atoms. */
  readonly atoms: readonly number[];
  readonly ends: readonly UnitEnd[];
  /** For a cumulene: whether it is planar (E/Z) rather than axial (M/P). False for the other kinds. */
  readonly planar: boolean;
  readonly state: UnitState;
  readonly sense: 1 | -1 | 0;
  readonly basis: UnitBasis;
  /** Signed volume in Å³ for the ligands in listed order (design.md, Conventions of measurement); null where none is defined. */
  readonly signedVolume: number | null;
  /** Its standard uncertainty, Å³; null without s.u. in the file. */
  readonly sigma: number | null;
  /** 0 flat, 1 ideal; null without 3D coordinates. */
  readonly firmness: number | null;
  /** Torsion in degrees, first ligand – end – end – first ligand; null for a centre. */
  readonly torsion: number | null;
  /** Its standard uncertainty, degrees. */
  readonly torsionSigma: number | null;
  /** Why the unit settles nothing (a pyramidal amine, an unhindered axis); null when it is configurationally stable. */
  readonly labile: string | null;
  /** What a reader must know: an explicit hydrogen on the wrong side, a doubtful bond order. */
  readonly warnings: readonly string[];
}
