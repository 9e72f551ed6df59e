/** Building, conformers, stereoisomers, repair, strain and torsion scans. */
import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { buildMolecule, LONE_PAIR, type Molecule } from '../../../core/chemistry/molecule.ts';
import { askedUnits, unitsMissed } from '../../../core/embedding/asked.ts';
import { heavyAutomorphisms } from '../../../core/embedding/automorphisms.ts';
import { conformers, symmetricRmsd } from '../../../core/embedding/conformers.ts';
import { embed } from '../../../core/embedding/embed.ts';
import { addHydrogens } from '../../../core/embedding/hydrogens.ts';
import { enumerateIsomers } from '../../../core/embedding/isomers.ts';
import { minimise } from '../../../core/embedding/minimise.ts';
import { repairPose } from '../../../core/embedding/repair.ts';
import { type EmbeddingTables, loadTables } from '../../../core/embedding/resources.ts';
import { smooth } from '../../../core/embedding/smoothing.ts';
import { poseEnergy, poseStrain } from '../../../core/embedding/strain.ts';
import { eyringHalfLife, laPlanteClass, scanTorsion } from '../../../core/embedding/torsion-scan.ts';
import { examine } from '../../../core/examine.ts';
import { parseSmiles } from '../../../core/formats/smiles.ts';
import { mirrored, randomMolecule, seeded } from '../../molecules.ts';

let tables: EmbeddingTables;
beforeAll(async () => {
  tables = await loadTables();
});

const read = (smiles: string): Molecule => parseSmiles(smiles).molecule;

function built(smiles: string, seed = 1): Molecule {
  const result = embed(read(smiles), tables, { seed });
  if (!result.ok) throw new Error(`${smiles}: ${result.reason}`);
  return result.molecule;
}

/** Descriptors of a molecule as "1R 4-5E", in order. */
function letters(molecule: Molecule): string {
  return examine(molecule)
    .units.filter(({ descriptor, unit }) => descriptor !== null && unit.labile === null)
    .map(({ descriptor, unit }) => `${unit.atoms.map(atom => atom + 1).join('-')}${descriptor}`)
    .sort()
    .join(' ');
}

describe('embed', () => {
  it.each([
    ['a centre', 'C[C@H](F)Cl'],
    ['the other hand', 'C[C@@H](F)Cl'],
    ['a sulfoxide with its lone pair', 'C[S@](=O)c1ccccc1'],
    ['a double bond', 'C/C=C\\C(F)=C'],
    ['an allene', 'CC=[C@]=CC'],
    ['a bridged cage', 'C[C@@]12CC[C@@H](CC1=O)C2(C)C'],
    ['a fused system', 'C[C@]12CCC(=O)C=C1CC[C@@H]1[C@@H]2CC[C@]2(C)[C@@H](O)CC[C@@H]12'],
    ['a spiro centre', 'O=C1CC[C@]2(C1)CCC(=O)C2'],
    ['a macrocycle', 'C[C@@H]1CCCCCCC(=O)CCCC(=O)O1'],
    ['a phosphine', 'CC[P@](C)c1ccccc1'],
  ])('builds %s with the configuration stated', (_, smiles) => {
    const molecule = read(smiles);
    const model = built(smiles);
    expect(letters(model)).toBe(letters(addHydrogens(molecule)));
    expect(letters(model)).not.toBe('');
    expect(model.dimension).toBe(3);
  });

  it('gives the same model for the same seed and another for another', () => {
    const smiles = 'C[C@H](N)C(=O)NCCc1ccccc1';
    expect(built(smiles, 7).coordinates).toEqual(built(smiles, 7).coordinates);
    expect(built(smiles, 8).coordinates).not.toEqual(built(smiles, 7).coordinates);
  });

  it('gives the units of any random molecule that it builds the senses asked for', () => {
    fc.assert(
      fc.property(randomMolecule, molecule => {
        const result = embed(molecule, tables, { attempts: 6 });
        if (!result.ok) return;
        const { asked } = askedUnits(addHydrogens(molecule));
        expect(unitsMissed(result.molecule, asked)).toEqual([]);
      }),
      { numRuns: 40, seed: 11 },
    );
  });

  it('refuses what no geometry can have, with the reason', () => {
    const [trans] = enumerateIsomers(read('OC1CC2CCC1C2'), tables, { attempts: 4 }).impossible;
    const result = embed(trans!.molecule, tables, { attempts: 5 });
    expect(result).toMatchObject({ ok: false, attempts: 5 });
    if (!result.ok) expect(result.reason).toMatch(/no model after 5 attempts: ./);
    const noAtoms = embed(buildMolecule({ atoms: [], bonds: [] }), tables);
    expect(noAtoms).toMatchObject({ ok: false, reason: 'the molecule has no atoms' });
  });

  it('says what is not stated, and that separate parts are set side by side', () => {
    const open = embed(read('CC(F)Cl'), tables);
    expect(open.ok && open.warnings.join()).toContain('not stated');
    const salt = embed(read('[Na+].CC(=O)[O-]'), tables);
    expect(salt.ok && salt.warnings.join()).toContain('side by side');
    expect(salt.ok && salt.energy).toBeTypeOf('number');
  });

  it('builds an element the force field does not know, and gives no energy', () => {
    const result = embed(read('C[Se@](=O)c1ccccc1'), tables);
    expect(result).toMatchObject({ ok: true, energy: null });
    expect(result.ok && result.warnings.join()).toContain('stands in');
  });

  it('stops when cancelled', () => {
    const stop = new AbortController();
    stop.abort();
    expect(embed(read('CCO'), tables, { signal: stop.signal })).toMatchObject({
      ok: false,
      reason: 'cancelled',
    });
  });
});

