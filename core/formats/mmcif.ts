/** Macromolecular models (PDBx/mmCIF dictionary, category atom_site): one entry for each model of a data block. */
import { type AtomRecord, buildModel, type StatedBond } from '../biopolymer/model.ts';
import { templateOf } from '../biopolymer/templates.ts';
import { elementNumber } from '../chemistry/elements.ts';
import type { CrystalDescription } from '../crystal/description.ts';
import { componentBonds } from './ccd.ts';
import { describeCrystal } from './cif-core.ts';
import { type CifBlock, type CifLoop, measured } from './cif-syntax.ts';
import { EntryProblem } from './errors.ts';
import type { Entry, Limits } from './format.ts';

export function isModelBlock(block: CifBlock): boolean {
  return block.has('_atom_site.cartn_x');
}

interface Row {
  readonly record: AtomRecord;
  readonly model: string;
  /** Chain, component, residue number and atom name by the labels of the dictionary, for links. */
  readonly place: string;
}

/** Reads a block. @throws EntryProblem that says what is wrong; its line is the line of the file. */
export function readModelBlock(
  block: CifBlock,
  limits: Limits,
): Pick<Entry, 'name' | 'molecule' | 'warnings' | 'crystal' | 'alternatives'>[] {
  const loop = block.looped.get('_atom_site.cartn_x');
  if (!loop) throw new EntryProblem('no-structure', 'the atom list is empty', block.line);
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
  const rows = readRows(loop);
  const warnings: string[] = [];
  const crystal = describeModelCrystal(block, rows, warnings);
  const models = new Map<string, Row[]>();
  for (const row of rows) {
    const list = models.get(row.model);
    if (list) list.push(row);
    else models.set(row.model, [row]);
  }
  const components = componentBonds(block);
  return [...models].map(([model, list]) => {
    const name = block.get('_entry.id') ?? block.name;
    const built = buildModel({
      name: models.size > 1 ? `${name}, model ${model}` : name,
      atoms: list.map(({ record }) => record),
      stated: statedLinks(block, list),
      components,
    });
    return {
      name: built.molecule.name,
      molecule: built.molecule,
      warnings: [...warnings, ...built.warnings],
      crystal,
      alternatives: built.alternatives,
    };
  });
}

function readRows(loop: CifLoop): Row[] {
  const at = (name: string): number => loop.columnIndex(`_atom_site.${name}`);
  const columns = {
    group: at('group_pdb'),
    id: at('id'),
    symbol: at('type_symbol'),
    labelAtom: at('label_atom_id'),
    atom: at('auth_atom_id'),
    location: at('label_alt_id'),
    labelComponent: at('label_comp_id'),
    component: at('auth_comp_id'),
    labelChain: at('label_asym_id'),
    chain: at('auth_asym_id'),
    labelNumber: at('label_seq_id'),
    number: at('auth_seq_id'),
    insertion: at('pdbx_pdb_ins_code'),
    x: at('cartn_x'),
    y: at('cartn_y'),
    z: at('cartn_z'),
    occupancy: at('occupancy'),
    charge: at('pdbx_formal_charge'),
    model: at('pdbx_pdb_model_num'),
  };
  const rows: Row[] = [];
  const symbols = new Map<string, number>();
  for (let row = 0; row < loop.rowCount; row++) {
    const read = (column: number): string | null => (column < 0 ? null : loop.value(row, column));
    const either = (first: number, second: number): string => read(first) ?? read(second) ?? '';
    const symbol = read(columns.symbol) ?? read(columns.labelAtom)?.charAt(0) ?? '';
    let element = symbols.get(symbol);
    if (element === undefined) {
      element = elementNumber(symbol.charAt(0).toUpperCase() + symbol.slice(1).toLowerCase());
      if (element === undefined) {
        throw new EntryProblem(
          'unknown-element',
          `${symbol === '' ? 'no symbol' : symbol} is no element`,
          loop.lineOfRow(row),
        );
      }
      symbols.set(symbol, element);
    }
    const x = decimal(read(columns.x));
    const y = decimal(read(columns.y));
    const z = decimal(read(columns.z));
    if (!Number.isFinite(x + y + z)) {
      throw new EntryProblem('bad-coordinates', 'a coordinate is no number', loop.lineOfRow(row));
    }
    const residue = either(columns.component, columns.labelComponent);
    const labelNumber = read(columns.labelNumber);
    // Polymer residues have a place in the sequence; without that column, the group and the name tell.
    const polymer =
      columns.labelNumber >= 0
        ? labelNumber !== null
        : read(columns.group) !== 'HETATM' && templateOf(residue) !== null;
    const chain = either(columns.chain, columns.labelChain);
    const labelAtom = either(columns.labelAtom, columns.atom);
    rows.push({
      record: {
        name: either(columns.atom, columns.labelAtom),
        element,
        isotope: symbol === 'D' ? 2 : 0,
        charge: Math.round(Number(read(columns.charge) ?? 0)) || 0,
        residue,
        chain,
        number: `${either(columns.number, columns.labelNumber)}${read(columns.insertion) ?? ''}`,
        location: read(columns.location) ?? '',
        occupancy: measured(read(columns.occupancy))?.value ?? 1,
        x,
        y,
        z,
        hetero: !polymer,
        serial: row,
      },
      model: read(columns.model) ?? '1',
      place: `${read(columns.labelChain) ?? chain}|${labelNumber ?? read(columns.number) ?? ''}|${labelAtom}`,
    });
  }
  return rows;
}

