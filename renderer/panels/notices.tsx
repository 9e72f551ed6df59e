/** What a person must know that belongs to the files as a whole, and what a rewritten file changed. */
import type { ReactElement } from 'react';
import { TEXT } from '../text.ts';
import { useAppState, useController } from '../use-store.ts';

export function Notices(): ReactElement | null {
  const { store } = useController();
  const { problems, changes } = useAppState('problems', 'changes');
  if (problems.length === 0 && changes.length === 0) return null;
  return (
    <section className="notices" role="alert" aria-label="Notices">
      <ul>
        {problems.map(text => (
          <li key={text}>{text}</li>
        ))}
        {changes.length > 0 && <li className="notice-head">{TEXT.changedHand}</li>}
        {changes.map(text => (
          <li key={text}>{text}</li>
        ))}
      </ul>
      <button type="button" className="quiet" onClick={() => store.dispatch({ type: 'dismiss' })}>
        {TEXT.dismiss}
      </button>
    </section>
  );
}
