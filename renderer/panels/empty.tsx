/** What stands where the sight will be before anything is open: what to do, and what was opened lately. */
import { type ReactElement, useEffect, useState } from 'react';
import { Glyph } from '../glyph.tsx';
import type { HostFile } from '../host.ts';
import { TEXT } from '../text.ts';
import { useController } from '../use-store.ts';

export function EmptyState(): ReactElement {
  const controller = useController();
  const [recent, setRecent] = useState<readonly HostFile[]>([]);
  useEffect(() => {
    controller.recent().then(setRecent, () => setRecent([]));
  }, [controller]);
  return (
    <section className="empty" aria-labelledby="empty-title">
      <Glyph descriptor="R" state="clear" firmness={0.5} verdict={null} size={96} />
      <h2 id="empty-title">{TEXT.empty.title}</h2>
      <p>{TEXT.empty.body}</p>
      <p className="fine">{TEXT.empty.formats}</p>
      <button type="button" className="strong" onClick={() => controller.run('open')}>
        {TEXT.empty.open}
      </button>
      {recent.length > 0 && (
        <>
          <h3>{TEXT.empty.recent}</h3>
          <ul className="recent">
            {recent.slice(0, 8).map(file => (
              <li key={file.id}>
                <button
                  type="button"
                  className="quiet"
                  onClick={() => {
                    controller.openFiles([file]).catch(() => undefined);
                  }}
                >
                  {file.name}
                </button>
              </li>
            ))}
          </ul>
        </>
      )}
    </section>
  );
}
