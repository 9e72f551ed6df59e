/** The sight of a unit as a vector figure: atoms and bonds in depth order, the dial with its numerals and sweep, a caption. */
import { elementSymbol } from '../chemistry/elements.ts';
import { atomLabel, type Molecule } from '../chemistry/molecule.ts';
import type { LabelledUnit, Verdict } from '../docket.ts';
import { elementColour, FAINT, INK, PAPER, senseColour } from './palette.ts';
import { type DialPlace, dialPlaces, ligandText, project, sightFrame } from './sight-frame.ts';

export interface SightFigureOptions {
  /** Edge of the square view in px; the caption stands below it. */
  readonly size?: number;
  readonly intended?: string | null;
  readonly verdict?: Verdict | null;
  /** Where the model comes from: "file, entry 3". */
  readonly source?: string;
  /** False leaves the paper transparent. */
  readonly paper?: boolean;
}

const MINUS = '\u2212';
/** Radius of the dial, Å. */
const DIAL_RADIUS = 2.25;
/** Atoms further from the unit than this are left out of the figure, Å. */
const VIEW_RADIUS = 5;

/** A number with a true minus sign. */
export function figureNumber(value: number, digits: number): string {
  return value.toFixed(digits).replace('-', MINUS);
}

/** The sentence under a sight: what one looks at, what it amounts to, what was intended. */
export function sightCaption(
  molecule: Molecule,
  labelled: LabelledUnit,
  intended: string | null = null,
  verdict: Verdict | null = null,
): string {
  const { unit, descriptor } = labelled;
  const label = (atom: number): string => atomLabel(molecule, atom, elementSymbol);
  const name = unit.atoms.map(label).join('–');
  const parts: string[] = [];
  const letter = descriptor === null ? 'no letter' : descriptor;
  if (unit.kind === 'centre') {
    const last = labelled.ranking[labelled.ranking.length - 1];
    if (unit.state !== 'clear') {
      parts.push(`${name}: the coordinates do not decide (${unit.state}).`);
    } else if (last === undefined) {
      parts.push(`${name}: ${letter}.`);
    } else {
      const way = (labelled.signedVolume ?? 0) < 0 ? 'clockwise' : 'anticlockwise';
      parts.push(
        `${name}, seen with ${ligandText(last.ligand, label)} behind: 1 to 2 to 3 runs ${way}, ${letter}.`,
      );
    }
    if (labelled.signedVolume !== null) {
      const sigma = unit.sigma === null ? '' : ` ± ${figureNumber(unit.sigma, 2)}`;
      parts.push(`Signed volume ${figureNumber(labelled.signedVolume, 2)}${sigma} Å³.`);
    }
  } else {
    const what = unit.state === 'clear' ? letter : `the coordinates do not decide (${unit.state})`;
    parts.push(`${name}, ${unit.kind}: ${what}.`);
    if (labelled.torsion !== null) parts.push(`Torsion ${figureNumber(labelled.torsion, 1)}°.`);
  }
  if (unit.firmness !== null) parts.push(`Firmness ${figureNumber(unit.firmness, 2)}.`);
  if (intended !== null && verdict !== null) parts.push(`Intended ${intended}: ${verdict}.`);
  if (unit.labile !== null) parts.push(`Labile: ${unit.labile}.`);
  return parts.join(' ');
}

