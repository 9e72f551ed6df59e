/** The dial of a sighted unit, worked out for one direction of view: where the numerals stand, how the sweep runs. */
import { IMPLICIT_HYDROGEN, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { type DialPlace, dialPlaces, type SightFrame } from '../../core/record/sight-frame.ts';

export interface Numeral {
  /** "1", "2", "3", "4"; with a prime at the second end. */
  readonly text: string;
  readonly rank: number;
  readonly end: 1 | 2 | null;
  readonly ligand: number;
  /** Direction on the dial, radians, anticlockwise from the right as the reader sees it. */
  readonly angle: number;
  /** Distance from the middle, Å, and towards the reader, Å. */
  readonly distance: number;
  readonly depth: number;
  /** Of the dial, rather than the fourth that lies behind. */
  readonly onRing: boolean;
}

export interface Sweep {
  readonly from: number;
  /** Signed turn in radians; negative is clockwise to the reader. */
  readonly turn: number;
  readonly clockwise: boolean;
}

export interface Dial {
  readonly shape: 'ring' | 'bar' | 'dotted';
  /** Å. */
  readonly radius: number;
  readonly doubled: boolean;
  /** 0 to 1. */
  readonly firmness: number;
  readonly numerals: readonly Numeral[];
  readonly sweep: Sweep | null;
  /** For a double bond: direction of the line through both ends, radians. */
  readonly axis: number | null;
  /** Implicit hydrogens and lone pairs, from where to where, Å in the view. */
  readonly stubs: readonly {
    readonly hydrogen: boolean;
    readonly x: number;
    readonly y: number;
    readonly z: number;
  }[];
  /** The fourth, when it is hidden behind the centre. */
  readonly hidden: Numeral | null;
}

/** Radii of the dial, Å: room for the ligands of a centre; of a unit with two ends. */
const CENTRE_RADIUS = 2.15;
const TWO_END_RADIUS = 2.75;
/** A ligand nearer to the line of sight than this is behind or in front of the centre, Å. */
const HIDDEN = 0.45;

const TURN = 2 * Math.PI;

function forward(from: number, to: number): number {
  const d = (to - from) % TURN;
  return d < 0 ? d + TURN : d;
}

/** The dial in a view. `frame` need not be the sight itself: the view may have been turned. */
export function dialOf(molecule: Molecule, labelled: LabelledUnit, frame: SightFrame): Dial {
  const { unit, descriptor } = labelled;
  const places = dialPlaces(molecule, labelled, frame);
  const axial = unit.ends.length === 2 && unit.kind !== 'double-bond' && !unit.planar;
  const numerals = places.map(place => numeralOf(place, unit.kind === 'centre'));
  const centre = unit.kind === 'centre';
  const clear = unit.state === 'clear';
  const complete = descriptor !== null;
  let sweep: Sweep | null = null;
  if (clear && complete && centre) sweep = centreSweep(numerals);
  else if (clear && complete && axial) sweep = axialSweep(numerals);
  const fourth = numerals.find(numeral => !numeral.onRing) ?? null;
  return {
    shape: unit.state === 'flat' ? 'bar' : unit.state === 'unspecified' ? 'dotted' : 'ring',
    radius: unit.ends.length === 2 ? TWO_END_RADIUS : CENTRE_RADIUS,
    doubled: descriptor !== null && /^[rsmpez]$/u.test(descriptor),
    firmness: unit.firmness ?? 1,
    numerals,
    sweep,
    axis: unit.ends.length === 2 && !axial ? endAxis(molecule, labelled, frame) : null,
    stubs: places
      .filter(place => place.ligand < 0)
      .map(({ ligand, x, y, z }) => ({ hydrogen: ligand === IMPLICIT_HYDROGEN, x, y, z })),
    hidden: fourth && fourth.distance < HIDDEN ? fourth : null,
  };
}

function numeralOf(place: DialPlace, centre: boolean): Numeral {
  return {
    text: place.end === 2 ? `${place.rank}′` : String(place.rank),
    rank: place.rank,
    end: place.end,
    ligand: place.ligand,
    angle: Math.atan2(place.y, place.x),
    distance: Math.hypot(place.x, place.y),
    depth: place.z,
    onRing: !centre || place.rank < 4,
  };
}

function centreSweep(numerals: readonly Numeral[]): Sweep | null {
  const [first, second, third] = [1, 2, 3].map(rank => numerals.find(numeral => numeral.rank === rank));
  if (!first || !second || !third) return null;
  const anticlockwise = forward(first.angle, second.angle) < forward(first.angle, third.angle);
  return {
    from: first.angle,
    turn: anticlockwise ? forward(first.angle, third.angle) : -forward(third.angle, first.angle),
    clockwise: !anticlockwise,
  };
}

/** From the front 1 to the rear 1 by the shorter way; which end is in front depends on the view. */
function axialSweep(numerals: readonly Numeral[]): Sweep | null {
  const tops = numerals.filter(numeral => numeral.rank === 1);
  const [one, other] = tops;
  if (!one || !other) return null;
  const [front, rear] = one.depth >= other.depth ? [one, other] : [other, one];
  const turn = forward(front.angle, rear.angle);
  const signed = turn > Math.PI ? turn - TURN : turn;
  return { from: front.angle, turn: signed, clockwise: signed < 0 };
}

function endAxis(molecule: Molecule, labelled: LabelledUnit, frame: SightFrame): number {
  const r = molecule.coordinates!;
  const [first, second] = labelled.unit.ends;
  const a = first!.atom;
  const b = second!.atom;
  let x = 0;
  let y = 0;
  for (let k = 0; k < 3; k++) {
    const d = r[3 * b + k]! - r[3 * a + k]!;
    x += d * frame.right[k]!;
    y += d * frame.up[k]!;
  }
  return Math.atan2(y, x);
}
