/** PDB files (wwPDB Format Description 3.30): one entry for each MODEL. CONECT records are set against the distances, not trusted. */
import { type AtomRecord, buildModel, type StatedBond } from '../biopolymer/model.ts';
import { templateOf } from '../biopolymer/templates.ts';
import { elementNumber } from '../chemistry/elements.ts';
import type { CrystalDescription } from '../crystal/description.ts';
import { operatorsFromHall } from '../crystal/hall.ts';
import { IDENTITY, isCentrosymmetric, isSohncke } from '../crystal/operator.ts';
import { settingNamed } from '../crystal/space-groups.ts';
import { EntryProblem } from './errors.ts';
import type { Entry, Format, Limits, RawEntry } from './format.ts';
import { LineTable } from './line-table.ts';
import { decodeText, LimitError, splitLines } from './lines.ts';

const RECORDS =
  /^(?:HEADER|OBSLTE|TITLE |SPLIT |CAVEAT|COMPND|SOURCE|KEYWDS|EXPDTA|NUMMDL|MDLTYP|AUTHOR|REVDAT|SPRSDE|JRNL  |REMARK|DBREF|SEQADV|SEQRES|MODRES|HET   |HETNAM|HETSYN|FORMUL|HELIX |SHEET |SSBOND|LINK  |CISPEP|SITE  |CRYST1|ORIGX|SCALE|MTRIX|MODEL |ATOM  |HETATM|ANISOU|TER|ENDMDL|CONECT|MASTER|END|USER  |TITLE\b|CRYST1)/u;

export const pdbFormat: Format = {
  name: 'PDB',
  extensions: ['pdb', 'ent', 'pdbqt', 'brk'],

  sniff(head) {
    const lines = decodeText(head).split(/\r\n|\n|\r/u);
    if (lines.length > 1) lines.pop();
    let known = 0;
    let atoms = 0;
    let all = 0;
    for (const line of lines.slice(0, 400)) {
      if (line.trim() === '') continue;
      all++;
      if (RECORDS.test(line)) known++;
      if (/^(?:ATOM  |HETATM)/u.test(line) && /^.{30}[ \d.-]{8}[ \d.-]{8}[ \d.-]{8}/u.test(line)) atoms++;
    }
    if (all === 0) return 0;
    if (atoms > 0 && known >= 0.8 * all) return 1;
    return known >= 0.95 * all && known > 5 ? 0.9 : atoms > 0 ? 0.6 : 0;
  },

  split: splitModels,

  parse: parseEntry,
};

/** Cuts where a record END is followed by more; the models of one part stay together, since they share header and bonds. */
async function* splitModels(chunks: AsyncIterable<Uint8Array>, limits: Limits): AsyncGenerator<RawEntry> {
  let parts: Uint8Array[] = [];
  let size = 0;
  let line = 1;
  let entry = 1;
  let models = 0;
  let ended = false;
  let atoms = false;
  const take = (): RawEntry => {
    const bytes = new Uint8Array(size);
    let at = 0;
    for (const part of parts) {
      bytes.set(part, at);
      at += part.length;
    }
    const raw = { entry, line, bytes };
    entry += Math.max(1, models);
    parts = [];
    size = 0;
    models = 0;
    ended = false;
    atoms = false;
    return raw;
  };
  for await (const each of splitLines(chunks, limits)) {
    const { bytes } = each;
    const blank = bytes.every(byte => byte <= 0x20);
    if (ended && atoms && !blank) {
      yield take();
      line = each.line;
    }
    const head = decodeText(bytes.subarray(0, 6));
    if (head.startsWith('MODEL ')) models++;
    if (/^END\s*$/u.test(head)) ended = true;
    if (head === 'ATOM  ' || head === 'HETATM') atoms = true;
    parts.push(bytes);
    size += bytes.length;
    if (size > limits.entryBytes)
      throw new LimitError(`an entry of more than ${limits.entryBytes} bytes`, line);
  }
  if (parts.some(part => part.some(byte => byte > 0x20))) yield take();
}

interface Header {
  code: string;
  compound: string;
  method: string;
  polymerNames: Set<string>;
  crystal: { line: number; text: string } | null;
}