describe('geometry of built models', () => {
  const distance = (m: Molecule, i: number, j: number): number => {
    const x = m.coordinates!;
    return Math.hypot(x[3 * i]! - x[3 * j]!, x[3 * i + 1]! - x[3 * j + 1]!, x[3 * i + 2]! - x[3 * j + 2]!);
  };

  // F. H. Allen et al., J. Chem. Soc. Perkin Trans. 2 1987, S1 (means of crystal structures; from memory). The force field is
  // fitted to isolated molecules: its amides are longer (1.38 Å in the gas), its alkyl fluorides shorter than in crystals.
  const PUBLISHED = [
    ['C-C of alkanes', 'CCC', 0, 1, 1.53],
    ['C-C of benzene', 'c1ccccc1', 0, 1, 1.38],
    ['C=C', 'C=CC', 0, 1, 1.32],
    ['C#C', 'C#CC', 0, 1, 1.18],
    ['C=O of ketones', 'CC(C)=O', 1, 3, 1.21],
    ['C-N of amides', 'CC(=O)NC', 1, 3, 1.33],
    ['C-O of alcohols', 'CCO', 1, 2, 1.43],
    ['C-F', 'CCF', 1, 2, 1.4],
    ['C-Cl', 'CCCl', 1, 2, 1.79],
    ['C-S of thioethers', 'CSC', 0, 1, 1.81],
  ] as const;

  it('has bond lengths within 0.02 Å of published means in the median, and none off by 0.06 Å', () => {
    const off = PUBLISHED.map(([, smiles, i, j, length]) =>
      Math.abs(distance(built(smiles), i, j) - length),
    ).sort((p, q) => p - q);
    expect(off[off.length >> 1]).toBeLessThan(0.02);
    expect(off.at(-1)).toBeLessThan(0.06);
  });
});

