/** The only door from the page to the main process: calls, events, and the path of a dropped file, which stays on this side. */
import { contextBridge, ipcRenderer, webUtils } from 'electron';
import type { ElectronBridge } from '../renderer/host-electron.ts';
import { createBridge } from './bridge.ts';

const bridge: ElectronBridge = createBridge(ipcRenderer, file => webUtils.getPathForFile(file));
contextBridge.exposeInMainWorld('deasilBridge', bridge);
