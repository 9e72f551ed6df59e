/** The dial of a sighted unit, worked out for one direction of view: where the numerals stand, how the sweep runs. */
import { IMPLICIT_HYDROGEN, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { type DialPlace, dialPlaces, project, type SightFrame } from '../../core/record/sight-frame.ts';
import { helixRim } from './frames.ts';

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

export interface Stub {
  readonly hydrogen: boolean;
  /** Where its atom stands. */
  readonly fromX: number;
  readonly fromY: number;
  readonly x: number;
  readonly y: number;
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
  readonly stubs: readonly Stub[];
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
  if (unit.kind === 'helix') return helixDial(molecule, labelled, frame);
  if (unit.kind === 'plane') return planeDial(molecule, labelled, frame);
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
      .map(({ ligand, end, x, y }) => {
        const atom = unit.ends[end === 2 ? 1 : 0]!.atom;
        const [fromX, fromY] = atomAt(molecule, atom, frame);
        return { hydrogen: ligand === IMPLICIT_HYDROGEN, fromX, fromY, x, y };
      }),
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

function atomAt(molecule: Molecule, atom: number, frame: SightFrame): readonly [number, number, number] {
  const r = molecule.coordinates!;
  return project(frame, [r[3 * atom]!, r[3 * atom + 1]!, r[3 * atom + 2]!]);
}

function shapeOf(
  labelled: LabelledUnit,
): Pick<Dial, 'shape' | 'doubled' | 'firmness' | 'stubs' | 'hidden' | 'axis'> {
  const { state, firmness } = labelled.unit;
  return {
    shape: state === 'flat' ? 'bar' : state === 'unspecified' ? 'dotted' : 'ring',
    doubled: false,
    firmness: firmness ?? 1,
    stubs: [],
    hidden: null,
    axis: null,
  };
}

/** Room for the inner rim of a helix, Å. */
const HELIX_RADIUS = 3.1;

/** Along a helix: from the end in front along the rim to the rear end. */
function helixDial(molecule: Molecule, labelled: LabelledUnit, frame: SightFrame): Dial {
  const rim = helixRim(molecule, labelled).map(atom => ({ atom, place: atomAt(molecule, atom, frame) }));
  const first = rim[0];
  const last = rim.at(-1);
  if (first && last && first.place[2] < last.place[2]) rim.reverse();
  const angle = ({ place }: { place: readonly [number, number, number] }): number =>
    Math.atan2(place[1], place[0]);
  let turn = 0;
  for (let k = 1; k < rim.length; k++) {
    const d = angle(rim[k]!) - angle(rim[k - 1]!);
    turn += Math.atan2(Math.sin(d), Math.cos(d));
  }
  const ends = [rim[0], rim.at(-1)].filter(end => end !== undefined);
  return {
    ...shapeOf(labelled),
    radius: HELIX_RADIUS,
    numerals: ends.map((end, k) => ({
      text: k === 0 ? 'front' : 'rear',
      rank: 1,
      end: k === 0 ? 1 : 2,
      ligand: end.atom,
      angle: angle(end),
      distance: Math.hypot(end.place[0], end.place[1]),
      depth: end.place[2],
      onRing: true,
    })),
    sweep:
      labelled.descriptor !== null && rim.length > 1
        ? { from: angle(rim[0]!), turn, clockwise: turn < 0 }
        : null,
  };
}

/** Onto a chirality plane: a, b and c in a row. */
function planeDial(molecule: Molecule, labelled: LabelledUnit, frame: SightFrame): Dial {
  const atoms = labelled.torsionAtoms?.slice(1) ?? [];
  const numerals = atoms.map((atom, k): Numeral => {
    const [x, y, z] = atomAt(molecule, atom, frame);
    return {
      text: 'abc'.charAt(k),
      rank: k + 1,
      end: null,
      ligand: atom,
      angle: Math.atan2(y, x),
      distance: Math.hypot(x, y),
      depth: z,
      onRing: true,
    };
  });
  return {
    ...shapeOf(labelled),
    radius: CENTRE_RADIUS,
    numerals,
    sweep: labelled.descriptor === null ? null : centreSweep(numerals),
  };
}
