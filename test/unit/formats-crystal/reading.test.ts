/** Structures from CIF, mmCIF, components, PDB and XYZ, all invented. */
import { describe, expect, it } from 'vitest';
import { degree, type Molecule } from '../../../core/chemistry/molecule.ts';
import { hillFormula } from '../../../core/chemistry/formula.ts';
import { cifFormat } from '../../../core/formats/cif.ts';
import { DEFAULT_LIMITS, type Entry, type Format } from '../../../core/formats/format.ts';
import { pdbFormat } from '../../../core/formats/pdb.ts';
import { detectFormat } from '../../../core/formats/registry.ts';
import { xyzFormat } from '../../../core/formats/xyz.ts';
import { examine } from '../../../core/examine.ts';
import { inventedCif } from '../crystal/invented.ts';

async function readAll(format: Format, text: string, chunk = 1 << 20): Promise<Entry[]> {
  const bytes = new TextEncoder().encode(text);
  async function* chunks(): AsyncGenerator<Uint8Array> {
    for (let at = 0; at < bytes.length; at += chunk) yield await Promise.resolve(bytes.slice(at, at + chunk));
  }
  const entries: Entry[] = [];
  for await (const raw of format.split(chunks(), DEFAULT_LIMITS))
    entries.push(...format.parse(raw, DEFAULT_LIMITS));
  return entries;
}

const all = (molecule: Molecule): number[] => Array.from({ length: molecule.atomCount }, (_, i) => i);
const letters = (molecule: Molecule): string[] =>
  examine(molecule).units.map(
    ({ unit, descriptor }) => `${unit.atoms.map(atom => molecule.labels?.[atom]).join('-')} ${descriptor}`,
  );

const SMALL = inventedCif({
  symbol: 'P 21 21 21',
  number: 19,
  hall: 'P 2ac 2ab',
  lengths: [8.2, 9.9, 11.7],
  at: [0.31, 0.12, 0.17],
});

