/** Where Deasil keeps its own small files: the recent list, and sessions of content that has no path. */
import { homedir } from 'node:os';
import { join } from 'node:path';

/** The folder for settings (XDG Base Directory Specification; the platform's own place on Windows and macOS). */
export function configFolder(
  env: NodeJS.ProcessEnv = process.env,
  platform: NodeJS.Platform = process.platform,
): string {
  if (platform === 'win32') return join(env['APPDATA'] ?? join(homedir(), 'AppData', 'Roaming'), 'Deasil');
  if (platform === 'darwin') return join(homedir(), 'Library', 'Application Support', 'Deasil');
  return join(absolute(env['XDG_CONFIG_HOME']) ?? join(homedir(), '.config'), 'deasil');
}

/** The folder for sessions of content without a path. */
export function stateFolder(
  env: NodeJS.ProcessEnv = process.env,
  platform: NodeJS.Platform = process.platform,
): string {
  if (platform === 'win32') return join(env['LOCALAPPDATA'] ?? join(homedir(), 'AppData', 'Local'), 'Deasil');
  if (platform === 'darwin') return configFolder(env, platform);
  return join(absolute(env['XDG_STATE_HOME']) ?? join(homedir(), '.local', 'state'), 'deasil');
}

/** The specification has relative paths ignored. */
function absolute(path: string | undefined): string | null {
  return path?.startsWith('/') ? path : null;
}
