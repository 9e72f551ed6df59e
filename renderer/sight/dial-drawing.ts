/** The dial drawn as SVG over the model: ring or bar, ticks of rising length, numerals, sweep, and the labels of the unit's atoms. */
import type { Dial, Numeral } from './dial.ts';

export interface DialDrawing {
  readonly dial: Dial;
  readonly descriptor: string | null;
  /** Where the middle of the dial stands, px. */
  readonly x: number;
  readonly y: number;
  /** px for one Å. */
  readonly scale: number;
  readonly labels: readonly {
    readonly text: string;
    readonly x: number;
    readonly y: number;
    readonly lit: boolean;
  }[];
  /** A second, broken sweep the other way: what was intended where the centre is inverted; null for none. */
  readonly intended: string | null;
  readonly name: (ligand: number) => string;
}

const SVG = 'http://www.w3.org/2000/svg';

type Attributes = Readonly<Record<string, string | number>>;

function element(name: string, attributes: Attributes, text?: string): SVGElement {
  const node = document.createElementNS(SVG, name);
  for (const [key, value] of Object.entries(attributes)) {
    node.setAttribute(key, typeof value === 'number' ? value.toFixed(2) : value);
  }
  if (text !== undefined) node.textContent = text;
  return node;
}

/** The class that gives a descriptor its hue. */
export function senseClass(descriptor: string | null): string {
  if (descriptor === null) return 'sense-none';
  if (/^[RPrp]$/u.test(descriptor)) return 'sense-clockwise';
  if (/^[SMsm]$/u.test(descriptor)) return 'sense-counter';
  return 'sense-none';
}

/** Lengths of the ticks for ranks 1 to 3, px. */
const TICKS = [9, 16, 24] as const;
const NUMERAL = 14;
const SWEEP_GAP = 26;

/** One dial as a group, with the hue of its letter. */
export function dialGroup(drawing: DialDrawing): SVGElement {
  const { dial, scale, descriptor, x: cx, y: cy } = drawing;
  const radius = dial.radius * scale;
  const at = (angle: number, r: number): [number, number] => [
    cx + r * Math.cos(angle),
    cy - r * Math.sin(angle),
  ];
  const parts: SVGElement[] = [];
  const line = (
    from: readonly [number, number],
    to: readonly [number, number],
    name: string,
    weight: number,
  ): void => {
    parts.push(
      element('line', {
        x1: from[0],
        y1: from[1],
        x2: to[0],
        y2: to[1],
        class: name,
        'stroke-width': weight,
      }),
    );
  };
  const weight = 0.8 + 3 * dial.firmness;
  parts.push(
    element('circle', {
      cx,
      cy,
      r: radius,
      class: `dial-ring dial-${dial.shape}`,
      'stroke-width': dial.shape === 'ring' ? weight : 1,
    }),
  );
  if (dial.doubled)
    parts.push(element('circle', { cx, cy, r: radius - 6, class: 'dial-ring', 'stroke-width': 1 }));
  if (dial.shape === 'bar') line([cx - radius, cy], [cx + radius, cy], 'dial-flat-bar', 5);
  if (dial.axis !== null) line(at(dial.axis, -radius), at(dial.axis, radius), 'dial-axis', 1);
  const rear = (numeral: Numeral): boolean => numeral.end === 2 && dial.axis === null;
  for (const numeral of dial.numerals) {
    if (!numeral.onRing) continue;
    const length = numeral.end === null ? (TICKS[numeral.rank - 1] ?? 8) : numeral.rank === 1 ? 22 : 8;
    line(
      at(numeral.angle, radius),
      at(numeral.angle, radius - NUMERAL - length),
      `dial-tick${rear(numeral) ? ' dial-rear' : ''}`,
      numeral.rank === 1 || numeral.end === null ? 2.2 : 1.2,
    );
  }
  for (const stub of dial.stubs) {
    const dx = stub.x - stub.fromX;
    const dy = stub.y - stub.fromY;
    if (Math.hypot(dx, dy) < 0.2) continue;
    const place = (t: number): [number, number] => [
      cx + scale * (stub.fromX + t * dx),
      cy - scale * (stub.fromY + t * dy),
    ];
    const end = place(1);
    line(place(0.36), end, stub.hydrogen ? 'dial-stub' : 'dial-lone', 1.6);
    parts.push(
      element('circle', {
        cx: end[0],
        cy: end[1],
        r: stub.hydrogen ? 4 : 7,
        class: stub.hydrogen ? 'dial-stub-end' : 'dial-lone-end',
      }),
    );
  }
  if (dial.sweep) {
    const { from, turn } = dial.sweep;
    parts.push(...sweepArc(from, turn, cx, cy, radius + SWEEP_GAP));
    if (drawing.intended !== null) {
      parts.push(...intendedArc(from, turn, cx, cy, radius + SWEEP_GAP + 17, drawing.intended));
    }
  }
  for (const label of drawing.labels) {
    parts.push(
      element(
        'text',
        { x: label.x + 13, y: label.y + 17, class: `atom-label${label.lit ? ' atom-lit' : ''}` },
        label.text,
      ),
    );
  }
  for (const numeral of spread(dial.numerals.filter(one => one.onRing))) {
    const [x, y] = at(numeral.shown, radius);
    const group = element('g', {
      class: 'numeral',
      'data-rank': String(numeral.rank),
      'data-end': numeral.end === null ? '' : String(numeral.end),
    });
    group.append(
      element('circle', {
        cx: x,
        cy: y,
        r: numeral.text.length > 2 ? 9 : NUMERAL,
        class: 'numeral-paper',
      }),
      element(
        'text',
        { x, y, class: `numeral-text${numeral.text.length > 2 ? ' numeral-word' : ''}` },
        numeral.text,
      ),
    );
    parts.push(group);
  }
  const fourth = dial.numerals.find(one => !one.onRing);
  if (fourth) parts.push(...fourthMark(fourth, dial, drawing, at, radius));
  const group = element('g', { class: `dial-group ${senseClass(descriptor)}` });
  group.append(...parts);
  return group;
}

