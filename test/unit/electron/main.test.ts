/**
 * The Electron shell's main process, run whole against a stand-in for Electron that records what it is told.
 *
 * The points follow Electron's published security checklist (electronjs.org/docs/latest/tutorial/security); the number
 * of each point is given where a test holds it.
 */
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test, vi } from 'vitest';

type Listener = (...args: unknown[]) => unknown;

/** Collects the listeners of an emitter. */
class Emitter {
  readonly listeners = new Map<string, Listener[]>();
  on(name: string, listener: Listener): this {
    this.listeners.set(name, [...(this.listeners.get(name) ?? []), listener]);
    return this;
  }
  once(name: string, listener: Listener): this {
    return this.on(name, listener);
  }
  emit(name: string, ...args: unknown[]): void {
    for (const listener of this.listeners.get(name) ?? []) listener(...args);
  }
}

interface MenuItem {
  readonly id?: string;
  readonly label?: string;
  readonly role?: string;
  readonly submenu?: MenuItem[];
  readonly click?: () => void;
}

const recorded = vi.hoisted(() => ({
  order: [] as string[],
  windowOptions: [] as Record<string, unknown>[],
  sent: [] as unknown[][],
  loaded: [] as string[],
  schemes: [] as unknown[],
  pageHandlers: new Map<string, (request: Request) => Promise<Response>>(),
  handlers: new Map<string, (...args: unknown[]) => Promise<unknown>>(),
  session: {} as Record<string, (...args: unknown[]) => unknown>,
  menu: [] as unknown[],
  program: '',
  lock: true,
  quit: 0,
}));

vi.mock('electron', () => {
  class FakeApp extends Emitter {
    isPackaged = false;
    enableSandbox(): void {
      recorded.order.push('sandbox');
    }
    requestSingleInstanceLock(): boolean {
      return recorded.lock;
    }
    getAppPath(): string {
      return recorded.program;
    }
    getVersion(): string {
      return '1.2.3';
    }
    whenReady(): Promise<void> {
      recorded.order.push('ready');
      return Promise.resolve();
    }
    quit(): void {
      recorded.quit++;
    }
    exit(code: number): void {
      throw new Error(`the shell gave up with ${code}`);
    }
  }
  class FakeContents extends Emitter {
    send(...args: unknown[]): void {
      recorded.sent.push(args);
    }
    openHandler: Listener | null = null;
    setWindowOpenHandler(handler: Listener): void {
      this.openHandler = handler;
    }
    reload(): void {}
  }
  class FakeWindow extends Emitter {
    readonly webContents = new FakeContents();
    constructor(options: Record<string, unknown>) {
      super();
      recorded.windowOptions.push(options);
    }
    loadURL(address: string): Promise<void> {
      recorded.loaded.push(address);
      return Promise.resolve();
    }
    show(): void {}
    isMinimized(): boolean {
      return true;
    }
    restore(): void {
      recorded.order.push('restored');
    }
    focus(): void {
      recorded.order.push('focused');
    }
  }
  const keep =
    (name: string) =>
    (handler: Listener): void => {
      recorded.session[name] = handler;
    };
  return {
    app: new FakeApp(),
    BrowserWindow: FakeWindow,
    dialog: {},
    ipcMain: {
      handle: (channel: string, handler: (...args: unknown[]) => Promise<unknown>) => {
        recorded.handlers.set(channel, handler);
      },
    },
    Menu: {
      buildFromTemplate: (template: unknown[]) => template,
      setApplicationMenu: (template: unknown[]) => {
        recorded.menu = template;
      },
    },
    protocol: {
      registerSchemesAsPrivileged: (schemes: unknown[]) => {
        recorded.order.push('scheme');
        recorded.schemes = schemes;
      },
      handle: (scheme: string, handler: (request: Request) => Promise<Response>) => {
        recorded.pageHandlers.set(scheme, handler);
      },
    },
    session: {
      defaultSession: {
        setPermissionRequestHandler: keep('request'),
        setPermissionCheckHandler: keep('check'),
        setDevicePermissionHandler: keep('device'),
        webRequest: { onBeforeRequest: keep('load') },
      },
    },
  };
});

