/** Signed volume, firmness, torsion and their uncertainty: values by hand, signs by convention, σ against a simulation. */
import { describe, expect, it } from 'vitest';
import {
  buildMolecule,
  type CoordinateUncertainty,
  type Molecule,
} from '../../../core/chemistry/molecule.ts';
import { DEFAULT_SETTINGS } from '../../../core/docket.ts';
import { examine } from '../../../core/examine.ts';
import {
  IDEAL_UNIT_VOLUME,
  propagated,
  relativeVolume,
  signedVolume,
  signedVolumeGradient,
} from '../../../core/geometry/signed-volume.ts';
import { torsion, torsionGradient } from '../../../core/geometry/torsion.ts';
import { moved, seeded } from '../../molecules.ts';

/** Four directions of a regular tetrahedron: from the fourth's far side, 1, 2, 3 run anticlockwise. */
const CORNERS = [
  [1, 1, 1],
  [1, -1, -1],
  [-1, 1, -1],
  [-1, -1, 1],
].map(corner => corner.map(c => c / Math.sqrt(3)));

/** A centre at the origin (index 0) and ligands at the given bond lengths. */
function centre(lengths: readonly number[]): Float64Array {
  return Float64Array.from([0, 0, 0, ...lengths.flatMap((length, k) => CORNERS[k]!.map(c => c * length))]);
}

/** C–C of diamond, Å (W. L. Bond, Acta Crystallogr. 1960, 13, 814: a = 3.56712 Å, times √3/4; from memory). */
const DIAMOND_BOND = 1.5446;

describe('the signed volume', () => {
  it('of an ideal centre: 4/(3√3) d³, by hand 0.7698 × 3.685 = 2.837 Å³ for diamond', () => {
    expect(IDEAL_UNIT_VOLUME).toBeCloseTo(0.7698, 4);
    const r = centre([DIAMOND_BOND, DIAMOND_BOND, DIAMOND_BOND, DIAMOND_BOND]);
    expect(Math.abs(signedVolume(r, 0, [1, 2, 3]))).toBeCloseTo(2.8367, 3);
    expect(Math.abs(signedVolume(r, 0, [1, 2, 3, 4]))).toBeCloseTo(2.8367, 3);
  });

  it('of three unequal bonds: the product of their lengths times 0.7698', () => {
    // C–F 1.39, C–Cl 1.77, C–Br 1.94 Å: 0.769800 × 1.39 × 1.77 × 1.94 = 3.6743.
    const r = centre([1.39, 1.77, 1.94, 1.09]);
    expect(Math.abs(signedVolume(r, 0, [1, 2, 3]))).toBeCloseTo(3.6743, 3);
  });

  it('by three ligands and by four is the same for an ideal centre, sign included', () => {
    const r = centre([1.5, 1.5, 1.5, 1.5]);
    for (const order of [
      [1, 2, 3, 4],
      [2, 1, 3, 4],
      [4, 2, 1, 3],
      [3, 4, 1, 2],
    ]) {
      expect(signedVolume(r, 0, order)).toBeCloseTo(signedVolume(r, 0, order.slice(0, 3)), 10);
    }
  });

  it('follows the parity of the order of ligands', () => {
    const r = centre([1.4, 1.5, 1.6, 1.7]);
    const v = signedVolume(r, 0, [1, 2, 3, 4]);
    expect(signedVolume(r, 0, [2, 1, 3, 4])).toBeCloseTo(-v, 10);
    expect(signedVolume(r, 0, [2, 3, 1, 4])).toBeCloseTo(v, 10);
    expect(signedVolume(r, 0, [1, 2, 4, 3])).toBeCloseTo(-v, 10);
  });

  it('keeps its sign where a small ring bends one triple over: four ligands see it, three do not', () => {
    // A propellane corner (all four bonds on one side of a plane through the centre) is the extreme case.
    const r = Float64Array.from([0, 0, 0, 1, 0, 0.3, -0.5, 0.87, 0.3, -0.5, -0.87, 0.3, 0, 0, 1.5]);
    expect(Math.sign(signedVolume(r, 0, [1, 2, 3, 4]))).toBe(Math.sign(-1));
    expect(Math.sign(signedVolume(r, 0, [1, 2, 3]))).toBe(1);
  });

  it('relative: one for an ideal centre of any bond lengths, nought for a flat one, more than one for bonds at right angles', () => {
    expect(Math.abs(relativeVolume(centre([1.1, 1.9, 1.3, 2.2]), 0, [1, 2, 3]))).toBeCloseTo(1, 10);
    expect(Math.abs(relativeVolume(centre([1.1, 1.9, 1.3, 2.2]), 0, [1, 2, 3, 4]))).toBeCloseTo(1, 10);
    const flat = Float64Array.from([0, 0, 0, 1, 0, 0, -0.5, 0.87, 0, -0.5, -0.87, 0]);
    expect(relativeVolume(flat, 0, [1, 2, 3])).toBeCloseTo(0, 10);
    const corner = Float64Array.from([0, 0, 0, 1, 0, 0, 0, 1, 0, 0, 0, 1]);
    expect(relativeVolume(corner, 0, [1, 2, 3])).toBeCloseTo(1 / IDEAL_UNIT_VOLUME, 10);
    // Two atoms on one place: no direction, no volume.
    expect(relativeVolume(new Float64Array(12), 0, [1, 2, 3])).toBe(0);
  });

  it('its gradient agrees with differences', () => {
    const random = seeded(7);
    for (const ligands of [
      [1, 2, 3],
      [2, 4, 1, 3],
    ]) {
      const r = centre([1.4, 1.5, 1.6, 1.7]).map(c => c + 0.3 * random());
      const { atoms, gradient } = signedVolumeGradient(r, 0, ligands);
      atoms.forEach((atom, k) => {
        for (let x = 0; x < 3; x++) {
          const step = 1e-5;
          const plus = r.slice();
          plus[3 * atom + x]! += step;
          const minus = r.slice();
          minus[3 * atom + x]! -= step;
          const slope = (signedVolume(plus, 0, ligands) - signedVolume(minus, 0, ligands)) / (2 * step);
          expect(gradient[3 * k + x]).toBeCloseTo(slope, 6);
        }
      });
    }
  });
});

