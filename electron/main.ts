/** The Electron shell: one window on the built page, the host's calls over IPC, menus, dialogs and file associations. */
import { app, BrowserWindow, dialog, ipcMain, Menu, protocol, session } from 'electron';
import { join } from 'node:path';
import { COMMANDS } from '../renderer/commands.ts';
import type { HostEvent } from '../renderer/host.ts';
import { DEMO_SWITCH, filesOf } from './arguments.ts';
import { EVENT_CHANNEL } from './bridge.ts';
import { demoFiles } from './demo.ts';
import { Dialogs } from './dialogs.ts';
import { configFolder, stateFolder } from './files/places.ts';
import { HostService } from './host-service.ts';
import { listen } from './ipc.ts';
import { menuTemplate } from './menu.ts';
import {
  lockPages,
  lockSession,
  ORIGIN,
  PAGE,
  SCHEME,
  SCHEME_PRIVILEGES,
  trustedSender,
  webPreferences,
} from './security.ts';
import { WindowFiles } from './window-files.ts';

/** The program's folder: the checkout, or the archive when packed. */
const root = app.getAppPath();

const INITIAL_WIDTH = 1360;
const INITIAL_HEIGHT = 860;
const LEAST_WIDTH = 640;
const LEAST_HEIGHT = 480;

let window: BrowserWindow | null = null;
/** Files the system handed over before the window was there. */
const waiting: string[] = [];
let service: HostService | null = null;

function log(message: string): void {
  process.stderr.write(`deasil: ${message}\n`);
}

function send(event: HostEvent): void {
  window?.webContents.send(EVENT_CHANNEL, event);
}

function openFiles(paths: readonly string[]): void {
  if (!service) {
    waiting.push(...paths);
    return;
  }
  service.openPaths(paths).catch((error: unknown) => {
    log(String(error));
  });
}

/** Serves the built window under the application's own scheme. */
function servePage(files: WindowFiles): void {
  protocol.handle(SCHEME, async request => {
    const address = new URL(request.url);
    const file =
      address.origin === ORIGIN || address.host === 'deasil' ? await files.get(address.pathname) : null;
    if (!file || request.method !== 'GET') return new Response('not found', { status: 404 });
    return new Response(file.bytes, { headers: file.headers });
  });
}

function createWindow(): void {
  const created = new BrowserWindow({
    width: INITIAL_WIDTH,
    height: INITIAL_HEIGHT,
    minWidth: LEAST_WIDTH,
    minHeight: LEAST_HEIGHT,
    title: 'Deasil',
    show: false,
    icon: join(root, 'assets', 'icons', 'icon.png'),
    webPreferences: webPreferences(join(root, 'dist', 'electron', 'preload.cjs')),
  });
  window = created;
  created.once('ready-to-show', () => {
    created.show();
  });
  created.on('closed', () => {
    window = null;
  });
  created.webContents.on('render-process-gone', (_event, details) => {
    log(`the window's process ended (${details.reason}); it is loaded again from the last saved session`);
    if (details.reason !== 'clean-exit') created.webContents.reload();
  });
  created.loadURL(PAGE).catch((error: unknown) => {
    log(String(error));
    app.exit(1);
  });
}

async function ready(): Promise<void> {
  lockSession(session.defaultSession);
  servePage(await WindowFiles.list(join(root, 'dist', 'window')));
  const dialogs = new Dialogs(dialog, () => window);
  const host = new HostService({
    info: { version: app.getVersion(), shell: 'electron', platform: process.platform },
    configFolder: configFolder(),
    stateFolder: stateFolder(),
    chooseFiles: () => dialogs.chooseFiles(),
    save: (request, bytes) => dialogs.save(request, bytes),
    send,
    log,
  });
  const named = [...filesOf(process.argv, app.isPackaged, process.cwd()), ...waiting];
  const demo = named.length === 0 && process.argv.includes(DEMO_SWITCH);
  await host.setStartFiles(demo ? await demoFiles(root) : named, demo);
  service = host;
  listen(ipcMain, host, trustedSender, log);
  Menu.setApplicationMenu(
    Menu.buildFromTemplate(
      menuTemplate(process.platform, COMMANDS, {
        command: id => {
          send({ type: 'command', command: id });
        },
        openDemo: () => {
          demoFiles(root)
            .then(files => host.openPaths(files, true))
            .catch((error: unknown) => {
              log(String(error));
            });
        },
      }),
    ),
  );
  createWindow();
}

protocol.registerSchemesAsPrivileged([{ scheme: SCHEME, privileges: SCHEME_PRIVILEGES }]);
app.enableSandbox();
lockPages(app);

if (app.requestSingleInstanceLock()) {
  app.on('second-instance', (_event, argv, folder) => {
    openFiles(filesOf(argv, app.isPackaged, folder));
    if (window?.isMinimized()) window.restore();
    window?.focus();
  });
  app.on('open-file', (event, path) => {
    event.preventDefault();
    openFiles([path]);
  });
  app.on('window-all-closed', () => {
    app.quit();
  });
  app.on('will-quit', () => {
    service?.dispose();
  });
  app
    .whenReady()
    .then(ready)
    .catch((error: unknown) => {
      log(error instanceof Error ? error.message : String(error));
      app.exit(1);
    });
} else {
  app.quit();
}
