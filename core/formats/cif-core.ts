/**
 * Small-molecule crystal structures (core CIF dictionary): from a data block to completed molecules with their standard
 * uncertainties, and to what the file says of the crystal.
 *
 * Disorder: in each assembly the group with the highest mean occupancy is taken, at equal occupancy the one with the
 * lowest number; every other group is offered as an alternative.
 */
import { elementNumber } from '../chemistry/elements.ts';
import { assembleMolecule, type CoordinateUncertainty, type Molecule } from '../chemistry/molecule.ts';
import { type Cell, cellMatrix, cellModes, cellVolume, type Matrix, multiply } from '../crystal/cell.ts';
import { type Completion, completeMolecules, type PlacedAtom, type Site } from '../crystal/completion.ts';
import type { CrystalDescription, DeclaredConfiguration, Dispersion } from '../crystal/description.ts';
import { operatorsFromHall } from '../crystal/hall.ts';
import {
  applyOperator,
  formatOperator,
  generateGroup,
  IDENTITY,
  isCentrosymmetric,
  isClosed,
  isSohncke,
  multiplyRotations,
  parseOperator,
  sameRotation,
  type SymmetryOperator,
} from '../crystal/operator.ts';
import { settingNamed } from '../crystal/space-groups.ts';
import { bondOrders } from '../perception/bond-orders.ts';
import { type CifBlock, type CifLoop, type Measured, measured } from './cif-syntax.ts';
import { EntryProblem } from './errors.ts';
import type { Limits, StructureAlternative } from './format.ts';

/** What a block gives. */
export interface CoreStructure {
  readonly molecule: Molecule;
  readonly crystal: CrystalDescription;
  readonly alternatives: readonly StructureAlternative[];
  readonly warnings: readonly string[];
}

/** A row of the atom site list. */
interface SiteRow {
  readonly label: string;
  readonly element: number;
  readonly coordinates: readonly [Measured, Measured, Measured];
  readonly occupancy: number;
  readonly assembly: string;
  readonly group: number;
  readonly line: number;
}

/** Whether a block lists atoms of a small-molecule structure. */
export function isCoreBlock(block: CifBlock): boolean {
  return (
    block.has('_atom_site_fract_x', '_atom_site_cartn_x', '_atom_site.fract_x') &&
    !block.has('_atom_site.cartn_x')
  );
}

/** Reads a block. @throws EntryProblem that says what is wrong; its line is the line of the file. */
export function readCoreBlock(block: CifBlock, limits: Limits): CoreStructure {
  const warnings: string[] = [];
  const crystal = describeCrystal(block, warnings);
  const rows = siteRows(block, limits, warnings);
  const { chosen, others, notes } = chooseGroups(rows);
  const described: CrystalDescription = { ...crystal, notes };
  warnings.push(...notes);
  const built = buildStructure(block, described, chosen, warnings);
  const alternatives: StructureAlternative[] = [];
  for (const { name, rows: list } of others) {
    alternatives.push({ name, molecule: buildStructure(block, described, list, null) });
  }
  return { molecule: built, crystal: described, alternatives, warnings };
}

function number(block: CifBlock, ...names: string[]): Measured | null {
  return measured(block.get(...names));
}

function readCell(block: CifBlock): Cell | null {
  const values = ['length_a', 'length_b', 'length_c', 'angle_alpha', 'angle_beta', 'angle_gamma'].map(
    (name, k) => {
      const own = number(block, `_cell_${name}`, `_cell.${name}`);
      if (own !== null) {
        // The s.u. may stand in an item of its own (DDLm).
        const apart = own.uncertainty === null ? number(block, `_cell_${name}_su`, `_cell.${name}_su`) : null;
        return apart ? { value: own.value, uncertainty: apart.value } : own;
      }
      return k >= 3 ? { value: 90, uncertainty: null } : null;
    },
  );
  if (values.some(value => value === null || !(value.value > 0))) return null;
  const [a, b, c, alpha, beta, gamma] = values as Measured[];
  const cell: Cell = { lengths: [a!, b!, c!], angles: [alpha!, beta!, gamma!] };
  return cellVolume(cell) > 0 ? cell : null;
}

const OPERATOR_NAMES = [
  '_space_group_symop_operation_xyz',
  '_symmetry_equiv_pos_as_xyz',
  '_space_group_symop.operation_xyz',
  '_symmetry_equiv.pos_as_xyz',
];