/** Bromochlorofluoromethane: C, then F Cl Br H at the corners. */
function halomethane(r: Float64Array, uncertainty: CoordinateUncertainty | null = null): Molecule {
  const elements = [6, 9, 17, 35, 1];
  const molecule = buildMolecule({
    atoms: elements.map((element, i) => ({ element, x: r[3 * i]!, y: r[3 * i + 1]!, z: r[3 * i + 2]! })),
    bonds: [1, 2, 3, 4].map(i => [0, i, 1] as const),
    dimension: 3,
  });
  return { ...molecule, uncertainty };
}

describe('sign and letter (design.md, Conventions of measurement)', () => {
  const r = centre([1.39, 1.77, 1.94, 1.09]);

  it('negative is R, positive is S, whatever the place in space', () => {
    const random = seeded(3);
    const seen = new Set<string>();
    for (const hand of [1, -1]) {
      const molecule = halomethane(r.map((c, i) => (i % 3 === 0 ? hand * c : c)));
      for (let k = 0; k < 20; k++) {
        const [unit] = examine(moved(molecule, random)).units;
        expect(unit!.signedVolume! < 0).toBe(unit!.descriptor === 'R');
        expect(Math.abs(unit!.signedVolume!)).toBeCloseTo(3.6743, 3);
        expect(unit!.unit.firmness).toBeCloseTo(1, 6);
        seen.add(unit!.descriptor!);
      }
    }
    expect([...seen].sort()).toEqual(['R', 'S']);
  });

  it('the letter is the one seen by eye: looking with H away, Br → Cl → F clockwise is R', () => {
    // H along -z (away from a reader above); Br, Cl, F clockwise as seen from above.
    const clockwise = Float64Array.from([0, 0, 0, 0.87, -0.5, 0.3, -0.87, -0.5, 0.3, 0, 1, 0.3, 0, 0, -1]);
    // Order of the atoms is C F Cl Br H: Br at 12 o'clock, F at 4, Cl at 8: Br → Cl → F anticlockwise.
    expect(examine(halomethane(clockwise)).units[0]!.descriptor).toBe('S');
    const mirror = clockwise.map((c, i) => (i % 3 === 0 ? -c : c));
    expect(examine(halomethane(mirror)).units[0]!.descriptor).toBe('R');
  });

  it('below the setting of firmness, and below 3 σ, a centre is flat and has no letter', () => {
    const shallow = Float64Array.from([0, 0, 0, 1, 0, 0.05, -0.5, 0.87, 0.05, -0.5, -0.87, 0.05, 0, 0, -1]);
    const [unit] = examine(halomethane(shallow)).units;
    expect([unit!.unit.state, unit!.descriptor]).toEqual(['flat', null]);
    const [told] = examine(halomethane(shallow), { ...DEFAULT_SETTINGS, flatFirmness: 0.01 }).units;
    expect(told!.descriptor).not.toBeNull();
    const vague: CoordinateUncertainty = { covariances: isotropic(5, 0.5), modes: [] };
    const [doubtful] = examine(halomethane(r, vague)).units;
    expect([doubtful!.unit.state, doubtful!.descriptor]).toEqual(['flat', null]);
    expect(doubtful!.unit.sigma! * 3).toBeGreaterThan(Math.abs(doubtful!.signedVolume!));
    const sharp: CoordinateUncertainty = { covariances: isotropic(5, 0.01), modes: [] };
    expect(examine(halomethane(r, sharp)).units[0]!.unit.state).toBe('clear');
  });

  it('without standard uncertainties none is reported', () => {
    expect(examine(halomethane(r)).units[0]!.unit.sigma).toBeNull();
  });
});

