/** Mapping a model that is not the intended graph atom for atom: parts missing, attachments, bond orders, isotopes. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { assembleMolecule, type Molecule, neighboursOf } from '../../../core/chemistry/molecule.ts';
import { DEFAULT_LIMITS } from '../../../core/formats/format.ts';
import { sdfFormat } from '../../../core/formats/sdf.ts';
import { compared, moleculeOf } from './models.ts';

const demo = (name: string): string =>
  readFileSync(new URL(`../../../assets/demo/${name}`, import.meta.url), 'utf8');
const [first] = demo('lantern-models.sdf').split(/(?<=^\$\$\$\$\n)/m);
const parsed = sdfFormat.parse({ entry: 1, line: 1, bytes: new TextEncoder().encode(first) }, DEFAULT_LIMITS);
/** The good model of the demo: centres C2, C4, C6 and S20, double bond C12=C13. */
const model = parsed[0]!.molecule!;
const intended = moleculeOf(demo('lantern-intended.smi').split('\t')[0]!);

/** The model with some atoms (0-based) left out. */
function without(molecule: Molecule, gone: (atom: number) => boolean): Molecule {
  const kept = Array.from({ length: molecule.atomCount }, (_, i) => i).filter(atom => !gone(atom));
  const place = new Map(kept.map((old, now) => [old, now]));
  const bonds = Array.from({ length: molecule.bondCount }, (_, b) => b).filter(
    b => place.has(molecule.bondAtoms[2 * b]!) && place.has(molecule.bondAtoms[2 * b + 1]!),
  );
  return assembleMolecule({
    ...molecule,
    elements: Uint8Array.from(kept, atom => molecule.elements[atom]!),
    charges: Int8Array.from(kept, atom => molecule.charges[atom]!),
    isotopes: Uint16Array.from(kept, atom => molecule.isotopes[atom]!),
    radicals: Uint8Array.from(kept, atom => molecule.radicals[atom]!),
    hydrogens: Uint8Array.from(kept, atom => molecule.hydrogens[atom]!),
    coordinates: Float64Array.from(
      kept.flatMap(atom => [0, 1, 2].map(axis => molecule.coordinates![3 * atom + axis]!)),
    ),
    bondAtoms: Uint32Array.from(
      bonds.flatMap(b => [
        place.get(molecule.bondAtoms[2 * b]!)!,
        place.get(molecule.bondAtoms[2 * b + 1]!)!,
      ]),
    ),
    bondOrders: Uint8Array.from(bonds, b => molecule.bondOrders[b]!),
    bondMarks: Uint8Array.from(bonds, b => molecule.bondMarks[b]!),
  });
}

/** The model with other elements for some atoms. */
function replaced(molecule: Molecule, elements: ReadonlyMap<number, number>): Molecule {
  return assembleMolecule({
    ...molecule,
    elements: molecule.elements.map((element, atom) => elements.get(atom) ?? element),
  });
}

const isHydrogen = (atom: number): boolean => model.elements[atom] === 1;
const hydrogenOf = (atom: number): number => neighboursOf(model, atom).find(isHydrogen)!;
const verdicts = (result: ReturnType<typeof compared>): Record<string, string> =>
  Object.fromEntries(
    result.units.map(({ intendedAtoms, kind, verdict }) => [`${kind} ${intendedAtoms?.join('-')}`, verdict]),
  );