let folder: string;
const earlier = {
  argv: process.argv,
  config: process.env['XDG_CONFIG_HOME'],
  state: process.env['XDG_STATE_HOME'],
};

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-main-'));
  mkdirSync(join(folder, 'elsewhere'));
  writeFileSync(join(folder, 'poses.sdf'), 'poses');
  writeFileSync(join(folder, 'elsewhere', 'second.cif'), 'data_second');
  recorded.program = join(folder, 'program');
  mkdirSync(join(recorded.program, 'dist', 'window'), { recursive: true });
  mkdirSync(join(recorded.program, 'assets', 'demo'), { recursive: true });
  writeFileSync(join(recorded.program, 'package.json'), '{}');
  writeFileSync(
    join(recorded.program, 'dist', 'window', 'index.html'),
    '<!doctype html><title>Deasil</title>',
  );
  writeFileSync(join(recorded.program, 'assets', 'demo', 'models.sdf'), 'demo');
  process.argv = ['electron', '.', '--no-sandbox', join(folder, 'poses.sdf')];
  process.env['XDG_CONFIG_HOME'] = join(folder, 'config');
  process.env['XDG_STATE_HOME'] = join(folder, 'state');
  await import('../../../electron/main.ts');
  await vi.waitUntil(() => recorded.loaded.length > 0);
});

afterAll(() => {
  process.argv = earlier.argv;
  for (const [name, value] of [
    ['XDG_CONFIG_HOME', earlier.config],
    ['XDG_STATE_HOME', earlier.state],
  ] as const) {
    if (value === undefined) delete process.env[name];
    else process.env[name] = value;
  }
  rmSync(folder, { recursive: true, force: true });
});

const window = { senderFrame: { url: 'app://deasil/', parent: null } };

async function call(event: unknown, method: string, message: unknown): Promise<unknown> {
  return await recorded.handlers.get('deasil:call')?.(event, method, message, null);
}

describe("Electron's security checklist", () => {
  test('1, 6, 7, 15: the page comes from the application itself, over its own scheme with a strict policy', async () => {
    expect(recorded.loaded).toEqual(['app://deasil/']);
    const handler = recorded.pageHandlers.get('app');
    const page = await handler?.(new Request('app://deasil/'));
    expect(page?.status).toBe(200);
    const policy = page?.headers.get('content-security-policy') ?? '';
    expect(policy).toContain("default-src 'none'");
    expect(policy).not.toContain('unsafe');
    for (const address of [
      'app://deasil/../../package.json',
      'app://deasil/%2e%2e/package.json',
      'app://other/',
      'app://deasil/electron/main.js',
    ]) {
      expect((await handler?.(new Request(address)))?.status).toBe(404);
    }
    expect((await handler?.(new Request('app://deasil/', { method: 'POST' })))?.status).toBe(404);
  });

  test('2, 3, 4, 6, 8, 9, 11: no Node in the page, isolation, sandbox, web security, nothing experimental, no webview', () => {
    const preferences = recorded.windowOptions[0]?.['webPreferences'];
    expect(preferences).toMatchObject({
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      contextIsolation: true,
      sandbox: true,
      webSecurity: true,
      allowRunningInsecureContent: false,
      experimentalFeatures: false,
      webviewTag: false,
    });
    expect(preferences).not.toHaveProperty('enableBlinkFeatures');
    expect(recorded.order.indexOf('sandbox')).toBeLessThan(recorded.order.indexOf('ready'));
    expect(recorded.order.indexOf('scheme')).toBeLessThan(recorded.order.indexOf('ready'));
  });

  test('5: permissions are refused, but for the clipboard of the window itself', () => {
    const asked = (permission: string, requestingUrl: string): boolean => {
      let granted = false;
      const answer = (value: boolean): void => {
        granted = value;
      };
      recorded.session['request']?.({}, permission, answer, { requestingUrl });
      return granted;
    };
    for (const permission of [
      'media',
      'geolocation',
      'notifications',
      'midi',
      'usb',
      'serial',
      'hid',
      'openExternal',
      'fullscreen',
      'display-capture',
      'fileSystem',
    ]) {
      expect(asked(permission, 'app://deasil/')).toBe(false);
      expect(recorded.session['check']?.({}, permission, 'app://deasil')).toBe(false);
    }
    expect(asked('clipboard-read', 'app://deasil/')).toBe(true);
    expect(asked('clipboard-read', 'https://evil.example/')).toBe(false);
    expect(recorded.session['check']?.({}, 'clipboard-sanitized-write', 'app://deasil.evil.example')).toBe(
      false,
    );
    expect(recorded.session['device']?.({})).toBe(false);
  });

  test('1: nothing is loaded from elsewhere', () => {
    const cancelled = (url: string): boolean => {
      let cancel = true;
      recorded.session['load']?.({ url }, (answer: { cancel: boolean }) => {
        cancel = answer.cancel;
      });
      return cancel;
    };
    for (const url of [
      'https://example.org/',
      'http://127.0.0.1/',
      'file:///etc/passwd',
      'ws://127.0.0.1:1/',
      'app://other/',
      'app://deasil.evil.example/',
      'ftp://x/',
      'blob:https://evil.example/1',
    ]) {
      expect({ url, cancelled: cancelled(url) }).toEqual({ url, cancelled: true });
    }
    for (const url of [
      'app://deasil/',
      'app://deasil/assets/main.js',
      'blob:app://deasil/1',
      'data:image/png;base64,',
    ]) {
      expect({ url, cancelled: cancelled(url) }).toEqual({ url, cancelled: false });
    }
  });

  test('12, 13, 14: no webview is attached, no page navigates, no window opens', async () => {
    const { app } = await import('electron');
    class Contents extends Emitter {
      handler: Listener | null = null;
      setWindowOpenHandler(handler: Listener): void {
        this.handler = handler;
      }
    }
    const contents = new Contents();
    (app as unknown as Emitter).emit('web-contents-created', {}, contents);
    expect(contents.handler?.({ url: 'https://example.org/' })).toEqual({ action: 'deny' });
    const prevented = (name: string, url: string): boolean => {
      let stopped = false;
      contents.emit(name, { url, preventDefault: () => (stopped = true) });
      return stopped;
    };
    for (const name of ['will-navigate', 'will-frame-navigate', 'will-redirect', 'will-attach-webview']) {
      expect(prevented(name, 'https://example.org/')).toBe(true);
      expect(prevented(name, 'file:///etc/passwd')).toBe(true);
    }
    expect(prevented('will-navigate', 'app://deasil/')).toBe(false);
  });

  test('17: only the top frame of the window may call', async () => {
    expect(await call(window, 'startFiles', {})).toMatchObject({
      ok: true,
      value: [{ name: 'poses.sdf', size: 5 }],
    });
    for (const event of [
      { senderFrame: null },
      { senderFrame: { url: 'https://evil.example/', parent: null } },
      { senderFrame: { url: 'app://deasil.evil.example/', parent: null } },
      { senderFrame: { url: 'app://deasil/', parent: {} } },
    ]) {
      expect(await call(event, 'startFiles', {})).toMatchObject({
        ok: false,
        error: { code: 'unauthorised' },
      });
    }
  });
});