/** Words under a dial that say what it belongs to. */
export function dialWords(x: number, y: number, text: string): SVGElement {
  return element('text', { x, y, class: 'dial-words' }, text);
}

/** Numerals pushed apart where two ligands project to nearly the same place. */
function spread(numerals: readonly Numeral[]): (Numeral & { shown: number })[] {
  const list = numerals.map(numeral => ({ ...numeral, shown: numeral.angle }));
  const least = 0.3;
  for (let i = 0; i < list.length; i++) {
    for (let j = i + 1; j < list.length; j++) {
      const a = list[i]!;
      const b = list[j]!;
      const d = Math.atan2(Math.sin(b.shown - a.shown), Math.cos(b.shown - a.shown));
      if (Math.abs(d) >= least) continue;
      const push = ((least - Math.abs(d)) / 2) * (d < 0 ? -1 : 1);
      a.shown -= push;
      b.shown += push;
    }
  }
  return list;
}

function sweepArc(from: number, turn: number, cx: number, cy: number, r: number): SVGElement[] {
  const sign = Math.sign(turn) || 1;
  const start = from;
  const end = from + turn - sign * 0.02;
  const neck = end - sign * (15 / r);
  const point = (angle: number, radius: number): string =>
    `${(cx + radius * Math.cos(angle)).toFixed(2)} ${(cy - radius * Math.sin(angle)).toFixed(2)}`;
  // Drawn inwards where it goes nearly all the way round, so that the end does not run into the beginning.
  const inward = Math.abs(turn) > 5 ? 16 : 0;
  const radiusAt = (t: number): number => r - inward * t;
  const steps = Math.max(2, Math.ceil(Math.abs(neck - start) / 0.08));
  const way: string[] = [];
  for (let k = 0; k <= steps; k++) {
    const t = k / steps;
    way.push(`${k === 0 ? 'M' : 'L'} ${point(start + t * (neck - start), radiusAt(t))}`);
  }
  const tip = radiusAt(1);
  return [
    element('path', {
      d: way.join(' '),
      class: 'dial-sweep',
      'data-turn': turn < 0 ? 'clockwise' : 'anticlockwise',
    }),
    element('circle', {
      cx: cx + r * Math.cos(start),
      cy: cy - r * Math.sin(start),
      r: 3.5,
      class: 'dial-head',
    }),
    element('path', {
      d: `M ${point(end, tip)} L ${point(neck, tip + 6.5)} L ${point(neck, tip - 6.5)} Z`,
      class: 'dial-head',
    }),
  ];
}

/** The sweep that was asked for, where what was found runs the other way. */
function intendedArc(
  from: number,
  found: number,
  cx: number,
  cy: number,
  r: number,
  letter: string,
): SVGElement[] {
  const sign = -(Math.sign(found) || 1);
  const end = from + sign * 0.85;
  const point = (angle: number, radius: number): string =>
    `${(cx + radius * Math.cos(angle)).toFixed(2)} ${(cy - radius * Math.sin(angle)).toFixed(2)}`;
  const start = from + sign * 0.08;
  const neck = end - sign * (13 / r);
  const words = from + sign * 0.5;
  const anchor = Math.cos(words) > 0 ? 'start' : 'end';
  return [
    element('path', {
      d: `M ${point(start, r)} A ${r.toFixed(2)} ${r.toFixed(2)} 0 0 ${sign < 0 ? 1 : 0} ${point(neck, r)}`,
      class: 'dial-intended',
      'data-turn': sign < 0 ? 'clockwise' : 'anticlockwise',
    }),
    element('path', {
      d: `M ${point(end, r)} L ${point(neck, r + 5)} L ${point(neck, r - 5)} Z`,
      class: 'dial-intended-head',
    }),
    element(
      'text',
      {
        x: cx + (r + 10) * Math.cos(words),
        y: cy - (r + 10) * Math.sin(words),
        class: 'dial-intended-words',
        'text-anchor': anchor,
      },
      `intended ${letter}`,
    ),
  ];
}

/** Says what the fourth is and whether it is behind or in front, in the gap that the sweep leaves. */
function fourthMark(
  fourth: Numeral,
  dial: Dial,
  drawing: DialDrawing,
  at: (angle: number, r: number) => [number, number],
  radius: number,
): SVGElement[] {
  const what = fourth.ligand >= 0 ? drawing.name(fourth.ligand) : fourth.ligand === -1 ? 'H' : 'lone pair';
  if (dial.hidden === null) {
    const [x, y] = at(fourth.angle, fourth.distance * drawing.scale + 22);
    return [element('text', { x, y, class: 'numeral-fourth', 'data-rank': '4' }, `4`)];
  }
  const first = dial.numerals.find(one => one.rank === 1);
  const third = dial.numerals.find(one => one.rank === 3);
  if (!first || !third || !dial.sweep) return [];
  const rest = 2 * Math.PI - Math.abs(dial.sweep.turn);
  const angle = third.angle + (Math.sign(dial.sweep.turn) * rest) / 2;
  const [x, y] = at(angle, radius + 16);
  const anchor = Math.cos(angle) > 0.25 ? 'start' : Math.cos(angle) < -0.25 ? 'end' : 'middle';
  return [
    element(
      'text',
      { x, y, class: 'numeral-fourth', 'text-anchor': anchor, 'data-rank': '4' },
      `4 ${what} ${fourth.depth < 0 ? 'behind' : 'in front'}`,
    ),
  ];
}
