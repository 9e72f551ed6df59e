/** Propagated uncertainties against a Monte Carlo over the figures of the file: sites, cell, and atoms completed by symmetry. */
import { describe, expect, it } from 'vitest';
import { type CifBlock, measured, parseCif } from '../../../core/formats/cif-syntax.ts';
import { readCoreBlock } from '../../../core/formats/cif-core.ts';
import { DEFAULT_LIMITS } from '../../../core/formats/format.ts';
import type { Molecule } from '../../../core/chemistry/molecule.ts';
import { propagated, signedVolume, signedVolumeGradient } from '../../../core/geometry/signed-volume.ts';
import { torsion, torsionGradient } from '../../../core/geometry/torsion.ts';
import { seeded } from '../../molecules.ts';
import { inventedCif } from './invented.ts';

const read = (text: string): Molecule => {
  const block = parseCif(text).blocks[0] as CifBlock;
  return readCoreBlock(block, DEFAULT_LIMITS).molecule;
};

/** The text with every figure that has an s.u. drawn from its distribution. */
function drawn(text: string, random: () => number, scale: number): string {
  const gauss = (): number => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
  return text
    .split('\n')
    .map(line => {
      if (!/^(?:_cell_|[A-Z][A-Za-z0-9]* [A-Z][a-z]? )/u.test(line)) return line;
      return line.replace(/-?\d+\.\d+\(\d+\)/gu, figure => {
        const value = measured(figure);
        return value?.uncertainty ? (value.value + scale * value.uncertainty * gauss()).toFixed(9) : figure;
      });
    })
    .join('\n');
}

function deviation(values: readonly number[]): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
}

const SAMPLES = 4000;
/** Sampling error of a standard deviation from that many samples: 1/√(2N) = 1.1 %; three of these. */
const TOLERANCE = 0.035;

function compare(text: string, volumeOf: readonly string[], torsionOf: readonly string[]): void {
  const molecule = read(text);
  const at = (m: Molecule, label: string): number => {
    const index = m.labels?.indexOf(label) ?? -1;
    if (index < 0) throw new Error(`${label} is not among ${m.labels?.join(' ')}`);
    return index;
  };
  const [centre, ...ligands] = volumeOf.map(label => at(molecule, label)) as [number, ...number[]];
  const four = torsionOf.map(label => at(molecule, label)) as [number, number, number, number];
  const r = molecule.coordinates!;
  const uncertainty = molecule.uncertainty!;
  expect(uncertainty).not.toBeNull();
  const { atoms, gradient } = signedVolumeGradient(r, centre, ligands);
  const volumeSigma = propagated(uncertainty, atoms, gradient);
  const torsionSigma = propagated(uncertainty, four, torsionGradient(r, four));
  const random = seeded(20);
  const volumes: number[] = [];
  const torsions: number[] = [];
  for (let k = 0; k < SAMPLES; k++) {
    const sample = read(drawn(text, random, 1));
    const s = sample.coordinates!;
    volumes.push(signedVolume(s, centre, ligands));
    torsions.push(torsion(s, ...four));
  }
  expect(Math.abs(volumeSigma / deviation(volumes) - 1)).toBeLessThan(TOLERANCE);
  expect(Math.abs(torsionSigma / deviation(torsions) - 1)).toBeLessThan(TOLERANCE);
}

describe('uncertainties of signed volume and torsion', () => {
  it('agree with a Monte Carlo in a monoclinic cell with its own s.u.', () => {
    const text = inventedCif({
      symbol: 'P 1 21 1',
      number: 4,
      hall: 'P 2yb',
      lengths: [7.6, 8.1, 9.3],
      angles: [90, 104.2, 90],
      at: [0.21, 0.34, 0.13],
      cellUncertainties: true,
    });
    compare(text, ['C1', 'Cl1', 'F1', 'C2'], ['Cl1', 'C1', 'C2', 'O1']);
  });

  it('agree where the cell errors are large beside those of the sites', () => {
    const text = inventedCif({
      symbol: 'P 1',
      number: 1,
      hall: 'P 1',
      lengths: [7.6, 8.1, 9.3],
      angles: [83.1, 104.2, 97.5],
      at: [0.21, 0.34, 0.13],
      cellUncertainties: true,
    })
      .replace(/\(12\)/gu, '(120)')
      .replace(/\(5\)$/gmu, '(9)');
    compare(text, ['C1', 'Cl1', 'F1', 'C2'], ['Cl1', 'C1', 'C2', 'O1']);
  });

  it('agree across a twofold axis, where the image moves with its site', () => {
    // Invented: 1,2-dichloro-1,2-difluoroethane on the axis of P 1 2 1.
    const text = `data_axis
_cell_length_a 8.000(3)
_cell_length_b 7.000(3)
_cell_length_c 9.000(3)
_cell_angle_alpha 90
_cell_angle_beta 98.00(4)
_cell_angle_gamma 90
loop_
_space_group_symop_operation_xyz
'x, y, z'
'-x, y, -z'
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
C1 C 0.0900(6) 0.5000(6) 0.0250(5)
Cl1 Cl 0.1700(3) 0.2800(3) -0.0700(3)
F1 F 0.1400(5) 0.5500(5) 0.1650(5)
H1 H 0.1200 0.6000 -0.0400
`;
    const { labels } = read(text);
    expect(labels).toContain('C1(2_555)');
    compare(text, ['C1', 'Cl1', 'F1', 'C1(2_555)'], ['Cl1', 'C1', 'C1(2_555)', 'Cl1(2_555)']);
  });

  it('are none where the file has none', () => {
    const text = inventedCif({
      symbol: 'P 1',
      number: 1,
      hall: 'P 1',
      lengths: [7.6, 8.1, 9.3],
      at: [0.2, 0.3, 0.1],
    }).replace(/\(\d+\)/gu, '');
    expect(read(text).uncertainty).toBeNull();
  });
});
