/** Exact arithmetic on figures as they are written, so that mirroring twice gives every digit back. */

const WRITTEN = /^([+-]?)(\d*)(?:(\.)(\d*))?(\(\d+\))?$/u;

/** Decimals a shift needs: 0, 0.5, 0.25, 0.125. */
function decimalsOf(shift: number): number {
  for (let d = 0; d <= 6; d++) if (Math.abs(shift * 10 ** d - Math.round(shift * 10 ** d)) < 1e-9) return d;
  return 6;
}

/**
 * `shift` − the figure, with the decimals of the figure (more where the shift needs them), its standard uncertainty and
 * its style; null where the text is no plain figure.
 */
export function mirroredFigure(text: string, shift: number): string | null {
  const match = WRITTEN.exec(text);
  if (!match) return null;
  const [, sign = '', whole = '', point = '', decimals = '', uncertainty = ''] = match;
  if (whole === '' && decimals === '') return null;
  const places = Math.max(decimals.length, decimalsOf(shift));
  const scaled = BigInt(`${whole}${decimals.padEnd(places, '0')}`) * (sign === '-' ? -1n : 1n);
  const result = BigInt(Math.round(shift * 10 ** places)) - scaled;
  const digits = (result < 0n ? -result : result).toString().padStart(places + 1, '0');
  let head = digits.slice(0, digits.length - places);
  const tail = digits.slice(digits.length - places);
  if (whole === '' && head === '0' && places > 0) head = '';
  const extra = places - decimals.length;
  const shown =
    uncertainty === '' || extra === 0 ? uncertainty : `${uncertainty.slice(0, -1)}${'0'.repeat(extra)})`;
  return `${result < 0n ? '-' : ''}${head}${places > 0 ? '.' : point}${tail}${shown}`;
}