function decimal(text: string | null): number {
  if (text === null) return Number.NaN;
  const value = Number(text);
  return Number.isFinite(value) ? value : (measured(text)?.value ?? Number.NaN);
}

/** Covalent links, disulfides and metal contacts of `_struct_conn` within the asymmetric unit. */
function statedLinks(block: CifBlock, rows: readonly Row[]): StatedBond[] {
  const types = block.all('_struct_conn.conn_type_id');
  if (!types) return [];
  const table = new Map<string, number[]>();
  rows.forEach(({ place }, i) => {
    const list = table.get(place);
    if (list) list.push(i);
    else table.set(place, [i]);
  });
  const column = (name: string): (string | null)[] => block.all(`_struct_conn.${name}`) ?? [];
  const end = (n: 1 | 2) => ({
    chain: column(`ptnr${n}_label_asym_id`),
    number: column(`ptnr${n}_label_seq_id`),
    authorNumber: column(`ptnr${n}_auth_seq_id`),
    atom: column(`ptnr${n}_label_atom_id`),
    location: column(`pdbx_ptnr${n}_label_alt_id`),
    symmetry: column(`ptnr${n}_symmetry`),
  });
  const ends = [end(1), end(2)] as const;
  const bonds: StatedBond[] = [];
  types.forEach((type, k) => {
    const kind = /^(?:covale|disulf|modres)/u.test(type ?? '') ? 'link' : type === 'metalc' ? 'metal' : null;
    if (kind === null) return;
    if (ends[0].symmetry[k] !== ends[1].symmetry[k]) return;
    const [first, second] = ends.map(each => {
      const key = `${each.chain[k] ?? ''}|${each.number[k] ?? each.authorNumber[k] ?? ''}|${each.atom[k] ?? ''}`;
      return table.get(key) ?? [];
    }) as [number[], number[]];
    for (const a of first) {
      for (const b of second) {
        const la = rows[a]!.record.location;
        const lb = rows[b]!.record.location;
        if (la === '' || lb === '' || la === lb) bonds.push({ first: a, second: b, kind });
      }
    }
  });
  return bonds;
}

/** Fewest polymer residues of a macromolecule. */
const LEAST_RESIDUES = 3;

function describeModelCrystal(
  block: CifBlock,
  rows: readonly Row[],
  warnings: string[],
): CrystalDescription | null {
  const method = block.get('_exptl.method')?.toUpperCase() ?? '';
  if (/NMR|MICROSCOPY|SCATTERING/u.test(method) && !/DIFFRACTION|CRYSTALLOGRAPHY/u.test(method)) return null;
  if (!block.has('_cell.length_a')) return null;
  const own: string[] = [];
  const crystal = describeCrystal(block, own);
  if (!crystal.cell || crystal.cell.lengths[0].value <= 1.01) return null;
  warnings.push(...own.filter(text => !text.includes('symmetry operators')));
  const residues = new Set<string>();
  for (const { record } of rows) {
    if (!record.hetero) residues.add(`${record.chain}|${record.number}`);
    if (residues.size >= LEAST_RESIDUES) break;
  }
  return { ...crystal, macromolecule: residues.size >= LEAST_RESIDUES };
}
