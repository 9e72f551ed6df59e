/**
 * The dial glyph: the sign for the handedness of a unit, 16 to 24 px.
 *
 * A closed ring with three ticks of rising length, the sweep 1 to 2 to 3; its weight is the firmness; doubled for lower
 * case; a bar where the coordinates do not decide, dots where nothing is specified; two strokes for a double bond; the
 * mark in the middle is the verdict. Direction, weight and mark say everything; colour repeats it.
 */
import type { Descriptor, Verdict } from '../docket.ts';
import type { UnitState } from '../perception/unit.ts';
import { ALARM, INK, senseColour } from './palette.ts';

export interface GlyphInput {
  readonly descriptor: Descriptor | null;
  readonly state: UnitState;
  readonly firmness: number | null;
  readonly verdict: Verdict | null;
}

const px = (value: number): string => String(Number(value.toFixed(2)));

/** What the glyph says, for readers that do not see it. */
export function glyphText({ descriptor, state, verdict }: GlyphInput): string {
  const letter = descriptor ?? (state === 'clear' ? 'no letter' : state);
  return verdict === null ? letter : `${letter}, ${verdict}`;
}

/** The glyph as an SVG element of the given edge in px. Colours can be overridden by CSS: its parts use `currentColor` when `plain`. */
export function glyph(input: GlyphInput, size = 20): string {
  const { descriptor, state, firmness, verdict } = input;
  const colour = verdict === 'inverted' ? ALARM : senseColour(descriptor);
  const weight = 0.6 + 1.8 * Math.max(0, Math.min(1, firmness ?? 0.7));
  const parts: string[] = [];
  const stroke = `stroke="${colour}" fill="none" stroke-linecap="round"`;
  const planar = descriptor !== null && /^[EZez]$/u.test(descriptor);
  if (state === 'flat') {
    parts.push(`<path d="M4 12h16" ${stroke.replace(colour, INK)} stroke-width="2.4"/>`);
  } else if (state === 'unspecified') {
    parts.push(
      `<circle cx="12" cy="12" r="7.5" ${stroke.replace(colour, INK)} stroke-width="1.6" stroke-dasharray="0.1 3.83"/>`,
    );
  } else if (planar) {
    parts.push(planarStrokes(descriptor, stroke, weight));
  } else {
    parts.push(ring(descriptor, stroke, weight));
  }
  parts.push(mark(verdict, colour));
  return `<svg class="dial" xmlns="http://www.w3.org/2000/svg" viewBox="0 0 24 24" width="${size}" height="${size}" role="img" aria-label="${glyphText(input)}">${parts.join('')}</svg>`;
}

function planarStrokes(descriptor: Descriptor, stroke: string, weight: number): string {
  const same = descriptor.toUpperCase() === 'Z';
  const lines = same ? ['M7 5v6', 'M17 5v6'] : ['M7 5v6', 'M17 13v6'];
  const doubled = descriptor === descriptor.toLowerCase();
  const all = doubled
    ? [...lines, ...(same ? ['M9.4 5v6', 'M14.6 5v6'] : ['M9.4 5v6', 'M14.6 13v6'])]
    : lines;
  return `<path d="M7 12h10" ${stroke} stroke-width="1"/><path d="${all.join('')}" ${stroke} stroke-width="${px(weight)}"/>`;
}

/** Lengths of the ticks, first to last, px. */
const TICKS = [1.6, 3, 4.6];
const RING = 6.6;

function ring(descriptor: Descriptor | null, stroke: string, weight: number): string {
  const parts = [`<circle cx="12" cy="12" r="${RING}" ${stroke} stroke-width="${px(weight)}"/>`];
  if (descriptor === null) return parts[0]!;
  const upper = descriptor.toUpperCase();
  if (descriptor !== upper)
    parts.push(`<circle cx="12" cy="12" r="${RING - 2.4}" ${stroke} stroke-width="0.9"/>`);
  // Clockwise from the top for R and P, the other way for S and M; an axis has a front and a rear tick.
  const direction = upper === 'R' || upper === 'P' ? 1 : -1;
  const lengths = upper === 'M' || upper === 'P' ? [TICKS[0]!, TICKS[2]!] : TICKS;
  const step = (2 * Math.PI) / 3;
  lengths.forEach((length, k) => {
    const angle = -Math.PI / 2 + direction * k * step;
    const from = RING;
    const to = RING + length;
    parts.push(
      `<path d="M${px(12 + from * Math.cos(angle))} ${px(12 + from * Math.sin(angle))}L${px(12 + to * Math.cos(angle))} ${px(12 + to * Math.sin(angle))}" ${stroke} stroke-width="1.7"/>`,
    );
  });
  return parts.join('');
}

function mark(verdict: Verdict | null, colour: string): string {
  switch (verdict) {
    case 'agrees':
      return `<circle cx="12" cy="12" r="2" fill="${colour}"/>`;
    case 'inverted':
      return `<path d="M12 8.8L15.2 12L12 15.2L8.8 12Z" fill="none" stroke="${ALARM}" stroke-width="1.5"/>`;
    case 'missing':
      return `<circle cx="12" cy="12" r="2" fill="none" stroke="${INK}" stroke-width="1.2"/>`;
    case 'relabelled':
      return `<path d="M8.8 12.6q1.6-2.4 3.2-0.6t3.2-0.6" fill="none" stroke="${colour}" stroke-width="1.3"/>`;
    default:
      return '';
  }
}
