/** The configuration a model is asked to have, and whether coordinates have it. */
import type { Molecule } from '../chemistry/molecule.ts';
import { DEFAULT_SETTINGS } from '../docket.ts';
import { perceiveUnits } from '../perception/perceive.ts';
import type { StereoUnit } from '../perception/unit.ts';

export interface AskedUnits {
  /** Units with a sense. */
  readonly asked: readonly StereoUnit[];
  /** Units about which nothing is said. */
  readonly open: readonly StereoUnit[];
}

/** Units of a molecule as its notation, drawing or coordinates have them; `extra` replaces or adds some. */
export function askedUnits(molecule: Molecule, extra: readonly StereoUnit[] = []): AskedUnits {
  const units = new Map<string, StereoUnit>();
  for (const unit of perceiveUnits(molecule, DEFAULT_SETTINGS).units) units.set(unitKey(unit), unit);
  for (const unit of extra) units.set(unitKey(unit), unit);
  const asked: StereoUnit[] = [];
  const open: StereoUnit[] = [];
  // What turns over by itself is not read from coordinates: a pose's amine or free axis asks for nothing.
  const free = (unit: StereoUnit): boolean =>
    unit.sense === 0 || (unit.labile !== null && unit.basis === 'coordinates' && !extra.includes(unit));
  for (const unit of units.values()) (free(unit) ? open : asked).push(unit);
  return { asked, open };
}

/** Kind and atoms of a unit as one text. */
export function unitKey(unit: StereoUnit): string {
  return `${unit.kind}:${[...unit.atoms].sort((a, b) => a - b).join('-')}`;
}

/** Units of a model in space that are not as asked; those whose kind perception does not report are left out. */
export function unitsMissed(model: Molecule, asked: readonly StereoUnit[]): StereoUnit[] {
  const found = new Map<string, StereoUnit>();
  for (const unit of perceiveUnits(model, DEFAULT_SETTINGS).units) found.set(unitKey(unit), unit);
  return asked.filter(unit => {
    const there = found.get(unitKey(unit));
    return there !== undefined && there.sense !== unit.sense;
  });
}

/** Name of a unit for people, with 1-based atom numbers. */
export function unitName(unit: StereoUnit): string {
  return `${unit.kind} ${unit.atoms.map(atom => atom + 1).join('-')}`;
}