describe('small-molecule CIF', () => {
  it('is read whole, in space, with labels and s.u.', async () => {
    const [entry] = await readAll(cifFormat, SMALL);
    const molecule = entry?.molecule;
    expect(entry?.error).toBeNull();
    expect(molecule && hillFormula(molecule, all(molecule))).toBe('C3H6ClFO');
    expect(molecule?.labels?.[0]).toBe('C1');
    expect(molecule?.uncertainty?.covariances[0]).toBeGreaterThan(0);
    expect(entry?.crystal).toMatchObject({
      spaceGroup: 'P 21 21 21',
      sohncke: true,
      flack: { value: 0.98, uncertainty: 0.03 },
    });
  });

  it('is cut into structures, blocks without atoms staying with the one before', async () => {
    const text = `data_global\n_publ_section_title\n;\ndata_not_a_block\n;\n${SMALL}data_hkl\n_x 1\n${SMALL.replace('data_invented', 'data_two')}`;
    for (const chunk of [7, 64, 1 << 20]) {
      const entries = await readAll(cifFormat, text, chunk);
      expect(entries.map(({ entry, name, line }) => [entry, name, line])).toEqual([
        [1, 'invented', text.split('\n').indexOf('data_invented') + 1],
        [2, 'two', text.split('\n').indexOf('data_two') + 1],
      ]);
    }
  });

  it.each([
    [/'x, y, z'/u, "'x, y, q'", 'bad-symmetry', /no symmetry operator/u],
    [/^C1 C (\S+)/mu, 'C1 C x.1', 'bad-coordinates', /coordinate of atom C1/u],
    [/^C1 C /mu, 'C1 Qq ', 'unknown-element', /Qq/u],
    [/^_cell_length_a .*$/mu, '_cell_length_a ?', 'bad-cell', /unit cell/u],
    [/^C1 C \S+ \S+ \S+$/mu, 'C1 C 0.1 0.2', 'bad-loop', /one value is missing/u],
  ])('is refused with code and reason: %s to %s', async (from, to, code, message) => {
    const [entry] = await readAll(cifFormat, SMALL.replace(from, to));
    expect(entry?.molecule).toBeNull();
    expect(entry?.error).toMatchObject({ code, message: expect.stringMatching(message) as string });
    expect(entry?.error?.line).toBeGreaterThan(1);
  });

  it('takes the operators from the symbol where the file lists none, and says so', async () => {
    const bare = SMALL.replace(/loop_\n_space_group_symop[^]*?(?=loop_)/u, '');
    expect(bare).not.toContain('symop');
    const [entry] = await readAll(cifFormat, bare);
    expect(entry?.crystal).toMatchObject({ operatorSource: 'symbol', sohncke: true });
    expect(entry?.crystal?.operators).toHaveLength(4);
    expect(entry?.warnings.join()).toMatch(/lists no symmetry operators/u);
    const [unknown] = await readAll(
      cifFormat,
      bare.replace(/_space_group_name.*\n/gu, '').replace(/_space_group_IT.*\n/u, ''),
    );
    expect(unknown?.crystal).toMatchObject({ operatorSource: 'none', sohncke: null });
    expect(unknown?.molecule).not.toBeNull();
  });

  it('tells when symbol and operators disagree on whether both hands are present', async () => {
    const [entry] = await readAll(
      cifFormat,
      SMALL.replace(/_space_group_name_Hall .*/u, "_space_group_name_Hall '-P 1'"),
    );
    expect(entry?.warnings.join()).toMatch(/disagree on whether both hands/u);
    expect(entry?.crystal?.sohncke).toBe(true);
  });

  it('takes the group of highest occupancy in each assembly and offers the others', async () => {
    const disordered = SMALL.replace(
      /_atom_site_fract_z\n/u,
      '_atom_site_fract_z\n_atom_site_occupancy\n_atom_site_disorder_assembly\n_atom_site_disorder_group\n',
    ).replace(/^((?:[A-Z][a-z]?\d+[A-Z]?) (?:[A-Z][a-z]?) .*)$/gmu, (line: string) => {
      if (!line.startsWith('Cl1 ') && !line.startsWith('F1 ')) return `${line} 1 . .`;
      // The minor group has sulfur and chlorine for chlorine and fluorine, so that the ranks of the two places are exchanged.
      const [label, element, ...xyz] = line.split(' ');
      const other = label === 'Cl1' ? 'S1B S' : 'Cl1B Cl';
      return `${label} ${element} ${xyz.join(' ')} 0.7 A 1\n${other} ${xyz.join(' ')} 0.3 A 2`;
    });
    const [entry] = await readAll(cifFormat, disordered);
    const molecule = entry!.molecule!;
    expect(hillFormula(molecule, all(molecule))).toBe('C3H6ClFO');
    expect(entry?.warnings.join()).toMatch(
      /assembly A, group 1 is taken, occupancy 0.70; alternatives: group 2 \(0.30\)/u,
    );
    expect(entry?.alternatives).toHaveLength(1);
    const other = entry!.alternatives![0]!.molecule;
    expect(letters(molecule)[0]).not.toBe(letters(other)[0]);
    expect(letters(molecule)[1]).toBe(letters(other)[1]);
    expect(molecule.occupancies?.[molecule.labels!.indexOf('F1')]).toBeCloseTo(0.7);
  });

  it('completes a molecule on a twofold axis and on an inversion centre', async () => {
    const axis = (operator: string): string => `data_x
_cell_length_a 8
_cell_length_b 7
_cell_length_c 9
loop_
_space_group_symop_operation_xyz
'x, y, z'
'${operator}'
loop_
_atom_site_label
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
C1 0.0900 ${operator.includes('-y') ? '0.02' : '0.50'} 0.0250
Cl1 0.1700 ${operator.includes('-y') ? '-0.20' : '0.28'} -0.0700
F1 0.1400 ${operator.includes('-y') ? '0.07' : '0.55'} 0.1650
H1 0.1200 ${operator.includes('-y') ? '0.12' : '0.60'} -0.0400
`;
    const [twofold] = await readAll(cifFormat, axis('-x, y, -z'));
    expect(twofold?.molecule?.atomCount).toBe(8);
    expect(
      letters(twofold!.molecule!)
        .map(text => text.slice(-1))
        .join(''),
    ).toMatch(/^(?:RR|SS)$/u);
    const [centre] = await readAll(cifFormat, axis('-x, -y, -z'));
    expect(
      letters(centre!.molecule!)
        .map(text => text.slice(-1))
        .sort()
        .join(''),
    ).toBe('RS');
    expect(centre?.crystal).toMatchObject({ sohncke: false, centrosymmetric: true });
    expect(centre?.warnings.join()).toMatch(/completed across symmetry: 4 atoms added/u);
  });

  it('leaves a chain without end as it is listed', async () => {
    const chain = `data_x
_cell_length_a 2.5
_cell_length_b 9
_cell_length_c 9
loop_
_space_group_symop_operation_xyz
'x, y, z'
loop_
_atom_site_label
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
C1 0 0 0
C2 0.5 0.1 0
`;
    const [entry] = await readAll(cifFormat, chain);
    expect(entry?.molecule?.atomCount).toBe(2);
    expect(entry?.warnings.join()).toMatch(/without end/u);
  });

  it('says that listed bond lengths disagree with the coordinates', async () => {
    const text = `${SMALL}loop_\n_geom_bond_atom_site_label_1\n_geom_bond_atom_site_label_2\n_geom_bond_distance\nC1 C2 1.530(4)\nC2 O1 1.21(1)\n`;
    const [entry] = await readAll(cifFormat, text);
    expect(entry?.warnings.join()).toMatch(/1 listed bond length differs.*C2–O1/u);
  });
});