function parseEntry(raw: RawEntry, limits: Limits): Entry[] {
  const table = new LineTable(raw.bytes);
  const warnings: string[] = [];
  const header: Header = { code: '', compound: '', method: '', polymerNames: new Set(), crystal: null };
  const models: { name: string; line: number; from: number; to: number }[] = [];
  let open: { name: string; line: number; from: number } | null = null;
  let loose = false;
  for (let i = 0; i < table.count; i++) {
    const record = table.field(i, 0, 6);
    switch (record) {
      case 'HEADER':
        header.code = table.field(i, 62, 66);
        break;
      case 'COMPND': {
        const text = table.field(i, 10, 80);
        if (header.compound === '' && !/MOL_ID/u.test(text)) header.compound = text;
        break;
      }
      case 'EXPDTA':
        header.method += table.field(i, 10, 80);
        break;
      case 'SEQRES':
        for (const name of table.field(i, 19, 70).split(/\s+/u))
          if (name !== '') header.polymerNames.add(name);
        break;
      case 'MODRES':
        header.polymerNames.add(table.field(i, 12, 15));
        break;
      case 'CRYST1':
        header.crystal = { line: i, text: table.text(i) };
        break;
      case 'MODEL':
        if (open) models.push({ ...open, to: i });
        open = { name: table.field(i, 6, 20), line: raw.line + i, from: i + 1 };
        break;
      case 'ENDMDL':
        if (open) models.push({ ...open, to: i });
        open = null;
        break;
      case 'ATOM':
      case 'HETATM':
        if (!open) loose = true;
        break;
      default:
    }
  }
  if (open) models.push({ ...open, to: table.count });
  if (models.length === 0 || (loose && models.length === 0)) {
    models.length = 0;
    models.push({ name: '', line: raw.line, from: 0, to: table.count });
  } else if (loose) warnings.push('atoms outside the models are left out');
  const name = header.code === '' ? header.compound : header.code;
  let crystal: CrystalDescription | null = null;
  const connections = readConnections(table);
  return models.map((model, k) => {
    const title = models.length > 1 ? `${name}${name === '' ? '' : ', '}model ${model.name}` : name;
    try {
      const atoms = readAtoms(table, model.from, model.to, header, limits);
      if (k === 0) crystal = readCrystal(header, atoms, warnings);
      if (atoms.length === 0) {
        throw new EntryProblem('no-structure', 'no ATOM or HETATM records', null);
      }
      const built = buildModel({
        name: title,
        atoms,
        stated: statedBonds(atoms, connections),
        components: new Map(),
      });
      return {
        entry: raw.entry + k,
        line: model.line,
        name: title,
        molecule: built.molecule,
        data: [],
        warnings: [...warnings, ...built.warnings],
        error: null,
        crystal,
        alternatives: built.alternatives,
      };
    } catch (error) {
      if (!(error instanceof EntryProblem)) throw error;
      return {
        entry: raw.entry + k,
        line: model.line,
        name: title,
        molecule: null,
        data: [],
        warnings,
        error: {
          code: error.code,
          message: error.message,
          line: error.at === null ? model.line : raw.line + error.at,
        },
      };
    }
  });
}

/** Element from columns 77–78, else from the name: a letter in column 13 is a two-letter symbol unless the name fills four columns (format description, ATOM). */
function elementAt(table: LineTable, line: number): number | null {
  const stated = table.field(line, 76, 78);
  const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1).toLowerCase();
  if (stated !== '' && /^[A-Za-z]{1,2}$/u.test(stated)) {
    const z = elementNumber(capital(stated));
    if (z !== undefined) return z;
  }
  const raw = Array.from({ length: 4 }, (_, k) => String.fromCharCode(table.byte(line, 12 + k))).join('');
  const letters = raw.replace(/[^A-Za-z]/gu, '');
  if (letters === '') return null;
  const residue = table.field(line, 17, 20);
  const firstTwo = capital(raw.slice(0, 2));
  if (/^[A-Za-z]{2}/u.test(raw) && elementNumber(firstTwo) !== undefined) {
    const standard = templateOf(residue) !== null;
    const fourColumns = raw.trim().length === 4;
    if (!standard && !(fourColumns && raw.startsWith('H')) && !(fourColumns && /^[CNO]/u.test(raw))) {
      return elementNumber(firstTwo)!;
    }
  }
  const first = /[A-Za-z]/u.exec(raw)![0].toUpperCase();
  return elementNumber(first) ?? null;
}

