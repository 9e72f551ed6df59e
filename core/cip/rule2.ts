/**
 * Sequence Rule 2 (P-92.3), in the wording that J. Chem. Inf. Model. 2018, 58, 1755 proposes: higher mass precedes
 * lower mass.
 *
 * The mass of a duplicate atom is 0; of an atom with a stated isotope the mass of that isotope; of any other atom
 * the standard atomic weight of its element.
 */
import { atomicWeight } from '../chemistry/elements.ts';
import { type Digraph, Nature } from './digraph.ts';
import type { NodeRule } from './rule.ts';

/**
 * Masses in u of isotopes so close to the atomic weight of their element that the mass number would not tell which
 * is heavier, and of their neighbours (Atomic Mass Evaluation 2020, Chinese Phys. C 2021, 45, 030003), by 1000 Z + mass number.
 */
const ISOTOPE_MASSES: ReadonlyMap<number, number> = new Map([
  [1001, 1.007825],
  [1002, 2.014102],
  [1003, 3.016049],
  [3006, 6.015123],
  [3007, 7.016003],
  [5010, 10.012937],
  [5011, 11.009305],
  [6012, 12],
  [6013, 13.003355],
  [6014, 14.003242],
  [7014, 14.003074],
  [7015, 15.000109],
  [8016, 15.994915],
  [8017, 16.999132],
  [8018, 17.99916],
  [14028, 27.976927],
  [14029, 28.976495],
  [14030, 29.97377],
  [16032, 31.972071],
  [16033, 32.971459],
  [16034, 33.967867],
  [17035, 34.968853],
  [17037, 36.965903],
  [35079, 78.918338],
  [35081, 80.91629],
]);

/** Elements of a single stable isotope: stating that isotope says nothing new, so it weighs what the element weighs. */
const MONOISOTOPIC: ReadonlyMap<number, number> = new Map([
  [9, 19],
  [11, 23],
  [13, 27],
  [15, 31],
  [33, 75],
  [53, 127],
]);

/** Mass in u of an atom of element `z` with mass number `isotope`, 0 where none is stated. */
export function massOf(z: number, isotope: number): number {
  if (isotope === 0 || MONOISOTOPIC.get(z) === isotope) return atomicWeight(z);
  return ISOTOPE_MASSES.get(1000 * z + isotope) ?? isotope;
}

/** Mass in u that Rule 2 gives a node. */
export function nodeMass(digraph: Digraph, node: number): number {
  const nature = digraph.nature[node];
  if (nature === Nature.bondDuplicate || nature === Nature.ringDuplicate) return 0;
  const atom = digraph.atom[node]!;
  if (atom < 0) return atomicWeight(1);
  return massOf(digraph.molecule.elements[atom]!, digraph.molecule.isotopes[atom]!);
}

export const rule2: NodeRule = { name: '2', key: nodeMass };