/** Alanine of right hand with an alternative CB of the wrong one. */
const ATOMS: readonly (readonly [string, string, number, number, number])[] = [
  ['N', ' ', -0.966, 0.493, 1.5],
  ['CA', ' ', 0.257, 0.418, 0.692],
  ['C', ' ', -0.094, 0.017, -0.716],
  ['O', ' ', -1.056, -0.682, -0.923],
  ['CB', 'A', 1.204, -0.62, 1.296],
  ['CB', 'B', 0.746, 1.75, 0.682],
];

function pdbAtoms(chain: string, residue = 'ALA', record = 'ATOM  '): string {
  return ATOMS.map(([name, location, x, y, z], i) => {
    const occupancy = location === 'A' ? 0.4 : location === 'B' ? 0.6 : 1;
    const xyz = [x, y, z].map(value => value.toFixed(3).padStart(8)).join('');
    return `${record}${String(i + 1).padStart(5)}  ${name.padEnd(3)}${location}${residue} ${chain}   7    ${xyz}${occupancy.toFixed(2).padStart(6)} 10.00          ${name.charAt(0).padStart(2)}`;
  }).join('\n');
}

describe('PDB', () => {
  it('is read model by model, the alternative of higher occupancy taken', async () => {
    const text = `HEADER    INVENTED                                01-JAN-00   9XYZ\nMODEL        1\n${pdbAtoms('A')}\nENDMDL\nMODEL        2\n${pdbAtoms('A')}\nENDMDL\nEND\n`;
    const entries = await readAll(pdbFormat, text);
    expect(entries.map(({ entry, name }) => [entry, name])).toEqual([
      [1, '9XYZ, model 1'],
      [2, '9XYZ, model 2'],
    ]);
    const { molecule, alternatives, warnings } = entries[0]!;
    expect(molecule?.atomCount).toBe(5);
    expect(molecule?.residues?.[1]).toEqual({
      chain: 'A',
      residue: 'ALA',
      number: '7',
      atomName: 'CA',
      hetero: false,
    });
    expect(warnings.join()).toMatch(/A\/ALA\/7: B 0.60, not A 0.40/u);
    expect(letters(molecule!)).toEqual(['CA R']);
    expect(letters(alternatives![0]!.molecule)).toEqual(['CA S']);
  });

  it('numbers models through files put end to end, and keeps the line of each', async () => {
    const one = `MODEL        1\n${pdbAtoms('A')}\nENDMDL\nMODEL        2\n${pdbAtoms('A')}\nENDMDL\nEND\n`;
    const entries = await readAll(pdbFormat, one + one, 50);
    expect(entries.map(({ entry }) => entry)).toEqual([1, 2, 3, 4]);
    expect(entries[2]?.line).toBe(1 + one.split('\n').length - 1);
  });

  it('believes no CONECT between atoms far apart', async () => {
    const [entry] = await readAll(pdbFormat, `${pdbAtoms('A')}\nCONECT    1    4\nCONECT    4    1\nEND\n`);
    const molecule = entry!.molecule!;
    expect(degree(molecule, 3)).toBe(1);
  });

  it('finds the bonds of a ligand without a template, with hydrogens implied', async () => {
    const [entry] = await readAll(
      pdbFormat,
      `${pdbAtoms('A', 'LIG', 'HETATM').replace(/^.*CB B.*$\n?/mu, '')}\nEND\n`,
    );
    const molecule = entry!.molecule!;
    expect(molecule.residues?.[0]?.hetero).toBe(true);
    expect(hillFormula(molecule, all(molecule))).toBe('C3H7NO');
    expect(letters(molecule)).toEqual(['CA S']);
    expect(molecule.doubtfulBonding === null || molecule.doubtfulBonding.length === 5).toBe(true);
  });

  it.each([
    ['ATOM      1  N   ALA A   1      11.1x4  -6.134   0.000', 'bad-coordinates'],
    ['ATOM      1  99  XXX A   1      11.104  -6.134   0.000', 'unknown-element'],
    ['REMARK nothing here', 'no-structure'],
  ])('refuses %j', async (text, code) => {
    const [entry] = await readAll(pdbFormat, `REMARK first\n${text}\nEND\n`);
    expect(entry?.error?.code).toBe(code);
    if (code !== 'no-structure') expect(entry?.error?.line).toBe(2);
  });

  it('tells the element from the name where columns 77 and 78 are blank', async () => {
    const atom = (name: string, residue: string): string =>
      `HETATM    1 ${name} ${residue} A   1      11.104  -6.134   0.000  1.00  0.00`;
    const element = async (name: string, residue: string): Promise<number | undefined> =>
      (await readAll(pdbFormat, `${atom(name, residue)}\n`))[0]?.molecule?.elements[0];
    expect(await element(' CA ', 'ALA')).toBe(6);
    expect(await element('CA  ', ' CA')).toBe(20);
    expect(await element('CL1 ', 'LIG')).toBe(17);
    expect(await element('HG11', 'VAL')).toBe(1);
    expect(await element(' C1*', 'LIG')).toBe(6);
  });
});

