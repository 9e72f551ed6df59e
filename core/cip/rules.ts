/** The sequence rules by name, in their order of application, with a one-line statement of each for people to read. */
import type { RuleName } from '../docket.ts';

export const RULE_ORDER: readonly RuleName[] = ['1a', '1b', '2', '3', '4a', '4b', '4c', '5', '6'];

/** What each rule says (IUPAC 2013, P-92.1.3; 1b, 2 and 6 as in J. Chem. Inf. Model. 2018, 58, 1755). */
export const RULE_STATEMENTS: Readonly<Record<RuleName, string>> = {
  '1a': 'higher atomic number before lower',
  '1b': 'smaller root distance before greater',
  '2': 'higher mass before lower',
  '3': 'Z before E before no stereogenic bond',
  '4a': 'chiral before pseudoasymmetric before not stereogenic',
  '4b': 'like descriptor pairs before unlike',
  '4c': 'r before s, m before p',
  '5': 'R, M, z before S, P, e',
  '6': 'the reference atom before its equals',
};
