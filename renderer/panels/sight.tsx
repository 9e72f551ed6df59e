/** The sight with its caption: the canvas, the dial over it, and the sentence that says what one looks at. */
import {
  type KeyboardEvent,
  type PointerEvent,
  type ReactElement,
  useEffect,
  useLayoutEffect,
  useMemo,
  useRef,
} from 'react';
import { caption, unitName } from '../caption.ts';
import { findingsOf } from '../controller.ts';
import { Glyph } from '../glyph.tsx';
import { type SightContent, SightView } from '../sight/view.ts';
import { Surroundings, surroundingsFormat } from '../surroundings/surroundings.ts';
import { measure, TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';
import { DrawingPanel } from './drawing.tsx';

/** A text as a sentence: a capital first, a stop at the end. */
function sentence(text: string): string {
  return text === '' ? '' : `${text.charAt(0).toUpperCase()}${text.slice(1).replace(/\.$/u, '')}.`;
}

/** Radians for one px of dragging, and for one press of an arrow key. */
const DRAG = 0.009;
const PRESS = 0.12;

export function SightPanel({ dark }: { readonly dark: boolean }): ReactElement {
  const controller = useController();
  const state = useAppState('model', 'unit', 'side', 'preferences', 'lit', 'mirror', 'panels', 'files');
  const { model, unit, side, preferences, lit, mirror, files } = state;
  const frame = useRef<HTMLDivElement>(null);
  const canvas = useRef<HTMLCanvasElement>(null);
  const dialSvg = useRef<SVGSVGElement>(null);
  const view = useRef<SightView | null>(null);
  const under = useRef<HTMLDivElement>(null);
  const around = useRef<Surroundings | null>(null);
  const pose = useRef<Parameters<Surroundings['follow']> | null>(null);
  const labelled = model?.docket?.units[unit] ?? null;
  const shown = model?.verdicts[unit] ?? null;
  const molecule = model?.molecule ?? null;
  const inSpace = molecule !== null && molecule.dimension === 3;
  const intended = shown?.verdict === 'inverted' ? shown.intended : null;
  const words =
    molecule && labelled ? caption(molecule, labelled, shown, side) : molecule ? TEXT.wholeModel : '';
  const overlay = useMemo(
    () =>
      preferences.overlay && model?.intended && model.mapping
        ? { molecule: model.intended, mapping: model.mapping }
        : null,
    [model, preferences.overlay],
  );
  const content = useMemo<SightContent | null>(
    () => (molecule && inSpace ? { molecule, labelled, intended, overlay } : null),
    [molecule, inSpace, labelled, intended, overlay],
  );

  useLayoutEffect(() => {
    if (!canvas.current || !dialSvg.current || !frame.current) return undefined;
    const made = new SightView(canvas.current, dialSvg.current, {
      onPick: atom => controller.light(atom),
      onPose: (pivot, turn, z) => {
        pose.current = [pivot.clone(), turn.clone(), z];
        around.current?.follow(pivot, turn, z);
      },
      onSide: next => controller.store.dispatch({ type: 'side', side: next }),
    });
    view.current = made;
    controller.attachSight(made);
    const box = frame.current;
    const watcher = new ResizeObserver(() => {
      made.resize(box.clientWidth, box.clientHeight);
      around.current?.resize();
    });
    watcher.observe(box);
    made.resize(box.clientWidth, box.clientHeight);
    return () => {
      watcher.disconnect();
      controller.attachSight(null);
      made.dispose();
      view.current = null;
    };
  }, [controller]);

  useLayoutEffect(() => {
    const still = !preferences.motion || matchMedia('(prefers-reduced-motion: reduce)').matches;
    const { hydrogens, labels } = preferences;
    view.current?.setLook({ dark, hydrogens, labels, motion: !still, lit, mirror });
  }, [dark, preferences, lit, mirror]);

  useLayoutEffect(() => {
    view.current?.show(content);
  }, [content]);

  const file = model ? files[model.file] : undefined;
  const format = file && molecule?.residues ? surroundingsFormat(file.name) : null;
  const { ribbon } = preferences;
  const surrounded = format !== null && inSpace && !mirror && ribbon;
  const entry = model?.index ?? -1;
  useEffect(() => {
    if (!surrounded || format === null || !under.current) return undefined;
    let current = true;
    const show = async (place: HTMLElement): Promise<void> => {
      around.current ??= await Surroundings.create(place);
      const text = await controller.entryText(entry);
      if (!current) return;
      around.current.show(`${file?.id ?? ''} ${entry}`, text, format, dark);
      around.current.resize();
      if (pose.current) around.current.follow(...pose.current);
    };
    show(under.current).catch((error: unknown) => controller.report(error));
    return () => {
      current = false;
    };
  }, [controller, surrounded, format, entry, file?.id, dark]);

  const last = useRef<{ x: number; y: number; moved: boolean } | null>(null);
  const local = (event: PointerEvent): { x: number; y: number } => {
    const box = frame.current!.getBoundingClientRect();
    return { x: event.clientX - box.left, y: event.clientY - box.top };
  };
  const onDown = (event: PointerEvent): void => {
    if (event.button !== 0) return;
    event.currentTarget.setPointerCapture(event.pointerId);
    last.current = { ...local(event), moved: false };
  };
  const onMove = (event: PointerEvent): void => {
    const from = last.current;
    if (!from) return;
    const to = local(event);
    if (!from.moved && Math.hypot(to.x - from.x, to.y - from.y) < 4) return;
    view.current?.orbit((to.x - from.x) * DRAG, (to.y - from.y) * DRAG);
    last.current = { ...to, moved: true };
  };
  const onUp = (event: PointerEvent): void => {
    const from = last.current;
    last.current = null;
    if (from && !from.moved) view.current?.pick(local(event).x, local(event).y);
  };
  const onKey = (event: KeyboardEvent): void => {
    if (event.shiftKey || event.ctrlKey || event.metaKey || event.altKey) return;
    const turns: Record<string, [number, number]> = {
      ArrowLeft: [-PRESS, 0],
      ArrowRight: [PRESS, 0],
      ArrowUp: [0, -PRESS],
      ArrowDown: [0, PRESS],
    };
    const turn = turns[event.key];
    if (!turn) return;
    event.preventDefault();
    view.current?.orbit(...turn);
  };

  useEffect(() => {
    const box = frame.current;
    if (!box) return undefined;
    const onWheel = (event: WheelEvent): void => {
      event.preventDefault();
      view.current?.zoom(Math.exp(event.deltaY * 0.0012));
    };
    box.addEventListener('wheel', onWheel, { passive: false });
    return () => box.removeEventListener('wheel', onWheel);
  }, []);

  return (
    <section className={`sight${molecule && !inSpace ? ' sight-notation' : ''}`} aria-label={TEXT.sight}>
      <div
        ref={frame}
        className={`sight-frame${inSpace ? '' : ' sight-none'}`}
        role="application"
        aria-label={`${TEXT.sight}. ${TEXT.sightHelp}`}
        tabIndex={0}
        onPointerDown={onDown}
        onPointerMove={onMove}
        onPointerUp={onUp}
        onKeyDown={onKey}
      >
        <div ref={under} className="surroundings" aria-hidden="true" hidden={!surrounded} />
        <canvas ref={canvas} className="sight-canvas" aria-hidden="true" />
        <svg
          ref={dialSvg}
          className="dial"
          role="img"
          aria-label={words === '' ? TEXT.sight : words}
          data-side={side}
        />
        {molecule && labelled && (
          <div className="sight-title">
            <Glyph
              descriptor={labelled.descriptor}
              state={labelled.unit.state}
              firmness={labelled.unit.firmness}
              verdict={shown?.verdict ?? null}
              size={44}
            />
            <span className="sight-letter">{labelled.descriptor ?? '–'}</span>
            <span className="sight-unit">
              <b>{unitName(molecule, labelled)}</b>
              <span>{TEXT.kinds[labelled.unit.kind]}</span>
            </span>
          </div>
        )}
        {side !== 'sight' && inSpace && labelled && (
          <button type="button" className="side-note" onClick={() => controller.run('sight')}>
            {side === 'far' ? TEXT.farSide : 'turned'} · return to the sight <kbd>S</kbd>
          </button>
        )}
        {molecule && !inSpace && <p className="sight-message">{TEXT.noSpace}</p>}
        {model?.error && (
          <div className="sight-message" role="alert">
            <b>{TEXT.unreadable(model.entry, model.error.line)}</b>
            <span>{sentence(model.error.message)}</span>
          </div>
        )}
      </div>
      <div className={`foot${state.panels.drawing && molecule ? ' with-drawing' : ''}`}>
        <div className="caption" tabIndex={0} role="region" aria-label={TEXT.captionLabel}>
          <p>
            {words}
            {model && findingsOf(model, unit).map(text => <b key={text}> {sentence(text)}</b>)}
            {model?.warnings.map(text => (
              <span key={text} className="warning">
                {' '}
                {sentence(text)}
              </span>
            ))}
            {model?.crystal && (
              <span className="crystal">
                {model.crystal.spaceGroup ? <b>{model.crystal.spaceGroup}</b> : null} {TEXT.absoluteStructure}{' '}
                <b>{model.crystal.absoluteStructure.replace('-', ' ')}</b>: {model.crystal.reason}.{' '}
                {molecule?.residues ? null : sentence(model.crystal.standing)}
              </span>
            )}
            {model?.difference ? <span className="warning"> {model.difference}.</span> : null}
            {labelled && model && (model.distorted[unit] ?? null) !== null ? (
              <span className="warning">
                {' '}
                Distorted: firmness {measure(model.distorted[unit]!, 2)} expected.
              </span>
            ) : null}
            {labelled?.warnings.map(text => (
              <span key={text} className="warning">
                {' '}
                {sentence(text)}
              </span>
            ))}
          </p>
        </div>
        {state.panels.drawing && molecule && <DrawingPanel />}
      </div>
    </section>
  );
}
