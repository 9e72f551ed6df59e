/** Constants of MMFF94's empirical rules that stand in the papers and in no table (T. A. Halgren, J. Comput. Chem. 1996, 17, 616). */

/** Row of the periodic table, 0 for H and He; transition elements of the fourth and fifth period 30 and 40 where `transition`. */
export function rowOf(z: number, transition = false): number {
  if (z <= 2) return 0;
  if (z <= 10) return 1;
  if (z <= 18) return 2;
  if (z <= 36) return transition && z >= 21 && z <= 30 ? 30 : 3;
  return transition && z >= 39 && z <= 48 ? 40 : z <= 54 ? 4 : 5;
}

/** Z of eq. 5 for the outer atoms of an angle. */
export const ANGLE_OUTER: Readonly<Record<number, number>> = {
  1: 1.395,
  6: 2.494,
  7: 2.711,
  8: 3.045,
  9: 2.847,
  14: 2.35,
  15: 2.35,
  16: 2.98,
  17: 2.909,
  35: 3.017,
  53: 3.086,
  33: 1.825,
  5: 2.19,
};

/** C of eq. 5 for the central atom of an angle. */
export const ANGLE_CENTRE: Readonly<Record<number, number>> = {
  5: 0.704,
  6: 1.016,
  7: 1.113,
  8: 1.337,
  14: 0.811,
  15: 1.068,
  16: 1.249,
  17: 1.078,
  33: 0.825,
};

/** U of the twofold rules. */
export const TORSION_U: Readonly<Record<number, number>> = { 6: 2, 7: 2, 8: 2, 14: 1.25, 15: 1.25, 16: 1.25 };
/** V of the threefold rule. */
export const TORSION_V: Readonly<Record<number, number>> = {
  6: 2.12,
  7: 1.5,
  8: 0.2,
  14: 1.22,
  15: 2.4,
  16: 0.49,
};
/** W of the rule for bonds between divalent atoms. */
export const TORSION_W: Readonly<Record<number, number>> = { 8: 2, 16: 8 };
