/** Plain models with their coordinates inverted in the origin: PDB, SDF and Molfile, XYZ. Figures are changed in place, all else stays byte for byte. */
import { mirroredFigure } from '../crystal/decimal.ts';
import { enantiomorphOf, settingNamed } from '../crystal/space-groups.ts';
import { EntryProblem } from './errors.ts';

export interface MirroredFile {
  readonly text: string;
  readonly notes: readonly string[];
}

/** Lines with their endings. */
function linesOf(text: string): string[] {
  return text.match(/[^\r\n]*(?:\r\n|\n|\r|$)/gu)?.filter(line => line !== '') ?? [];
}

function inverted(field: string, width: number, line: number): string {
  const figure = field.trim();
  const mirrored = mirroredFigure(figure, 0);
  if (mirrored === null) {
    throw new EntryProblem('bad-coordinates', `${figure === '' ? 'nothing' : figure} is no coordinate`, line);
  }
  if (mirrored.length > width) {
    throw new EntryProblem('bad-coordinates', `${mirrored} does not fit into ${width} columns`, line);
  }
  return mirrored.padStart(width);
}

/** A PDB file inverted in the origin; anisotropic displacements are the same for the image. @throws EntryProblem, its line 0-based, for a coordinate that cannot be read or does not fit. */
export function mirrorPdb(text: string): MirroredFile {
  const notes = [
    'coordinates inverted in the origin; L residues are now D, and all that the file says of them (names, secondary structure, remarks) holds for the old model',
  ];
  let atoms = 0;
  const lines = linesOf(text).map((line, n) => {
    if (/^(?:ATOM {2}|HETATM)/u.test(line)) {
      atoms++;
      const xyz = [30, 38, 46].map(at => inverted(line.slice(at, at + 8), 8, n)).join('');
      return line.slice(0, 30) + xyz + line.slice(54);
    }
    if (line.startsWith('CRYST1')) {
      const symbol = line.slice(55, 66).trim();
      const number = settingNamed(symbol)?.number;
      if (number === undefined || enantiomorphOf(number) === number) return line;
      const swap: Readonly<Record<string, string>> = {
        41: '43',
        43: '41',
        31: '32',
        32: '31',
        61: '65',
        65: '61',
        62: '64',
        64: '62',
      };
      const other = symbol.replace(/4[13]|3[12]|6[1245]/u, found => swap[found]!);
      notes.push(
        `the space group changes to its enantiomorph, ${symbol} to ${other}; operators in the remarks hold for the old one`,
      );
      return `${line.slice(0, 55)}${other.padEnd(11)}${line.slice(66)}`;
    }
    return line;
  });
  if (atoms === 0) throw new EntryProblem('no-structure', 'no ATOM or HETATM records', null);
  return { text: lines.join(''), notes };
}

/** An SDF or a Molfile with every entry inverted: models in space by their coordinates, drawings by their wedges. @throws EntryProblem, its line 0-based. */
export function mirrorSdf(text: string): MirroredFile {
  const lines = linesOf(text);
  const notes: string[] = [];
  let start = 0;
  let entries = 0;
  for (let end = 0; end < lines.length; end++) {
    const last = end + 1 === lines.length;
    if (!lines[end]!.startsWith('$$$$') && !last) continue;
    if (lines.slice(start, end + 1).some(line => line.trim() !== '')) {
      mirrorMolfile(lines, start, end + 1);
      entries++;
    }
    start = end + 1;
  }
  if (entries === 0) throw new EntryProblem('no-structure', 'no entries', null);
  notes.push(
    `${entries} ${entries === 1 ? 'entry' : 'entries'} inverted; data items (names, InChI, descriptors) hold for the old structures`,
  );
  return { text: lines.join(''), notes };
}

function body(line: string): { content: string; ending: string } {
  const content = line.replace(/[\r\n]+$/u, '');
  return { content, ending: line.slice(content.length) };
}

