/** An SDF entry for the command tests: one centre with F, Cl, Br and H. */

/** An ideal centre, in Å; `hand` 1 is R (H away, Br to Cl to F clockwise), -1 its mirror image, 0 flat. */
export function halide(
  name: string,
  hand: 1 | -1 | 0,
  changes: (lines: string[]) => void = () => undefined,
): string {
  const place = (x: number, y: number, z: number, symbol: string): string =>
    `${[x, y, z].map(value => value.toFixed(4).padStart(10)).join('')} ${symbol.padEnd(3)} 0  0  0  0  0  0`;
  const up = hand === 0 ? 0 : 0.33;
  const lines = [
    name,
    '  test            3D',
    '',
    '  5  4  0  0  0  0  0  0  0  0999 V2000',
    place(0, 0, 0, 'C'),
    place(1.83, 0, up * 1.94, 'Br'),
    place(-0.83, -1.44 * (hand || 1), up * 1.77, 'Cl'),
    place(-0.64, 1.1 * (hand || 1), up * 1.35, 'F'),
    place(0, 0, hand === 0 ? 1.09 : -1.09, 'H'),
    '  1  2  1  0',
    '  1  3  1  0',
    '  1  4  1  0',
    '  1  5  1  0',
    'M  END',
  ];
  changes(lines);
  return `${lines.join('\n')}\n> <POSE>\n${name}\n\n$$$$\n`;
}