/** Operators in the order of the file, or from the space-group symbol. */
function readOperators(
  block: CifBlock,
  symbol: string | null,
  hall: string | null,
  warnings: string[],
): { operators: readonly SymmetryOperator[]; source: CrystalDescription['operatorSource'] } {
  for (const name of OPERATOR_NAMES) {
    const texts = block.all(name);
    if (!texts || texts.every(text => text === null)) continue;
    const operators: SymmetryOperator[] = [];
    for (const text of texts) {
      const operator = text === null ? null : parseOperator(text);
      if (!operator) {
        throw new EntryProblem(
          'bad-symmetry',
          `${text ?? '?'} is no symmetry operator; a triplet such as -x, y+1/2, -z is wanted`,
          block.lineOf(name),
        );
      }
      operators.push(operator);
    }
    if (!isClosed(operators)) {
      const group = generateGroup(operators);
      warnings.push(
        group
          ? `the ${operators.length} symmetry operators are no group; ${group.length} that they generate would be one`
          : `the ${operators.length} symmetry operators are no group`,
      );
    }
    const table = hall ? operatorsFromHall(hall) : symbol ? settingOperators(symbol) : null;
    if (table && isSohncke(table) !== isSohncke(operators)) {
      warnings.push(
        `the space-group symbol ${symbol ?? hall ?? ''} and the symmetry operators disagree on whether both hands are present; the operators count`,
      );
    }
    return { operators, source: 'operators' };
  }
  const fromSymbol = (hall ? operatorsFromHall(hall) : null) ?? (symbol ? settingOperators(symbol) : null);
  if (fromSymbol) {
    warnings.push(
      `the file lists no symmetry operators; those of the standard setting of ${symbol ?? hall ?? ''} are taken`,
    );
    return { operators: fromSymbol, source: 'symbol' };
  }
  warnings.push('the file gives no usable symmetry; molecules are not completed');
  return { operators: [IDENTITY], source: 'none' };
}

function settingOperators(symbol: string): SymmetryOperator[] | null {
  const setting = settingNamed(symbol);
  return setting ? operatorsFromHall(setting.hall) : null;
}

const DECLARED: ReadonlySet<string> = new Set(['ad', 'rm', 'rmad', 'syn', 'unk']);

/** What a block says of its crystal. @throws EntryProblem for an operator that cannot be read. */
export function describeCrystal(block: CifBlock, warnings: string[]): CrystalDescription {
  const spaceGroup = block.get(
    '_space_group_name_h-m_alt',
    '_symmetry_space_group_name_h-m',
    '_space_group.name_h-m_alt',
    '_symmetry.space_group_name_h-m',
    '_space_group_name_h-m_full',
  );
  const hall = block.get(
    '_space_group_name_hall',
    '_symmetry_space_group_name_hall',
    '_space_group.name_hall',
    '_symmetry.space_group_name_hall',
  );
  const { operators, source } = readOperators(block, spaceGroup, hall, warnings);
  const listed = number(
    block,
    '_space_group_it_number',
    '_symmetry_int_tables_number',
    '_space_group.it_number',
  );
  const declared = block
    .get('_chemical_absolute_configuration', '_chemical.absolute_configuration')
    ?.toLowerCase();
  const usable = declared !== undefined && DECLARED.has(declared);
  if (declared !== undefined && !usable) {
    warnings.push(`_chemical_absolute_configuration is ${declared}; one of rm, ad, rmad, syn, unk is wanted`);
  }
  return {
    cell: readCell(block),
    operators,
    operatorSource: source,
    spaceGroup,
    spaceGroupNumber:
      listed?.value ?? (spaceGroup === null ? null : (settingNamed(spaceGroup)?.number ?? null)),
    sohncke: source === 'none' ? null : isSohncke(operators),
    centrosymmetric: source === 'none' ? null : isCentrosymmetric(operators),
    flack: number(block, '_refine_ls_abs_structure_flack', '_refine_ls.abs_structure_flack'),
    hooft: number(block, '_refine_ls_abs_structure_hooft', '_refine_ls.abs_structure_hooft'),
    declared: usable ? (declared as DeclaredConfiguration) : null,
    wavelength:
      number(block, '_diffrn_radiation_wavelength', '_diffrn_radiation_wavelength.wavelength')?.value ?? null,
    radiation: block.get('_diffrn_radiation_type', '_diffrn_radiation.type'),
    formula: block.get('_chemical_formula_sum', '_chemical_formula.sum'),
    formulaUnits: number(block, '_cell_formula_units_z', '_cell.formula_units_z')?.value ?? null,
    dispersion: readDispersion(block),
    macromolecule: false,
    notes: [],
  };
}