describe('the shell', () => {
  test('says what it is', async () => {
    expect(await call(window, 'info', {})).toEqual({
      ok: true,
      value: { version: '1.2.3', shell: 'electron', platform: process.platform },
    });
  });

  test('a second start hands its files to the first, which comes forward', async () => {
    const { app } = await import('electron');
    (app as unknown as Emitter).emit(
      'second-instance',
      {},
      ['electron', '.', '--flag', 'second.cif'],
      join(folder, 'elsewhere'),
    );
    await vi.waitFor(() => {
      expect(recorded.sent).toContainEqual([
        'deasil:event',
        { type: 'opened', files: [expect.objectContaining({ name: 'second.cif', size: 11 })] },
      ]);
    });
    expect(recorded.order).toContain('focused');
    expect(recorded.order).toContain('restored');
  });

  test('a file association of macOS opens its file', async () => {
    const { app } = await import('electron');
    let prevented = false;
    const event = { preventDefault: () => (prevented = true) };
    recorded.sent.length = 0;
    (app as unknown as Emitter).emit('open-file', event, join(folder, 'poses.sdf'));
    await vi.waitFor(() => {
      expect(recorded.sent.length).toBe(1);
    });
    expect(prevented).toBe(true);
  });

  test("the menu runs the window's commands and opens the demo", async () => {
    const items = (recorded.menu as MenuItem[]).flatMap(menu => menu.submenu ?? []);
    recorded.sent.length = 0;
    items.find(item => item.id === 'shell-demo')?.click?.();
    await vi.waitFor(() => {
      expect(recorded.sent[0]?.[1]).toMatchObject({ type: 'opened' });
    });
    recorded.sent.length = 0;
    const commands = items.filter(item => item.id !== undefined && item.id !== 'shell-demo');
    for (const item of commands) item.click?.();
    expect(recorded.sent.map(([, event]) => event)).toEqual(
      commands.map(item => ({ type: 'command', command: item.id })),
    );
  });
});
