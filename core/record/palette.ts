/**
 * The colours of figures and records: paper and ink, one hue for clockwise, one for the other way, one for alarm.
 *
 * The two hues differ in lightness as well, so that grey print keeps them apart; each has a contrast of at least 4.5
 * to 1 against the paper. Element colours are muted tones near the trade's usual ones, chosen by us.
 */
export const PAPER = '#fbfaf6';
export const INK = '#23262b';
export const FAINT = '#8d9096';
/** Clockwise: R, P. */
export const CLOCKWISE = '#0b4f6c';
/** The other way: S, M. */
export const COUNTER = '#a4551e';
export const ALARM = '#b3123c';

const ELEMENTS: ReadonlyMap<number, string> = new Map([
  [1, '#d9d7cf'],
  [5, '#d8a48f'],
  [6, '#6b6f76'],
  [7, '#4f6fae'],
  [8, '#b5544a'],
  [9, '#6fa287'],
  [14, '#b49a73'],
  [15, '#c98a3a'],
  [16, '#b7a03c'],
  [17, '#5f9a5a'],
  [34, '#a98432'],
  [35, '#8f4b3c'],
  [53, '#6d4f86'],
]);

/** Colour of an element in figures. */
export function elementColour(z: number): string {
  return ELEMENTS.get(z) ?? '#8a8f88';
}

/** The hue that repeats what a letter and the direction of the sweep already say; ink where nothing is decided. */
export function senseColour(descriptor: string | null): string {
  switch (descriptor?.toUpperCase()) {
    case 'R':
    case 'P':
      return CLOCKWISE;
    case 'S':
    case 'M':
      return COUNTER;
    default:
      return INK;
  }
}
