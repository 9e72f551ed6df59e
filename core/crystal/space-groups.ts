/**
 * The space groups by number: Hermann–Mauguin symbol and Hall symbol of the standard setting (hexagonal axes for R, origin
 * at the centre where there is a choice), and settings that are common besides.
 *
 * International Tables A (2016), table 2.1; Hall symbols after International Tables B (2010), table A1.4.2.7.
 */

export interface SpaceGroupSetting {
  readonly number: number;
  readonly symbol: string;
  readonly hall: string;
}

const STANDARD = `
P 1|P 1
P -1|-P 1
P 1 2 1|P 2y
P 1 21 1|P 2yb
C 1 2 1|C 2y
P 1 m 1|P -2y
P 1 c 1|P -2yc
C 1 m 1|C -2y
C 1 c 1|C -2yc
P 1 2/m 1|-P 2y
P 1 21/m 1|-P 2yb
C 1 2/m 1|-C 2y
P 1 2/c 1|-P 2yc
P 1 21/c 1|-P 2ybc
C 1 2/c 1|-C 2yc
P 2 2 2|P 2 2
P 2 2 21|P 2c 2
P 21 21 2|P 2 2ab
P 21 21 21|P 2ac 2ab
C 2 2 21|C 2c 2
C 2 2 2|C 2 2
F 2 2 2|F 2 2
I 2 2 2|I 2 2
I 21 21 21|I 2b 2c
P m m 2|P 2 -2
P m c 21|P 2c -2
P c c 2|P 2 -2c
P m a 2|P 2 -2a
P c a 21|P 2c -2ac
P n c 2|P 2 -2bc
P m n 21|P 2ac -2
P b a 2|P 2 -2ab
P n a 21|P 2c -2n
P n n 2|P 2 -2n
C m m 2|C 2 -2
C m c 21|C 2c -2
C c c 2|C 2 -2c
A m m 2|A 2 -2
A b m 2|A 2 -2b
A m a 2|A 2 -2a
A b a 2|A 2 -2ab
F m m 2|F 2 -2
F d d 2|F 2 -2d
I m m 2|I 2 -2
I b a 2|I 2 -2c
I m a 2|I 2 -2a
P m m m|-P 2 2
P n n n|-P 2ab 2bc
P c c m|-P 2 2c
P b a n|-P 2ab 2b
P m m a|-P 2a 2a
P n n a|-P 2a 2bc
P m n a|-P 2ac 2
P c c a|-P 2a 2ac
P b a m|-P 2 2ab
P c c n|-P 2ab 2ac
P b c m|-P 2c 2b
P n n m|-P 2 2n
P m m n|-P 2ab 2a
P b c n|-P 2n 2ab
P b c a|-P 2ac 2ab
P n m a|-P 2ac 2n
C m c m|-C 2c 2
C m c a|-C 2bc 2
C m m m|-C 2 2
C c c m|-C 2 2c
C m m a|-C 2b 2
C c c a|-C 2b 2bc
F m m m|-F 2 2
F d d d|-F 2uv 2vw
I m m m|-I 2 2
I b a m|-I 2 2c
I b c a|-I 2b 2c
I m m a|-I 2b 2
P 4|P 4
P 41|P 4w
P 42|P 4c
P 43|P 4cw
I 4|I 4
I 41|I 4bw
P -4|P -4
I -4|I -4
P 4/m|-P 4
P 42/m|-P 4c
P 4/n|-P 4a
P 42/n|-P 4bc
I 4/m|-I 4
I 41/a|-I 4ad
P 4 2 2|P 4 2
P 4 21 2|P 4ab 2ab
P 41 2 2|P 4w 2c
P 41 21 2|P 4abw 2nw
P 42 2 2|P 4c 2
P 42 21 2|P 4n 2n
P 43 2 2|P 4cw 2c
P 43 21 2|P 4nw 2abw
I 4 2 2|I 4 2
I 41 2 2|I 4bw 2bw
P 4 m m|P 4 -2
P 4 b m|P 4 -2ab
P 42 c m|P 4c -2c
P 42 n m|P 4n -2n
P 4 c c|P 4 -2c
P 4 n c|P 4 -2n
P 42 m c|P 4c -2
P 42 b c|P 4c -2ab
I 4 m m|I 4 -2
I 4 c m|I 4 -2c
I 41 m d|I 4bw -2
I 41 c d|I 4bw -2c
P -4 2 m|P -4 2
P -4 2 c|P -4 2c
P -4 21 m|P -4 2ab
P -4 21 c|P -4 2n
P -4 m 2|P -4 -2
P -4 c 2|P -4 -2c
P -4 b 2|P -4 -2ab
P -4 n 2|P -4 -2n
I -4 m 2|I -4 -2
I -4 c 2|I -4 -2c
I -4 2 m|I -4 2
I -4 2 d|I -4 2bw
P 4/m m m|-P 4 2
P 4/m c c|-P 4 2c
P 4/n b m|-P 4a 2b
P 4/n n c|-P 4a 2bc
P 4/m b m|-P 4 2ab
P 4/m n c|-P 4 2n
P 4/n m m|-P 4a 2a
P 4/n c c|-P 4a 2ac
P 42/m m c|-P 4c 2
P 42/m c m|-P 4c 2c
P 42/n b c|-P 4ac 2b
P 42/n n m|-P 4ac 2bc
P 42/m b c|-P 4c 2ab
P 42/m n m|-P 4n 2n
P 42/n m c|-P 4ac 2a
P 42/n c m|-P 4ac 2ac
I 4/m m m|-I 4 2
I 4/m c m|-I 4 2c
I 41/a m d|-I 4bd 2
I 41/a c d|-I 4bd 2c
P 3|P 3
P 31|P 31
P 32|P 32
R 3|R 3
P -3|-P 3
R -3|-R 3
P 3 1 2|P 3 2
P 3 2 1|P 3 2"
P 31 1 2|P 31 2 (0 0 4)
P 31 2 1|P 31 2"
P 32 1 2|P 32 2 (0 0 2)
P 32 2 1|P 32 2"
R 3 2|R 3 2"
P 3 m 1|P 3 -2"
P 3 1 m|P 3 -2
P 3 c 1|P 3 -2"c
P 3 1 c|P 3 -2c
R 3 m|R 3 -2"
R 3 c|R 3 -2"c
P -3 1 m|-P 3 2
P -3 1 c|-P 3 2c
P -3 m 1|-P 3 2"
P -3 c 1|-P 3 2"c
R -3 m|-R 3 2"
R -3 c|-R 3 2"c
P 6|P 6
P 61|P 61
P 65|P 65
P 62|P 62
P 64|P 64
P 63|P 6c
P -6|P -6
P 6/m|-P 6
P 63/m|-P 6c
P 6 2 2|P 6 2
P 61 2 2|P 61 2 (0 0 5)
P 65 2 2|P 65 2 (0 0 1)
P 62 2 2|P 62 2 (0 0 4)
P 64 2 2|P 64 2 (0 0 2)
P 63 2 2|P 6c 2c
P 6 m m|P 6 -2
P 6 c c|P 6 -2c
P 63 c m|P 6c -2
P 63 m c|P 6c -2c
P -6 m 2|P -6 2
P -6 c 2|P -6c 2
P -6 2 m|P -6 -2
P -6 2 c|P -6c -2c
P 6/m m m|-P 6 2
P 6/m c c|-P 6 2c
P 63/m c m|-P 6c 2
P 63/m m c|-P 6c 2c
P 2 3|P 2 2 3
F 2 3|F 2 2 3
I 2 3|I 2 2 3
P 21 3|P 2ac 2ab 3
I 21 3|I 2b 2c 3
P m -3|-P 2 2 3
P n -3|-P 2ab 2bc 3
F m -3|-F 2 2 3
F d -3|-F 2uv 2vw 3
I m -3|-I 2 2 3
P a -3|-P 2ac 2ab 3
I a -3|-I 2b 2c 3
P 4 3 2|P 4 2 3
P 42 3 2|P 4n 2 3
F 4 3 2|F 4 2 3
F 41 3 2|F 4d 2 3
I 4 3 2|I 4 2 3
P 43 3 2|P 4acd 2ab 3
P 41 3 2|P 4bd 2ab 3
I 41 3 2|I 4bd 2c 3
P -4 3 m|P -4 2 3
F -4 3 m|F -4 2 3
I -4 3 m|I -4 2 3
P -4 3 n|P -4n 2 3
F -4 3 c|F -4a 2 3
I -4 3 d|I -4bd 2c 3
P m -3 m|-P 4 2 3
P n -3 n|-P 4a 2bc 3
P m -3 n|-P 4n 2 3
P n -3 m|-P 4bc 2bc 3
F m -3 m|-F 4 2 3
F m -3 c|-F 4a 2 3
F d -3 m|-F 4vw 2vw 3
F d -3 c|-F 4ud 2vw 3
I m -3 m|-I 4 2 3
I a -3 d|-I 4bd 2c 3
`;

