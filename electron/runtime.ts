/** Tells, without trying to fetch it, whether Electron's runtime is at hand. */
import { accessSync, constants, readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';

/** The executable in an unpacked runtime, by platform. */
const OVERRIDE_NAMES: Partial<Record<NodeJS.Platform, string>> = {
  win32: 'electron.exe',
  darwin: 'Electron.app/Contents/MacOS/Electron',
};

/** Path of the runtime's executable, or null. @param env `ELECTRON_OVERRIDE_DIST_PATH` is honoured. */
export function electronRuntime(
  env: NodeJS.ProcessEnv = process.env,
  from: string = import.meta.url,
): string | null {
  try {
    const folder = dirname(createRequire(from).resolve('electron/package.json'));
    const override = env['ELECTRON_OVERRIDE_DIST_PATH'];
    const name =
      read(join(folder, 'path.txt')) ?? (override ? (OVERRIDE_NAMES[process.platform] ?? 'electron') : null);
    if (name === null) return null;
    const path = join(override || join(folder, 'dist'), name);
    accessSync(path, constants.X_OK);
    return path;
  } catch {
    // Not installed, or not executable: there is none.
    return null;
  }
}

function read(path: string): string | null {
  try {
    return readFileSync(path, 'utf8').trim() || null;
  } catch {
    return null;
  }
}

/** Whether there is a screen for windows to open on. */
export function hasDisplay(
  env: NodeJS.ProcessEnv = process.env,
  platform: NodeJS.Platform = process.platform,
): boolean {
  return platform === 'win32' || platform === 'darwin' || Boolean(env['DISPLAY'] || env['WAYLAND_DISPLAY']);
}