function mirrorMolfile(lines: string[], start: number, end: number): void {
  const counts = lines[start + 3] ?? '';
  if (/V3000/u.test(counts)) {
    mirrorV3000(lines, start + 4, end);
    return;
  }
  const atoms = Number(counts.slice(0, 3));
  const bonds = Number(counts.slice(3, 6));
  if (!Number.isInteger(atoms) || !Number.isInteger(bonds) || counts.slice(0, 3).trim() === '') {
    throw new EntryProblem('bad-counts', 'the fourth line of the entry holds no counts', start + 3);
  }
  if (start + 4 + atoms + bonds > end) {
    throw new EntryProblem('truncated-entry', 'the entry ends before what its counts promise', end - 1);
  }
  const flat = Array.from({ length: atoms }, (_, i) => Number(lines[start + 4 + i]!.slice(20, 30))).every(
    z => z === 0,
  );
  for (let i = start + 4; i < start + 4 + atoms; i++) {
    const { content, ending } = body(lines[i]!);
    let changed = content;
    if (!flat) {
      changed =
        [0, 10, 20].map(at => inverted(content.slice(at, at + 10), 10, i)).join('') + content.slice(30);
    }
    const parity = changed.slice(39, 42).trim();
    if (parity === '1' || parity === '2') {
      changed = `${changed.slice(0, 39)}${parity === '1' ? '  2' : '  1'}${changed.slice(42)}`;
    }
    lines[i] = changed + ending;
  }
  for (let i = start + 4 + atoms; i < start + 4 + atoms + bonds; i++) {
    const { content, ending } = body(lines[i]!);
    const mark = content.slice(9, 12).trim();
    if (mark !== '1' && mark !== '6') continue;
    lines[i] = `${content.slice(0, 9)}${mark === '1' ? '  6' : '  1'}${content.slice(12)}${ending}`;
  }
}

function mirrorV3000(lines: string[], from: number, to: number): void {
  let part: 'atoms' | 'bonds' | null = null;
  const atomLines: number[] = [];
  const bondLines: number[] = [];
  for (let i = from; i < to; i++) {
    const text = lines[i]!;
    if (/^M {2}V30 BEGIN ATOM/u.test(text)) part = 'atoms';
    else if (/^M {2}V30 BEGIN BOND/u.test(text)) part = 'bonds';
    else if (/^M {2}V30 END (?:ATOM|BOND)/u.test(text)) part = null;
    else if (part === 'atoms') atomLines.push(i);
    else if (part === 'bonds') bondLines.push(i);
  }
  const atomPattern = /^(M {2}V30\s+\d+\s+\S+\s+)(\S+)(\s+)(\S+)(\s+)(\S+)(.*)$/su;
  const flat = atomLines.every(i => Number(atomPattern.exec(lines[i]!)?.[6] ?? 0) === 0);
  for (const i of atomLines) {
    const match = atomPattern.exec(lines[i]!);
    if (!match) continue;
    const figures = [2, 4, 6].map(k => (flat ? match[k]! : inverted(match[k]!, 64, i).trim()));
    const rest = match[7]!.replace(/\bCFG=([12])\b/u, (_, value: string) => `CFG=${value === '1' ? 2 : 1}`);
    lines[i] = `${match[1]!}${figures[0]!}${match[3]!}${figures[1]!}${match[5]!}${figures[2]!}${rest}`;
  }
  for (const i of bondLines) {
    lines[i] = lines[i]!.replace(/\bCFG=([13])\b/u, (_, value: string) => `CFG=${value === '1' ? 3 : 1}`);
  }
}

/** An XYZ file with every frame inverted in the origin. @throws EntryProblem, its line 0-based. */
export function mirrorXyz(text: string): MirroredFile {
  const lines = linesOf(text);
  let at = 0;
  let frames = 0;
  while (at < lines.length) {
    if (lines[at]!.trim() === '') {
      at++;
      continue;
    }
    const count = Number(lines[at]!.trim());
    if (!Number.isInteger(count) || count < 1) {
      throw new EntryProblem('bad-counts', `${lines[at]!.trim()} is no number of atoms`, at);
    }
    if (at + 2 + count > lines.length) {
      throw new EntryProblem(
        'truncated-entry',
        `${count} atoms are announced, fewer follow`,
        lines.length - 1,
      );
    }
    for (let i = at + 2; i < at + 2 + count; i++) {
      const match = /^(\s*\S+\s+)(\S+)(\s+)(\S+)(\s+)(\S+)(.*)$/su.exec(lines[i]!);
      if (!match) throw new EntryProblem('bad-coordinates', 'an element and three coordinates are wanted', i);
      const [x, y, z] = [2, 4, 6].map(k => inverted(match[k]!, 64, i).trim()) as [string, string, string];
      lines[i] = `${match[1]!}${x}${match[3]!}${y}${match[5]!}${z}${match[7]!}`;
    }
    at += 2 + count;
    frames++;
  }
  if (frames === 0) throw new EntryProblem('no-structure', 'no frames', null);
  return {
    text: lines.join(''),
    notes: [`${frames} ${frames === 1 ? 'frame' : 'frames'} inverted in the origin`],
  };
}
