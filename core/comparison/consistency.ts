/**
 * Names for the compound, the configuration and the places of the units of a model that hold from one file to the next
 * whatever the order of atoms, so that poses of one compound can be set against one another when nothing was intended.
 */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Docket } from '../docket.ts';
import { fragmentsOf, hasIsotopes, PLAIN_FRAGMENTS } from './fragment.ts';
import { initialColours, mix, refine, refineRounds } from './refinement.ts';

export interface Identity {
  /** The same for models of one compound, stereochemistry aside. */
  readonly compound: string;
  /** The same for models of one compound in one configuration; null where a unit that matters is not decided. */
  readonly configuration: string | null;
  /** For each unit of the docket: the same for units whose surroundings are alike, stereochemistry aside. */
  readonly places: readonly string[];
}

function hex(value: number): string {
  return (value >>> 0).toString(16).padStart(8, '0');
}

/** Works out the names for the largest molecule of a model; units elsewhere have places but no say in the configuration. */
export function identityOf(molecule: Molecule, docket: Docket): Identity {
  const fragments = fragmentsOf(molecule, PLAIN_FRAGMENTS);
  const level = hasIsotopes(molecule) ? 'isotopic' : 'bonded';
  const refined = fragments.list.map(fragment => refine(fragment, initialColours(fragment, level)));
  let chief = 0;
  fragments.list.forEach((fragment, f) => {
    if (fragment.count > fragments.list[chief]!.count) chief = f;
  });
  const main = fragments.list[chief];
  if (!main) return { compound: hex(0), configuration: hex(0), places: docket.units.map(() => hex(0)) };
  const { colours, rounds } = refined[chief]!;
  const lettered = colours.slice();
  let decided = true;
  const places = docket.units.map(({ unit, descriptor }) => {
    let place = mix(0x51ed270b, unit.kind.length * 31 + unit.kind.charCodeAt(0));
    let sum = 0;
    for (const { atom } of unit.ends) {
      const node = fragments.nodeOf[atom]!;
      const f = fragments.fragmentOf[atom]!;
      if (node >= 0 && f >= 0) sum = (sum + mix(0x68bc21eb, refined[f]!.colours[node]!)) | 0;
    }
    place = mix(place, sum);
    if (unit.labile !== null) return hex(place);
    for (const { atom } of unit.ends) {
      if (fragments.fragmentOf[atom] !== chief) continue;
      if (descriptor === null) decided = false;
      const node = fragments.nodeOf[atom]!;
      if (node >= 0) lettered[node] = mix(lettered[node]!, (descriptor ?? '?').charCodeAt(0));
    }
    return hex(place);
  });
  const configured = refineRounds(main, lettered, Math.max(rounds, 1));
  return {
    compound: `${main.count}-${hex(total(refineRounds(main, colours, 1)))}`,
    configuration: decided ? hex(total(configured)) : null,
    places,
  };
}

function total(colours: Int32Array): number {
  let sum = colours.length;
  for (const colour of colours) sum = (sum + Math.imul(colour, 0x9e3779b1)) | 0;
  return sum;
}