const OTHER = `
14|P 1 21/n 1|-P 2yn
14|P 1 21/a 1|-P 2yab
13|P 1 2/n 1|-P 2yac
13|P 1 2/a 1|-P 2ya
15|I 1 2/a 1|-I 2ya
15|I 1 2/c 1|-I 2yc
15|A 1 2/a 1|-A 2ya
15|A 1 2/n 1|-A 2yab
12|I 1 2/m 1|-I 2y
12|A 1 2/m 1|-A 2y
5|I 1 2 1|I 2y
5|A 1 2 1|A 2y
7|P 1 n 1|P -2yac
7|P 1 a 1|P -2ya
8|I 1 m 1|I -2y
9|I 1 a 1|I -2ya
9|A 1 a 1|A -2ya
4|P 1 1 21|P 2c
3|P 1 1 2|P 2
14|P 1 1 21/b|-P 2bc
33|P n 21 a|P -2ac -2n
62|P n a m|-P 2c 2n
62|P b n m|-P 2c 2ab
62|P m c n|-P 2n 2a
61|P c a b|-P 2bc 2ac
146|R 3 :R|P 3*
148|R -3 :R|-P 3*
155|R 3 2 :R|P 3* 2
160|R 3 m :R|P 3* -2
161|R 3 c :R|P 3* -2n
166|R -3 m :R|-P 3* 2
167|R -3 c :R|-P 3* 2n
`;

