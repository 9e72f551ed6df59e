/** What is drawn of a molecule around a unit: its own atoms at full strength, the rest receding, hydrogens thin. */
import { bondBetween, isLocated, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { elementTone } from './colours.ts';
import { helixRim } from './frames.ts';
import type { Ball, Rod } from './impostors.ts';

export interface ModelLook {
  readonly dark: boolean;
  /** Whether hydrogens away from the unit are drawn. */
  readonly hydrogens: boolean;
  /** Atom pointed out, null for none. */
  readonly lit: number | null;
}

/** Radii in Å: ours, chosen so that the numerals find room. */
const UNIT_RADIUS = 0.36;
const LIGAND_RADIUS = 0.32;
const REST_RADIUS = 0.17;
const HYDROGEN_RADIUS = 0.17;
const FAR_HYDROGEN_RADIUS = 0.1;
const UNIT_ROD = 0.105;
const REST_ROD = 0.055;
const HYDROGEN_ROD = 0.045;
/** Distance between the rods of a double bond, Å. */
const PAIR_GAP = 0.2;
const REST_STRENGTH = 0.5;
/** Atoms up to which a model is drawn whole around a unit; of a larger one what lies near, by the sum of the coordinate differences in Å. */
const WHOLE = 20_000;
const NEAR = 70;

/** The atoms that belong to a unit: its ends, its ligands, and what lies between the ends. */
export function unitAtoms(molecule: Molecule, labelled: LabelledUnit): ReadonlyMap<number, 'own' | 'ligand'> {
  const atoms = new Map<number, 'own' | 'ligand'>();
  for (const end of labelled.unit.ends) {
    for (const ligand of end.ligands) if (ligand >= 0) atoms.set(ligand, 'ligand');
  }
  for (const atom of labelled.unit.atoms) atoms.set(atom, 'own');
  for (const end of labelled.unit.ends) atoms.set(end.atom, 'own');
  for (const atom of between(molecule, labelled)) atoms.set(atom, 'own');
  if (labelled.unit.kind === 'helix') {
    for (const atom of helixRim(molecule, labelled)) atoms.set(atom, 'own');
  }
  if (labelled.unit.kind === 'plane' && labelled.torsionAtoms) {
    atoms.clear();
    const [pilot, ...plane] = labelled.torsionAtoms;
    atoms.set(pilot, 'ligand');
    for (const atom of plane) atoms.set(atom, 'own');
  }
  return atoms;
}

/** The inner atoms of a cumulene, walked from one end along double bonds. */
function between(molecule: Molecule, labelled: LabelledUnit): number[] {
  const [first, second] = labelled.unit.atoms;
  if (first === undefined || second === undefined || labelled.unit.kind !== 'cumulene') return [];
  const path: number[] = [];
  let previous = -1;
  let at = first;
  while (at !== second && path.length < molecule.atomCount) {
    let next = -1;
    for (let k = molecule.neighbourStart[at]!; k < molecule.neighbourStart[at + 1]!; k++) {
      const neighbour = molecule.neighbours[k]!;
      if (neighbour !== previous && molecule.bondOrders[molecule.neighbourBonds[k]!] === 2) next = neighbour;
    }
    if (next === -1) return [];
    previous = at;
    at = next;
    if (at !== second) path.push(at);
  }
  return path;
}

export function modelGeometry(
  molecule: Molecule,
  labelled: LabelledUnit | null,
  look: ModelLook,
): { readonly balls: readonly Ball[]; readonly rods: readonly Rod[] } {
  const r = molecule.coordinates;
  if (r === null) return { balls: [], rods: [] };
  const own = labelled ? unitAtoms(molecule, labelled) : new Map<number, 'own' | 'ligand'>();
  // Without a unit in view nothing has to recede.
  const rest = labelled ? REST_STRENGTH : 1;
  const balls: Ball[] = [];
  const rods: Rod[] = [];
  const middle = labelled && molecule.atomCount > WHOLE ? labelled.unit.atoms[0] : undefined;
  const near = (atom: number): boolean =>
    middle === undefined ||
    Math.abs(r[3 * atom]! - r[3 * middle]!) +
      Math.abs(r[3 * atom + 1]! - r[3 * middle + 1]!) +
      Math.abs(r[3 * atom + 2]! - r[3 * middle + 2]!) <
      NEAR;
  const shown = (atom: number): boolean =>
    isLocated(molecule, atom) &&
    near(atom) &&
    (molecule.elements[atom] !== 1 || look.hydrogens || own.has(atom));
  const tone = (atom: number): number => elementTone(molecule.elements[atom]!, look.dark);
  for (let i = 0; i < molecule.atomCount; i++) {
    if (!shown(i)) continue;
    const part = own.get(i);
    const hydrogen = molecule.elements[i] === 1;
    let radius = hydrogen ? FAR_HYDROGEN_RADIUS : REST_RADIUS;
    if (part === 'own') radius = UNIT_RADIUS;
    else if (part === 'ligand') radius = hydrogen ? HYDROGEN_RADIUS : LIGAND_RADIUS;
    if (look.lit === i) radius += 0.1;
    const strength = part !== undefined || look.lit === i ? 1 : rest;
    balls.push({ x: r[3 * i]!, y: r[3 * i + 1]!, z: r[3 * i + 2]!, radius, colour: tone(i), strength });
  }
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    if (!shown(i) || !shown(j)) continue;
    const strong = own.get(i) === 'own' || own.get(j) === 'own' ? own.has(i) && own.has(j) : false;
    const hydrogen = molecule.elements[i] === 1 || molecule.elements[j] === 1;
    const order = molecule.bondOrders[b]!;
    const base = strong ? UNIT_ROD : hydrogen ? HYDROGEN_ROD : REST_ROD;
    const radius = order > 1 ? base * 0.7 : base;
    const strength = strong ? 1 : rest;
    const from = [r[3 * i]!, r[3 * i + 1]!, r[3 * i + 2]!] as const;
    const to = [r[3 * j]!, r[3 * j + 1]!, r[3 * j + 2]!] as const;
    const aside = order > 1 ? sideways(molecule, i, j) : null;
    for (let k = 0; k < Math.max(1, order); k++) {
      const shift = aside === null ? 0 : (k - (order - 1) / 2) * PAIR_GAP * (strong ? 1.15 : 0.8);
      const at = (p: readonly [number, number, number]): [number, number, number] =>
        aside === null
          ? [p[0], p[1], p[2]]
          : [p[0] + shift * aside[0], p[1] + shift * aside[1], p[2] + shift * aside[2]];
      const a = at(from);
      const c = at(to);
      rods.push({ from: a, to: c, radius, colours: [tone(i), tone(j)], strength });
    }
  }
  return { balls, rods };
}

