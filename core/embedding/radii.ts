/** Atomic radii for bounds: covalent for bonds the force field does not know, van der Waals for contacts. */

/** Covalent radii in Å by atomic number (B. Cordero et al., Dalton Trans. 2008, 2832), 0 where none is needed; from memory. */
const COVALENT = [
  0, 0.31, 0.28, 1.28, 0.96, 0.84, 0.76, 0.71, 0.66, 0.57, 0.58, 1.66, 1.41, 1.21, 1.11, 1.07, 1.05, 1.02,
  1.06, 2.03, 1.76, 1.7, 1.6, 1.53, 1.39, 1.39, 1.32, 1.26, 1.24, 1.32, 1.22, 1.22, 1.2, 1.19, 1.2, 1.2, 1.16,
  2.2, 1.95, 1.9, 1.75, 1.64, 1.54, 1.47, 1.46, 1.42, 1.39, 1.45, 1.44, 1.42, 1.39, 1.39, 1.38, 1.39, 1.4,
  2.44, 2.15, 2.07, 2.04, 2.03, 2.01, 1.99, 1.98, 1.98, 1.96, 1.94, 1.92, 1.92, 1.89, 1.9, 1.87, 1.87, 1.75,
  1.7, 1.62, 1.51, 1.44, 1.41, 1.36, 1.36, 1.32, 1.45, 1.46, 1.48, 1.4, 1.5, 1.5,
];
const COVALENT_DEFAULT = 1.5;

/** Van der Waals radii in Å (A. Bondi, J. Phys. Chem. 1964, 68, 441); others 2.0. */
const VAN_DER_WAALS: Readonly<Record<number, number>> = {
  1: 1.2,
  6: 1.7,
  7: 1.55,
  8: 1.52,
  9: 1.47,
  14: 2.1,
  15: 1.8,
  16: 1.8,
  17: 1.75,
  34: 1.9,
  35: 1.85,
  53: 1.98,
};
const VAN_DER_WAALS_DEFAULT = 2;

/** Share of a single bond's length that a bond of each order has (common practice, no source). */
const ORDER_SHARE = [1.05, 1, 0.88, 0.79, 0.75] as const;

export function covalentRadius(z: number): number {
  return COVALENT[z] || COVALENT_DEFAULT;
}

export function vanDerWaalsRadius(z: number): number {
  return VAN_DER_WAALS[z] ?? VAN_DER_WAALS_DEFAULT;
}

/** Length of a bond from the radii of its atoms, Å. */
export function radiiLength(first: number, second: number, order: number): number {
  return (covalentRadius(first) + covalentRadius(second)) * (ORDER_SHARE[order] ?? 1);
}