describe('mmCIF', () => {
  const rows = ATOMS.map(
    ([name, location, x, y, z], i) =>
      `ATOM ${i + 1} ${name.charAt(0)} ${name} ${location === ' ' ? '.' : location} ALA X 3 ? ${x} ${y} ${z} ${location === 'A' ? 0.4 : location === 'B' ? 0.6 : 1} 7 B 1`,
  );
  const text = `data_9XYZ
_entry.id 9XYZ
_cell.length_a 30
_cell.length_b 40
_cell.length_c 50
_symmetry.space_group_name_H-M 'P 21 21 21'
loop_
_atom_site.group_PDB
_atom_site.id
_atom_site.type_symbol
_atom_site.label_atom_id
_atom_site.label_alt_id
_atom_site.label_comp_id
_atom_site.label_asym_id
_atom_site.label_seq_id
_atom_site.pdbx_PDB_ins_code
_atom_site.Cartn_x
_atom_site.Cartn_y
_atom_site.Cartn_z
_atom_site.occupancy
_atom_site.auth_seq_id
_atom_site.auth_asym_id
_atom_site.pdbx_PDB_model_num
${rows.join('\n')}
`;

  it('reads the same model as PDB, with the author’s chain and number', async () => {
    const [entry] = await readAll(cifFormat, text);
    const [pdb] = await readAll(pdbFormat, `${pdbAtoms('B')}\n`);
    expect([...(entry?.molecule?.coordinates ?? [])]).toEqual([...(pdb?.molecule?.coordinates ?? [])]);
    expect(entry?.molecule?.residues?.[1]).toEqual({
      chain: 'B',
      residue: 'ALA',
      number: '7',
      atomName: 'CA',
      hetero: false,
    });
    expect(entry?.molecule?.bondCount).toBe(pdb?.molecule?.bondCount);
    expect(entry?.crystal).toMatchObject({ spaceGroup: 'P 21 21 21', sohncke: true, macromolecule: false });
  });

  it('is refused where a value is missing in the atom list', async () => {
    const [entry] = await readAll(cifFormat, text.replace(' 7 B 1\n', ' 7 B\n'));
    expect(entry?.error?.code).toBe('bad-loop');
  });
});

