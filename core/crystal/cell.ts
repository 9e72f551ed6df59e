/** The unit cell: fractional to Cartesian coordinates and back, and how cell errors move atoms. */
import type { Measured } from '../formats/cif-syntax.ts';

export type Vector = readonly [number, number, number];
/** Nine numbers, row by row. */
export type Matrix = readonly number[];

/** a, b, c in Å, α, β, γ in degrees, each with its standard uncertainty. */
export interface Cell {
  readonly lengths: readonly [Measured, Measured, Measured];
  readonly angles: readonly [Measured, Measured, Measured];
}

const RADIANS = Math.PI / 180;

/** Volume in Å³; NaN where the angles make no cell. */
export function cellVolume(cell: Cell): number {
  const [a, b, c] = cell.lengths.map(({ value }) => value) as [number, number, number];
  const [x, y, z] = cell.angles.map(({ value }) => Math.cos(value * RADIANS)) as [number, number, number];
  return a * b * c * Math.sqrt(1 - x * x - y * y - z * z + 2 * x * y * z);
}

/**
 * Matrix from fractional to Cartesian coordinates: x along a, y in the plane of a and b, z along c*
 * (International Tables B, 2006, 3.3.1.1). A proper change of axes: handedness is kept.
 */
export function orthogonalisation(lengths: readonly number[], angles: readonly number[]): Matrix {
  const [a, b, c] = lengths as [number, number, number];
  const [ca, cb, cg] = angles.map(angle => Math.cos(angle * RADIANS)) as [number, number, number];
  const sg = Math.sin(angles[2]! * RADIANS);
  const root = Math.sqrt(1 - ca * ca - cb * cb - cg * cg + 2 * ca * cb * cg);
  return [a, b * cg, c * cb, 0, b * sg, (c * (ca - cb * cg)) / sg, 0, 0, (c * root) / sg];
}

export function cellMatrix(cell: Cell): Matrix {
  return orthogonalisation(
    cell.lengths.map(({ value }) => value),
    cell.angles.map(({ value }) => value),
  );
}

export function multiply(m: Matrix, v: Vector): [number, number, number] {
  return [
    m[0]! * v[0] + m[1]! * v[1] + m[2]! * v[2],
    m[3]! * v[0] + m[4]! * v[1] + m[5]! * v[2],
    m[6]! * v[0] + m[7]! * v[1] + m[8]! * v[2],
  ];
}

/** A cell parameter (or several bound by symmetry) with an error: how one unit of it changes the orthogonalisation matrix. */
export interface CellMode {
  readonly sigma: number;
  readonly slope: Matrix;
}

/** Step for the numerical derivative of the matrix: Å or degrees. */
const STEP = 1e-4;

/**
 * The errors of the cell, one mode for each independent parameter that has an s.u. Axes that an operator exchanges and
 * that agree in value and s.u. are one parameter.
 */
export function cellModes(cell: Cell, rotations: readonly Matrix[]): CellMode[] {
  const values = [...cell.lengths, ...cell.angles];
  const bound = [0, 1, 2, 3, 4, 5];
  const find = (k: number): number => (bound[k] === k ? k : find(bound[k]!));
  for (const w of rotations) {
    for (let i = 0; i < 3; i++) {
      for (let j = 0; j < 3; j++) {
        if (i === j || w[3 * i + j] === 0) continue;
        for (const shift of [0, 3]) {
          const first = values[i + shift]!;
          const second = values[j + shift]!;
          if (first.value === second.value && first.uncertainty === second.uncertainty) {
            bound[find(i + shift)] = find(j + shift);
          }
        }
      }
    }
  }
  const modes: CellMode[] = [];
  for (let k = 0; k < 6; k++) {
    const sigma = values[k]!.uncertainty;
    if (find(k) !== k || sigma === null || sigma === 0) continue;
    const moved = (by: number): Matrix => {
      const list = values.map(({ value }, at) => value + (find(at) === k ? by : 0));
      return orthogonalisation(list.slice(0, 3), list.slice(3));
    };
    const plus = moved(STEP);
    const minus = moved(-STEP);
    modes.push({ sigma, slope: plus.map((value, at) => (value - minus[at]!) / (2 * STEP)) });
  }
  return modes;
}
