/**
 * Planar chirality of cyclophanes and ansa compounds: a benzene ring that a bridge holds on one side (IUPAC 1996, Basic
 * Terminology of Stereochemistry: planar chirality, chirality plane).
 *
 * The plane holds the ring and the first atom of the bridge at either end; the next atom of the bridge, out of the
 * plane, is a pilot atom. Seen from the pilot atom of higher priority, the way from the plane atom it is bound to (a),
 * over the ring atom (b), to the higher-ranked neighbour in the ring (c) runs clockwise for P (Rp), anticlockwise for M (Sp).
 */
import { isLocated } from '../chemistry/molecule.ts';
import { torsion } from '../geometry/torsion.ts';
import { isUnsaturated, type PerceptionContext } from './context.ts';
import type { StereoUnit, UnitState } from './unit.ts';

/** Atoms of a bridge up to which a benzene ring with a substituent cannot turn through it: [10]paracyclophanes are resolvable (common practice, no source). */
const LONGEST_STABLE_BRIDGE = 10;
/** Longest bridge that is mentioned at all. */
const LONGEST_BRIDGE = 14;

/** One end of the bridge: ring atom, plane atom, pilot atom, and the ring neighbours of the ring atom. */
interface BridgeEnd {
  readonly ring: number;
  readonly plane: number;
  readonly pilot: number;
  readonly neighbours: readonly [number, number];
}

export interface PlaneCandidate {
  /** The neighbours that stand first at both ends lie on one side of the line between the ends. */
  readonly ends: readonly [BridgeEnd, BridgeEnd];
  readonly labile: string | null;
}

/** Finds bridged benzene rings whose two sides, and whose two ends, constitution tells apart. */
export function planeCandidates(context: PerceptionContext): PlaneCandidate[] {
  const { rings, molecule } = context;
  const found: PlaneCandidate[] = [];
  for (const ring of rings.rings) {
    if (ring.length !== 6 || !ring.every(atom => isUnsaturated(molecule, atom))) continue;
    const exits = [...ring.keys()].flatMap(place => exitsAt(context, ring, place));
    for (let i = 0; i < exits.length; i++) {
      for (let j = i + 1; j < exits.length; j++) {
        const candidate = bridged(context, ring, exits[i]!, exits[j]!);
        if (candidate !== null) found.push(candidate);
      }
    }
  }
  return found;
}

interface Exit {
  readonly place: number;
  readonly plane: number;
}

/** Bonds out of the ring at one place that are part of a larger ring. */
function exitsAt(context: PerceptionContext, ring: Int32Array, place: number): Exit[] {
  const { molecule, rings } = context;
  const atom = ring[place]!;
  const exits: Exit[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const neighbour = molecule.neighbours[k]!;
    const bond = molecule.neighbourBonds[k]!;
    if (ring.includes(neighbour) || rings.bondInRing[bond] === 0 || rings.bondRingSize[bond]! < 8) continue;
    exits.push({ place, plane: neighbour });
  }
  return exits;
}

function bridged(
  context: PerceptionContext,
  ring: Int32Array,
  first: Exit,
  second: Exit,
): PlaneCandidate | null {
  const apart = Math.abs(first.place - second.place);
  const separation = Math.min(apart, 6 - apart);
  // Meta and para; an ortho bridge makes an ordinary ring.
  if (separation < 2) return null;
  const path = bridgePath(context, ring, first.plane, second.plane);
  if (path === null || path.length > LONGEST_BRIDGE || path.length < 3) return null;
  const at = (place: number): number => ring[((place % 6) + 6) % 6]!;
  // Going the short way round from the first place to the second, the neighbours on that side come first.
  const forwards = (second.place - first.place + 6) % 6 <= 3 ? 1 : -1;
  const ends: readonly [BridgeEnd, BridgeEnd] = [
    {
      ring: at(first.place),
      plane: first.plane,
      pilot: path[1]!,
      neighbours: [at(first.place + forwards), at(first.place - forwards)],
    },
    {
      ring: at(second.place),
      plane: second.plane,
      pilot: path[path.length - 2]!,
      neighbours: [at(second.place - forwards), at(second.place + forwards)],
    },
  ];
  const { classes } = context;
  const same = (a: number, b: number): boolean => classes[a] === classes[b];
  const [a, b] = ends;
  const sidesAlike = same(a.neighbours[0], a.neighbours[1]) && same(b.neighbours[0], b.neighbours[1]);
  const endsAlike =
    same(a.plane, b.plane) &&
    same(a.neighbours[0], b.neighbours[0]) &&
    same(a.neighbours[1], b.neighbours[1]);
  if (sidesAlike || endsAlike || same(a.neighbours[0], a.neighbours[1])) return null;
  return {
    ends,
    labile:
      path.length > LONGEST_STABLE_BRIDGE
        ? `a bridge of ${path.length} atoms is judged long enough for the ring to turn through it`
        : null,
  };
}

/** Shortest way from one end of a bridge to the other that does not pass the ring; both ends included. */
function bridgePath(context: PerceptionContext, ring: Int32Array, from: number, to: number): number[] | null {
  const { molecule } = context;
  const before = new Map<number, number>([[from, -1]]);
  const queue = [from];
  for (let head = 0; head < queue.length; head++) {
    const atom = queue[head]!;
    if (atom === to) {
      const path: number[] = [];
      for (let at = to; at !== -1; at = before.get(at)!) path.unshift(at);
      return path;
    }
    for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
      const next = molecule.neighbours[k]!;
      if (before.has(next) || ring.includes(next)) continue;
      before.set(next, atom);
      queue.push(next);
    }
  }
  return null;
}

/**
 * Measures a plane by the torsions pilot – plane atom – ring atom – ring neighbour: the one of the first-listed neighbour at
 * the first end is reported; sense and firmness come from all four, which alternate in sign.
 */
export function measurePlane(context: PerceptionContext, candidate: PlaneCandidate): StereoUnit {
  const { molecule, settings, space } = context;
  const [first, second] = candidate.ends;
  const wanted = candidate.ends.flatMap(end => [end.pilot, end.plane, end.ring, ...end.neighbours]);
  let angle: number | null = null;
  let sine: number | null = null;
  if (space !== null && wanted.every(atom => isLocated(molecule, atom))) {
    const angles = candidate.ends.flatMap(end =>
      end.neighbours.map(neighbour => torsion(space, end.pilot, end.plane, end.ring, neighbour)),
    );
    const sines = angles.map(measured => Math.sin((measured * Math.PI) / 180));
    const mean = (sines[0]! - sines[1]! - sines[2]! + sines[3]!) / 4;
    if (!Number.isNaN(mean)) {
      angle = angles[0]!;
      sine = mean;
    }
  }
  const firmness = sine === null ? null : Math.min(1, Math.abs(sine));
  const state: UnitState =
    firmness === null ? 'unspecified' : firmness < settings.flatFirmness ? 'flat' : 'clear';
  return {
    kind: 'plane',
    atoms: [first.ring, second.ring],
    ends: candidate.ends.map(end => ({
      atom: end.ring,
      ligands: [...end.neighbours, end.plane, end.pilot],
    })),
    planar: false,
    state,
    sense: state === 'clear' ? (sine! > 0 ? 1 : -1) : 0,
    basis: space === null ? 'notation' : 'coordinates',
    signedVolume: null,
    sigma: null,
    firmness,
    torsion: angle,
    torsionSigma: null,
    labile: candidate.labile,
    warnings: [],
  };
}
