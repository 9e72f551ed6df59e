/** The colours of the drawn model on both papers; element tones and hues are those of the records. */
import { ALARM, CLOCKWISE, COUNTER, elementColour, FAINT, INK, PAPER } from '../../core/record/palette.ts';

export interface Papers {
  readonly paper: string;
  readonly ink: string;
  readonly faint: string;
  readonly clockwise: string;
  readonly counter: string;
  readonly alarm: string;
}

export const LIGHT: Papers = {
  paper: PAPER,
  ink: INK,
  faint: FAINT,
  clockwise: CLOCKWISE,
  counter: COUNTER,
  alarm: ALARM,
};

/** The same on dark paper: hues lifted until the contrast is at least 4.5 to 1. */
export const DARK: Papers = {
  paper: '#17191c',
  ink: '#e9e5da',
  faint: '#7c8087',
  clockwise: '#8fd0e8',
  counter: '#d98f4e',
  alarm: '#ff7d92',
};

function channels(hex: string): [number, number, number] {
  const value = Number.parseInt(hex.slice(1), 16);
  return [(value >> 16) & 255, (value >> 8) & 255, value & 255];
}

/** Share by which element tones are lifted on dark paper. */
const LIFT = 0.18;

/** Colour of an element as a number, 0xrrggbb. */
export function elementTone(z: number, dark: boolean): number {
  const [r, g, b] = channels(elementColour(z));
  const lift = (c: number): number => (dark ? Math.round(c + (255 - c) * LIFT) : c);
  return (lift(r) << 16) | (lift(g) << 8) | lift(b);
}
