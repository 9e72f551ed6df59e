/** The docket: every stereogenic unit of the model with glyph, letter, atoms and verdict; and the judgement of the chosen one. */
import { useVirtualizer } from '@tanstack/react-virtual';
import { type KeyboardEvent, type ReactElement, useEffect, useRef } from 'react';
import { unitName } from '../caption.ts';
import type { CommandId } from '../commands.ts';
import { findingsOf, isDoubtful } from '../controller.ts';
import { Glyph } from '../glyph.tsx';
import { type Mark, judgementOf, unitKey } from '../store.ts';
import { measure, TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';

/** Height of a row, px. */
const ROW_HEIGHT = 31;

export function DocketPanel(): ReactElement {
  const controller = useController();
  const state = useAppState('model', 'unit', 'files', 'present');
  const { model, unit } = state;
  const list = useRef<HTMLUListElement>(null);
  const units = model?.docket?.units ?? [];

  const virtual = useVirtualizer({
    count: units.length,
    getScrollElement: () => list.current,
    estimateSize: () => ROW_HEIGHT,
    overscan: 10,
  });

  useEffect(() => {
    virtual.scrollToIndex(unit, { align: 'auto' });
    // Only the choice moves the list.
  }, [unit, model]); // oxlint-disable-line

  const onKey = (event: KeyboardEvent): void => {
    const steps: Record<string, number> = {
      ArrowDown: unit + 1,
      ArrowUp: unit - 1,
      Home: 0,
      End: units.length - 1,
    };
    const next = steps[event.key];
    if (next === undefined || event.shiftKey) return;
    event.preventDefault();
    controller.selectUnit(Math.min(units.length - 1, Math.max(0, next)));
  };

  return (
    <section className="panel docket" aria-labelledby="docket-title">
      <header className="panel-head">
        <h2 id="docket-title">{TEXT.docket}</h2>
        <span className="fine">{TEXT.unitCount(units.length)}</span>
      </header>
      {units.length > 0 && (
        <div className="unit unit-columns" aria-hidden="true">
          <span className="unit-column-name">{TEXT.docketColumns.unit}</span>
          <span className="unit-firmness">{TEXT.docketColumns.firmness}</span>
          <span>{TEXT.docketColumns.verdict}</span>
        </div>
      )}
      {units.length === 0 && <p className="fine padded">{TEXT.noUnits}</p>}
      {units.length > 0 && (
        <ul
          ref={list}
          role="listbox"
          aria-labelledby="docket-title"
          aria-activedescendant={`unit-${unit}`}
          tabIndex={0}
          onKeyDown={onKey}
          className="units"
          style={{ height: units.length * ROW_HEIGHT }}
        >
          <li role="presentation" style={{ height: virtual.getTotalSize() }} />
          {virtual.getVirtualItems().map(({ index: u, start }) => {
            const labelled = units[u];
            if (!labelled) return null;
            const shown = model?.verdicts[u];
            const verdict = shown?.verdict ?? null;
            const judgement = model ? judgementOf(state, unitKey(model, u, state.files)) : null;
            const doubtful = model !== null && isDoubtful(model, u);
            return (
              <li
                key={u}
                id={`unit-${u}`}
                role="option"
                aria-selected={u === unit}
                aria-setsize={units.length}
                aria-posinset={u + 1}
                className={`unit${doubtful ? ' doubtful' : ''}`}
                style={{ transform: `translateY(${start}px)` }}
                onClick={() => controller.selectUnit(u)}
              >
                <Glyph
                  descriptor={labelled.descriptor}
                  state={labelled.unit.state}
                  firmness={labelled.unit.firmness}
                  verdict={verdict}
                />
                <span className="letter">{labelled.descriptor ?? '–'}</span>
                <span className="unit-name">
                  {model?.molecule ? unitName(model.molecule, labelled) : ''}
                  <span className="fine">
                    {labelled.unit.labile === null ? '' : ' labile'}
                    <span className="said">, {TEXT.kinds[labelled.unit.kind]}</span>
                  </span>
                </span>
                <span className="unit-firmness" title="Firmness">
                  {labelled.unit.firmness === null ? '' : measure(labelled.unit.firmness, 2)}
                </span>
                <span className={`verdict verdict-${verdict ?? labelled.unit.state}`}>
                  {verdict !== null && verdict !== 'open'
                    ? TEXT.verdict[verdict]
                    : labelled.unit.state === 'clear'
                      ? model && findingsOf(model, u).length > 0
                        ? TEXT.residueFinding
                        : verdict === 'open'
                          ? TEXT.verdict.open
                          : ''
                      : labelled.unit.state}
                </span>
                <span className="unit-mark">{judgement?.mark ? MARK_SIGNS[judgement.mark] : ''}</span>
                {judgement?.mark && <span className="said">{TEXT.marks[judgement.mark]}</span>}
              </li>
            );
          })}
        </ul>
      )}
      {model && model.absent.length > 0 && (
        <ul className="absent" aria-label="Intended units that the model lacks">
          {model.absent.map((unit, k) => (
            <li key={k}>
              <Glyph descriptor={null} state="unspecified" firmness={null} verdict="missing" />
              <span>
                intended {unit.intended ?? TEXT.kinds[unit.kind]}: {TEXT.verdict[unit.verdict]}
              </span>
            </li>
          ))}
        </ul>
      )}
      {units.length > 0 && <JudgementForm />}
    </section>
  );
}

const MARK_SIGNS: Readonly<Record<Mark, string>> = { accepted: '✓', rejected: '✗', question: '?' };

const MARKS: readonly { readonly mark: Mark; readonly command: CommandId; readonly label: string }[] = [
  { mark: 'accepted', command: 'accept', label: 'Accept' },
  { mark: 'rejected', command: 'reject', label: 'Reject' },
  { mark: 'question', command: 'question', label: 'Question' },
];

function JudgementForm(): ReactElement | null {
  const controller = useController();
  const state = useAppState('model', 'unit', 'files', 'present');
  const { model, unit, files } = state;
  const field = useRef<HTMLInputElement>(null);
  useEffect(() => {
    controller.onRemark(() => field.current?.focus());
    return () => controller.onRemark(null);
  }, [controller]);
  const labelled = model?.docket?.units[unit];
  if (!model?.molecule || !labelled) return null;
  const key = unitKey(model, unit, files);
  const { mark, remark } = judgementOf(state, key);
  return (
    <div className="judgement">
      <div role="group" aria-label={TEXT.markLegend} className="marks">
        {MARKS.map(one => (
          <button
            key={one.mark}
            type="button"
            aria-pressed={mark === one.mark}
            onClick={() => controller.run(one.command)}
          >
            <span aria-hidden="true">{MARK_SIGNS[one.mark]}</span> {one.label}
          </button>
        ))}
      </div>
      <input
        key={`${key}|${remark}`}
        ref={field}
        defaultValue={remark}
        placeholder={TEXT.remark}
        aria-label={TEXT.remarkOf(unitName(model.molecule, labelled))}
        maxLength={2000}
        onBlur={event => controller.judge({ remark: event.currentTarget.value })}
        onKeyDown={event => {
          if (event.key === 'Enter' || event.key === 'Escape') event.currentTarget.blur();
        }}
      />
    </div>
  );
}