describe('conformers', () => {
  it('orders by energy and keeps no two alike', () => {
    const result = conformers(read('CCCCO'), tables, { count: 6 });
    if (!result.ok) throw new Error(result.reason);
    const energies = result.models.map(({ energy }) => energy!);
    expect(energies.length).toBeGreaterThan(2);
    expect([...energies].sort((a, b) => a - b)).toEqual(energies);
    const symmetry = heavyAutomorphisms(result.models[0]!.molecule);
    for (let i = 0; i < energies.length; i++) {
      for (let j = 0; j < i; j++) {
        const [a, b] = [result.models[i]!, result.models[j]!];
        expect(
          symmetricRmsd(symmetry, a.molecule.coordinates!, b.molecule.coordinates!),
        ).toBeGreaterThanOrEqual(0.5);
      }
    }
  });

  it('finds one conformer of a rigid molecule, however many are asked for', () => {
    const result = conformers(read('Cc1ccccc1'), tables, { count: 5 });
    expect(result.ok && result.models.length).toBe(1);
  });

  it('counts equal atoms as equal: 12 mappings for benzene, 2 for propane', () => {
    expect(heavyAutomorphisms(read('c1ccccc1')).mappings).toHaveLength(12);
    expect(heavyAutomorphisms(read('CCC')).mappings).toHaveLength(2);
  });
});

describe('stereoisomers', () => {
  it('finds three tartaric acids: a pair of enantiomers and meso', () => {
    const { isomers, impossible } = enumerateIsomers(read('OC(C(O)C(=O)O)C(=O)O'), tables);
    expect(isomers).toHaveLength(3);
    expect(impossible).toEqual([]);
    expect(isomers.filter(({ chirality }) => chirality === 'meso')).toHaveLength(1);
    const [pair] = isomers.filter(({ enantiomer }) => enantiomer !== null);
    expect(isomers[pair!.enantiomer! - 1]!.enantiomer).toBe(pair!.number);
  });

  it('leaves out the trans-bridged arrangements of a small bicycle, with the reason', () => {
    // Two bridgeheads of norbornane and one substituted carbon: cis bridging only (common practice, no source).
    const { isomers, impossible } = enumerateIsomers(read('OC1CC2CCC1C2'), tables, { attempts: 8 });
    expect(isomers).toHaveLength(4);
    expect(impossible.length).toBeGreaterThan(0);
    for (const { reason } of impossible) expect(reason).toMatch(/no model after/);
  });

  it('keeps what is stated', () => {
    const { isomers } = enumerateIsomers(read('C[C@H](F)C(F)C'), tables, { test: false });
    expect(isomers.length).toBe(2);
  });
});

describe('repair', () => {
  it.each([
    ['a centre with hydrogen', 'C[C@H](F)Cl', 'C[C@@H](F)Cl'],
    ['a quaternary centre', 'CC[C@](C)(O)c1ccccc1', 'CC[C@@](C)(O)c1ccccc1'],
    ['a ring substituent', 'CC(=O)O[C@H]1CC[C@@H](C)C[C@@H]1C', 'CC(=O)O[C@H]1CC[C@@H](C)C[C@H]1C'],
    ['a double bond', 'C/C=C/c1ccccc1', 'C/C=C\\c1ccccc1'],
  ])('gives %s the hand asked for and leaves the rest near its place', (_, wrong, right) => {
    const pose = built(wrong);
    const { asked } = askedUnits(addHydrogens(read(right)));
    const result = repairPose(pose, asked, tables);
    if (!result.ok) throw new Error(result.reason);
    expect(letters(result.molecule)).toBe(letters(addHydrogens(read(right))));
    expect(result.repaired.length).toBe(1);
    expect(result.movement).toBeLessThan(1.2);
    expect(result.before).toBeTypeOf('number');
    expect(Number.isFinite(result.after)).toBe(true);
  });

  it('leaves a right pose as it is', () => {
    const pose = built('C[C@H](F)Cl');
    const { asked } = askedUnits(addHydrogens(read('C[C@H](F)Cl')));
    expect(repairPose(pose, asked, tables)).toMatchObject({ ok: true, repaired: [], movement: 0 });
  });
});

