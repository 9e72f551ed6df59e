/** Superposition: by movements that were made, and by what must not fit. */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { moved, superpose } from '../../../core/geometry/superposition.ts';
import { seeded } from '../../molecules.ts';

/** A centre at the origin, four ligands at tetrahedral angles; with the last one away, the first three run clockwise. */
function tetrahedron(lengths: readonly [number, number, number, number]): Float64Array {
  const directions = [
    [0, 1, 1 / Math.SQRT2],
    [0, -1, 1 / Math.SQRT2],
    [1, 0, -1 / Math.SQRT2],
    [-1, 0, -1 / Math.SQRT2],
  ];
  const r = [0, 0, 0];
  directions.forEach((direction, k) => {
    const length = Math.hypot(...direction);
    for (const x of direction) r.push((x * lengths[k]!) / length);
  });
  return Float64Array.from(r);
}

const coordinate = fc.double({ min: -5, max: 5, noNaN: true });
const points = (count: number): fc.Arbitrary<Float64Array> =>
  fc.array(coordinate, { minLength: 3 * count, maxLength: 3 * count }).map(list => Float64Array.from(list));

const mirror = (r: Float64Array): Float64Array => r.map((value, i) => (i % 3 === 2 ? -value : value));

/** Normal deviates (G. E. P. Box, M. E. Muller, Ann. Math. Stat. 1958, 29, 610). */
function normal(random: () => number): number {
  return Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
}

describe('superposition', () => {
  it('finds the movement that was made, and none other', () => {
    fc.assert(
      fc.property(points(6), fc.nat(), (r, seed) => {
        const random = seeded(seed);
        const axis = [normal(random), normal(random), normal(random), normal(random)];
        const length = Math.hypot(...axis);
        const [w, x, y, z] = axis.map(value => value / length) as [number, number, number, number];
        const rotation = Float64Array.of(
          1 - 2 * (y * y + z * z),
          2 * (x * y - w * z),
          2 * (x * z + w * y),
          2 * (x * y + w * z),
          1 - 2 * (x * x + z * z),
          2 * (y * z - w * x),
          2 * (x * z - w * y),
          2 * (y * z + w * x),
          1 - 2 * (x * x + y * y),
        );
        const target = moved(r, { rotation, translation: Float64Array.of(3, -40, 7), rmsd: 0 });
        const found = superpose(r, target);
        expect(found.rmsd).toBeLessThan(1e-6);
        moved(r, found).forEach((value, i) => expect(value).toBeCloseTo(target[i]!, 5));
        const [a, b, c, d, e, f, g, h, k] = found.rotation as unknown as number[];
        const determinant = a! * (e! * k! - f! * h!) - b! * (d! * k! - f! * g!) + c! * (d! * h! - e! * g!);
        expect(determinant).toBeCloseTo(1, 8);
      }),
    );
  });

  it('does not lay a chiral set on its mirror image', () => {
    const r = tetrahedron([1, 1.5, 2, 2.5]);
    expect(superpose(r, r).rmsd).toBeLessThan(1e-9);
    expect(superpose(mirror(r), r).rmsd).toBeGreaterThan(0.3);
  });

  it('gives points of no weight no say', () => {
    const r = tetrahedron([1, 1.5, 2, 2.5]);
    const target = r.slice();
    target[12] = 40;
    expect(superpose(r, target).rmsd).toBeGreaterThan(1);
    expect(superpose(r, target, Float64Array.of(1, 1, 1, 1, 0)).rmsd).toBeLessThan(1e-6);
  });

  it('keeps a single point upright and refuses what does not pair', () => {
    const one = superpose(Float64Array.of(1, 2, 3), Float64Array.of(4, 4, 4));
    expect([...one.rotation]).toEqual([1, 0, 0, 0, 1, 0, 0, 0, 1]);
    expect([...one.translation]).toEqual([3, 2, 1]);
    expect(() => superpose(new Float64Array(3), new Float64Array(6))).toThrow(RangeError);
    expect(() => superpose(new Float64Array(0), new Float64Array(0))).toThrow(RangeError);
    expect(() => superpose(new Float64Array(3), new Float64Array(3), Float64Array.of(-1))).toThrow(
      RangeError,
    );
    expect(() => superpose(new Float64Array(3), new Float64Array(3), Float64Array.of(0))).toThrow(RangeError);
  });
});