describe('mapping', () => {
  it('reports which intended atom each atom of the model is', () => {
    const result = compared(model, intended);
    expect(result.relation).toBe('same');
    for (let atom = 0; atom < model.atomCount; atom++) {
      const to = result.mapping![atom]!;
      expect(to === -1).toBe(isHydrogen(atom));
      expect(to === -1 ? 1 : intended.elements[to]).toBe(model.elements[atom]);
    }
  });

  it('judges the units inside a part of the model and calls the others missing', () => {
    // Without hydrogens and without the methylsulfinyl group.
    const part = without(model, atom => isHydrogen(atom) || [19, 20, 21].includes(atom));
    const result = compared(part, intended);
    expect(result.relation).toBe('undecided');
    const found = result.units.map(({ kind, verdict, unit }) => [kind, verdict, unit === null]);
    expect(found.filter(([, verdict]) => verdict === 'agrees')).toHaveLength(4);
    expect(found.filter(([, verdict]) => verdict === 'missing')).toEqual([['centre', 'missing', true]]);
    expect(result.units.find(({ verdict }) => verdict === 'missing')?.intendedAtoms).toHaveLength(1);
    expect(result.warnings.join()).toMatch(/3 of 22 intended atoms/);
  });

  it('calls a part whose valences are filled with hydrogen another compound', () => {
    // The hydroxyl group replaced by hydrogen, all hydrogens listed.
    const reduced = without(replaced(model, new Map([[4, 1]])), atom => atom === hydrogenOf(4));
    const result = compared(reduced, intended);
    expect(result.relation).toBe('other compound');
    expect(result.difference).toMatch(/2 O, the intention 3/);
  });

  it('passes over what hangs on an attachment point', () => {
    const attached = replaced(model, new Map([[hydrogenOf(0), 0]]));
    expect(compared(attached, intended).relation).toBe('same');
    const atCentre = replaced(model, new Map([[hydrogenOf(3), 0]]));
    expect(compared(atCentre, intended).relation).toBe('same');
    expect(compared(replaced(model, new Map([[hydrogenOf(0), 9]])), intended).relation).toBe(
      'other compound',
    );
  });

  it('compares with an intention that has attachment points', () => {
    // The ring with its amide; the acyl part is open.
    const scaffold = 'C[C@@H]1C[C@H](O)[C@@H](F)CN1C(=O)*';
    expect(compared(model, scaffold).relation).toBe('same');
    expect(compared(model, 'C[C@H]1C[C@H](O)[C@@H](F)CN1C(=O)*').relation).toBe('epimer');
  });

  it('takes missing bond orders from the intention, and says so', () => {
    const single = assembleMolecule({
      ...without(model, isHydrogen),
      bondOrders: without(model, isHydrogen).bondOrders.fill(1),
    });
    const result = compared(single, intended);
    expect(result.relation).toBe('same');
    expect(result.warnings).toContain('bond orders taken from the intention');
    expect(Object.values(verdicts(result)).every(verdict => verdict === 'agrees')).toBe(true);
    expect(
      result.examined.docket.units
        .map(({ descriptor }) => descriptor ?? '-')
        .sort((a, b) => (a < b ? -1 : 1)),
    ).toEqual(['E', 'R', 'R', 'S', 'S']);
  });

  it('tells a saturated analogue with its hydrogens from missing bond orders', () => {
    expect(compared(model, 'C[C@@H]1C[C@H](O)[C@@H](F)CN1C(=O)CCc1ccc(nc1)[S@@](C)=O').relation).toBe(
      'other compound',
    );
  });
});

describe('verdicts', () => {
  it('calls a unit relabelled when only its ranking differs', () => {
    // Natural carbon ranks above 11C and below 13C, so the letter changes though nothing moves.
    const result = compared('F[C@](Cl)([13CH3])C', 'F[C@](Cl)([11CH3])C');
    expect(result.relation).toBe('same');
    expect(result.units.map(({ verdict }) => verdict)).toEqual(['relabelled']);
    expect(result.warnings.join()).toMatch(/isotopes/);
  });

  it('calls a unit relabelled when a covalent attachment outranks what was free', () => {
    // A hydrogen of C1 gives way to the sulfur of a polymer residue: C1 now ranks above C3 at C2, and nothing moved.
    const sulfur = hydrogenOf(0);
    const bound = replaced(model, new Map([[sulfur, 16]]));
    const residues = Array.from({ length: model.atomCount }, (_, atom) => ({
      chain: 'A',
      residue: atom === sulfur ? 'CYS' : 'LIG',
      number: atom === sulfur ? '42' : '500',
      atomName: atom === sulfur ? 'SG' : `X${atom}`,
      hetero: atom !== sulfur,
    }));
    const result = compared({ ...bound, residues }, intended);
    expect(result.relation).toBe('same');
    expect(verdicts(result)).toMatchObject({
      'centre 1': 'relabelled',
      'centre 3': 'agrees',
      'centre 5': 'agrees',
    });
    // The same sulfur as part of the ligand makes it another compound.
    expect(compared(bound, intended).relation).toBe('other compound');
  });

  it('calls a change of the letter that comes with a change in space inverted', () => {
    expect(
      compared('F[C@@](Cl)([13CH3])C', 'F[C@](Cl)([13CH3])C').units.map(({ verdict }) => verdict),
    ).toEqual(['inverted']);
  });

  it('keeps isotopic configuration apart', () => {
    expect(compared('C[C@H]([2H])O', 'C[C@@H]([2H])O').relation).toBe('enantiomer');
    expect(compared('CC([2H])O', 'C[C@@H]([2H])O').relation).toBe('undecided');
  });

  it('judges the members of a stereo group as one', () => {
    const mixed = compared('C[C@@H](O)[C@@H](N)C[C@H](F)Cl', 'C[C@H](O)[C@@H](N)C[C@H](F)Cl |&1:1,3|');
    expect(mixed.units.map(({ verdict, group }) => [verdict, group])).toEqual([
      ['inverted', '&1'],
      ['inverted', '&1'],
      ['agrees', null],
    ]);
    const whole = compared('C[C@@H](O)[C@H](N)C[C@H](F)Cl', 'C[C@H](O)[C@@H](N)C[C@H](F)Cl |&1:1,3|');
    expect(whole.relation).toBe('same');
    expect(whole.units.map(({ verdict }) => verdict)).toEqual(['agrees', 'agrees', 'agrees']);
  });

  it('lists what was found at units that nothing was asked of', () => {
    const result = compared('C[C@H](O)[C@H](N)CC', 'CC(O)[C@H](N)CC');
    expect(result.relation).toBe('same');
    expect(result.units.map(({ verdict }) => verdict)).toEqual(['open', 'agrees']);
    expect(result.examined.docket.units[0]?.descriptor).toMatch(/[RS]/);
  });
});
