/** The Electron host over a faked IPC pair that copies messages as the real one does: the contract, and who may call. */
import { readFileSync, writeFileSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import type { Dialog } from 'electron';
import { describe, expect, test } from 'vitest';
import {
  CALL_CHANNEL,
  createBridge,
  EVENT_CHANNEL,
  PATH_CHANNEL,
  type RendererIpc,
} from '../../electron/bridge.ts';
import { Dialogs } from '../../electron/dialogs.ts';
import { HostService } from '../../electron/host-service.ts';
import { listen } from '../../electron/ipc.ts';
import { electronHost, isElectronBridge } from '../../renderer/host-electron.ts';
import { HostError } from '../../renderer/host-messages.ts';
import { type Harness, hostContract, type Machine } from './host-contract.ts';

interface FakeEvent {
  readonly from: string;
}

type Handler = (event: FakeEvent, ...args: unknown[]) => Promise<unknown>;

/** Both ends of Electron's IPC; messages cross by structured clone. */
class FakeIpc {
  readonly handlers = new Map<string, Handler>();
  readonly listeners = new Map<string, Set<(event: unknown, ...args: unknown[]) => void>>();

  handle(channel: string, handler: Handler): void {
    this.handlers.set(channel, handler);
  }

  async invokeFrom(from: string, channel: string, args: unknown[]): Promise<unknown> {
    const handler = this.handlers.get(channel);
    if (!handler) throw new Error(`No handler registered for '${channel}'`);
    return structuredClone(await handler({ from }, ...structuredClone(args)));
  }

  send(channel: string, message: unknown): void {
    for (const listener of this.listeners.get(channel) ?? []) listener({}, structuredClone(message));
  }

  renderer(from: string): RendererIpc {
    return {
      invoke: (channel, ...args) => this.invokeFrom(from, channel, args),
      on: (channel, listener) => {
        const set = this.listeners.get(channel) ?? new Set();
        this.listeners.set(channel, set.add(listener));
      },
      removeListener: (channel, listener) => this.listeners.get(channel)?.delete(listener),
    };
  }
}

interface ElectronHarness extends Harness {
  readonly ipc: FakeIpc;
  readonly logged: string[];
}

async function start(machine: Machine): Promise<ElectronHarness> {
  const ipc = new FakeIpc();
  const paths = new WeakMap<File, string>();
  const logged: string[] = [];
  let picked: readonly string[] | null = null;
  let confirmed = true;
  let savedPath: string | null = null;
  const dialog = {
    showOpenDialog: () => Promise.resolve({ canceled: picked === null, filePaths: [...(picked ?? [])] }),
    showSaveDialog: (_window: unknown, options: { defaultPath: string }) => {
      savedPath = join(machine.saveFolder, basename(options.defaultPath));
      return Promise.resolve({ canceled: !confirmed, filePath: confirmed ? savedPath : '' });
    },
  } as unknown as Pick<Dialog, 'showOpenDialog' | 'showSaveDialog'>;
  const window = {} as ReturnType<ConstructorParameters<typeof Dialogs>[1]>;
  const dialogs = new Dialogs(dialog, () => window);
  const service = new HostService({
    info: { version: 'test', shell: 'electron', platform: process.platform },
    configFolder: machine.configFolder,
    stateFolder: machine.stateFolder,
    chooseFiles: () => dialogs.chooseFiles(),
    save: (request, bytes) => dialogs.save(request, bytes),
    send: event => {
      ipc.send(EVENT_CHANNEL, event);
    },
    log: message => logged.push(message),
  });
  await service.setStartFiles(machine.files, false);
  listen<FakeEvent>(
    ipc,
    service,
    event => event.from === 'window',
    message => logged.push(message),
  );
  return {
    ipc,
    logged,
    host: electronHost(createBridge(ipc.renderer('window'), file => paths.get(file) ?? '')),
    pick(files) {
      picked = files;
    },
    confirmSave(value) {
      confirmed = value;
    },
    saved: () =>
      Promise.resolve(
        savedPath === null
          ? null
          : { name: basename(savedPath), bytes: new Uint8Array(readFileSync(savedPath)) },
      ),
    dropped(path) {
      const file = new File([readFileSync(path)], basename(path));
      paths.set(file, path);
      return file;
    },
    async openWhileRunning(files) {
      await service.openPaths(files);
    },
    close() {
      service.dispose();
      return Promise.resolve();
    },
  };
}

hostContract('Electron', start);

describe('the Electron host beyond the contract', () => {
  async function withHarness(
    work: (harness: ElectronHarness, folder: string) => Promise<void>,
  ): Promise<void> {
    const folder = await mkdtemp(join(tmpdir(), 'deasil-ipc-'));
    writeFileSync(join(folder, 'a.sdf'), 'a');
    const harness = await start({
      files: [join(folder, 'a.sdf')],
      configFolder: join(folder, 'config'),
      stateFolder: join(folder, 'state'),
      saveFolder: folder,
    });
    try {
      await work(harness, folder);
    } finally {
      await harness.close();
      await rm(folder, { recursive: true, force: true });
    }
  }

  test('a cancelled save is null and writes nothing', () =>
    withHarness(async harness => {
      harness.confirmSave(false);
      const bytes = new Uint8Array([1]);
      expect(await harness.host.save({ name: 'x.svg', bytes, extensions: ['svg'] })).toBeNull();
    }));

  test('a dropped file keeps its path: it can be watched and its session lies beside it', () =>
    withHarness(async (harness, folder) => {
      const path = join(folder, 'b.sdf');
      writeFileSync(path, 'b');
      const file = await harness.host.offerFile(harness.dropped(path));
      await harness.host.writeSession(file.id, '{"b":1}');
      expect(readFileSync(`${path}.deasil.json`, 'utf8')).toBe('{"b":1}');
    }));

  test('a file without a path is handed over by its content', () =>
    withHarness(async harness => {
      const file = await harness.host.offerFile(new File(['made in the page'], 'made.smi'));
      expect(new TextDecoder().decode(await harness.host.read(file.id, 0, 100))).toBe('made in the page');
    }));

  test.each([CALL_CHANNEL, PATH_CHANNEL])('another sender is refused on %s', channel =>
    withHarness(async (harness, folder) => {
      const args = channel === CALL_CHANNEL ? ['startFiles', {}, null] : [join(folder, 'a.sdf')];
      expect(await harness.ipc.invokeFrom('another frame', channel, args)).toMatchObject({
        ok: false,
        error: { code: 'unauthorised' },
      });
      expect(await harness.ipc.invokeFrom('window', channel, args)).toMatchObject({ ok: true });
    }),
  );

  test.each([
    [[]],
    [['startFiles']],
    [['startFiles', { extra: 1 }, null]],
    [['constructor', {}, null]],
    [['__proto__', {}, null]],
    [['read', { id: '../etc/passwd', offset: 0, length: 1 }, null]],
    [['offer', { name: 'x' }, 'not bytes']],
    [['watch', { id: '0'.repeat(32), on: 'yes' }, null]],
    [[{ toString: 'startFiles' }, {}, null]],
  ])('a malformed call is refused: %j', args =>
    withHarness(async harness => {
      expect(await harness.ipc.invokeFrom('window', CALL_CHANNEL, args)).toMatchObject({
        ok: false,
        error: { code: 'bad-request' },
      });
    }),
  );

  test('listens on its own channels only', () =>
    withHarness(async harness => {
      expect([...harness.ipc.handlers.keys()].sort((a, b) => a.localeCompare(b))).toEqual([
        CALL_CHANNEL,
        PATH_CHANNEL,
      ]);
    }));

  test('the page does not take an answer or an event for granted', async () => {
    let emit: (event: unknown) => void = () => undefined;
    const host = electronHost({
      call: () => Promise.resolve({ ok: true, value: [{ id: 'x', name: 1 }] }),
      onEvent(listener) {
        emit = listener;
        return () => undefined;
      },
      fileFor: () => Promise.resolve(null),
    });
    await expect(host.startFiles()).rejects.toThrow(HostError);
    const seen: unknown[] = [];
    host.onEvent(event => seen.push(event));
    expect(() => {
      emit({ type: 'changed', file: '/etc/passwd' });
    }).toThrow(/file/);
    expect(seen).toEqual([]);
  });

  test('only the whole bridge counts as one', () => {
    expect(isElectronBridge({ call: () => 0, onEvent: () => 0, fileFor: () => 0 })).toBe(true);
    for (const other of [undefined, null, {}, { call: () => 0 }, 'call'])
      expect(isElectronBridge(other)).toBe(false);
  });
});
