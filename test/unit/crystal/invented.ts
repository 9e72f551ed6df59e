/** Invented crystal structures for tests: a chiral molecule put into any space group. */
import { orthogonalisation } from '../../../core/crystal/cell.ts';
import { operatorsFromHall } from '../../../core/crystal/hall.ts';
import { formatOperator } from '../../../core/crystal/operator.ts';

/** Bromochlorofluoromethane and a C–C–O chain on it, in Å: an invented molecule with two centres and a torsion. */
const ATOMS: readonly (readonly [string, string, number, number, number])[] = [
  ['C1', 'C', 0, 0, 0],
  ['C2', 'C', 1.53, 0, 0],
  ['Cl1', 'Cl', -0.59, 1.66, 0],
  ['F1', 'F', -0.45, -0.62, 1.1],
  ['H1', 'H', -0.35, -0.52, -0.9],
  ['O1', 'O', 2.02, 1.34, 0.12],
  ['C3', 'C', 2.06, -0.75, 1.22],
  ['H2', 'H', 1.88, -0.48, -0.93],
  ['H3', 'H', 2.97, 1.3, 0.12],
  ['H3A', 'H', 3.15, -0.72, 1.2],
  ['H3B', 'H', 1.72, -1.79, 1.18],
  ['H3C', 'H', 1.7, -0.29, 2.15],
];

export interface InventedOptions {
  readonly symbol: string;
  readonly number: number;
  readonly hall: string;
  readonly lengths: readonly [number, number, number];
  readonly angles?: readonly [number, number, number];
  /** Fractional place of C1. */
  readonly at: readonly [number, number, number];
  readonly extra?: string;
  readonly cellUncertainties?: boolean;
}

/** The CIF of the invented molecule in a group. */
export function inventedCif(options: InventedOptions): string {
  const angles = options.angles ?? [90, 90, 90];
  const m = orthogonalisation(options.lengths, angles);
  const inverse = [
    1 / m[0]!,
    -m[1]! / (m[0]! * m[4]!),
    (m[1]! * m[5]! - m[2]! * m[4]!) / (m[0]! * m[4]! * m[8]!),
    1 / m[4]!,
    -m[5]! / (m[4]! * m[8]!),
    1 / m[8]!,
  ];
  const operators = operatorsFromHall(options.hall);
  if (!operators) throw new Error(`${options.hall} is no Hall symbol`);
  const rows = ATOMS.map(([label, element, x, y, z]) => {
    const f = [
      options.at[0] + inverse[0]! * x + inverse[1]! * y + inverse[2]! * z,
      options.at[1] + inverse[3]! * y + inverse[4]! * z,
      options.at[2] + inverse[5]! * z,
    ];
    const su = element === 'H' ? '' : '(4)';
    return `${label} ${element} ${f.map(value => value.toFixed(4) + su).join(' ')}`;
  });
  const su = options.cellUncertainties ? '(12)' : '';
  const angle = (value: number): string =>
    value === 90 || value === 120 ? String(value) : `${value}${su === '' ? '' : '(5)'}`;
  return `# invented data
data_invented
_space_group_name_H-M_alt '${options.symbol}'
_space_group_name_Hall '${options.hall.replace(/"/gu, '""').replace(/""/gu, '"')}'
_space_group_IT_number ${options.number}
_cell_length_a ${options.lengths[0].toFixed(3)}${su}
_cell_length_b ${options.lengths[1].toFixed(3)}${su}
_cell_length_c ${options.lengths[2].toFixed(3)}${su}
_cell_angle_alpha ${angle(angles[0])}
_cell_angle_beta ${angle(angles[1])}
_cell_angle_gamma ${angle(angles[2])}
_diffrn_radiation_wavelength 0.71073
_chemical_formula_sum 'C3 H6 Cl F O'
_chemical_name_systematic '(1S,2R)-1-chloro-1-fluoropropan-2-ol'
_refine_ls_abs_structure_Flack 0.98(3)
_refine_ls_R_factor_gt 0.031
_shelx_res_checksum 12345
_shelx_res_file
;
TITL invented
;
loop_
_space_group_symop_operation_xyz
${operators.map(operator => `'${formatOperator(operator)}'`).join('\n')}
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
${rows.join('\n')}
loop_
_geom_torsion_atom_site_label_1
_geom_torsion_atom_site_label_2
_geom_torsion_atom_site_label_3
_geom_torsion_atom_site_label_4
_geom_torsion
Cl1 C1 C2 O1 -65.2(4)
F1 C1 C2 C3 56.1(5)
${options.extra ?? ''}
`;
}
