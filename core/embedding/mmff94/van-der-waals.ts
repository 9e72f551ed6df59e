/**
 * Van der Waals parameters of MMFF94 for a pair of types: buffered 14-7 with the combination rules for radius and depth
 * (T. A. Halgren, J. Am. Chem. Soc. 1992, 114, 7827; J. Comput. Chem. 1996, 17, 520, eqs 1 to 7).
 */
import type { Mmff94Parameters } from './parameters.ts';

const B = 0.2;
const BETA = 12;
/** Scales of radius and depth for a donor with an acceptor. */
const DONOR_RADIUS = 0.8;
const DONOR_DEPTH = 0.5;

/** R* in Å and ε in kcal/mol for two types. @throws Error when a type has no parameters. */
export function pairParameters(
  parameters: Mmff94Parameters,
  first: number,
  second: number,
): readonly [number, number] {
  const p = parameters.vanDerWaals[first];
  const q = parameters.vanDerWaals[second];
  if (!p || !q) throw new Error(`MMFF94 has no van der Waals parameters for type ${p ? second : first}`);
  const ri = p.a * p.alpha ** 0.25;
  const rj = q.a * q.alpha ** 0.25;
  const gamma = (ri - rj) / (ri + rj);
  const donor = p.role === 'D' || q.role === 'D';
  let radius = 0.5 * (ri + rj) * (1 + (donor ? 0 : B * (1 - Math.exp(-BETA * gamma * gamma))));
  let depth =
    (181.16 * p.g * q.g * p.alpha * q.alpha) /
    ((Math.sqrt(p.alpha / p.n) + Math.sqrt(q.alpha / q.n)) * radius ** 6);
  if ((p.role === 'D' && q.role === 'A') || (p.role === 'A' && q.role === 'D')) {
    radius *= DONOR_RADIUS;
    depth *= DONOR_DEPTH;
  }
  return [radius, depth];
}
