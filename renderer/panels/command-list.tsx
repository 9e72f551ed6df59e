/** The searchable list of all commands with their keys. */
import { type KeyboardEvent, type ReactElement, useEffect, useRef, useState } from 'react';
import { findCommands } from '../commands.ts';
import { TEXT } from '../text.ts';
import { useController } from '../use-store.ts';

/** Keys as they are written on a keyboard. */
export function keyText(keys: string): string {
  return keys
    .split(/\+(?=.)/u)
    .map(key => key.replace('Arrow', '').replace(/^[a-z]$/u, letter => letter.toUpperCase()))
    .join(' ');
}

export function CommandList(): ReactElement {
  const controller = useController();
  const dialog = useRef<HTMLDialogElement>(null);
  const [query, setQuery] = useState('');
  const [at, setAt] = useState(0);
  const found = findCommands(query);
  const close = (): void => controller.store.dispatch({ type: 'dialog', dialog: 'none' });

  useEffect(() => {
    dialog.current?.showModal();
  }, []);
  useEffect(() => {
    dialog.current?.querySelector('[aria-selected="true"]')?.scrollIntoView({ block: 'nearest' });
  }, [at, query]);

  const run = (index: number): void => {
    const command = found[index];
    if (!command) return;
    close();
    controller.run(command.id);
  };
  const onKey = (event: KeyboardEvent): void => {
    const move: Record<string, number> = { ArrowDown: 1, ArrowUp: -1, PageDown: 8, PageUp: -8 };
    const by = move[event.key];
    if (by !== undefined) {
      event.preventDefault();
      setAt(Math.min(found.length - 1, Math.max(0, at + by)));
    } else if (event.key === 'Enter') {
      event.preventDefault();
      run(at);
    }
  };
  return (
    <dialog ref={dialog} className="sheet" aria-label={TEXT.findCommand} onClose={close}>
      <input
        role="combobox"
        aria-label={TEXT.findCommand}
        aria-expanded="true"
        aria-controls="command-options"
        aria-activedescendant={found.length > 0 ? `command-${at}` : undefined}
        placeholder={TEXT.findCommand}
        value={query}
        autoFocus
        onChange={event => {
          setQuery(event.currentTarget.value);
          setAt(0);
        }}
        onKeyDown={onKey}
      />
      <ul id="command-options" role="listbox" aria-label="Commands" className="commands">
        {found.map((command, k) => (
          <li
            key={command.id}
            id={`command-${k}`}
            role="option"
            aria-selected={k === at}
            onClick={() => run(k)}
          >
            <span className="fine command-menu">{command.menu}</span>
            <span>{command.label.replace('…', '')}</span>
            {command.keys !== null && <kbd>{keyText(command.keys)}</kbd>}
          </li>
        ))}
      </ul>
      {found.length === 0 && <p className="fine padded">{TEXT.noCommand}</p>}
    </dialog>
  );
}
