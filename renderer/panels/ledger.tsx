/** The ledger: closed, a strip with one line for each entry; opened, the table of all entries with their findings. */
import { useVirtualizer } from '@tanstack/react-virtual';
import {
  type KeyboardEvent,
  type MouseEvent,
  type ReactElement,
  useEffect,
  useMemo,
  useRef,
  useState,
} from 'react';
import { measure, TEXT, figure } from '../text.ts';
import { useAppState, useController, useThrottled } from '../use-store.ts';
import { type Finding, FINDINGS, type Row } from '../worker/protocol.ts';
import { LEDGER_COLUMNS, type LedgerColumn, ledgerRows } from './ledger-order.ts';

const ROW_HEIGHT = 28;
const URGENCY = Object.fromEntries(FINDINGS.map((finding, k) => [finding, k])) as Record<Finding, number>;
/** Letters of an entry that are written out. */
const MOST_LETTERS = 60;
/** How often strip and table follow a running batch, ms. */
const FOLLOW = 250;
/** Tallest line of the strip, px. */
const LINE = 9;

/** Where the line of each entry begins in a strip of some height. */
function lineHeight(count: number, height: number): number {
  return Math.min(LINE, height / Math.max(1, count));
}

export function LedgerStrip(): ReactElement {
  const controller = useController();
  const {
    rows,
    rowCount: read,
    current,
    preferences,
  } = useAppState('rows', 'rowCount', 'current', 'preferences');
  const rowCount = Math.min(rows.length, useThrottled(read, FOLLOW));
  const canvas = useRef<HTMLCanvasElement>(null);
  const [size, setSize] = useState({ width: 40, height: 400 });
  const doubtful = useMemo(() => {
    let count = 0;
    for (let i = 0; i < rowCount; i++) if (rows[i]!.finding !== 'none') count++;
    return count;
  }, [rows, rowCount]);

  useEffect(() => {
    const node = canvas.current;
    if (!node) return undefined;
    const watcher = new ResizeObserver(() => setSize({ width: node.clientWidth, height: node.clientHeight }));
    watcher.observe(node);
    return () => watcher.disconnect();
  }, []);

  useEffect(() => {
    const node = canvas.current;
    const context = node?.getContext('2d');
    if (!node || !context) return;
    const ratio = window.devicePixelRatio;
    node.width = Math.max(1, Math.round(size.width * ratio));
    node.height = Math.max(1, Math.round(size.height * ratio));
    context.scale(ratio, ratio);
    const style = getComputedStyle(node);
    const ink = style.getPropertyValue('--ink');
    const faint = style.getPropertyValue('--rule');
    const alarm = style.getPropertyValue('--alarm');
    const step = lineHeight(rowCount, size.height);
    const draw = (finding: Finding, y: number): void => {
      const h = Math.max(1, step - (step > 3 ? 2 : 0));
      context.fillStyle = finding === 'inverted' ? alarm : finding === 'none' ? faint : ink;
      const width = finding === 'inverted' ? 1 : finding === 'none' ? 0.36 : 0.7;
      const full = (size.width - 12) * width;
      if (finding === 'flat' || finding === 'missing') {
        // Broken into pieces: told from the rest without colour.
        for (let x = 0; x < full; x += 6) context.fillRect(6 + x, y, 3.5, Math.max(1, h));
      } else context.fillRect(6, y, full, Math.max(finding === 'none' ? 0.6 : 1.5, h));
    };
    // Where several entries fall on one line of pixels, the most urgent finding is the one that shows.
    const least = Math.max(1, step);
    const lines = new Map<number, { finding: Finding; y: number }>();
    for (let i = 0; i < rowCount; i++) {
      const { finding } = rows[i]!;
      const line = Math.floor((i * step) / least);
      const before = lines.get(line);
      if (!before || URGENCY[finding] < URGENCY[before.finding]) lines.set(line, { finding, y: i * step });
    }
    // What matters is drawn last, so that no ordinary line covers it.
    for (const urgent of [false, true]) {
      for (const { finding, y } of lines.values()) {
        if ((finding === 'inverted') === urgent) draw(finding, y);
      }
    }
    if (current >= 0) {
      context.strokeStyle = ink;
      context.lineWidth = 1.5;
      const h = Math.max(5, step);
      context.strokeRect(2, current * step - (h - step) / 2 - 1, size.width - 4, h);
    }
  }, [rows, rowCount, current, size, preferences.theme]);

  const onClick = (event: MouseEvent<HTMLCanvasElement>): void => {
    const y = event.nativeEvent.offsetY;
    const index = Math.floor(y / lineHeight(rowCount, size.height));
    if (index < rowCount) controller.goTo(index);
  };
  return (
    <nav className="strip" aria-label={TEXT.ledger}>
      <button type="button" className="strip-open" onClick={() => controller.run('ledger')}>
        <b>{figure(rowCount)}</b>
        <span className="said"> entries, </span>
        <span className="strip-doubtful">{doubtful === 0 ? '' : figure(doubtful)}</span>
        <span className="said"> {doubtful === 0 ? 'none ' : ''}doubtful: open the ledger</span>
      </button>
      <canvas ref={canvas} aria-hidden="true" onClick={onClick} />
    </nav>
  );
}