describe('strain', () => {
  it('is small for the best conformer and large for a squeezed one', () => {
    const best = conformers(read('CCOC(=O)c1ccccc1'), tables, { count: 10 });
    if (!best.ok) throw new Error(best.reason);
    const pose = best.models[0]!.molecule;
    const relaxed = poseStrain(pose, tables, { count: 10 });
    expect(Math.abs(relaxed.strain)).toBeLessThan(0.5);
    const squeezed = { ...pose, coordinates: pose.coordinates!.map(value => 0.93 * value) };
    expect(poseEnergy(squeezed, tables).total).toBeGreaterThan(relaxed.asItStands + 20);
  });

  it('is the same for the mirror image', () => {
    const pose = built('C[C@H](N)C(=O)O');
    expect(poseEnergy(mirrored(pose), tables).total).toBeCloseTo(poseEnergy(pose, tables).total, 8);
  });

  it('says that coordinates are wanting', () => {
    expect(() => poseEnergy(read('CCO'), tables)).toThrow(/no coordinates in space/);
  });
});

describe('rotation about an axis', () => {
  it('puts biphenyl below, and tetramethylbiphenyl above, what can be isolated', () => {
    const axis = [4, 5, 6, 7] as const;
    const free = scanTorsion(built('c1ccccc1-c1ccccc1'), tables, axis)!;
    expect(free.laPlanteClass).toBe(1);
    const held = scanTorsion(built('Cc1cccc(C)c1-c1c(C)cccc1C'), tables, [5, 7, 8, 9])!;
    expect(held.barrier).toBeGreaterThan(30);
    expect(held.laPlanteClass).toBe(3);
  });

  it('sorts barriers as LaPlante et al. do and turns them into half-lives by Eyring', () => {
    expect([19.9, 20, 30, 30.1].map(laPlanteClass)).toEqual([1, 2, 2, 3]);
    // 24 kcal/mol at 310.15 K: k = 6.46e12 · exp(-38.94) s⁻¹, worked by hand.
    expect(eyringHalfLife(24) / 3600).toBeCloseTo(Math.LN2 / (6.4625e12 * Math.exp(-38.9416)) / 3600, 1);
  });
});

describe('numerical parts', () => {
  it('finds the minimum of a long valley (Rosenbrock, Comput. J. 1960, 3, 175)', () => {
    const x = Float64Array.of(-1.2, 1);
    minimise(
      (at, g) => {
        const [a, b] = [at[0]!, at[1]!];
        g[0]! += -400 * a * (b - a * a) - 2 * (1 - a);
        g[1]! += 200 * (b - a * a);
        return 100 * (b - a * a) ** 2 + (1 - a) ** 2;
      },
      x,
      { iterations: 500, gradient: 1e-8, step: 1 },
    );
    expect(x[0]).toBeCloseTo(1, 6);
    expect(x[1]).toBeCloseTo(1, 6);
  });

  it('smooths bounds so that every triangle closes', () => {
    fc.assert(
      fc.property(fc.integer(), seed => {
        const random = seeded(seed);
        const n = 8;
        const lower = new Float64Array(n * n);
        const upper = new Float64Array(n * n);
        for (let i = 0; i < n; i++) {
          for (let j = 0; j < i; j++) {
            lower[i * n + j] = lower[j * n + i] = random();
            upper[i * n + j] = upper[j * n + i] = 2 + 20 * random();
          }
        }
        if (smooth({ n, lower, upper }, 0) !== null) return;
        for (let i = 0; i < n; i++) {
          for (let j = 0; j < n; j++) {
            for (let k = 0; k < n; k++) {
              expect(upper[i * n + j]!).toBeLessThanOrEqual(upper[i * n + k]! + upper[k * n + j]! + 1e-9);
            }
          }
        }
      }),
      { numRuns: 50 },
    );
  });

  it('turns implicit hydrogens into atoms and keeps a lone pair a lone pair', () => {
    const full = addHydrogens(read('C[C@H](F)Cl'));
    expect(full.atomCount).toBe(8);
    const [stereo] = full.stated;
    expect(stereo?.kind === 'centre' && stereo.ligands.every(ligand => ligand >= 0)).toBe(true);
    const sulfoxide = addHydrogens(read('C[S@](=O)CC')).stated[0];
    expect(sulfoxide?.kind === 'centre' && sulfoxide.ligands.includes(LONE_PAIR)).toBe(true);
  });
});
