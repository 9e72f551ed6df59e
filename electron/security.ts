/** The locks of the Electron shell: what the page may load, where it may go, what it may ask for. */
import type { App, IpcMainInvokeEvent, Session, WebContents, WebPreferences } from 'electron';

export const SCHEME = 'app';
/** Where the window lives in the shell. */
export const ORIGIN = `${SCHEME}://deasil`;
export const PAGE = `${ORIGIN}/`;

/** The scheme is like https for the page: it has an origin, fetch and storage, and counts as secure. */
export const SCHEME_PRIVILEGES = {
  standard: true,
  secure: true,
  supportFetchAPI: true,
  codeCache: true,
} as const;

/** Settings of the one window; the safe defaults are stated so that a test can hold them. */
export function webPreferences(preload: string): WebPreferences {
  return {
    preload,
    contextIsolation: true,
    sandbox: true,
    nodeIntegration: false,
    nodeIntegrationInWorker: false,
    nodeIntegrationInSubFrames: false,
    webSecurity: true,
    allowRunningInsecureContent: false,
    experimentalFeatures: false,
    webviewTag: false,
    navigateOnDragDrop: false,
    safeDialogs: true,
    // The spelling checker would fetch its dictionaries.
    spellcheck: false,
  };
}

/** Structures are pasted and figures copied; nothing else is ever asked for. */
const ALLOWED_PERMISSIONS: ReadonlySet<string> = new Set(['clipboard-read', 'clipboard-sanitized-write']);

/** Whether the page may have a permission. @param asking Its address. */
export function permitted(permission: string, asking: string): boolean {
  return ALLOWED_PERMISSIONS.has(permission) && ownAddress(asking);
}

/** Whether an address belongs to the window. */
export function ownAddress(address: string): boolean {
  return address === ORIGIN || address.startsWith(PAGE);
}

/** Addresses the page may load: its own files, what it made itself, the developer tools. */
export function mayLoad(address: string): boolean {
  return (
    ownAddress(address) ||
    address.startsWith(`blob:${PAGE}`) ||
    address.startsWith('data:') ||
    address.startsWith('devtools:')
  );
}

/** Refuses permissions, devices and everything that would leave the machine. */
export function lockSession(session: Session): void {
  session.setPermissionRequestHandler((_contents, permission, answer, details) => {
    answer(permitted(permission, details.requestingUrl));
  });
  session.setPermissionCheckHandler((_contents, permission, origin) => permitted(permission, origin));
  session.setDevicePermissionHandler(() => false);
  session.webRequest.onBeforeRequest((details, answer) => {
    answer({ cancel: !mayLoad(details.url) });
  });
}

/** Keeps every page of the application where it is: no navigation, no new windows, no embedded pages. */
export function lockPages(app: App): void {
  app.on('web-contents-created', (_event, contents: WebContents) => {
    contents.setWindowOpenHandler(() => ({ action: 'deny' }));
    contents.on('will-navigate', event => {
      // A reload of the window is a navigation to itself.
      if (event.url !== PAGE) event.preventDefault();
    });
    contents.on('will-frame-navigate', event => {
      if (event.url !== PAGE) event.preventDefault();
    });
    contents.on('will-redirect', event => {
      event.preventDefault();
    });
    contents.on('will-attach-webview', event => {
      event.preventDefault();
    });
  });
}

/** Whether a call comes from the window's own page, in its top frame. */
export function trustedSender(event: IpcMainInvokeEvent): boolean {
  const frame = event.senderFrame;
  return frame !== null && frame.parent === null && ownAddress(frame.url);
}