/** Covariances of atoms with the same σ in every direction. */
function isotropic(atoms: number, sigma: number): Float64Array {
  const covariances = new Float64Array(6 * atoms);
  for (let i = 0; i < atoms; i++) covariances.fill(sigma * sigma, 6 * i, 6 * i + 3);
  return covariances;
}

/** A random number of the normal distribution (G. E. P. Box, M. E. Muller, Ann. Math. Stat. 1958, 29, 610). */
function normal(random: () => number): number {
  return Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
}

/** Anisotropic covariances L Lᵀ with their factors, and an error shared by all atoms. */
function randomUncertainty(
  atoms: number,
  r: Float64Array,
  random: () => number,
): { uncertainty: CoordinateUncertainty; draw: () => Float64Array } {
  const covariances = new Float64Array(6 * atoms);
  const factors: number[][] = [];
  for (let i = 0; i < atoms; i++) {
    const l = [
      0.004 + 0.004 * random(),
      0.003 * random(),
      0.004 + 0.004 * random(),
      0.003 * random(),
      0.003 * random(),
      0.004 + 0.004 * random(),
    ];
    const [a, b, c, d, e, f] = l as [number, number, number, number, number, number];
    covariances.set([a * a, b * b + c * c, d * d + e * e + f * f, a * b, a * d, b * d + c * e], 6 * i);
    factors.push(l);
  }
  // One cell length with an s.u. of 1 %: all coordinates stretch along x.
  const displacement = new Float64Array(3 * atoms);
  for (let i = 0; i < atoms; i++) displacement[3 * i] = r[3 * i]!;
  const modes = [{ sigma: 0.01, displacement }];
  const draw = (): Float64Array => {
    const shifted = r.slice();
    factors.forEach(([a, b, c, d, e, f], i) => {
      const [u, v, w] = [normal(random), normal(random), normal(random)];
      shifted[3 * i]! += a! * u;
      shifted[3 * i + 1]! += b! * u + c! * v;
      shifted[3 * i + 2]! += d! * u + e! * v + f! * w;
    });
    const stretch = 0.01 * normal(random);
    for (let k = 0; k < shifted.length; k++) shifted[k]! += stretch * displacement[k]!;
    return shifted;
  };
  return { uncertainty: { covariances, modes }, draw };
}

function spread(values: readonly number[]): number {
  const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
  return Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (values.length - 1));
}

