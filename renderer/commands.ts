/** Every action of the window in one list, from which menus, keys and the searchable list of commands are made. */

export type CommandMenu = 'File' | 'Edit' | 'View' | 'Unit' | 'Entry';

export interface Command {
  readonly id: CommandId;
  readonly label: string;
  readonly menu: CommandMenu;
  /** Keys as in "Ctrl+Shift+Z"; null without. A single letter acts only outside text fields and can be switched off. */
  readonly keys: string | null;
}

const LIST = [
  ['open', 'Open files…', 'File', 'Ctrl+O'],
  ['intend', 'State the intended configuration…', 'File', 'Ctrl+I'],
  ['intend-file', 'Take the intended configuration from a file…', 'File', null],
  ['intend-nothing', 'Withdraw the intended configuration', 'File', null],
  ['record-html', 'Save the record…', 'File', 'Ctrl+S'],
  ['record-csv', 'Save the record as a table…', 'File', null],
  ['save-agreeing', 'Save the entries that agree…', 'File', null],
  ['save-inverted', 'Save the inverted entries…', 'File', null],
  ['save-figure', 'Save the sight as a figure…', 'File', 'Ctrl+Shift+S'],
  ['print', 'Print', 'File', 'Ctrl+P'],
  ['undo', 'Undo', 'Edit', 'Ctrl+Z'],
  ['redo', 'Redo', 'Edit', 'Ctrl+Shift+Z'],
  ['accept', 'Accept the unit', 'Edit', 'a'],
  ['reject', 'Reject the unit', 'Edit', 'x'],
  ['question', 'Question the unit', 'Edit', 'q'],
  ['remark', 'Write a remark', 'Edit', 'r'],
  ['next-unit', 'Next unit', 'Unit', 'j'],
  ['previous-unit', 'Previous unit', 'Unit', 'k'],
  ['next-doubtful', 'Next doubtful unit', 'Unit', 'd'],
  ['sight', 'Return to the sight', 'Unit', 's'],
  ['far-side', 'Turn to the far side', 'Unit', 'f'],
  ['mirror', 'Show the mirror image beside it', 'Unit', 'm'],
  ['next-atom', 'Next atom of the unit', 'Unit', 'Shift+ArrowRight'],
  ['previous-atom', 'Previous atom of the unit', 'Unit', 'Shift+ArrowLeft'],
  ['turn-left', 'Turn the model left', 'Unit', null],
  ['turn-right', 'Turn the model right', 'Unit', null],
  ['nearer', 'Nearer', 'Unit', '+'],
  ['further', 'Further', 'Unit', '-'],
  ['next-entry', 'Next entry', 'Entry', ']'],
  ['previous-entry', 'Previous entry', 'Entry', '['],
  ['next-doubtful-entry', 'Next doubtful entry', 'Entry', 'Shift+D'],
  ['first-entry', 'First entry', 'Entry', null],
  ['last-entry', 'Last entry', 'Entry', null],
  ['ledger', 'Show or hide the ledger', 'View', 'l'],
  ['docket', 'Show or hide the docket', 'View', null],
  ['ladder', 'Show or hide the ladder', 'View', null],
  ['drawing', 'Show or hide the drawing', 'View', 'w'],
  ['hydrogens', 'Show or hide hydrogens away from the unit', 'View', 'h'],
  ['overlay', 'Lay the intended arrangement over the unit, or lift it', 'View', 'i'],
  ['ribbon', 'Show or hide the trace of the chain', 'View', 'c'],
  ['labels', 'Show or hide atom labels', 'View', 'b'],
  ['theme', 'Switch between light and dark', 'View', null],
  ['motion', 'Switch movement on or off', 'View', null],
  ['single-keys', 'Switch single-letter keys on or off', 'View', null],
  ['commands', 'Find a command', 'View', 'Ctrl+K'],
] as const;

export type CommandId = (typeof LIST)[number][0];

export const COMMANDS: readonly Command[] = LIST.map(([id, label, menu, keys]) => ({
  id,
  label,
  menu,
  keys,
}));

const KEYS = new Map<string, CommandId>(
  COMMANDS.filter(command => command.keys !== null).map(command => [command.keys!, command.id]),
);

export function isCommandId(id: string): id is CommandId {
  return COMMANDS.some(command => command.id === id);
}

/** The keys of an event in the notation of the list. */
export function keysOf(event: {
  readonly key: string;
  readonly ctrlKey: boolean;
  readonly metaKey: boolean;
  readonly shiftKey: boolean;
  readonly altKey: boolean;
}): string {
  const single = event.key.length === 1;
  const letter = single && event.key.toLowerCase() !== event.key.toUpperCase();
  const upper = event.ctrlKey || event.metaKey || event.shiftKey;
  const main = letter ? (upper ? event.key.toUpperCase() : event.key.toLowerCase()) : event.key;
  const parts: string[] = [];
  if (event.ctrlKey || event.metaKey) parts.push('Ctrl');
  if (event.altKey) parts.push('Alt');
  if (event.shiftKey && (letter || !single)) parts.push('Shift');
  parts.push(main);
  return parts.join('+');
}

/** The command on some keys; null when there is none. */
export function commandOn(keys: string): CommandId | null {
  return KEYS.get(keys) ?? null;
}

/** Whether keys act without Ctrl or Alt, so that they must leave text fields alone. */
export function isBare(keys: string): boolean {
  return !/^(Ctrl|Alt)\+/u.test(keys);
}

/** Commands whose words hold all the words asked for, in the order of the list. */
export function findCommands(query: string): readonly Command[] {
  const words = query
    .toLowerCase()
    .split(/\s+/u)
    .filter(word => word !== '');
  return COMMANDS.filter(({ label, menu }) => {
    const text = `${label} ${menu}`.toLowerCase();
    return words.every(word => text.includes(word));
  });
}