function readDispersion(block: CifBlock): Map<string, Dispersion> {
  const table = new Map<string, Dispersion>();
  const symbols = block.all('_atom_type_symbol');
  const real = block.all('_atom_type_scat_dispersion_real');
  const imaginary = block.all('_atom_type_scat_dispersion_imag');
  if (!symbols || !real || !imaginary) return table;
  symbols.forEach((symbol, k) => {
    const re = measured(real[k] ?? null);
    const im = measured(imaginary[k] ?? null);
    const element = symbol === null ? null : elementOf(symbol);
    if (symbol !== null && element !== null && re && im) {
      table.set(plainSymbol(symbol), { real: re.value, imaginary: im.value });
    }
  });
  return table;
}

function plainSymbol(text: string): string {
  const letters = /^[A-Za-z]{1,2}/u.exec(text)?.[0] ?? '';
  const two = letters.charAt(0).toUpperCase() + letters.slice(1).toLowerCase();
  return elementNumber(two) === undefined ? two.charAt(0) : two;
}

/** Element of a type symbol such as `C`, `Cl1-`, `Fe3+`; null where it is none. */
function elementOf(text: string): number | null {
  return elementNumber(plainSymbol(text)) ?? null;
}

function loopWith(block: CifBlock, ...names: string[]): CifLoop | null {
  for (const name of names) {
    const loop = block.looped.get(name);
    if (loop) return loop;
  }
  return null;
}

function siteRows(block: CifBlock, limits: Limits, warnings: string[]): SiteRow[] {
  const loop = loopWith(block, '_atom_site_label', '_atom_site.label');
  const fractions = loop ? ['x', 'y', 'z'].map(axis => dotted(loop, `_atom_site_fract_${axis}`)) : [];
  if (!loop || fractions.some(column => column < 0)) {
    throw new EntryProblem(
      'no-structure',
      'the block lists no atoms with fractional coordinates (_atom_site_label, _atom_site_fract_x, _y, _z)',
      block.line,
    );
  }
  if (loop.broken) {
    throw new EntryProblem(
      'bad-loop',
      `the atom list has values for no whole number of rows of ${loop.names.length} columns; one value is missing or a quote is out of place`,
      loop.line,
    );
  }
  if (loop.rowCount > limits.atoms) {
    throw new EntryProblem('too-many-atoms', `more than ${limits.atoms} atoms`, loop.line);
  }
  const label = dotted(loop, '_atom_site_label');
  const type = dotted(loop, '_atom_site_type_symbol');
  const occupancy = dotted(loop, '_atom_site_occupancy');
  const assembly = dotted(loop, '_atom_site_disorder_assembly');
  const group = dotted(loop, '_atom_site_disorder_group');
  const calc = dotted(loop, '_atom_site_calc_flag');
  const rows: SiteRow[] = [];
  let unplaced = 0;
  for (let row = 0; row < loop.rowCount; row++) {
    const read = (column: number): string | null => (column < 0 ? null : loop.value(row, column));
    const name = read(label) ?? `${row + 1}`;
    const symbol = read(type) ?? name;
    const element = /^(?:D\d|D$|T$)/u.test(symbol) ? 1 : elementOf(symbol);
    if (element === null) {
      throw new EntryProblem(
        'unknown-element',
        `${symbol} of atom ${name} is no element`,
        loop.lineOfRow(row),
      );
    }
    const xyz = fractions.map(column => measured(read(column)));
    if (read(calc) === 'dum' || xyz.every(value => value === null)) {
      unplaced++;
      continue;
    }
    if (xyz.some(value => value === null || !Number.isFinite(value.value))) {
      throw new EntryProblem(
        'bad-coordinates',
        `a coordinate of atom ${name} is no number: ${fractions.map(column => read(column) ?? '?').join(', ')}`,
        loop.lineOfRow(row),
      );
    }
    const part = read(group);
    const partNumber = part === null ? 0 : Number.parseInt(part, 10);
    rows.push({
      label: name,
      element,
      coordinates: xyz as [Measured, Measured, Measured],
      occupancy: measured(read(occupancy))?.value ?? 1,
      assembly: read(assembly) ?? '',
      group: part === null ? 0 : Number.isNaN(partNumber) ? 1 + (part.charCodeAt(0) & 31) : partNumber,
      line: loop.lineOfRow(row),
    });
  }
  if (unplaced > 0) warnings.push(`${unplaced} sites without coordinates, or dummy sites, are left out`);
  if (rows.length === 0) throw new EntryProblem('no-structure', 'the atom list is empty', loop.line);
  return rows;
}