export function LedgerTable(): ReactElement {
  const controller = useController();
  const { rows, rowCount: read, current } = useAppState('rows', 'rowCount', 'current');
  const rowCount = Math.min(rows.length, useThrottled(read, FOLLOW));
  const [column, setColumn] = useState<LedgerColumn>('entry');
  const [descending, setDescending] = useState(false);
  const [words, setWords] = useState('');
  const [doubtfulOnly, setDoubtfulOnly] = useState(false);
  const scroller = useRef<HTMLDivElement>(null);
  const shown = useMemo(
    () => ledgerRows(rows.slice(0, rowCount), { column, descending, words, doubtfulOnly }),
    [rows, rowCount, column, descending, words, doubtfulOnly],
  );
  const virtual = useVirtualizer({
    count: shown.length,
    getScrollElement: () => scroller.current,
    estimateSize: () => ROW_HEIGHT,
    overscan: 12,
  });
  const at = shown.findIndex(row => row.index === current);

  useEffect(() => {
    if (at >= 0) virtual.scrollToIndex(at, { align: 'auto' });
    // Only the choice moves the table, not its growth.
  }, [current, words, column, descending, doubtfulOnly]); // oxlint-disable-line

  const onKey = (event: KeyboardEvent): void => {
    const moves: Record<string, number> = {
      ArrowDown: at + 1,
      ArrowUp: at - 1,
      PageDown: at + 15,
      PageUp: at - 15,
      Home: 0,
      End: shown.length - 1,
    };
    const next = moves[event.key];
    if (next === undefined) return;
    event.preventDefault();
    const row = shown[Math.min(shown.length - 1, Math.max(0, next))];
    if (row) controller.goTo(row.index);
  };
  const sortBy = (next: LedgerColumn): void => {
    setDescending(next === column ? !descending : false);
    setColumn(next);
  };
  return (
    <section className="ledger" aria-labelledby="ledger-title">
      <header className="panel-head">
        <h2 id="ledger-title">{TEXT.ledger}</h2>
        <span className="fine">{TEXT.rowsShown(shown.length, rowCount)}</span>
        <button type="button" className="quiet" onClick={() => controller.run('ledger')}>
          {TEXT.close}
        </button>
      </header>
      <div className="ledger-tools">
        <input
          type="search"
          value={words}
          placeholder={TEXT.filter}
          aria-label={TEXT.filter}
          onChange={event => setWords(event.currentTarget.value)}
        />
        <label>
          <input
            type="checkbox"
            checked={doubtfulOnly}
            onChange={event => setDoubtfulOnly(event.currentTarget.checked)}
          />
          {TEXT.findingOnly}
        </label>
      </div>
      <div
        ref={scroller}
        className="ledger-scroll"
        role="grid"
        aria-labelledby="ledger-title"
        aria-rowcount={shown.length + 1}
        aria-activedescendant={at >= 0 ? `row-${current}` : undefined}
        tabIndex={0}
        onKeyDown={onKey}
      >
        <div role="row" aria-rowindex={1} className="ledger-row ledger-columns">
          {LEDGER_COLUMNS.map(one => (
            <span
              key={one}
              role="columnheader"
              aria-sort={one !== column ? 'none' : descending ? 'descending' : 'ascending'}
            >
              <button type="button" onClick={() => sortBy(one)}>
                {TEXT.ledgerColumns[one]}
                <span aria-hidden="true">{one !== column ? '' : descending ? ' ↓' : ' ↑'}</span>
              </button>
            </span>
          ))}
        </div>
        <div role="rowgroup" style={{ height: virtual.getTotalSize(), position: 'relative' }}>
          {virtual.getVirtualItems().map(item => {
            const row = shown[item.index];
            return row ? (
              <LedgerRow
                key={item.key}
                row={row}
                at={item.index}
                top={item.start}
                chosen={row.index === current}
              />
            ) : null;
          })}
        </div>
      </div>
    </section>
  );
}

function LedgerRow({
  row,
  at,
  top,
  chosen,
}: {
  readonly row: Row;
  readonly at: number;
  readonly top: number;
  readonly chosen: boolean;
}): ReactElement {
  const controller = useController();
  return (
    <div
      role="row"
      id={`row-${row.index}`}
      aria-rowindex={at + 2}
      aria-selected={chosen}
      className={`ledger-row finding-${row.finding}`}
      style={{ position: 'absolute', top: 0, left: 0, right: 0, transform: `translateY(${top}px)` }}
      onClick={() => controller.goTo(row.index)}
    >
      <span role="gridcell" className="number">
        {figure(row.entry)}
      </span>
      <span role="gridcell">{row.name}</span>
      <span role="gridcell">{row.formula}</span>
      <span role="gridcell" className="letters">
        {Array.from(row.letters.slice(0, MOST_LETTERS), one => one).map((letter, k) => (
          <span key={k} className={`cell-${row.verdicts[k] ?? '-'}`}>
            {letter}
          </span>
        ))}
      </span>
      <span role="gridcell">{row.relation ?? ''}</span>
      <span role="gridcell">
        {row.error
          ? `line ${row.error.line ?? row.line}: ${row.error.message}`
          : `${TEXT.finding[row.finding]} ${row.doubtful}`}
      </span>
      <span role="gridcell" className="number">
        {row.firmness === null ? '' : measure(row.firmness, 2)}
      </span>
    </div>
  );
}