const TRIALS = 20_000;
/** Relative error allowed: five times 1/√(2 n), the standard error of a standard deviation, and the higher orders. */
const TOLERANCE = 5 / Math.sqrt(2 * TRIALS) + 0.01;

describe('standard uncertainty by first order against a simulation, seed fixed', () => {
  it.each([[[1, 2, 3]], [[1, 2, 3, 4]], [[3, 1, 4, 2]]])('of the signed volume, ligands %j', ligands => {
    const random = seeded(20);
    const r = centre([1.4, 1.5, 1.6, 1.7]).map(c => c + 0.2);
    const { uncertainty, draw } = randomUncertainty(5, r, random);
    const { atoms, gradient } = signedVolumeGradient(r, 0, ligands);
    const sigma = propagated(uncertainty, atoms, gradient);
    const simulated = spread(Array.from({ length: TRIALS }, () => signedVolume(draw(), 0, ligands)));
    expect(Math.abs(sigma / simulated - 1)).toBeLessThan(TOLERANCE);
  });

  it.each([[[0, 1, 2, 3]], [[4, 0, 1, 2]]] as const)('of the torsion, atoms %j', four => {
    const random = seeded(21);
    const r = Float64Array.from([1.3, 0.2, 0.4, 0, 0, 0, 0.1, 1.34, 0, 1.2, 2.1, -0.6, 2.1, -0.4, 1.3]);
    const { uncertainty, draw } = randomUncertainty(5, r, random);
    const atoms = four as unknown as readonly [number, number, number, number];
    const sigma = propagated(uncertainty, atoms, torsionGradient(r, atoms));
    const simulated = spread(Array.from({ length: TRIALS }, () => torsion(draw(), ...atoms)));
    expect(Math.abs(sigma / simulated - 1)).toBeLessThan(TOLERANCE);
  });

  it('correlations count: an error that moves all atoms alike moves no volume and no torsion', () => {
    const r = centre([1.4, 1.5, 1.6, 1.7]);
    const displacement = new Float64Array(15).fill(1);
    const uncertainty = { covariances: new Float64Array(30), modes: [{ sigma: 1, displacement }] };
    const { atoms, gradient } = signedVolumeGradient(r, 0, [1, 2, 3, 4]);
    expect(propagated(uncertainty, atoms, gradient)).toBeCloseTo(0, 10);
    const four = [1, 0, 2, 3] as const;
    expect(propagated(uncertainty, four, torsionGradient(r, four))).toBeCloseTo(0, 3);
  });
});

describe('the torsion (IUPAC 1996, Basic Terminology of Stereochemistry)', () => {
  const at = (degrees: number): Float64Array => {
    const t = (degrees * Math.PI) / 180;
    // Front atom up; looking along +z the rear atom turned by t. Along +z with y up, x points to the left.
    return Float64Array.from([0, 1, 0, 0, 0, 0, 0, 0, 1.5, -Math.sin(t), Math.cos(t), 1.5]);
  };

  it('is positive when the rear bond lies clockwise of the front bond', () => {
    for (const degrees of [-179, -120, -60, -1, 1, 30, 60, 90, 150, 180]) {
      expect(torsion(at(degrees), 0, 1, 2, 3)).toBeCloseTo(degrees, 8);
    }
  });

  it('is the same from either end, and changes sign on reflection', () => {
    const r = at(72);
    expect(torsion(r, 3, 2, 1, 0)).toBeCloseTo(72, 8);
    expect(
      torsion(
        r.map((c, i) => (i % 3 === 0 ? -c : c)),
        0,
        1,
        2,
        3,
      ),
    ).toBeCloseTo(-72, 8);
  });

  it('is not a number where three atoms are in line', () => {
    expect(torsion(Float64Array.from([0, 0, -1, 0, 0, 0, 0, 0, 1, 1, 0, 2]), 0, 1, 2, 3)).toBeNaN();
  });

  it('its gradient does not jump at ±180°', () => {
    const gradient = torsionGradient(at(180), [0, 1, 2, 3]);
    // A front atom at 1 Å from the axis: one radian an ångström.
    expect(Math.abs(gradient[0]!)).toBeCloseTo(180 / Math.PI, 3);
  });
});
