/** The native menus, made from the window's own list of commands so that both always offer the same. */
import type { MenuItemConstructorOptions } from 'electron';

/** A command of the window as a menu shows it. */
export interface MenuCommand {
  readonly id: string;
  readonly label: string;
  /** The menu it stands in. */
  readonly menu: string;
  /** Keys as the window names them, "Ctrl+Shift+Z"; null without. */
  readonly keys: string | null;
}

export interface MenuActions {
  /** Has the window run a command. */
  readonly command: (id: string) => void;
  readonly openDemo: () => void;
}

/** The key names of Electron's accelerators where they differ from the window's. */
const KEY_NAMES: Readonly<Record<string, string>> = {
  Ctrl: 'CommandOrControl',
  Mod: 'CommandOrControl',
  ArrowLeft: 'Left',
  ArrowRight: 'Right',
  ArrowUp: 'Up',
  ArrowDown: 'Down',
  '+': 'Plus',
  ' ': 'Space',
};

/** Keys in Electron's notation. */
export function accelerator(keys: string): string {
  return keys
    .split(/\+(?=.)/)
    .map(key => KEY_NAMES[key] ?? (key.length === 1 ? key.toUpperCase() : key))
    .join('+');
}

/**
 * The keys as the menu shows them, left to the page, which knows whether a text field has the keyboard.
 *
 * macOS takes every key that a menu shows for itself: letters alone are not shown there, so that they can be typed.
 */
function keysOf(command: MenuCommand, platform: NodeJS.Platform): MenuItemConstructorOptions {
  if (command.keys === null) return {};
  if (platform === 'darwin' && !/^(Ctrl|Alt)\+/u.test(command.keys)) return {};
  return { accelerator: accelerator(command.keys), registerAccelerator: false };
}

/** The menu bar: the window's commands by menu, with the system's own items where people expect them. */
export function menuTemplate(
  platform: NodeJS.Platform,
  commands: readonly MenuCommand[],
  actions: MenuActions,
): MenuItemConstructorOptions[] {
  const menus = new Map<string, MenuItemConstructorOptions[]>();
  for (const command of commands) {
    const items = menus.get(command.menu) ?? [];
    items.push({
      id: command.id,
      label: command.label,
      ...keysOf(command, platform),
      click: () => {
        actions.command(command.id);
      },
    });
    menus.set(command.menu, items);
  }
  const extend = (menu: string, items: MenuItemConstructorOptions[]): void => {
    const own = menus.get(menu) ?? [];
    menus.set(menu, own.length === 0 ? items : [...own, { type: 'separator' }, ...items]);
  };
  extend('File', [{ role: 'quit' }]);
  extend('Edit', [{ role: 'cut' }, { role: 'copy' }, { role: 'paste' }, { role: 'selectAll' }]);
  extend('View', [
    { role: 'zoomIn' },
    { role: 'zoomOut' },
    { role: 'resetZoom' },
    { role: 'togglefullscreen' },
  ]);
  extend('Help', [
    { id: 'shell-demo', label: 'Open the demonstration', click: actions.openDemo },
    { role: 'about' },
  ]);
  const first = ['File', 'Edit', 'View'];
  const names = [
    ...first,
    ...[...menus.keys()].filter(name => !first.includes(name) && name !== 'Help'),
    'Help',
  ];
  const bar = names.map(
    (name): MenuItemConstructorOptions => ({ label: name, submenu: menus.get(name) ?? [] }),
  );
  return platform === 'darwin' ? [{ role: 'appMenu' }, ...bar] : bar;
}