function readAtoms(table: LineTable, from: number, to: number, header: Header, limits: Limits): AtomRecord[] {
  const atoms: AtomRecord[] = [];
  const polymer = new Map<string, boolean>();
  for (let i = from; i < to; i++) {
    // A, T, O, M or H, E, T: the first bytes tell most lines apart.
    const c = table.byte(i, 0);
    if (c !== 0x41 && c !== 0x48) continue;
    const record = table.field(i, 0, 6);
    if (record !== 'ATOM' && record !== 'HETATM') continue;
    if (atoms.length >= limits.atoms)
      throw new EntryProblem('too-many-atoms', `more than ${limits.atoms} atoms`, i);
    const x = table.decimal(i, 30, 38);
    const y = table.decimal(i, 38, 46);
    const z = table.decimal(i, 46, 54);
    if (!Number.isFinite(x + y + z)) {
      throw new EntryProblem(
        'bad-coordinates',
        `columns 31 to 54 hold no three numbers: ${table.text(i).slice(30, 54)}`,
        i,
      );
    }
    const element = elementAt(table, i);
    if (element === null) {
      throw new EntryProblem(
        'unknown-element',
        `neither columns 77–78 nor the atom name ${table.field(i, 12, 16)} give an element`,
        i,
      );
    }
    const residue = table.field(i, 17, 20);
    const kind = `${record} ${residue}`;
    let isPolymer = polymer.get(kind);
    if (isPolymer === undefined) {
      const template = templateOf(residue);
      const standard = template?.residueClass === 'amino acid' || template?.residueClass === 'nucleotide';
      isPolymer = header.polymerNames.has(residue) || (record === 'ATOM' && standard);
      polymer.set(kind, isPolymer);
    }
    const occupancy = table.decimal(i, 54, 60);
    const charge = /^(\d)([+-])$/u.exec(table.field(i, 78, 80));
    const insertion = table.field(i, 26, 27);
    atoms.push({
      name: table.field(i, 12, 16),
      element,
      isotope: table.field(i, 76, 78) === 'D' ? 2 : 0,
      charge: charge ? (charge[2] === '-' ? -1 : 1) * Number(charge[1]) : 0,
      residue,
      chain: table.field(i, 21, 22),
      number: `${table.field(i, 22, 26)}${insertion}`,
      location: table.field(i, 16, 17),
      occupancy: Number.isFinite(occupancy) ? occupancy : 1,
      x,
      y,
      z,
      hetero: !isPolymer,
      serial: table.integer(i, 6, 11),
    });
  }
  return atoms;
}

interface Connections {
  readonly serials: readonly (readonly [number, number])[];
  readonly links: readonly { readonly ends: readonly [string, string]; readonly symmetric: boolean }[];
}

/** Place of an atom in words: chain, residue number with insertion code, atom name. */
function place(chain: string, number: string, atom: string): string {
  return `${chain}|${number}|${atom}`;
}

function readConnections(table: LineTable): Connections {
  const serials: [number, number][] = [];
  const links: { ends: [string, string]; symmetric: boolean }[] = [];
  for (let i = 0; i < table.count; i++) {
    const record = table.field(i, 0, 6);
    if (record === 'CONECT') {
      const centre = table.integer(i, 6, 11);
      for (let column = 11; column < 31; column += 5) {
        const other = table.integer(i, column, column + 5);
        if (Number.isFinite(centre) && Number.isFinite(other) && other > 0) serials.push([centre, other]);
      }
    } else if (record === 'LINK') {
      links.push({
        ends: [
          place(
            table.field(i, 21, 22),
            table.field(i, 22, 26) + table.field(i, 26, 27),
            table.field(i, 12, 16),
          ),
          place(
            table.field(i, 51, 52),
            table.field(i, 52, 56) + table.field(i, 56, 57),
            table.field(i, 42, 46),
          ),
        ],
        symmetric: table.field(i, 59, 65) !== table.field(i, 66, 72),
      });
    } else if (record === 'SSBOND') {
      links.push({
        ends: [
          place(table.field(i, 15, 16), table.field(i, 17, 21) + table.field(i, 21, 22), 'SG'),
          place(table.field(i, 29, 30), table.field(i, 31, 35) + table.field(i, 35, 36), 'SG'),
        ],
        symmetric: table.field(i, 59, 65) !== table.field(i, 66, 72),
      });
    }
  }
  return { serials, links };
}

