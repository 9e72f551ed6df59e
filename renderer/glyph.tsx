/** The dial glyph: the dial in small, the sign for handedness wherever a unit is named. */
import type { ReactElement } from 'react';
import type { Verdict } from '../core/docket.ts';
import type { StereoUnit } from '../core/perception/unit.ts';
import { senseClass } from './sight/dial-drawing.ts';

export interface GlyphProps {
  readonly descriptor: string | null;
  readonly state: StereoUnit['state'];
  readonly firmness: number | null;
  readonly verdict: Verdict | null;
  readonly size?: number;
}

const C = 12;
const RING = 6.2;

/** Points on a circle, degrees clockwise from the top. */
function at(degrees: number, radius: number): [number, number] {
  const a = ((degrees - 90) * Math.PI) / 180;
  return [C + radius * Math.cos(a), C + radius * Math.sin(a)];
}

function tick(degrees: number, from: number, to: number, key: string): ReactElement {
  const [x1, y1] = at(degrees, from);
  const [x2, y2] = at(degrees, to);
  return <line key={key} x1={x1} y1={y1} x2={x2} y2={y2} strokeWidth={1.6} />;
}

function body({ descriptor, state, firmness }: GlyphProps): ReactElement[] {
  const weight = 0.5 + 1.7 * (firmness ?? 1);
  if (state === 'flat') return [<line key="bar" x1={3} y1={C} x2={21} y2={C} strokeWidth={2.6} />];
  if (state === 'unspecified' || descriptor === null) {
    return [
      <circle
        key="ring"
        cx={C}
        cy={C}
        r={RING}
        strokeWidth={1.4}
        strokeDasharray="0.4 2.9"
        strokeLinecap="round"
      />,
    ];
  }
  const letter = descriptor.toUpperCase();
  const lower = descriptor !== letter;
  if (letter === 'E' || letter === 'Z') {
    const dy = letter === 'Z' ? -1 : 1;
    const strokes = [
      <line key="bond" x1={6.5} y1={C} x2={17.5} y2={C} strokeWidth={0.7} />,
      <line key="left" x1={7} y1={C} x2={7} y2={4} strokeWidth={weight + 0.4} />,
      <line key="right" x1={17} y1={C} x2={17} y2={C + 8 * dy} strokeWidth={weight + 0.4} />,
    ];
    if (lower) {
      strokes.push(
        <line key="left2" x1={9.6} y1={C} x2={9.6} y2={5} strokeWidth={0.8} />,
        <line key="right2" x1={14.4} y1={C} x2={14.4} y2={C + 7 * dy} strokeWidth={0.8} />,
      );
    }
    return strokes;
  }
  const sense = letter === 'R' || letter === 'P' ? 1 : -1;
  const parts = [<circle key="ring" cx={C} cy={C} r={RING} strokeWidth={weight} />];
  if (lower) parts.push(<circle key="inner" cx={C} cy={C} r={RING - 2.6} strokeWidth={0.8} />);
  const outer = RING + 0.6;
  if (letter === 'P' || letter === 'M') {
    parts.push(tick(0, outer, outer + 2.2, 'front'), tick(90 * sense, outer, outer + 4.6, 'rear'));
  } else {
    parts.push(
      tick(0, outer, outer + 1.6, 'one'),
      tick(120 * sense, outer, outer + 3.2, 'two'),
      tick(240 * sense, outer, outer + 5, 'three'),
    );
  }
  return parts;
}

/** The mark in the middle: agrees, inverted, missing, relabelled. */
function centreMark(verdict: Verdict | null): ReactElement | null {
  switch (verdict) {
    case 'agrees':
      return <circle cx={C} cy={C} r={2} className="glyph-fill" />;
    case 'inverted':
      return (
        <path
          d={`M${C} ${C - 3.2}L${C + 3.2} ${C}L${C} ${C + 3.2}L${C - 3.2} ${C}Z`}
          className="glyph-alarm"
        />
      );
    case 'missing':
      return <circle cx={C} cy={C} r={2.4} className="glyph-hollow" />;
    case 'relabelled':
      return <path d={`M${C - 3} ${C + 0.8}q1.5 -2.6 3 -0.8t3 -0.8`} className="glyph-hollow" />;
    default:
      return null;
  }
}

export function Glyph(props: GlyphProps): ReactElement {
  const size = props.size ?? 22;
  return (
    <svg
      className={`glyph ${senseClass(props.descriptor)}`}
      width={size}
      height={size}
      viewBox="0 0 24 24"
      aria-hidden="true"
      focusable="false"
    >
      <g className="glyph-body">{body(props)}</g>
      {centreMark(props.verdict)}
    </svg>
  );
}