/** Column of a name written with an underscore or, in DDLm, a full stop. */
function dotted(loop: CifLoop, name: string): number {
  const column = loop.columnIndex(name);
  return column >= 0 ? column : loop.columnIndex(name.replace('_atom_site_', '_atom_site.'));
}

interface GroupChoice {
  readonly chosen: readonly SiteRow[];
  readonly others: readonly { readonly name: string; readonly rows: readonly SiteRow[] }[];
  readonly notes: readonly string[];
}

/** Most alternatives that are offered. */
const MOST_ALTERNATIVES = 12;

function chooseGroups(rows: readonly SiteRow[]): GroupChoice {
  const assemblies = new Map<string, Map<number, SiteRow[]>>();
  for (const row of rows) {
    if (row.group === 0) continue;
    const groups = assemblies.get(row.assembly) ?? new Map<number, SiteRow[]>();
    assemblies.set(row.assembly, groups);
    const list = groups.get(row.group) ?? [];
    groups.set(row.group, list);
    list.push(row);
  }
  const pick = new Map<string, number>();
  const notes: string[] = [];
  const named = (assembly: string, group: number): string =>
    assembly === '' ? `group ${group}` : `assembly ${assembly}, group ${group}`;
  const switches: [string, number][] = [];
  for (const [assembly, groups] of assemblies) {
    const mean = (list: readonly SiteRow[]): number =>
      list.reduce((sum, { occupancy }) => sum + occupancy, 0) / list.length;
    const order = [...groups].sort(
      (a, b) => Math.round(1e4 * (mean(b[1]) - mean(a[1]))) || Math.abs(a[0]) - Math.abs(b[0]) || b[0] - a[0],
    );
    const [first, ...rest] = order;
    if (!first) continue;
    pick.set(assembly, first[0]);
    if (rest.length > 0) {
      const said = rest.map(([group, list]) => `${group} (${mean(list).toFixed(2)})`).join(', ');
      notes.push(
        `disorder: ${named(assembly, first[0])} is taken, occupancy ${mean(first[1]).toFixed(2)}; alternatives: group ${said}`,
      );
    }
    for (const [group] of rest) switches.push([assembly, group]);
  }
  const select = (choice: ReadonlyMap<string, number>): SiteRow[] =>
    rows.filter(({ group, assembly }) => group === 0 || choice.get(assembly) === group);
  const others = switches.slice(0, MOST_ALTERNATIVES).map(([assembly, group]) => ({
    name: named(assembly, group),
    rows: select(new Map([...pick, [assembly, group]])),
  }));
  return { chosen: select(pick), others, notes };
}

/** Half-occupied atoms nearer than this, Å, are taken for alternatives of each other where the file names no groups. */
const CLASH = 0.8;

function dropClashes(rows: readonly SiteRow[], m: Matrix, warnings: string[] | null): SiteRow[] {
  const kept: SiteRow[] = [];
  const dropped: string[] = [];
  const full = rows.filter(row => row.occupancy >= 0.999 || row.group !== 0);
  const partial = rows.filter(row => row.occupancy < 0.999 && row.group === 0);
  if (partial.length === 0) return [...rows];
  const accepted = new Set<SiteRow>(full);
  for (const row of [...partial].sort((a, b) => b.occupancy - a.occupancy)) {
    const near = [...accepted].some(other => {
      if (other.occupancy + row.occupancy > 1.05) return false;
      const d = multiply(
        m,
        [0, 1, 2].map(k => other.coordinates[k]!.value - row.coordinates[k]!.value) as [
          number,
          number,
          number,
        ],
      );
      return Math.hypot(d[0], d[1], d[2]) < CLASH;
    });
    if (near) dropped.push(row.label);
    else accepted.add(row);
  }
  for (const row of rows) if (accepted.has(row)) kept.push(row);
  if (dropped.length > 0 && warnings) {
    warnings.push(
      `partly occupied sites that overlap others of higher occupancy are left out, no disorder group being given: ${dropped.join(', ')}`,
    );
  }
  return kept;
}

