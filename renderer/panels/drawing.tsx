/** The structure drawing beside the model: the same numerals, wedges for what the coordinates show, every atom clickable. */
import { type ReactElement, type ReactNode, useEffect, useMemo, useState } from 'react';
import { elementSymbol } from '../../core/chemistry/elements.ts';
import { BondMark, type Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { unitName } from '../caption.ts';
import { layOut } from '../drawing/layout-client.ts';
import { focusOf, type Layout, skeletonOf, wedgesFor } from '../drawing/skeleton.ts';
import { senseClass } from '../sight/dial-drawing.ts';
import { unitAtoms } from '../sight/model-geometry.ts';
import { TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';

/** Drawing units: a bond is this long. */
const BOND = 30;
const MARGIN = 24;
/** Largest scale, px for a drawing unit: a small molecule is not blown up. */
const LARGEST = 1.7;

interface Made {
  readonly molecule: Molecule;
  readonly focus: readonly number[];
  readonly layout: Layout | null;
}

export function DrawingPanel(): ReactElement | null {
  const { model, unit } = useAppState('model', 'unit');
  const molecule = model?.molecule ?? null;
  const units = model?.docket?.units;
  const [made, setMade] = useState<Made | null>(null);
  const whole = useMemo<readonly number[]>(() => [], []);
  const found = molecule ? focusOf(molecule, units?.[unit]) : whole;
  const focus = found.length === 0 ? whole : found;
  useEffect(() => {
    if (!molecule || !units) return undefined;
    let current = true;
    layOut(molecule, units, focus).then(
      ({ layout }) => {
        if (current) setMade({ molecule, focus, layout });
      },
      () => undefined,
    );
    return () => {
      current = false;
    };
  }, [molecule, units, focus]);
  if (!molecule || !units) return null;
  const ready = made?.molecule === molecule && made.focus === focus ? made : null;
  return (
    <section className="drawing" aria-label={TEXT.drawing}>
      {ready?.layout && (
        <Drawing molecule={molecule} units={units} layout={ready.layout} unit={unit} focus={focus} />
      )}
      {ready && !ready.layout && <p className="fine">{TEXT.noDrawing}</p>}
    </section>
  );
}

function Drawing({
  molecule,
  units,
  layout,
  unit,
  focus,
}: {
  readonly molecule: Molecule;
  readonly units: readonly LabelledUnit[];
  readonly layout: Layout;
  readonly unit: number;
  readonly focus: readonly number[];
}): ReactElement {
  const controller = useController();
  const { lit } = useAppState('lit');
  const scaled = useMemo(() => scale(molecule, layout), [molecule, layout]);
  const wedges = useMemo(() => wedgesFor(molecule, units, layout), [molecule, units, layout]);
  const skeleton = useMemo(() => skeletonOf(molecule, units, focus), [molecule, units, focus]);
  const { points, width, height } = scaled;
  const chosen = units[unit];
  const own = chosen ? unitAtoms(molecule, chosen) : new Map<number, string>();
  const owner = new Map<number, number>();
  units.forEach(({ unit: each }, u) => {
    for (const atom of each.atoms) if (!owner.has(atom)) owner.set(atom, u);
  });
  const click = (atom: number): void => {
    const u = owner.get(atom);
    if (u !== undefined && u !== unit) controller.selectUnit(u);
    else controller.light(lit === atom ? null : atom);
  };
  const symbols = new Map<number, string>();
  skeleton.atoms.forEach((atom, k) => {
    const text = atomText(skeleton.molecule, k);
    if (text !== '') symbols.set(atom, text);
  });
  const numerals = (chosen?.ranking ?? []).filter(({ ligand }) => ligand >= 0 && points.has(ligand));
  const name = chosen ? unitName(molecule, chosen) : '';
  return (
    <svg
      viewBox={`0 0 ${width} ${height}`}
      role="img"
      aria-label={`${TEXT.drawing}${name === '' ? '' : `, ${name} marked`}`}
      preserveAspectRatio="xMidYMid meet"
      style={{ maxWidth: LARGEST * width, maxHeight: LARGEST * height }}
    >
      <Bonds molecule={molecule} points={points} symbols={symbols} wedges={wedges} own={own} />
      {[...points].map(([atom, [x, y]]) => {
        const text = symbols.get(atom);
        const part = own.get(atom);
        return (
          <g
            key={atom}
            className={`drawn-atom${part ? ' drawn-own' : ''}${lit === atom ? ' drawn-lit' : ''}`}
            onClick={() => click(atom)}
          >
            <circle cx={x} cy={y} r={11} className="drawn-target" />
            {part === 'own' && !text && <circle cx={x} cy={y} r={3.4} className="drawn-dot" />}
            {text && (
              <text x={x} y={y}>
                {text}
              </text>
            )}
          </g>
        );
      })}
      {units.map(({ descriptor, unit: each }, u) => {
        const [a, b] = each.atoms.map(atom => points.get(atom));
        if (!a || descriptor === null || (focus.length > 0 && u !== unit)) return null;
        const [dx, dy] = b ? [0, 0] : free(molecule, each.atoms[0]!, points);
        const x = b ? (a[0] + b[0]) / 2 + 10 : a[0] + 15 * dx;
        const y = b ? (a[1] + b[1]) / 2 - 10 : a[1] + 15 * dy;
        return (
          <text
            key={u}
            x={x}
            y={y}
            className={`drawn-letter ${senseClass(descriptor)}${u === unit ? ' drawn-chosen' : ''}`}
          >
            {descriptor}
          </text>
        );
      })}
      {numerals.map(({ ligand, rank, end }) => {
        const [x, y] = points.get(ligand)!;
        const from = points.get(chosen!.unit.ends[end === 2 ? 1 : 0]!.atom) ?? [x, y];
        const length = Math.hypot(x - from[0], y - from[1]) || 1;
        // Beside the atom, on the side of the sweep, clear of its symbol.
        const nx = x + (12 * (x - from[0])) / length - (9 * (y - from[1])) / length;
        const ny = y + (12 * (y - from[1])) / length + (9 * (x - from[0])) / length;
        return (
          <text key={`${ligand}-${String(end)}`} x={nx} y={ny} className="drawn-numeral">
            {rank}
            {end === 2 ? '′' : ''}
          </text>
        );
      })}
    </svg>
  );
}

type Point = readonly [number, number];

function scale(
  molecule: Molecule,
  layout: Layout,
): { points: ReadonlyMap<number, Point>; width: number; height: number } {
  let total = 0;
  let count = 0;
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    const d = Math.hypot(layout[2 * i]! - layout[2 * j]!, layout[2 * i + 1]! - layout[2 * j + 1]!);
    if (Number.isFinite(d) && d > 0) {
      total += d;
      count++;
    }
  }
  const k = count === 0 ? BOND : (BOND * count) / total;
  let left = Infinity;
  let right = -Infinity;
  let top = Infinity;
  let bottom = -Infinity;
  const raw: [number, number, number][] = [];
  for (let i = 0; i < molecule.atomCount; i++) {
    const x = k * layout[2 * i]!;
    const y = -k * layout[2 * i + 1]!;
    if (!Number.isFinite(x + y)) continue;
    raw.push([i, x, y]);
    left = Math.min(left, x);
    right = Math.max(right, x);
    top = Math.min(top, y);
    bottom = Math.max(bottom, y);
  }
  const points = new Map(raw.map(([i, x, y]) => [i, [x - left + MARGIN, y - top + MARGIN] as const]));
  return { points, width: right - left + 2 * MARGIN, height: bottom - top + 2 * MARGIN };
}

/** Symbol with hydrogens and charge; empty for a plain carbon of the skeleton. */
function atomText(skeleton: Molecule, atom: number): string {
  const z = skeleton.elements[atom]!;
  const charge = skeleton.charges[atom]!;
  const isotope = skeleton.isotopes[atom]!;
  const hydrogens = skeleton.hydrogens[atom]!;
  const neighbours = skeleton.neighbourStart[atom + 1]! - skeleton.neighbourStart[atom]!;
  if (z === 6 && charge === 0 && isotope === 0 && neighbours > 0) return '';
  const sign =
    charge === 0
      ? ''
      : `${Math.abs(charge) === 1 ? '' : SUPERSCRIPT[Math.abs(charge)]}${charge > 0 ? '⁺' : '⁻'}`;
  const count = hydrogens < 2 ? '' : (SUBSCRIPT[hydrogens] ?? String(hydrogens));
  return `${isotope === 0 ? '' : String(isotope)}${elementSymbol(z)}${hydrogens === 0 ? '' : `H${count}`}${sign}`;
}

const SUBSCRIPT = ['₀', '₁', '₂', '₃', '₄', '₅', '₆'];
const SUPERSCRIPT = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶'];

/** A direction from an atom into which no bond runs. */
function free(molecule: Molecule, atom: number, points: ReadonlyMap<number, Point>): [number, number] {
  const own = points.get(atom);
  if (!own) return [0, -1];
  const angles: number[] = [];
  for (let k = molecule.neighbourStart[atom]!; k < molecule.neighbourStart[atom + 1]!; k++) {
    const other = points.get(molecule.neighbours[k]!);
    if (other) angles.push(Math.atan2(other[1] - own[1], other[0] - own[0]));
  }
  angles.sort((a, b) => a - b);
  let best = -Math.PI / 2;
  let widest = -1;
  angles.forEach((angle, k) => {
    const next = k + 1 < angles.length ? angles[k + 1]! : angles[0]! + 2 * Math.PI;
    if (next - angle > widest) {
      widest = next - angle;
      best = (angle + next) / 2;
    }
  });
  return [Math.cos(best), Math.sin(best)];
}

function Bonds({
  molecule,
  points,
  symbols,
  wedges,
  own,
}: {
  readonly molecule: Molecule;
  readonly points: ReadonlyMap<number, Point>;
  readonly symbols: ReadonlyMap<number, string>;
  readonly wedges: ReturnType<typeof wedgesFor>;
  readonly own: ReadonlyMap<number, string>;
}): ReactElement {
  const lines: ReactNode[] = [];
  for (let b = 0; b < molecule.bondCount; b++) {
    const i = molecule.bondAtoms[2 * b]!;
    const j = molecule.bondAtoms[2 * b + 1]!;
    const p = points.get(i);
    const q = points.get(j);
    if (!p || !q) continue;
    const wedge = wedges.find(one => (one.from === i && one.to === j) || (one.from === j && one.to === i));
    const strong = own.has(i) && own.has(j) && (own.get(i) === 'own' || own.get(j) === 'own');
    const name = `drawn-bond${strong ? ' drawn-strong' : ''}`;
    const [a, c] = trimmed(p, q, symbols.has(i), symbols.has(j));
    if (wedge) {
      const [from, to] = wedge.from === i ? [a, c] : [c, a];
      lines.push(wedge.mark === BondMark.wedge ? solid(from, to, b) : hashed(from, to, b));
      continue;
    }
    const order = molecule.bondOrders[b]!;
    const length = Math.hypot(c[0] - a[0], c[1] - a[1]) || 1;
    const nx = -(c[1] - a[1]) / length;
    const ny = (c[0] - a[0]) / length;
    for (let k = 0; k < Math.max(1, order); k++) {
      const shift = (k - (Math.max(1, order) - 1) / 2) * 5;
      lines.push(
        <line
          key={`${b}-${k}`}
          x1={a[0] + shift * nx}
          y1={a[1] + shift * ny}
          x2={c[0] + shift * nx}
          y2={c[1] + shift * ny}
          className={name}
          strokeDasharray={order === 0 ? '3 3' : undefined}
        />,
      );
    }
  }
  return <g>{lines}</g>;
}

/** A bond shortened at ends that carry a symbol. */
function trimmed(p: Point, q: Point, first: boolean, second: boolean): [Point, Point] {
  const length = Math.hypot(q[0] - p[0], q[1] - p[1]) || 1;
  const cut = 9 / length;
  const along = (t: number): Point => [p[0] + t * (q[0] - p[0]), p[1] + t * (q[1] - p[1])];
  return [along(first ? cut : 0), along(second ? 1 - cut : 1)];
}

function solid(from: Point, to: Point, key: number): ReactElement {
  const length = Math.hypot(to[0] - from[0], to[1] - from[1]) || 1;
  const nx = (-(to[1] - from[1]) / length) * 3.6;
  const ny = ((to[0] - from[0]) / length) * 3.6;
  return (
    <path
      key={key}
      className="drawn-wedge"
      d={`M${from[0]} ${from[1]}L${to[0] + nx} ${to[1] + ny}L${to[0] - nx} ${to[1] - ny}Z`}
    />
  );
}

function hashed(from: Point, to: Point, key: number): ReactElement {
  const length = Math.hypot(to[0] - from[0], to[1] - from[1]) || 1;
  const nx = -(to[1] - from[1]) / length;
  const ny = (to[0] - from[0]) / length;
  const count = Math.max(4, Math.round(length / 3.6));
  const strokes: ReactElement[] = [];
  for (let k = 1; k <= count; k++) {
    const t = k / count;
    const w = 3.8 * t;
    const x = from[0] + t * (to[0] - from[0]);
    const y = from[1] + t * (to[1] - from[1]);
    strokes.push(
      <line key={k} x1={x - w * nx} y1={y - w * ny} x2={x + w * nx} y2={y + w * ny} className="drawn-hash" />,
    );
  }
  return <g key={key}>{strokes}</g>;
}