/** The standard settings, number 1 first. */
export const STANDARD_SETTINGS: readonly SpaceGroupSetting[] = STANDARD.trim()
  .split('\n')
  .map((line, index) => {
    const [symbol = '', hall = ''] = line.split('|');
    return { number: index + 1, symbol, hall };
  });

const OTHER_SETTINGS: readonly SpaceGroupSetting[] = OTHER.trim()
  .split('\n')
  .map(line => {
    const [number = '', symbol = '', hall = ''] = line.split('|');
    return { number: Number(number), symbol, hall };
  });

/**
 * The eleven pairs of enantiomorphic space groups, by number (International Tables A, 2016, section 1.4).
 * All other Sohncke groups are their own mirror image.
 */
export const ENANTIOMORPHIC_PAIRS: readonly (readonly [number, number])[] = [
  [76, 78],
  [91, 95],
  [92, 96],
  [144, 145],
  [151, 153],
  [152, 154],
  [169, 170],
  [171, 172],
  [178, 179],
  [180, 181],
  [212, 213],
];

/** The group of the opposite hand, or the number itself. */
export function enantiomorphOf(number: number): number {
  for (const [first, second] of ENANTIOMORPHIC_PAIRS) {
    if (number === first) return second;
    if (number === second) return first;
  }
  return number;
}

function bare(symbol: string): string {
  return symbol
    .replace(/[\s_()]/gu, '')
    .replace(/:?[hs12]$/iu, match => (match.startsWith(':') || /[hs]/iu.test(match) ? '' : match))
    .toLowerCase();
}

/** A full monoclinic symbol in its short form: P 1 21/c 1 is P21/c. */
function shortened(symbol: string): string {
  return bare(symbol.replace(/ 1 (\S+) 1$/u, ' $1'));
}

const BY_NAME: ReadonlyMap<string, SpaceGroupSetting> = new Map(
  [...OTHER_SETTINGS, ...STANDARD_SETTINGS].flatMap((setting): [string, SpaceGroupSetting][] => [
    [bare(setting.symbol), setting],
    [shortened(setting.symbol), setting],
  ]),
);

/** The setting that a Hermann–Mauguin symbol means, written with or without spaces; null where it is unknown. */
export function settingNamed(symbol: string): SpaceGroupSetting | null {
  return BY_NAME.get(bare(symbol)) ?? null;
}