function buildStructure(
  block: CifBlock,
  crystal: CrystalDescription,
  chosen: readonly SiteRow[],
  warnings: string[] | null,
): Molecule {
  if (!crystal.cell) {
    throw new EntryProblem(
      'bad-cell',
      'the block gives no usable unit cell; _cell_length_a, _b, _c and _cell_angle_alpha, _beta, _gamma are wanted',
      block.line,
    );
  }
  const m = cellMatrix(crystal.cell);
  const rows = dropClashes(chosen, m, warnings);
  const sites: Site[] = rows.map(row => ({
    element: row.element,
    fractional: row.coordinates.map(({ value }) => value) as [number, number, number],
    occupancy: row.occupancy,
    assembly: row.assembly,
    group: row.group,
  }));
  const completion = completeMolecules(sites, crystal.operators, m);
  if (warnings) noteCompletion(completion, rows, warnings);
  const n = completion.atoms.length;
  const elements = Uint8Array.from(completion.atoms, ({ site }) => sites[site]!.element);
  const coordinates = new Float64Array(3 * n);
  completion.atoms.forEach(({ position }, i) => coordinates.set(position, 3 * i));
  const pairs = Uint32Array.from(completion.pairs);
  if (warnings) compareGeometry(block, rows, completion, warnings);
  const orders = bondOrders({ elements, coordinates, pairs });
  const occupancies = Float32Array.from(completion.atoms, ({ site }) => sites[site]!.occupancy);
  return assembleMolecule({
    name: block.name,
    elements,
    charges: orders.charges,
    isotopes: new Uint16Array(n),
    radicals: new Uint8Array(n),
    hydrogens: orders.hydrogens,
    bondAtoms: pairs,
    bondOrders: orders.orders,
    bondMarks: new Uint8Array(pairs.length / 2),
    coordinates,
    dimension: 3,
    labels: labelsOf(completion.atoms, rows, crystal.operators),
    stated: [],
    stereoGroups: [],
    residues: null,
    uncertainty: uncertaintyOf(crystal, m, completion, rows),
    occupancies: occupancies.some(value => value !== 1) ? occupancies : null,
    doubtfulBonding: orders.doubtful,
  });
}

function noteCompletion(completion: Completion, rows: readonly SiteRow[], warnings: string[]): void {
  const special = rows.filter((row, i) => completion.siteSymmetry[i]! > 1 && row.element !== 1).length;
  if (completion.completed > 0) {
    warnings.push(
      `${completion.completed === 1 ? 'a molecule was' : `${completion.completed} molecules were`} completed across symmetry: ${completion.atoms.length - rows.length} atoms added${special > 0 ? `, ${special} atoms on special positions` : ''}`,
    );
  }
  if (completion.endless) {
    warnings.push('bonds run through the crystal without end; those parts are left as the file lists them');
  }
}

/** Labels; images of a site carry the code of their operator: C1(2_655). */
function labelsOf(
  atoms: readonly PlacedAtom[],
  rows: readonly SiteRow[],
  operators: readonly SymmetryOperator[],
): string[] {
  return atoms.map(({ site, operator }) => {
    const { label } = rows[site]!;
    if (sameRotation(operator, IDENTITY) && operator.translation.every(value => Math.abs(value) < 1e-6))
      return label;
    return `${label}(${symmetryCode(operator, operators)})`;
  });
}

/** Symmetry code n_klm of an operator (core CIF dictionary, `_geom_bond_site_symmetry_1`), or its triplet where it is not in the list. */
export function symmetryCode(operator: SymmetryOperator, operators: readonly SymmetryOperator[]): string {
  for (let n = 0; n < operators.length; n++) {
    const each = operators[n]!;
    if (!sameRotation(each, operator)) continue;
    const shift = operator.translation.map((value, k) => value - each.translation[k]!);
    if (shift.every(value => Math.abs(value - Math.round(value)) < 1e-3 && Math.abs(value) < 4.5)) {
      return `${n + 1}_${shift.map(value => 5 + Math.round(value)).join('')}`;
    }
  }
  return formatOperator(operator).replace(/ /gu, '');
}

/**
 * Standard uncertainties: each site's own in its covariance; those of sites that occur more than once as errors their
 * images share; the cell's as errors all atoms share.
 */