const escapeXml = (text: string): string =>
  text.replace(/[&<>"]/gu, c => (c === '&' ? '&amp;' : c === '<' ? '&lt;' : c === '>' ? '&gt;' : '&quot;'));

const px = (value: number): string => String(Number(value.toFixed(2)));

interface Drawn {
  readonly depth: number;
  readonly svg: string;
}

/** Draws the sight of a unit; null when the model has no coordinates in space. */
export function sightFigure(
  molecule: Molecule,
  labelled: LabelledUnit,
  options: SightFigureOptions = {},
): string | null {
  const frame = sightFrame(molecule, labelled);
  const r = molecule.coordinates;
  if (frame === null || r === null) return null;
  const size = options.size ?? 480;
  const scale = size / 8.4;
  const middle = size / 2;
  const own = new Set<number>(labelled.unit.atoms);
  const ligands = new Set<number>();
  for (const end of labelled.unit.ends)
    for (const ligand of end.ligands) if (ligand >= 0) ligands.add(ligand);
  const places = dialPlaces(molecule, labelled, frame);
  const points: (readonly [number, number, number] | null)[] = [];
  for (let i = 0; i < molecule.atomCount; i++) {
    const p = project(frame, [r[3 * i]!, r[3 * i + 1]!, r[3 * i + 2]!]);
    points.push(Number.isFinite(p[0] + p[1] + p[2]) && Math.hypot(...p) <= VIEW_RADIUS ? p : null);
  }
  const X = (x: number): string => px(middle + scale * x);
  const Y = (y: number): string => px(middle - scale * y);
  const near = (atom: number): boolean => own.has(atom) || ligands.has(atom);
  const shown: Drawn[] = [];
  const stroke = (strong: boolean): string => (strong ? INK : FAINT);
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    const p = points[i];
    const q = points[j];
    if (!p || !q) continue;
    const strong = near(i) && near(j);
    const faint = !strong;
    if (faint && (molecule.elements[i] === 1 || molecule.elements[j] === 1)) continue;
    shown.push({
      depth: (p[2] + q[2]) / 2 - 0.2,
      svg: `<line x1="${X(p[0])}" y1="${Y(p[1])}" x2="${X(q[0])}" y2="${Y(q[1])}" stroke="${stroke(strong)}" stroke-width="${px((strong ? 0.14 : 0.07) * scale)}" stroke-linecap="round"${faint ? ' opacity="0.55"' : ''}/>`,
    });
  }
  for (let i = 0; i < molecule.atomCount; i++) {
    const p = points[i];
    if (!p) continue;
    const strong = near(i);
    const z = molecule.elements[i]!;
    if (!strong && z === 1) continue;
    const radius = (z === 1 ? 0.2 : own.has(i) ? 0.36 : strong ? 0.34 : 0.2) * scale;
    const title = `<title>${escapeXml(atomLabel(molecule, i, elementSymbol))}</title>`;
    shown.push({
      depth: p[2],
      svg: `<circle cx="${X(p[0])}" cy="${Y(p[1])}" r="${px(radius)}" fill="${elementColour(z)}" stroke="${stroke(strong)}" stroke-width="${px(strong ? 1.2 : 0.6)}"${strong ? '' : ' opacity="0.55"'}>${title}</circle>`,
    });
  }
  for (const place of places) {
    if (place.ligand >= 0) continue;
    const dash = place.ligand === -1 ? '' : ' stroke-dasharray="2 4"';
    shown.push({
      depth: place.z - 0.1,
      svg: `<line x1="${px(middle)}" y1="${px(middle)}" x2="${X(place.x)}" y2="${Y(place.y)}" stroke="${INK}" stroke-width="${px(0.06 * scale)}"${dash}/>`,
    });
  }
  shown.sort((a, b) => a.depth - b.depth);
  const caption = sightCaption(molecule, labelled, options.intended ?? null, options.verdict ?? null);
  const lines = wrap(caption, Math.floor(size / 7));
  if (options.source !== undefined) lines.push(options.source);
  const height = size + 18 * lines.length + 14;
  const text = lines
    .map(
      (line, i) =>
        `<text x="12" y="${size + 18 * (i + 1)}" font-size="13" fill="${INK}">${escapeXml(line)}</text>`,
    )
    .join('');
  const paper = options.paper === false ? '' : `<rect width="${size}" height="${height}" fill="${PAPER}"/>`;
  return `<svg xmlns="http://www.w3.org/2000/svg" width="${size}" height="${height}" viewBox="0 0 ${size} ${height}" font-family="Source Sans 3, Noto Sans, DejaVu Sans, sans-serif" role="img" aria-label="${escapeXml(caption)}">${paper}${shown.map(d => d.svg).join('')}${dial(labelled, places, middle, scale)}${text}</svg>\n`;
}

/** The ring with the numerals where the ligands project, and for a decided unit the sweep from 1 to the last. */
function dial(labelled: LabelledUnit, places: readonly DialPlace[], middle: number, scale: number): string {
  const { unit, descriptor } = labelled;
  const radius = DIAL_RADIUS * scale;
  const firmness = unit.firmness ?? 1;
  const colour = senseColour(descriptor);
  const decided = unit.state === 'clear';
  const weight = px(Math.max(0.6, 3.2 * firmness));
  const dash = unit.state === 'unspecified' ? ' stroke-dasharray="1 6" stroke-linecap="round"' : '';
  const ring = `<circle cx="${px(middle)}" cy="${px(middle)}" r="${px(radius)}" fill="none" stroke="${decided ? colour : INK}" stroke-width="${weight}"${dash} opacity="0.85"/>`;
  const doubled =
    descriptor !== null && /^[rsmpez]$/u.test(descriptor)
      ? `<circle cx="${px(middle)}" cy="${px(middle)}" r="${px(radius - 5)}" fill="none" stroke="${colour}" stroke-width="1" opacity="0.85"/>`
      : '';
  const numerals: string[] = [];
  const angles: number[] = [];
  const behind = unit.kind === 'centre' ? 4 : 99;
  for (const place of places) {
    if (place.rank >= behind) continue;
    const angle = Math.atan2(place.y, place.x);
    angles.push(angle);
    const distance = radius + 16;
    const name = place.end === 2 ? `${place.rank}′` : String(place.rank);
    numerals.push(
      `<text x="${px(middle + distance * Math.cos(angle))}" y="${px(middle - distance * Math.sin(angle))}" font-size="20" font-weight="600" text-anchor="middle" dominant-baseline="central" fill="${decided ? colour : INK}">${name}</text>`,
    );
  }
  const sweep =
    decided && unit.kind === 'centre' && angles.length === 3 ? sweepArc(angles, middle, radius, colour) : '';
  return ring + doubled + sweep + numerals.join('');
}

/** The arc inside the ring from 1 over 2 to 3, with its arrowhead. */
function sweepArc(angles: readonly number[], middle: number, radius: number, colour: string): string {
  const turn = (from: number, to: number): number => {
    const d = (to - from) % (2 * Math.PI);
    return d < 0 ? d + 2 * Math.PI : d;
  };
  const [a, b, c] = angles as readonly [number, number, number];
  const counter = turn(a, b) < turn(a, c);
  const whole = counter ? turn(a, c) : -turn(c, a);
  const r = radius - 14;
  const point = (angle: number): string =>
    `${px(middle + r * Math.cos(angle))} ${px(middle - r * Math.sin(angle))}`;
  const start = a + 0.14 * Math.sign(whole);
  const end = a + whole - 0.14 * Math.sign(whole);
  const large = Math.abs(end - start) > Math.PI ? 1 : 0;
  const sweepFlag = whole < 0 ? 1 : 0;
  const tipX = middle + r * Math.cos(end);
  const tipY = middle - r * Math.sin(end);
  // Direction of travel at the tip, in the y-down coordinates of the drawing.
  const tx = -Math.sin(end) * Math.sign(whole);
  const ty = -Math.cos(end) * Math.sign(whole);
  const head = 9;
  const left = `${px(tipX - head * tx + 0.5 * head * ty)} ${px(tipY - head * ty - 0.5 * head * tx)}`;
  const right = `${px(tipX - head * tx - 0.5 * head * ty)} ${px(tipY - head * ty + 0.5 * head * tx)}`;
  return `<path d="M ${point(start)} A ${px(r)} ${px(r)} 0 ${large} ${sweepFlag} ${point(end)}" fill="none" stroke="${colour}" stroke-width="1.6"/><path d="M ${px(tipX)} ${px(tipY)} L ${left} L ${right} Z" fill="${colour}"/>`;
}

function wrap(text: string, width: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + 1 + word.length > width) {
      lines.push(line);
      line = word;
    } else {
      line = line === '' ? word : `${line} ${word}`;
    }
  }
  if (line !== '') lines.push(line);
  return lines;
}