describe('components', () => {
  const text = `data_INV
_chem_comp.id INV
_chem_comp.name 'invented'
loop_
_chem_comp_atom.comp_id
_chem_comp_atom.atom_id
_chem_comp_atom.type_symbol
_chem_comp_atom.charge
_chem_comp_atom.pdbx_stereo_config
_chem_comp_atom.model_Cartn_x
_chem_comp_atom.model_Cartn_y
_chem_comp_atom.model_Cartn_z
_chem_comp_atom.pdbx_model_Cartn_x_ideal
_chem_comp_atom.pdbx_model_Cartn_y_ideal
_chem_comp_atom.pdbx_model_Cartn_z_ideal
INV C1 C 0 S 0 0 0 0 0 0
INV F1 F 0 N 1.3 0 0 -1.3 0 0
INV CL1 CL 0 N -0.6 1.6 0 0.6 1.6 0
INV BR1 BR 0 N -0.6 -0.8 1.5 0.6 -0.8 1.5
INV H1 H 0 N -0.3 -0.5 -0.9 0.3 -0.5 -0.9
loop_
_chem_comp_bond.comp_id
_chem_comp_bond.atom_id_1
_chem_comp_bond.atom_id_2
_chem_comp_bond.value_order
INV C1 F1 SING
INV C1 CL1 SING
INV C1 BR1 SING
INV C1 H1 SING
`;

  it('have ideal coordinates first and the model’s as alternative', async () => {
    const [entry] = await readAll(cifFormat, text);
    expect(entry?.name).toBe('INV');
    expect(entry?.molecule?.coordinates?.[3]).toBe(-1.3);
    expect(entry?.alternatives?.[0]?.name).toBe('model coordinates');
    expect(letters(entry!.molecule!)[0]).not.toBe(letters(entry!.alternatives![0]!.molecule)[0]);
    expect(entry?.data).toContainEqual({ name: 'configuration flags', value: 'C1 S' });
  });

  it('are refused where a bond names an atom that is not there', async () => {
    const [entry] = await readAll(cifFormat, text.replace('INV C1 H1 SING', 'INV C1 H9 SING'));
    expect(entry?.error).toMatchObject({ code: 'bond-atom-missing' });
  });
});

describe('XYZ', () => {
  const frame = '5\ninvented\nC 0 0 0\nF 1.35 0 0\n17 -0.6 1.65 0\nBr -0.6 -0.85 1.6\nD -0.35 -0.5 -0.9\n';
  it('is read frame by frame', async () => {
    for (const chunk of [5, 1000]) {
      const entries = await readAll(xyzFormat, `${frame}\n${frame}`, chunk);
      expect(entries).toHaveLength(2);
      expect(entries[1]?.line).toBe(9);
      expect(entries[0]?.molecule?.bondCount).toBe(4);
      expect(entries[0]?.molecule?.isotopes[4]).toBe(2);
      expect(examine(entries[0]!.molecule!).units[0]?.descriptor).toMatch(/^[RS]$/u);
    }
  });

  it.each([
    ['x\n\nC 0 0 0\n', 'bad-counts', 1],
    ['2\n\nC 0 0 0\n', 'truncated-entry', 3],
    ['1\n\nQq 0 0 0\n', 'unknown-element', 3],
    ['1\n\nC 0 zero 0\n', 'bad-coordinates', 3],
  ])('refuses %j', async (text, code, line) => {
    const [entry] = await readAll(xyzFormat, text);
    expect(entry?.error).toMatchObject({ code, line });
  });
});

describe('formats', () => {
  it('are told by content', () => {
    const bytes = (text: string): Uint8Array => new TextEncoder().encode(text);
    expect(detectFormat(bytes(SMALL), 'x')?.name).toBe('CIF');
    expect(detectFormat(bytes(`${pdbAtoms('A')}\nEND\n`), 'x')?.name).toBe('PDB');
    expect(detectFormat(bytes('1\n\nC 0 0 0\n'), 'x')?.name).toBe('XYZ');
    expect(detectFormat(bytes('HEADER    SOMETHING\n'), 'model.pdb')?.name).toBe('PDB');
  });
});
