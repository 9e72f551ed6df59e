/** The preload (point 20 of Electron's security checklist: no Electron API reaches the page). */
import { expect, test, vi } from 'vitest';

const recorded = vi.hoisted(() => ({
  exposed: {} as Record<string, unknown>,
  listeners: new Map<string, ((...args: unknown[]) => void)[]>(),
  invoked: [] as unknown[][],
}));

vi.mock('electron', () => ({
  contextBridge: {
    exposeInMainWorld: (name: string, value: unknown) => {
      recorded.exposed[name] = value;
    },
  },
  ipcRenderer: {
    invoke: (...args: unknown[]) => {
      recorded.invoked.push(args);
      return Promise.resolve({ ok: true, value: null });
    },
    on: (channel: string, listener: (...args: unknown[]) => void) => {
      recorded.listeners.set(channel, [...(recorded.listeners.get(channel) ?? []), listener]);
    },
    removeListener: (channel: string, listener: unknown) => {
      recorded.listeners.set(
        channel,
        (recorded.listeners.get(channel) ?? []).filter(one => one !== listener),
      );
    },
  },
  webUtils: {
    getPathForFile: (file: File) => (file.name === 'made in the page' ? '' : `/home/x/${file.name}`),
  },
}));

interface Exposed {
  call(method: string, message: unknown, bytes?: Uint8Array): Promise<unknown>;
  onEvent(listener: (...args: unknown[]) => void): () => void;
  fileFor(file: File): Promise<unknown>;
}

test('the page gets three functions, on fixed channels, and never an event of Electron', async () => {
  await import('../../../electron/preload.ts');
  expect(Object.keys(recorded.exposed)).toEqual(['deasilBridge']);
  const bridge = recorded.exposed['deasilBridge'] as Exposed;
  expect(Object.keys(bridge).sort((a, b) => a.localeCompare(b))).toEqual(['call', 'fileFor', 'onEvent']);

  await bridge.call('info', {});
  expect(await bridge.fileFor(new File([], 'made in the page'))).toBeNull();
  await bridge.fileFor(new File([], 'a.sdf'));
  expect(recorded.invoked).toEqual([
    ['deasil:call', 'info', {}, null],
    ['deasil:path', '/home/x/a.sdf'],
  ]);

  const seen: unknown[][] = [];
  const end = bridge.onEvent((...args) => seen.push(args));
  const electronEvent = { sender: 'of Electron' };
  for (const listener of recorded.listeners.get('deasil:event') ?? [])
    listener(electronEvent, { type: 'x' }, 'more');
  expect(seen).toEqual([[{ type: 'x' }]]);
  end();
  expect(recorded.listeners.get('deasil:event')).toEqual([]);
  expect([...recorded.listeners.keys()]).toEqual(['deasil:event']);
});