/** A unit vector across a bond, in the plane of its neighbours, along which the rods of a multiple bond stand apart. */
function sideways(molecule: Molecule, i: number, j: number): [number, number, number] {
  const r = molecule.coordinates!;
  const axis = [0, 1, 2].map(x => r[3 * j + x]! - r[3 * i + x]!) as [number, number, number];
  const squared = axis[0] ** 2 + axis[1] ** 2 + axis[2] ** 2 || 1;
  for (const [end, other] of [
    [i, j],
    [j, i],
  ] as const) {
    for (let k = molecule.neighbourStart[end]!; k < molecule.neighbourStart[end + 1]!; k++) {
      const neighbour = molecule.neighbours[k]!;
      if (neighbour === other || !isLocated(molecule, neighbour)) continue;
      if (bondBetween(molecule, neighbour, other) !== -1) continue;
      const d = [0, 1, 2].map(x => r[3 * neighbour + x]! - r[3 * end + x]!) as [number, number, number];
      const along = (d[0] * axis[0] + d[1] * axis[1] + d[2] * axis[2]) / squared;
      const v = [d[0] - along * axis[0], d[1] - along * axis[1], d[2] - along * axis[2]] as const;
      const length = Math.hypot(...v);
      if (length > 0.2) return [v[0] / length, v[1] / length, v[2] / length];
    }
  }
  const other = Math.abs(axis[0]) < 0.7 * Math.sqrt(squared) ? [1, 0, 0] : [0, 1, 0];
  const v = [
    axis[1] * other[2]! - axis[2] * other[1]!,
    axis[2] * other[0]! - axis[0] * other[2]!,
    axis[0] * other[1]! - axis[1] * other[0]!,
  ] as const;
  const length = Math.hypot(...v) || 1;
  return [v[0] / length, v[1] / length, v[2] / length];
}
