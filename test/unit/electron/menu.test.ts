/** The native menus. */
import { expect, test } from 'vitest';
import { accelerator, menuTemplate } from '../../../electron/menu.ts';

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

test('macOS has its application menu first', () => {
  const bar = menuTemplate('darwin', [], { command: () => undefined, openDemo: () => undefined });
  expect(bar[0]).toEqual({ role: 'appMenu' });
});
