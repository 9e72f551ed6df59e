/** Finding Electron's runtime without fetching it. */
import { chmodSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { electronRuntime, hasDisplay } from '../../../electron/runtime.ts';

let folder: string;
let from: string;
let electron: string;

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-runtime-'));
  electron = join(folder, 'node_modules', 'electron');
  mkdirSync(join(electron, 'dist'), { recursive: true });
  writeFileSync(join(electron, 'package.json'), '{"name":"electron","version":"45.5.0"}');
  from = pathToFileURL(join(folder, 'start.js')).href;
});

afterEach(() => {
  rmSync(folder, { recursive: true, force: true });
});

describe('the Electron runtime', () => {
  test('is absent where the package came without it', () => {
    expect(electronRuntime({}, from)).toBeNull();
  });

  test('is absent where the package is', () => {
    rmSync(electron, { recursive: true });
    expect(electronRuntime({}, from)).toBeNull();
  });

  test('is the executable that path.txt names', () => {
    writeFileSync(join(electron, 'path.txt'), 'electron\n');
    expect(electronRuntime({}, from)).toBeNull();
    const runtime = join(electron, 'dist', 'electron');
    writeFileSync(runtime, '');
    chmodSync(runtime, 0o755);
    expect(electronRuntime({}, from)).toBe(runtime);
  });

  test.skipIf(process.platform === 'win32')('does not count when it cannot be executed', () => {
    writeFileSync(join(electron, 'path.txt'), 'electron');
    writeFileSync(join(electron, 'dist', 'electron'), '', { mode: 0o644 });
    expect(electronRuntime({}, from)).toBeNull();
  });

  test.skipIf(process.platform !== 'linux')('may lie elsewhere by ELECTRON_OVERRIDE_DIST_PATH', () => {
    const elsewhere = join(folder, 'elsewhere');
    mkdirSync(elsewhere);
    expect(electronRuntime({ ELECTRON_OVERRIDE_DIST_PATH: elsewhere }, from)).toBeNull();
    writeFileSync(join(elsewhere, 'electron'), '', { mode: 0o755 });
    expect(electronRuntime({ ELECTRON_OVERRIDE_DIST_PATH: elsewhere }, from)).toBe(
      join(elsewhere, 'electron'),
    );
  });
});

test('a display is one of X or Wayland on Linux, a given elsewhere', () => {
  expect(hasDisplay({}, 'linux')).toBe(false);
  expect(hasDisplay({ DISPLAY: ':0' }, 'linux')).toBe(true);
  expect(hasDisplay({ WAYLAND_DISPLAY: 'wayland-0' }, 'linux')).toBe(true);
  expect(hasDisplay({}, 'darwin')).toBe(true);
});
