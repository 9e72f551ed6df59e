/** An intended configuration: a structure with its docket, and what the comparison works out of it once. */
import type { Molecule } from '../chemistry/molecule.ts';
import type { Docket } from '../docket.ts';
import { type FragmentOptions, fragmentsOf, PLAIN_FRAGMENTS } from './fragment.ts';
import { type IntendedFragments, intendedFragments, skeletonSignature } from './mapping.ts';

export class Intention {
  readonly name: string;
  readonly molecule: Molecule;
  readonly docket: Docket;
  /** Signature of the skeleton of the principal molecule, its attachment points left out. */
  readonly signature: number;
  readonly #cuts = new Map<string, IntendedFragments>();

  constructor(name: string, molecule: Molecule, docket: Docket) {
    this.name = name;
    this.molecule = molecule;
    this.docket = docket;
    this.signature = principalSignature(molecule);
  }

  /** The molecules of the intention under one set of options. */
  cut(options: FragmentOptions): IntendedFragments {
    const key = `${options.isotopicHydrogens} ${options.withoutMetalBonds} ${options.withoutAttachments}`;
    let cut = this.#cuts.get(key);
    if (!cut) {
      cut = intendedFragments(this.molecule, this.docket, options);
      this.#cuts.set(key, cut);
    }
    return cut;
  }
}

/** Signature of the skeleton of the largest molecule of an entry; 0 when there is none. */
export function principalSignature(molecule: Molecule): number {
  const { list } = fragmentsOf(molecule, { ...PLAIN_FRAGMENTS, isotopicHydrogens: false });
  let largest = list[0];
  for (const fragment of list) if (fragment.count > (largest?.count ?? 0)) largest = fragment;
  return largest ? skeletonSignature(largest) : 0;
}
