/** The elements: symbols, atomic weights, isotopic masses of those that carry a mass number in practice, radii. */

const SYMBOLS =
  '* H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se Br Kr Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb Lu Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi Po At Rn Fr Ra Ac Th Pa U Np Pu Am Cm Bk Cf Es Fm Md No Lr Rf Db Sg Bh Hs Mt Ds Rg Cn Nh Fl Mc Lv Ts Og'.split(
    ' ',
  );

/** Abridged standard atomic weights (IUPAC 2021, Pure Appl. Chem. 2022, 94, 573); mass number of the longest-lived isotope where none is standard. */
const WEIGHTS = [
  0, 1.008, 4.0026, 6.94, 9.0122, 10.81, 12.011, 14.007, 15.999, 18.998, 20.18, 22.99, 24.305, 26.982, 28.085,
  30.974, 32.06, 35.45, 39.95, 39.098, 40.078, 44.956, 47.867, 50.942, 51.996, 54.938, 55.845, 58.933, 58.693,
  63.546, 65.38, 69.723, 72.63, 74.922, 78.971, 79.904, 83.798, 85.468, 87.62, 88.906, 91.224, 92.906, 95.95,
  97, 101.07, 102.91, 106.42, 107.87, 112.41, 114.82, 118.71, 121.76, 127.6, 126.9, 131.29, 132.91, 137.33,
  138.91, 140.12, 140.91, 144.24, 145, 150.36, 151.96, 157.25, 158.93, 162.5, 164.93, 167.26, 168.93, 173.05,
  174.97, 178.49, 180.95, 183.84, 186.21, 190.23, 192.22, 195.08, 196.97, 200.59, 204.38, 207.2, 208.98, 209,
  210, 222, 223, 226, 227, 232.04, 231.04, 238.03, 237, 244, 243, 247, 247, 251, 252, 257, 258, 259, 262, 267,
  268, 269, 270, 269, 277, 281, 282, 285, 286, 290, 290, 293, 294, 294,
];

const NUMBERS: ReadonlyMap<string, number> = new Map(SYMBOLS.map((symbol, z) => [symbol, z]));

/** Largest atomic number known to the table. */
export const LAST_ELEMENT = SYMBOLS.length - 1;

/** Symbol of an element, `*` for 0. */
export function elementSymbol(z: number): string {
  return SYMBOLS[z] ?? '*';
}

/** Atomic number of a symbol in its usual capitalisation (`Cl`); `D` and `T` are hydrogen; undefined when there is no such element. */
export function elementNumber(symbol: string): number | undefined {
  if (symbol === 'D' || symbol === 'T') return 1;
  return NUMBERS.get(symbol);
}

/** Standard atomic weight in u. */
export function atomicWeight(z: number): number {
  return WEIGHTS[z] ?? 0;
}

/** Whether the element is a metal; handedness at metals is not judged. Metalloids B, Si, Ge, As, Sb, Te, At and all nonmetals are not. */
export function isMetal(z: number): boolean {
  if (z <= 2) return false;
  return !(
    (z >= 5 && z <= 10) ||
    (z >= 14 && z <= 18) ||
    (z >= 32 && z <= 36) ||
    (z >= 51 && z <= 54) ||
    z === 85 ||
    z === 86
  );
}
