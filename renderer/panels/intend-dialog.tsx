/** Asks for the intended configuration as text. */
import { type FormEvent, type ReactElement, useEffect, useRef } from 'react';
import { TEXT } from '../text.ts';
import { useController } from '../use-store.ts';

export function IntendDialog(): ReactElement {
  const controller = useController();
  const dialog = useRef<HTMLDialogElement>(null);
  const field = useRef<HTMLInputElement>(null);
  useEffect(() => {
    dialog.current?.showModal();
  }, []);
  const close = (): void => controller.store.dispatch({ type: 'dialog', dialog: 'none' });
  const apply = (event: FormEvent): void => {
    event.preventDefault();
    controller.intendText(field.current?.value ?? '');
  };
  return (
    <dialog ref={dialog} className="sheet" aria-labelledby="intend-title" onClose={close}>
      <form onSubmit={apply}>
        <h2 id="intend-title">{TEXT.pasteTitle}</h2>
        <p className="fine" id="intend-help">
          {TEXT.pasteBody}
        </p>
        <input ref={field} aria-labelledby="intend-title" aria-describedby="intend-help" autoFocus />
        <div className="sheet-buttons">
          <button type="button" className="quiet" onClick={close}>
            {TEXT.cancel}
          </button>
          <button type="submit" className="strong">
            {TEXT.apply}
          </button>
        </div>
      </form>
    </dialog>
  );
}
