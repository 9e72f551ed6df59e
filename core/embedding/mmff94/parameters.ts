/**
 * The parameter tables of MMFF94, parsed from the texts that the installed library carries, with look-up by key.
 *
 * Source of the values: T. A. Halgren, J. Comput. Chem. 1996, 17, 490 to 641 (five papers), as distributed with openchemlib.
 */

/** What the force field knows of an atom type (MMFFPROP): atomic number, coordination, valence, and flags. */
export interface TypeProperties {
  readonly element: number;
  readonly coordination: number;
  readonly valence: number;
  /** A lone pair that can conjugate. */
  readonly lonePair: boolean;
  /** 0 none, 1 partial, 2 double, 3 triple. */
  readonly multiple: number;
  readonly aromatic: boolean;
  readonly linear: boolean;
  /** Two such types can be joined by a single bond that is not delocalised (bond type 1). */
  readonly singleBetweenMultiple: boolean;
}

/** Van der Waals parameters of a type. */
export interface VanDerWaalsType {
  readonly alpha: number;
  readonly n: number;
  readonly a: number;
  readonly g: number;
  /** `D` donor, `A` acceptor, `-` neither. */
  readonly role: string;
}

type Row = readonly number[];

/** The tables, each by a numeric key that `bondKey` and its like make. */
export interface Mmff94Parameters {
  readonly properties: readonly (TypeProperties | undefined)[];
  /** For each type its equivalents at the five levels of step-down. */
  readonly equivalents: readonly (Row | undefined)[];
  /** kb in md/Å, r0 in Å. */
  readonly bonds: ReadonlyMap<number, Row>;
  /** r0 and kb of the bonds between elements, for the empirical rule. */
  readonly bondDefaults: ReadonlyMap<number, Row>;
  /** Covalent radius in Å and electronegativity by element. */
  readonly radii: ReadonlyMap<number, Row>;
  /** Constants of Herschbach and Laurie by the rows of the periodic table: a, d, d'. */
  readonly herschbachLaurie: ReadonlyMap<number, Row>;
  /** ka in md Å rad⁻², θ0 in degrees. */
  readonly angles: ReadonlyMap<number, Row>;
  /** kba of i-j with the angle, kba of j-k, in md rad⁻¹. */
  readonly stretchBends: ReadonlyMap<number, Row>;
  readonly stretchBendDefaults: ReadonlyMap<number, Row>;
  /** koop in md Å rad⁻². */
  readonly outOfPlanes: ReadonlyMap<number, Row>;
  /** V1, V2, V3 in kcal/mol. */
  readonly torsions: ReadonlyMap<number, Row>;
  readonly vanDerWaals: readonly (VanDerWaalsType | undefined)[];
  /** Bond charge increments: what the second type gains. */
  readonly chargeIncrements: ReadonlyMap<number, Row>;
  /** Partial increment and share of the formal charge by type. */
  readonly partialCharges: readonly (Row | undefined)[];
}

/** Key of a tuple of small numbers (types below 100, a leading class below 100). */
export function key(a: number, b: number, c: number, d = 0, e = 0): number {
  return (((a * 100 + b) * 100 + c) * 100 + d) * 100 + e;
}

/** Parses the tables; `text` gives the text of a table by its name. @throws Error naming a table that is not as expected. */
export function parseMmff94(text: (name: string) => string): Mmff94Parameters {
  const rows = (name: string): { values: number[]; last: string }[] => {
    const lines = text(`forcefield/mmff94/${name}.csv`).split(/\r?\n/u);
    const count = Number(lines[0]);
    const body = lines.slice(2).filter(line => line.trim() !== '');
    if (!(count > 0) || body.length < count)
      throw new Error(`table ${name} of MMFF94: ${body.length} rows, ${lines[0]} announced`);
    return body.map(line => {
      const cells = line.split(',');
      return { values: cells.map(Number), last: cells.at(-1) ?? '' };
    });
  };
  const table = (name: string, keys: number): Map<number, Row> => {
    const map = new Map<number, Row>();
    for (const { values } of rows(name)) {
      if (values.some(value => !Number.isFinite(value)))
        throw new Error(`table ${name} of MMFF94: a cell is not a number`);
      const k = values.slice(0, keys);
      map.set(key(k[0]!, k[1] ?? 0, k[2] ?? 0, k[3] ?? 0, k[4] ?? 0), values.slice(keys));
    }
    return map;
  };
  const properties: (TypeProperties | undefined)[] = [];
  for (const { values } of rows('atom')) {
    const [type, element, coordination, valence, pilp, mltb, arom, linh, sbmb] = values as [
      number,
      number,
      number,
      number,
      number,
      number,
      number,
      number,
      number,
    ];
    properties[type] = {
      element,
      coordination,
      valence,
      lonePair: pilp === 1,
      multiple: mltb,
      aromatic: arom === 1,
      linear: linh === 1,
      singleBetweenMultiple: sbmb === 1,
    };
  }
  const equivalents: (Row | undefined)[] = [];
  for (const { values } of rows('def')) equivalents[values[0]!] = values;
  const vanDerWaals: (VanDerWaalsType | undefined)[] = [];
  for (const { values, last } of rows('vanderwaals')) {
    vanDerWaals[values[0]!] = {
      alpha: values[1]!,
      n: values[2]!,
      a: values[3]!,
      g: values[4]!,
      role: last.replaceAll("'", ''),
    };
  }
  const partialCharges: (Row | undefined)[] = [];
  for (const { values } of rows('pbci')) partialCharges[values[0]!] = values.slice(1);
  return {
    properties,
    equivalents,
    bonds: table('bond', 3),
    bondDefaults: table('bndk', 2),
    radii: table('covrad', 1),
    herschbachLaurie: table('herschbachlaurie', 2),
    angles: table('angle', 4),
    stretchBends: table('stbn', 4),
    stretchBendDefaults: table('dfsb', 3),
    outOfPlanes: table('outofplane', 4),
    torsions: table('torsion', 5),
    vanDerWaals,
    chargeIncrements: table('bci', 3),
    partialCharges,
  };
}
