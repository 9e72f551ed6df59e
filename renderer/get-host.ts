/** Finds the host the window runs on: the Electron shell's when its preload is there, else the loopback host. */
import type { Host } from './host.ts';
import { electronHost, isElectronBridge } from './host-electron.ts';
import { loopbackHost } from './host-loopback.ts';

let host: Host | null = null;

/** The host of this window, the same object each time. */
export function getHost(): Host {
  if (!host) {
    const bridge: unknown = Reflect.get(globalThis, 'deasilBridge');
    host = isElectronBridge(bridge) ? electronHost(bridge) : loopbackHost();
  }
  return host;
}
