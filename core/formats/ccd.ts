/**
 * Chemical components (wwPDB Chemical Component Dictionary, mmCIF dictionary categories chem_comp, chem_comp_atom,
 * chem_comp_bond): ideal coordinates where they are complete, the model's otherwise; configuration flags as data.
 */
import type { ComponentBonds } from '../biopolymer/model.ts';
import { elementNumber } from '../chemistry/elements.ts';
import {
  type AtomInput,
  type BondOrder,
  buildMolecule,
  type Molecule,
  type ResidueAtom,
} from '../chemistry/molecule.ts';
import { kekulise, DoubleBondNeed } from '../chemistry/kekule.ts';
import type { CifBlock } from './cif-syntax.ts';
import { measured } from './cif-syntax.ts';
import { EntryProblem } from './errors.ts';
import type { DataItem, Limits, StructureAlternative } from './format.ts';

/** Configuration flag of an atom (R, S) or a bond (E, Z); N for none. */
export interface ConfigurationFlag {
  readonly atoms: readonly string[];
  readonly flag: string;
}

export interface Component {
  readonly id: string;
  readonly name: string;
  readonly molecule: Molecule;
  readonly alternatives: readonly StructureAlternative[];
  readonly flags: readonly ConfigurationFlag[];
  readonly data: readonly DataItem[];
  readonly warnings: readonly string[];
}

export function isComponentBlock(block: CifBlock): boolean {
  return block.has('_chem_comp_atom.atom_id') && !block.has('_atom_site.cartn_x');
}

const ORDERS: Readonly<Record<string, BondOrder>> = {
  sing: 1,
  single: 1,
  doub: 2,
  double: 2,
  trip: 3,
  triple: 3,
  quad: 4,
  arom: 1,
  aromatic: 1,
  delo: 1,
  deloc: 1,
  pi: 0,
  poly: 1,
  metal: 0,
};

function upper(symbol: string): string {
  return symbol.charAt(0).toUpperCase() + symbol.slice(1).toLowerCase();
}

/** Reads a component. @throws EntryProblem that says what is wrong; its line is the line of the file. */
export function readComponent(block: CifBlock, limits: Limits): Component {
  const column = (name: string): (string | null)[] | null => block.all(`_chem_comp_atom.${name}`);
  const ids = column('atom_id')!;
  const types = column('type_symbol');
  const line = block.lineOf('_chem_comp_atom.atom_id');
  if (!types) throw new EntryProblem('unknown-element', '_chem_comp_atom.type_symbol is missing', line);
  if (ids.length > limits.atoms)
    throw new EntryProblem('too-many-atoms', `more than ${limits.atoms} atoms`, line);
  const charges = column('charge') ?? column('partial_charge');
  const warnings: string[] = [];
  const coordinates = (prefix: string, suffix: string): (number | null)[][] =>
    ['x', 'y', 'z'].map(axis => {
      const values = column(`${prefix}Cartn_${axis}${suffix}`.toLowerCase());
      return ids.map((_, i) => measured(values?.[i] ?? null)?.value ?? null);
    });
  const ideal = coordinates('pdbx_model_', '_ideal');
  const model = coordinates('model_', '');
  const bare = ['x', 'y', 'z'].map(axis => {
    const values = column(axis);
    return ids.map((_, i) => measured(values?.[i] ?? null)?.value ?? null);
  });
  const complete = (set: (number | null)[][]): boolean =>
    set.every(axis => axis.every(value => value !== null));
  const sets = [
    { name: 'ideal coordinates', values: ideal },
    { name: 'model coordinates', values: model },
    { name: 'coordinates', values: bare },
  ].filter(({ values }) => complete(values));
  const partly = [ideal, model, bare].find(set => set.some(axis => axis.some(value => value !== null)));
  const chosen = sets[0] ?? (partly ? { name: 'incomplete coordinates', values: partly } : null);
  if (!sets[0] && partly) warnings.push('the coordinates are incomplete');
  if (!chosen) warnings.push('the component has no coordinates');

  const index = new Map<string, number>();
  ids.forEach((id, i) => {
    if (id !== null) index.set(id, i);
  });
  const bonds: [number, number, BondOrder][] = [];
  const aromaticBonds: number[] = [];
  const flags: ConfigurationFlag[] = [];
  const firsts = block.all('_chem_comp_bond.atom_id_1');
  const seconds = block.all('_chem_comp_bond.atom_id_2');
  const orders = block.all('_chem_comp_bond.value_order') ?? block.all('_chem_comp_bond.type');
  const bondFlags = block.all('_chem_comp_bond.pdbx_stereo_config');
  const bondLine = block.lineOf('_chem_comp_bond.atom_id_1');
  firsts?.forEach((a, k) => {
    const b = seconds?.[k] ?? null;
    const i = a === null ? undefined : index.get(a);
    const j = b === null ? undefined : index.get(b);
    if (i === undefined || j === undefined) {
      throw new EntryProblem(
        'bond-atom-missing',
        `a bond joins ${a ?? '?'} and ${b ?? '?'}, which are not both atoms`,
        bondLine,
      );
    }
    const value = (orders?.[k] ?? 'sing').toLowerCase();
    const order = ORDERS[value];
    if (order === undefined) throw new EntryProblem('bad-bond', `${value} is no bond order`, bondLine);
    if (value.startsWith('arom') || value.startsWith('delo')) aromaticBonds.push(bonds.length);
    bonds.push([i, j, order]);
    const flag = bondFlags?.[k];
    if (flag && flag !== 'N') flags.push({ atoms: [a!, b!], flag });
  });
  const atomFlags = column('pdbx_stereo_config');
  ids.forEach((id, i) => {
    const flag = atomFlags?.[i];
    if (id !== null && flag && flag !== 'N') flags.push({ atoms: [id], flag });
  });
  const elements = ids.map((id, i) => {
    const symbol = upper(types[i] ?? '');
    // X stands for an atom that may be one or another (ASX, GLX).
    const z = symbol === 'X' ? 0 : elementNumber(symbol);
    if (z === undefined)
      throw new EntryProblem('unknown-element', `${symbol} of atom ${id ?? '?'} is no element`, line);
    return z;
  });
  if (aromaticBonds.length > 0) kekuliseBonds(bonds, aromaticBonds, elements);
  const id = block.get('_chem_comp.id', '_chem_comp.three_letter_code') ?? block.name;
  const build = (values: (number | null)[][] | null): Molecule => {
    const atoms = ids.map((label, i): AtomInput => {
      const [x, y, z] = [0, 1, 2].map(axis => values?.[axis]?.[i] ?? Number.NaN);
      return {
        element: elements[i]!,
        isotope: types[i] === 'D' ? 2 : 0,
        charge: Math.round(measured(charges?.[i] ?? null)?.value ?? 0),
        label: label ?? String(i + 1),
        ...(values && { x: x!, y: y!, z: z! }),
      };
    });
    const molecule = buildMolecule({ name: id, atoms, bonds, dimension: values ? 3 : 0 });
    const residues = ids.map(
      (label): ResidueAtom => ({ chain: '', residue: id, number: '', atomName: label ?? '', hetero: true }),
    );
    return { ...molecule, residues };
  };
  return {
    id,
    name: block.get('_chem_comp.name') ?? '',
    molecule: build(chosen?.values ?? null),
    alternatives: sets.slice(1).map(({ name, values }) => ({ name, molecule: build(values) })),
    flags,
    data: [
      { name: 'coordinates', value: chosen?.name ?? 'none' },
      {
        name: 'configuration flags',
        value: flags.map(({ atoms, flag }) => `${atoms.join('-')} ${flag}`).join('\n'),
      },
    ],
    warnings,
  };
}