function statedBonds(atoms: readonly AtomRecord[], connections: Connections): StatedBond[] {
  const bySerial = new Map<number, number>();
  const byPlace = new Map<string, number[]>();
  atoms.forEach((atom, i) => {
    bySerial.set(atom.serial, i);
    if (connections.links.length === 0) return;
    const key = place(atom.chain, atom.number, atom.name);
    const list = byPlace.get(key);
    if (list) list.push(i);
    else byPlace.set(key, [i]);
  });
  const bonds: StatedBond[] = [];
  for (const { ends, symmetric } of connections.links) {
    if (symmetric) continue;
    for (const first of byPlace.get(ends[0]) ?? []) {
      for (const second of byPlace.get(ends[1]) ?? []) {
        const [a, b] = [atoms[first]!, atoms[second]!];
        if (a.location !== '' && b.location !== '' && a.location !== b.location) continue;
        bonds.push({ first, second, kind: metallic(a, b) ? 'metal' : 'link' });
      }
    }
  }
  for (const [a, b] of connections.serials) {
    const first = bySerial.get(a);
    const second = bySerial.get(b);
    if (first !== undefined && second !== undefined) bonds.push({ first, second, kind: 'connect' });
  }
  return bonds;
}

function metallic(a: AtomRecord, b: AtomRecord): boolean {
  const heavy = (z: number): boolean =>
    (z > 10 && z < 14) || (z > 18 && z < 34) || (z > 36 && z < 52) || z > 54;
  return heavy(a.element) || heavy(b.element);
}

/** Fewest polymer residues of a macromolecule. */
const LEAST_RESIDUES = 3;

function readCrystal(
  header: Header,
  atoms: readonly AtomRecord[],
  warnings: string[],
): CrystalDescription | null {
  if (!header.crystal || /NMR|MICROSCOPY/u.test(header.method)) return null;
  const { text } = header.crystal;
  const values = [
    [6, 15],
    [15, 24],
    [24, 33],
    [33, 40],
    [40, 47],
    [47, 54],
  ].map(([from, to]) => ({ value: Number(text.slice(from, to).trim()), uncertainty: null }));
  // 1 Å by 1 Å by 1 Å stands for no cell (format description, CRYST1).
  if (values.some(({ value }) => !(value > 0)) || values[0]!.value <= 1.01) return null;
  const spaceGroup = text.slice(55, 66).trim();
  const setting = spaceGroup === '' ? null : settingNamed(spaceGroup.replace(/^H /u, 'R '));
  const operators = setting ? operatorsFromHall(setting.hall) : null;
  if (spaceGroup !== '' && !operators)
    warnings.push(`${spaceGroup} is no space-group symbol that is known here`);
  const residues = new Set<string>();
  for (const atom of atoms) {
    if (!atom.hetero) residues.add(`${atom.chain}|${atom.number}`);
    if (residues.size >= LEAST_RESIDUES) break;
  }
  return {
    cell: { lengths: [values[0]!, values[1]!, values[2]!], angles: [values[3]!, values[4]!, values[5]!] },
    operators: operators ?? [IDENTITY],
    operatorSource: operators ? 'symbol' : 'none',
    spaceGroup: spaceGroup === '' ? null : spaceGroup,
    spaceGroupNumber: setting?.number ?? null,
    sohncke: operators ? isSohncke(operators) : null,
    centrosymmetric: operators ? isCentrosymmetric(operators) : null,
    flack: null,
    hooft: null,
    declared: null,
    wavelength: null,
    radiation: null,
    formula: null,
    formulaUnits: null,
    dispersion: new Map(),
    macromolecule: residues.size >= LEAST_RESIDUES,
    notes: [],
  };
}
