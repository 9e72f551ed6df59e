/** The native menus. */
import { expect, test } from 'vitest';
import { COMMANDS } from '../../../renderer/commands.ts';
import { accelerator, menuTemplate } from '../../../electron/menu.ts';

const byText = (one: string | undefined, other: string | undefined): number =>
  (one ?? '').localeCompare(other ?? '');

test.each([
  ['Ctrl+O', 'CommandOrControl+O'],
  ['Ctrl+Shift+Z', 'CommandOrControl+Shift+Z'],
  ['ArrowRight', 'Right'],
  ['n', 'N'],
  ['Ctrl++', 'CommandOrControl+Plus'],
  ['+', 'Plus'],
  ['F6', 'F6'],
])('%s is %s to Electron', (keys, expected) => {
  expect(accelerator(keys)).toBe(expected);
});

test('every command stands in its menu and runs by its id; the page keeps the keys', () => {
  const run: string[] = [];
  const commands = [
    { id: 'open', label: 'Open…', menu: 'File', keys: 'Ctrl+O' },
    { id: 'next-unit', label: 'Next unit', menu: 'Unit', keys: 'j' },
    { id: 'far-side', label: 'Turn to the far side', menu: 'Unit', keys: null },
  ];
  const bar = menuTemplate('linux', commands, { command: id => run.push(id), openDemo: () => undefined });
  expect(bar.map(menu => menu.label)).toEqual(['File', 'Edit', 'View', 'Unit', 'Help']);
  const unit = bar[3]?.submenu;
  expect(unit).toMatchObject([
    { label: 'Next unit', accelerator: 'J', registerAccelerator: false },
    { label: 'Turn to the far side' },
  ]);
  for (const item of Array.isArray(unit) ? unit : []) (item.click as () => void)();
  expect(run).toEqual(['next-unit', 'far-side']);
});

test('macOS shows no letter alone, which its menus would take from text fields', () => {
  const commands = [
    { id: 'open', label: 'Open…', menu: 'File', keys: 'Ctrl+O' },
    { id: 'next-unit', label: 'Next unit', menu: 'File', keys: 'j' },
  ];
  const bar = menuTemplate('darwin', commands, { command: () => undefined, openDemo: () => undefined });
  expect(bar[1]?.submenu).toMatchObject([
    { accelerator: 'CommandOrControl+O' },
    { label: 'Next unit' },
    {},
    {},
  ]);
  expect(Array.isArray(bar[1]?.submenu) && bar[1].submenu[1]).not.toHaveProperty('accelerator');
});

test('the menu offers every command of the window once, under keys that Electron understands', () => {
  const bar = menuTemplate('linux', COMMANDS, { command: () => undefined, openDemo: () => undefined });
  const items = bar.flatMap(menu => (Array.isArray(menu.submenu) ? menu.submenu : []));
  const own = items.filter(item => item.id !== undefined && item.id !== 'shell-demo');
  expect(own.map(item => item.id).sort(byText)).toEqual(COMMANDS.map(command => command.id).sort(byText));
  for (const { accelerator: keys } of own) {
    if (keys === undefined) continue;
    expect(keys).toMatch(/^((CommandOrControl|Alt|Shift)\+)*([^a-z\s]|[A-Z][a-z]+|F\d+)$/);
  }
});

test('macOS has its application menu first', () => {
  const bar = menuTemplate('darwin', [], { command: () => undefined, openDemo: () => undefined });
  expect(bar[0]).toEqual({ role: 'appMenu' });
});