function uncertaintyOf(
  crystal: CrystalDescription,
  m: Matrix,
  completion: Completion,
  rows: readonly SiteRow[],
): CoordinateUncertainty | null {
  const { atoms } = completion;
  if (!rows.some(row => row.element !== 1 && row.coordinates.some(({ uncertainty }) => uncertainty !== null)))
    return null;
  const n = atoms.length;
  const covariances = new Float64Array(6 * n);
  const modes: { sigma: number; displacement: Float64Array }[] = [];
  const images = new Map<number, number[]>();
  atoms.forEach(({ site }, i) => {
    const list = images.get(site);
    if (list) list.push(i);
    else images.set(site, [i]);
  });
  for (const [site, list] of images) {
    const sigmas = rows[site]!.coordinates.map(({ uncertainty }) => uncertainty ?? 0);
    for (let axis = 0; axis < 3; axis++) {
      const sigma = sigmas[axis]!;
      if (sigma === 0) continue;
      const shared = list.length > 1 ? new Float64Array(3 * n) : null;
      for (const atom of list) {
        // Shift of this image, in Å, for one unit of the fractional coordinate of its site.
        const turned = multiplyRotations(m, atoms[atom]!.operator.rotation);
        const d = [turned[axis]!, turned[3 + axis]!, turned[6 + axis]!];
        if (shared) {
          shared.set(d, 3 * atom);
          continue;
        }
        const v = sigma * sigma;
        const c = 6 * atom;
        covariances[c]! += v * d[0]! * d[0]!;
        covariances[c + 1]! += v * d[1]! * d[1]!;
        covariances[c + 2]! += v * d[2]! * d[2]!;
        covariances[c + 3]! += v * d[0]! * d[1]!;
        covariances[c + 4]! += v * d[0]! * d[2]!;
        covariances[c + 5]! += v * d[1]! * d[2]!;
      }
      if (shared) modes.push({ sigma, displacement: shared });
    }
  }
  for (const { sigma, slope } of cellModes(
    crystal.cell!,
    crystal.operators.map(({ rotation }) => rotation),
  )) {
    const displacement = new Float64Array(3 * n);
    atoms.forEach(({ site, operator }, i) => {
      const fractional = applyOperator(
        operator,
        rows[site]!.coordinates.map(({ value }) => value) as [number, number, number],
      );
      displacement.set(multiply(slope, fractional), 3 * i);
    });
    modes.push({ sigma, displacement });
  }
  return { covariances, modes };
}

/** Difference between a listed bond length and the coordinates that is worth telling, Å. */
const LENGTH_DIFFERENCE = 0.05;

/** Sets the bond lengths the file lists against the coordinates: where they disagree, something was changed after refinement. */
function compareGeometry(
  block: CifBlock,
  rows: readonly SiteRow[],
  completion: Completion,
  warnings: string[],
): void {
  const loop = loopWith(block, '_geom_bond_atom_site_label_1');
  if (!loop) return;
  const first = loop.columnIndex('_geom_bond_atom_site_label_1');
  const second = loop.columnIndex('_geom_bond_atom_site_label_2');
  const length = loop.columnIndex('_geom_bond_distance');
  const symmetry = ['_geom_bond_site_symmetry_1', '_geom_bond_site_symmetry_2'].map(name =>
    loop.columnIndex(name),
  );
  if (second < 0 || length < 0) return;
  const index = new Map<string, number>();
  rows.forEach((row, i) => index.set(row.label, i));
  const atomOf = new Map<number, number>();
  completion.atoms.forEach(({ site }, i) => {
    if (!atomOf.has(site)) atomOf.set(site, i);
  });
  let differing = 0;
  let example = '';
  for (let row = 0; row < loop.rowCount; row++) {
    if (symmetry.some(column => column >= 0 && loop.value(row, column) !== null)) continue;
    const a = index.get(loop.value(row, first) ?? '');
    const b = index.get(loop.value(row, second) ?? '');
    const listed = measured(loop.value(row, length));
    if (a === undefined || b === undefined || !listed) continue;
    const p = completion.atoms[atomOf.get(a)!]!;
    const q = completion.atoms[atomOf.get(b)!]!;
    if (!sameRotation(p.operator, IDENTITY) || !sameRotation(q.operator, IDENTITY)) continue;
    if (p.operator.translation.some((value, k) => value !== q.operator.translation[k])) continue;
    const found = Math.hypot(
      p.position[0] - q.position[0],
      p.position[1] - q.position[1],
      p.position[2] - q.position[2],
    );
    if (Math.abs(found - listed.value) <= LENGTH_DIFFERENCE) continue;
    differing++;
    if (example === '')
      example = `${rows[a]!.label}–${rows[b]!.label} ${found.toFixed(3)} Å, listed ${listed.value} Å`;
  }
  if (differing > 0) {
    warnings.push(
      `${differing} listed bond ${differing === 1 ? 'length differs' : 'lengths differ'} from the coordinates by more than ${LENGTH_DIFFERENCE} Å (${example}); the coordinates count`,
    );
  }
}
