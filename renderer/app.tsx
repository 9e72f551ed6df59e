/** The window: ledger at the edge, the sight with its caption in the middle, docket and ladder beside it. */
import { type ReactElement, useEffect, useState } from 'react';
import { commandOn, isBare, keysOf } from './commands.ts';
import { type Controller, isDark } from './controller.ts';
import { CommandList } from './panels/command-list.tsx';
import { DocketPanel } from './panels/docket.tsx';
import { EmptyState } from './panels/empty.tsx';
import { Header } from './panels/header.tsx';
import { IntendDialog } from './panels/intend-dialog.tsx';
import { LadderPanel } from './panels/ladder.tsx';
import { LedgerStrip, LedgerTable } from './panels/ledger.tsx';
import { Notices } from './panels/notices.tsx';
import { SightPanel } from './panels/sight.tsx';
import { TEXT } from './text.ts';
import { ControllerContext, useAppState, useController, useDerived } from './use-store.ts';

export function App({ controller }: { readonly controller: Controller }): ReactElement {
  return (
    <ControllerContext value={controller}>
      <Window />
    </ControllerContext>
  );
}

/** Whether the keyboard writes text at the moment. */
function isWriting(target: EventTarget | null): boolean {
  return (
    target instanceof HTMLElement &&
    (target.isContentEditable || /^(INPUT|TEXTAREA|SELECT)$/u.test(target.tagName))
  );
}

function useKeys(controller: Controller): void {
  useEffect(() => {
    const onKey = (event: KeyboardEvent): void => {
      const keys = keysOf(event);
      const id = commandOn(keys);
      if (id === null) return;
      const { dialog, preferences } = controller.store.get();
      if (isBare(keys) && (isWriting(event.target) || dialog !== 'none' || !preferences.singleKeys)) return;
      if (isWriting(event.target) && (id === 'undo' || id === 'redo')) return;
      event.preventDefault();
      controller.run(id);
    };
    window.addEventListener('keydown', onKey);
    return () => window.removeEventListener('keydown', onKey);
  }, [controller]);
}

function useIncoming(controller: Controller): boolean {
  const [over, setOver] = useState(false);
  useEffect(() => {
    const onDrag = (event: DragEvent): void => {
      event.preventDefault();
      setOver(true);
    };
    const onLeave = (event: DragEvent): void => {
      if (event.relatedTarget === null) setOver(false);
    };
    const onDrop = (event: DragEvent): void => {
      event.preventDefault();
      setOver(false);
      const files = [...(event.dataTransfer?.files ?? [])];
      if (files.length > 0) controller.offer(files).catch(() => undefined);
      else controller.paste(event.dataTransfer?.getData('text/plain') ?? '').catch(() => undefined);
    };
    const onPaste = (event: ClipboardEvent): void => {
      if (isWriting(event.target)) return;
      const files = [...(event.clipboardData?.files ?? [])];
      if (files.length > 0) controller.offer(files).catch(() => undefined);
      else controller.paste(event.clipboardData?.getData('text/plain') ?? '').catch(() => undefined);
    };
    window.addEventListener('dragover', onDrag);
    window.addEventListener('dragleave', onLeave);
    window.addEventListener('drop', onDrop);
    window.addEventListener('paste', onPaste);
    return () => {
      window.removeEventListener('dragover', onDrag);
      window.removeEventListener('dragleave', onLeave);
      window.removeEventListener('drop', onDrop);
      window.removeEventListener('paste', onPaste);
    };
  }, [controller]);
  return over;
}

/** Follows the theme that is chosen, or the system's. */
function useDark(theme: 'system' | 'light' | 'dark'): boolean {
  const [dark, setDark] = useState(() => isDark(theme));
  useEffect(() => {
    const query = matchMedia('(prefers-color-scheme: dark)');
    const update = (): void => setDark(isDark(theme));
    update();
    query.addEventListener('change', update);
    return () => query.removeEventListener('change', update);
  }, [theme]);
  useEffect(() => {
    document.documentElement.dataset['paper'] = dark ? 'dark' : 'light';
  }, [dark]);
  return dark;
}

/** What a screen reader is told. */
function Said(): ReactElement {
  const { announcement } = useAppState('announcement');
  return (
    <div className="said" role="status" aria-live="polite">
      {announcement}
    </div>
  );
}

function Window(): ReactElement {
  const controller = useController();
  const { panels, preferences, dialog } = useAppState('panels', 'preferences', 'dialog');
  const dark = useDark(preferences.theme);
  useKeys(controller);
  const dropping = useIncoming(controller);
  const hasModel = useDerived(state => state.model !== null);
  const hasRows = useDerived(state => state.rowCount > 0);
  const idle = useDerived(state => state.progress === null || (state.progress.done && state.rowCount === 0));
  const aside = hasModel && (panels.docket || panels.ladder);
  return (
    <div
      className={`window${dropping ? ' dropping' : ''}${panels.ledger ? ' ledger-open' : ''}${aside ? '' : ' no-aside'}`}
    >
      {hasRows && !panels.ledger && <LedgerStrip />}
      {hasRows && panels.ledger && <LedgerTable />}
      <main className="middle">
        <Header />
        <Notices />
        {!hasModel && idle ? <EmptyState /> : <SightPanel dark={dark} />}
        <p className="limits">{TEXT.limits}</p>
      </main>
      {aside && (
        <div className="aside">
          {panels.docket && <DocketPanel />}
          {panels.ladder && <LadderPanel />}
        </div>
      )}
      {dialog === 'commands' && <CommandList />}
      {dialog === 'intend' && <IntendDialog />}
      <Said />
    </div>
  );
}
