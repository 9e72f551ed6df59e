/** The line over the sight: file, entry, intention, relation, and the way to every command. */
import type { ReactElement } from 'react';
import { figure, TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';

export function Header(): ReactElement {
  const controller = useController();
  const { files, model, current, rowCount, intention, progress } = useAppState(
    'files',
    'model',
    'current',
    'rowCount',
    'intention',
    'progress',
  );
  const file = model ? files[model.file] : files[0];
  const running = progress !== null && !progress.done;
  return (
    <header className="head">
      <div className="head-names">
        <h1>{file?.name ?? TEXT.program}</h1>
        {rowCount > 0 && (
          <span className="head-entry">
            {TEXT.entryOf(current + 1, rowCount)}
            {model?.name ? <b>{model.name}</b> : null}
          </span>
        )}
        {rowCount > 0 && (
          <span className="head-intention">
            {intention ? TEXT.intendedFrom(intention.name) : TEXT.intendedNothing}
            {model?.relation ? (
              <b className={`relation relation-${model.relation.replace(' ', '-')}`}>{model.relation}</b>
            ) : null}
          </span>
        )}
      </div>
      {running && (
        <div className="head-progress">
          <progress max={Math.max(1, progress.total)} value={progress.read} aria-label={TEXT.reading} />
          <span>{figure(progress.entries)}</span>
          <button type="button" className="quiet" onClick={() => controller.stop()}>
            {TEXT.stop}
          </button>
        </div>
      )}
      <button type="button" className="find" onClick={() => controller.run('commands')}>
        {TEXT.findCommand}
        <kbd>Ctrl K</kbd>
      </button>
    </header>
  );
}
