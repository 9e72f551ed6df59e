/** What the preload puts into the page: calls and events over Electron's IPC, and nothing of Electron itself. */
import type { ElectronBridge } from '../renderer/host-electron.ts';

/** The channels; the main process listens on no other. */
export const CALL_CHANNEL = 'deasil:call';
export const PATH_CHANNEL = 'deasil:path';
export const EVENT_CHANNEL = 'deasil:event';

/** What of `ipcRenderer` the bridge uses. */
export interface RendererIpc {
  invoke(channel: string, ...args: unknown[]): Promise<unknown>;
  on(channel: string, listener: (event: unknown, ...args: unknown[]) => void): unknown;
  removeListener(channel: string, listener: (...args: unknown[]) => void): unknown;
}

/** @param pathOf The path of a file that came from the system, "" for one that the page made. */
export function createBridge(ipc: RendererIpc, pathOf: (file: File) => string): ElectronBridge {
  return {
    call: (method, message, bytes) => ipc.invoke(CALL_CHANNEL, method, message, bytes ?? null),
    onEvent(listener) {
      const pass = (_event: unknown, ...args: unknown[]): void => {
        listener(args[0]);
      };
      ipc.on(EVENT_CHANNEL, pass);
      return () => {
        ipc.removeListener(EVENT_CHANNEL, pass);
      };
    },
    fileFor(file) {
      const path = pathOf(file);
      return path === '' ? Promise.resolve(null) : ipc.invoke(PATH_CHANNEL, path);
    },
  };
}