function kekuliseBonds(
  bonds: [number, number, BondOrder][],
  aromatic: readonly number[],
  elements: readonly number[],
): void {
  const needs = new Uint8Array(elements.length);
  const edges = new Uint32Array(2 * aromatic.length);
  aromatic.forEach((b, e) => {
    const [i, j] = bonds[b]!;
    edges[2 * e] = i;
    edges[2 * e + 1] = j;
    for (const atom of [i, j])
      needs[atom] = elements[atom] === 6 ? DoubleBondNeed.required : DoubleBondNeed.optional;
  });
  const { doubled } = kekulise({ atomCount: elements.length, edges, needs, chains: true });
  aromatic.forEach((b, e) => {
    if (doubled[e]) bonds[b]![2] = 2;
  });
}

/** Bonds and charges of the components that a model file itself describes, by component name. */
export function componentBonds(block: CifBlock): Map<string, ComponentBonds> {
  const table = new Map<string, ComponentBonds>();
  const components = block.all('_chem_comp_bond.comp_id');
  const firsts = block.all('_chem_comp_bond.atom_id_1');
  const seconds = block.all('_chem_comp_bond.atom_id_2');
  const orders = block.all('_chem_comp_bond.value_order');
  if (!components || !firsts || !seconds || !orders) return table;
  const charges = new Map<string, Map<string, number>>();
  const atomComponents = block.all('_chem_comp_atom.comp_id');
  const atomIds = block.all('_chem_comp_atom.atom_id');
  const atomCharges = block.all('_chem_comp_atom.charge');
  atomComponents?.forEach((component, k) => {
    const charge = Number(atomCharges?.[k] ?? 0);
    const atom = atomIds?.[k];
    if (component === null || !atom || !charge) return;
    const own = charges.get(component) ?? new Map<string, number>();
    charges.set(component, own);
    own.set(atom, charge);
  });
  const lists = new Map<string, { first: string; second: string; order: 1 | 2 | 3 }[]>();
  components.forEach((component, k) => {
    const first = firsts[k];
    const second = seconds[k];
    if (component === null || !first || !second) return;
    const order = ORDERS[(orders[k] ?? 'sing').toLowerCase()] ?? 1;
    const list = lists.get(component) ?? [];
    lists.set(component, list);
    list.push({ first, second, order: order === 2 || order === 3 ? order : 1 });
  });
  for (const [component, bonds] of lists) {
    table.set(component, { bonds, charges: charges.get(component) ?? new Map() });
  }
  return table;
}
