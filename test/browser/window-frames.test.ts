/** Frames of the sight in software rendering, for the record: written to the test output, not asserted. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import {
  demoFiles,
  ensureBuilt,
  launchBrowser,
  openWindow,
  outputFolder,
  type OpenedWindow,
  startProgram,
} from './launch.ts';
import { atRest } from './window.ts';

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-frames-'));
});
afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
});

/** A chiral centre in the middle of a cloud of carbons on a lattice, bonded in rows: as many atoms as asked for. */
function cloud(count: number): string {
  const atoms: string[] = [];
  const bonds: string[] = [];
  const put = (symbol: string, x: number, y: number, z: number): number =>
    atoms.push(`M  V30 ${atoms.length + 1} ${symbol} ${x.toFixed(4)} ${y.toFixed(4)} ${z.toFixed(4)} 0`);
  const bond = (a: number, b: number): number => bonds.push(`M  V30 ${bonds.length + 1} 1 ${a} ${b}`);
  const centre = put('C', 0, 0, 0);
  for (const [symbol, x, y, z] of [
    ['F', 0.8, 0.8, 0.8],
    ['Cl', -0.9, -0.9, 0.9],
    ['Br', -1, 1, -1],
    ['H', 0.6, -0.6, -0.6],
  ] as const) {
    bond(centre, put(symbol, x, y, z));
  }
  const side = Math.ceil(Math.cbrt(count));
  let before = 0;
  for (let k = 0; atoms.length < count; k++) {
    const [i, j, l] = [k % side, Math.floor(k / side) % side, Math.floor(k / side / side)];
    const at = (n: number): number => (n - side / 2) * 1.9 + 0.3;
    if (Math.hypot(at(i), at(j), at(l)) < 4) {
      before = 0;
      continue;
    }
    const atom = put('C', at(i), at(j), at(l));
    if (before !== 0 && i > 0) bond(before, atom);
    before = atom;
  }
  return [
    'cloud',
    '  Deasil            3D',
    '',
    '  0  0  0  0  0  0  0  0  0  0999 V3000',
    'M  V30 BEGIN CTAB',
    `M  V30 COUNTS ${atoms.length} ${bonds.length} 0 0 0`,
    'M  V30 BEGIN ATOM',
    ...atoms,
    'M  V30 END ATOM',
    'M  V30 BEGIN BOND',
    ...bonds,
    'M  V30 END BOND',
    'M  V30 END CTAB',
    'M  END',
    '$$$$',
    '',
  ].join('\n');
}

/** Frames a second while the model is turned. */
async function framesOf(opened: OpenedWindow): Promise<number> {
  const { page } = opened;
  await page.getByRole('option').first().waitFor({ timeout: 60_000 });
  await atRest(page);
  return page.evaluate(async () => {
    const sight = document.querySelector<HTMLElement>('[role="application"]')!;
    const canvas = sight.querySelector('canvas')!;
    const gl = canvas.getContext('webgl2')!;
    const pixel = new Uint8Array(4);
    const frames = 20;
    const start = performance.now();
    for (let k = 0; k < frames; k++) {
      sight.dispatchEvent(new KeyboardEvent('keydown', { key: 'ArrowRight', bubbles: true }));
      await new Promise(resolve => requestAnimationFrame(resolve));
      await new Promise(resolve => setTimeout(resolve, 0));
      // Reading a pixel waits until the frame is really drawn.
      gl.readPixels(0, 0, 1, 1, gl.RGBA, gl.UNSIGNED_BYTE, pixel);
    }
    return (1000 * frames) / (performance.now() - start);
  });
}

test('from the start of the program to the first sight of the demo', async () => {
  ensureBuilt('electron', 'window');
  const browser = await launchBrowser();
  const started = performance.now();
  const program = startProgram(['--browser'], {
    INIT_CWD: folder,
    XDG_CONFIG_HOME: join(folder, 'config'),
    XDG_STATE_HOME: join(folder, 'state'),
  });
  try {
    const address = await new Promise<string>((resolve, reject) => {
      let text = '';
      program.stdout!.on('data', (chunk: Buffer) => {
        text += chunk.toString();
        const found = /http:\/\/127\.0\.0\.1:\S+/u.exec(text);
        if (found) resolve(found[0]);
      });
      program.on('exit', () => reject(new Error(`it ended: ${text}`)));
    });
    const printed = performance.now();
    const page = await browser.newPage();
    await page.goto(address);
    await page.getByRole('option').first().waitFor();
    await atRest(page);
    const seconds = (from: number, to: number): number => Math.round((to - from) / 100) / 10;
    writeFileSync(
      join(outputFolder, 'first-sight.json'),
      JSON.stringify({
        addressAfter: seconds(started, printed),
        sightAfter: seconds(started, performance.now()),
      }),
    );
  } finally {
    program.kill('SIGINT');
    await browser.close();
  }
});

test('a molecule, one with its surroundings, and 5,000 atoms', async () => {
  const measured: Record<string, number> = {};
  const models: [string, string][] = [['demo', demoFiles().find(path => path.endsWith('.sdf'))!]];
  for (const count of [350, 5000]) {
    const path = join(folder, `cloud-${count}.sdf`);
    writeFileSync(path, cloud(count));
    models.push([`${count} atoms`, path]);
  }
  for (const [name, path] of models) {
    const opened = await openWindow([path], { width: 1360, height: 940 });
    try {
      measured[name] = Math.round(10 * (await framesOf(opened))) / 10;
      expect(opened.complaints).toEqual([]);
    } finally {
      await opened.close();
    }
  }
  writeFileSync(join(outputFolder, 'frames.json'), JSON.stringify(measured));
});
