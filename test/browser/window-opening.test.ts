/** What the window opens and how: bad input, drop, paste, arguments, intentions, sessions, watching, large files with cancel. */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { demoFiles, launchBrowser, openWindow, outputFolder, type OpenedWindow } from './launch.ts';
import { SHARED_DATA_ABSENT, sharedData } from '../shared.ts';
import { atRest, picture, readDial, runOf, violations } from './window.ts';

let browser: Browser;
let opened: OpenedWindow | null = null;
let folder: string;

beforeAll(async () => {
  browser = await launchBrowser();
});
afterAll(async () => {
  await browser.close();
});
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-open-'));
});
afterEach(async () => {
  const complaints = opened?.complaints ?? [];
  await opened?.close();
  opened = null;
  rmSync(folder, { recursive: true, force: true });
  expect(complaints).toEqual([]);
});

const models = readFileSync(demoFiles().find(path => path.endsWith('.sdf'))!, 'utf8');
const entries = models.split(/(?<=\$\$\$\$\r?\n)/u).filter(text => text.trim() !== '');

function file(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

async function open(...paths: string[]): Promise<Page> {
  opened = await openWindow(paths, { browser, reducedMotion: 'reduce' });
  return opened.page;
}

/** Drops files on the page, as a file manager does. */
async function drop(page: Page, files: readonly { name: string; text: string }[]): Promise<void> {
  await page.evaluate(
    list => {
      const transfer = new DataTransfer();
      for (const { name, text } of list) transfer.items.add(new File([text], name));
      document.body.dispatchEvent(
        new DragEvent('drop', { dataTransfer: transfer, bubbles: true, cancelable: true }),
      );
    },
    [...files],
  );
}

async function paste(page: Page, text: string): Promise<void> {
  await page.evaluate(content => {
    const transfer = new DataTransfer();
    transfer.setData('text/plain', content);
    document.body.dispatchEvent(
      new ClipboardEvent('paste', { clipboardData: transfer, bubbles: true, cancelable: true }),
    );
  }, text);
}

describe('bad input', () => {
  test.each([
    ['empty.sdf', '', /empty\.sdf: the file is empty/u],
    [
      'binary.sdf',
      Uint8Array.from({ length: 4000 }, (_, k) => (k * 37) % 256),
      /binary\.sdf: a binary file/u,
    ],
    ['notes.txt', 'nothing of the kind\nat all, really\n', /notes\.txt/u],
  ])('%s: a message that names the file', async (name, content, expected) => {
    const page = await open(file(name, content));
    await page.getByText(expected).first().waitFor();
  });

  test('a truncated entry among good ones is named with entry and line; the others are checked', async () => {
    const cut = `${entries[1]!.split('\n').slice(0, 20).join('\n')}\n$$$$\n`;
    const page = await open(file('mixed.sdf', entries[0]! + cut + entries[2]!));
    await atRest(page);
    await page.keyboard.press('l');
    const ledger = page.getByRole('grid', { name: 'Ledger' });
    await expect.poll(() => ledger.getByRole('row').count()).toBe(4);
    expect(await ledger.getByRole('row').nth(2).textContent()).toMatch(/line \d+: /u);
    await page.keyboard.press(']');
    await page.getByText(/Entry 2, line \d+, could not be read/u).waitFor();
    await picture(page, 'unreadable-entry-light');
    expect(await violations(page)).toEqual([]);
    await page.keyboard.press(']');
    await page.getByRole('option').first().waitFor();
  });

  test.each([
    ['an unknown element', (text: string) => text.replace(/ C {3}0/u, ' Qx  0')],
    [
      'a bond to an atom that is not there',
      (text: string) => text.replace(/^( {2}\d| \d\d)( {2}\d| \d\d)( {2}\d {2}0.*)$/mu, '$1 99$3'),
    ],
    ['coordinates that are no numbers', (text: string) => text.replace(/^ {4}2\.2969/mu, '       NaN')],
  ])('%s: said of the entry, with its line', async (_, spoil) => {
    const bad = spoil(entries[0]!);
    expect(bad).not.toBe(entries[0]);
    const page = await open(file('bad.sdf', bad + entries[1]!));
    await expect.poll(() => page.locator('.head-entry').textContent()).toContain('of 2');
    const alert = page.getByText(/could not be read|not a number|no number|located|coordinates/u).first();
    await alert.waitFor();
    await page.keyboard.press(']');
    await page.getByRole('option').first().waitFor();
  });

  test('a model without coordinates in space: no sight, and it is said why', async () => {
    const flat = entries[0]!.replaceAll(
      /^ *-?\d+\.\d{4} *-?\d+\.\d{4} *-?\d+\.\d{4}/gmu,
      '    0.0000    0.0000    0.0000',
    );
    const page = await open(file('zero.sdf', flat));
    await page.locator('.sight-message').first().waitFor();
    expect(await page.getByRole('option').count()).toBeGreaterThanOrEqual(0);
  });
});

describe('opening', () => {
  test('dropped files replace what is open; a notation dropped with models is their intention', async () => {
    const page = await open();
    await drop(page, [
      { name: 'poses.sdf', text: models },
      { name: 'wanted.smi', text: readFileSync(demoFiles().find(path => path.endsWith('.smi'))!, 'utf8') },
    ]);
    await page.getByText('intended: wanted.smi').waitFor();
    await page.getByRole('option').filter({ hasText: 'agrees' }).first().waitFor();
  });

  test('a pasted SMILES gives its letters from the notation', async () => {
    const page = await open();
    await paste(page, 'C[C@H](N)C(=O)O');
    await page.getByRole('option').filter({ hasText: 'S' }).waitFor();
    await page
      .getByText('There is no sight', { exact: false })
      .or(page.getByText('there is no sight', { exact: false }))
      .first()
      .waitFor();
    await page.getByRole('region', { name: 'Drawing' }).getByRole('img').waitFor();
    await picture(page, 'notation-light');
    expect(await violations(page)).toEqual([]);
  });

  test('a pasted Molfile is read as one', async () => {
    const page = await open();
    await paste(page, entries[0]!.slice(0, entries[0]!.indexOf('M  END') + 7));
    await atRest(page);
    expect(runOf(await readDial(page))).toBe('clockwise');
  });

  test('an intention stated as text is judged at once, and withdrawn', async () => {
    const page = await open(file('poses.sdf', models));
    await page.getByRole('option').first().waitFor();
    await page.keyboard.press('Control+i');
    await page.getByRole('textbox', { name: 'Intended configuration' }).fill('C4=R');
    await page.keyboard.press('Enter');
    await page.getByRole('option').filter({ hasText: 'inverted' }).waitFor();
    await page.keyboard.press('Control+k');
    await page.getByRole('combobox').fill('withdraw');
    await page.keyboard.press('Enter');
    await expect.poll(() => page.getByRole('option').filter({ hasText: 'inverted' }).count()).toBe(0);
  });

  test('an intention with coordinates is laid over the unit', async () => {
    const page = await open(file('found.sdf', entries[1]!));
    await page.getByRole('option').first().waitFor();
    const chooser = page.waitForEvent('filechooser');
    await page.keyboard.press('Control+k');
    await page.getByRole('combobox').fill('configuration from a file');
    await page.keyboard.press('Enter');
    await (await chooser).setFiles(file('wanted.sdf', entries[0]!));
    await page.getByRole('option').filter({ hasText: 'inverted' }).click();
    await atRest(page);
    const alarmed = async (): Promise<number> => {
      const shot = await page.getByRole('application').screenshot();
      return page.evaluate(async encoded => {
        const bytes = Uint8Array.from(atob(encoded), c => c.charCodeAt(0));
        const image = await createImageBitmap(new Blob([bytes], { type: 'image/png' }));
        const context = new OffscreenCanvas(image.width, image.height).getContext('2d')!;
        context.drawImage(image, 0, 0);
        const { data } = context.getImageData(0, 0, image.width, image.height);
        let count = 0;
        for (let k = 0; k < data.length; k += 4) {
          if (Math.hypot(data[k]! - 179, data[k + 1]! - 18, data[k + 2]! - 60) < 40) count++;
        }
        return count;
      }, shot.toString('base64'));
    };
    // Seen from the side: in the sight itself the intended substituent stands behind the centre.
    await page.getByRole('application').focus();
    for (let k = 0; k < 11; k++) await page.keyboard.press('ArrowRight');
    await atRest(page);
    const laid = await alarmed();
    await picture(page, 'overlay-light');
    await page.keyboard.press('i');
    await atRest(page);
    expect(laid).toBeGreaterThan((await alarmed()) + 150);
  });

  test('an intention that is nonsense is refused with the reason', async () => {
    const page = await open(file('poses.sdf', models));
    await page.getByRole('option').first().waitFor();
    await page.keyboard.press('Control+i');
    await page.getByRole('textbox', { name: 'Intended configuration' }).fill('C((');
    await page.keyboard.press('Enter');
    await page
      .getByRole('alert')
      .getByText(/neither descriptors on units .* nor a SMILES/u)
      .waitFor();
  });

  test('judgements are kept beside the input and restored', async () => {
    const path = file('poses.sdf', models);
    const page = await open(path);
    await page.getByRole('option').first().waitFor();
    await page.keyboard.press('a');
    await page.getByRole('button', { name: 'Accept', pressed: true }).waitFor();
    await page.waitForTimeout(1200);
    await page.reload();
    await page.getByRole('button', { name: 'Accept', pressed: true }).waitFor();
  });

  test('a file that is written again is read again, and what changed hand is said', async () => {
    const path = file('refined.sdf', entries[0]!);
    const page = await open(path);
    await page.getByRole('option').first().waitFor();
    await page.waitForTimeout(300);
    writeFileSync(path, entries[1]!.replace('model 2', 'model 1'));
    await page.getByText('C4 S became R').waitFor({ timeout: 15_000 });
    await picture(page, 'changed-light');
  });

  test('steps through poses with the same centre held in the middle', async () => {
    const page = await open(...demoFiles());
    await page.getByRole('option').first().waitFor();
    await page.keyboard.press('j');
    await page.keyboard.press(']');
    await expect.poll(() => page.locator('.head-entry').textContent()).toContain('entry 2');
    await expect.poll(() => page.getByRole('option', { selected: true }).textContent()).toContain('C4');
  });
});

describe('what leaves the window', () => {
  async function saved(page: Page, words: string): Promise<{ name: string; text: string }> {
    const download = page.waitForEvent('download');
    await page.keyboard.press('Control+k');
    await page.getByRole('combobox', { name: 'Find a command' }).fill(words);
    await page.keyboard.press('Enter');
    const file = await download;
    return { name: file.suggestedFilename(), text: readFileSync(await file.path(), 'utf8') };
  }

  test('the record names input, verdicts, the mark that was made, and what it does not establish', async () => {
    const page = await open(...demoFiles());
    await page.getByRole('option').first().waitFor();
    await page.keyboard.press('d');
    await page.getByRole('option', { selected: true }).filter({ hasText: 'inverted' }).waitFor();
    await page.keyboard.press('x');
    await page.keyboard.press('r');
    await page.keyboard.type('to be built again');
    await page.keyboard.press('Enter');
    const { name, text } = await saved(page, 'save the record');
    expect(name).toBe('lantern-models-record.html');
    expect(text).toContain('lantern-models.sdf');
    expect(text).toMatch(/SHA-256 <code>[0-9a-f]{64}<\/code>/u);
    expect(text).toContain('inverted');
    expect(text).toContain('to be built again');
    expect(text).toContain('no proof of the absolute configuration');
    expect(text).toContain('<svg');
    const table = await saved(page, 'record as a table');
    expect(table.name).toBe('lantern-models-record.csv');
    // A heading and five units for each of three entries.
    expect(table.text.trim().split('\r\n')).toHaveLength(16);
  });

  test('entries that agree are saved byte for byte', async () => {
    const page = await open(...demoFiles());
    await page.getByRole('option').first().waitFor();
    const { name, text } = await saved(page, 'entries that agree');
    expect(name).toBe('lantern-models-agreeing.sdf');
    expect(text).toBe(entries[0]);
    const other = await saved(page, 'inverted entries');
    expect(other.text).toBe(entries[1]);
  });

  test('the sight is saved as a figure', async () => {
    const page = await open(...demoFiles());
    await page.getByRole('option').first().waitFor();
    const { name, text } = await saved(page, 'figure');
    expect(name).toBe('LANTERN-017-model-1-C2.svg');
    expect(text).toMatch(/^<svg /u);
  });
});

describe('other kinds of model', () => {
  const macromolecule = sharedData('macromolecule/5dpv.pdb');
  test.skipIf(macromolecule === null)(
    `a macromolecule${macromolecule ? '' : `: ${SHARED_DATA_ABSENT}`}`,
    async () => {
      const page = await open(macromolecule!);
      await page.getByRole('option').first().waitFor({ timeout: 30_000 });
      await atRest(page);
      expect(await page.getByRole('option').first().textContent()).toMatch(/A\/GLN\/127 CA/u);
      expect(runOf(await readDial(page))).toBe('anticlockwise');
      await page.getByRole('listbox').focus();
      await page.keyboard.press('End');
      await page.getByRole('option', { selected: true }).waitFor();
      await atRest(page);
      await picture(page, 'macromolecule-light');
      // The chain lies under the sight with the same camera.
      await page.keyboard.press('c');
      await page.locator('.surroundings canvas').waitFor();
      for (let k = 0; k < 5; k++) await page.keyboard.press('-');
      await atRest(page);
      await page.waitForTimeout(300);
      await picture(page, 'chain-light');
      await page.keyboard.press('c');
      expect(await violations(page)).toEqual([]);
    },
  );

  const strained = sharedData('macromolecule/1orc.pdb');
  test.skipIf(strained === null)(
    `a residue that is not as its name says is found by the next doubtful unit${strained ? '' : `: ${SHARED_DATA_ABSENT}`}`,
    async () => {
      const page = await open(strained!);
      await page.getByRole('option').first().waitFor({ timeout: 30_000 });
      await page.getByRole('option', { selected: true }).filter({ hasText: 'A/GLU/56C CA' }).waitFor();
      await page.getByText('A/GLU/56C: CA is far from its ideal volume').waitFor();
      await atRest(page);
      await picture(page, 'residue-light');
    },
  );

  const crystal = sharedData('small-molecule-cif/cod-2224874.cif');
  test.skipIf(crystal === null)(`a crystal${crystal ? '' : `: ${SHARED_DATA_ABSENT}`}`, async () => {
    const page = await open(crystal!);
    await page.getByText('P -4 c 2').waitFor();
    await page.getByText('Absolute structure').waitFor();
    await picture(page, 'crystal-light');
    expect(await violations(page)).toEqual([]);
  });

  const suite = sharedData('cip/suite-3d.sdf');
  // Letters as the suite publishes them.
  test.skipIf(suite === null).each([
    ['VS010', 'helix', 'P', /seen along the helix: from the front end to the rear it winds clockwise, P/u],
    ['VS079', 'allene', 'M', /seen end-on: front 1 to rear 1′ runs anticlockwise by the shorter way, M/u],
    ['VS023', 'axis', 'M', /seen end-on: front 1 to rear 1′ runs anticlockwise by the shorter way, M/u],
  ])('%s, a unit with a sight of its own: %s', async (name, kind, letter, words) => {
    const page = await open(suite!);
    await page.getByRole('navigation', { name: 'Ledger' }).waitFor();
    await page.keyboard.press('l');
    await page.getByRole('searchbox').fill(name);
    await page.getByRole('row').filter({ hasText: name }).click();
    await page.getByRole('option').filter({ hasText: letter }).first().waitFor();
    await page.getByRole('grid').focus();
    await page.keyboard.press('l');
    await atRest(page);
    const dial = await readDial(page);
    expect(dial.sweep).toBe(letter === 'P' ? 'clockwise' : 'anticlockwise');
    expect(dial.caption).toMatch(words);
    await picture(page, `${kind}-light`);
  });
});

describe('many entries', () => {
  /** A campaign of many poses; every five hundredth has an inverted centre. */
  function many(count: number): string {
    const parts: string[] = [];
    for (let k = 1; k <= count; k++) parts.push(k % 500 === 0 ? entries[1]! : entries[0]!);
    return file('many.sdf', parts.join(''));
  }

  test('20,000 entries: the first inverted pose is soon in the sight, and no task of the window is long', async () => {
    const count = 20_000;
    const page = await open();
    const text = readFileSync(many(count), 'utf8');
    const smiles = readFileSync(demoFiles().find(path => path.endsWith('.smi'))!, 'utf8');
    await page.evaluate(() => {
      const list: number[] = [];
      Reflect.set(globalThis, 'longTasks', list);
      new PerformanceObserver(seen => {
        const since = Number(Reflect.get(globalThis, 'since') ?? Infinity);
        for (const entry of seen.getEntries()) if (entry.startTime > since) list.push(entry.duration);
      }).observe({ entryTypes: ['longtask'] });
    });
    await drop(page, [
      { name: 'many.sdf', text },
      { name: 'wanted.smi', text: smiles },
    ]);
    // Building the files in the page is the test's own work.
    await page.evaluate(() => Reflect.set(globalThis, 'since', performance.now()));
    const dropped = Date.now();
    await page.getByRole('option').first().waitFor({ timeout: 60_000 });
    const first = Date.now() - dropped;
    await expect.poll(() => page.locator('.strip-doubtful').textContent(), { timeout: 60_000 }).not.toBe('');
    await page.keyboard.press('Shift+D');
    await page.getByRole('option', { selected: true }).filter({ hasText: 'inverted' }).waitFor();
    await atRest(page);
    const inverted = Date.now() - dropped;
    // The window answers while the batch runs.
    await page.keyboard.press('l');
    await page.getByRole('grid', { name: 'Ledger' }).waitFor();
    await page.getByRole('searchbox').fill('inverted');
    await page.waitForTimeout(1500);
    const tasks = await page.evaluate(() => Reflect.get(globalThis, 'longTasks') as number[]);
    await page.getByRole('searchbox').fill('');
    await expect
      .poll(() => page.locator('.head-progress').count(), { timeout: 110_000, interval: 500 })
      .toBe(0);
    const whole = Date.now() - dropped;
    await expect.poll(() => page.getByRole('grid').getAttribute('aria-rowcount')).toBe(String(count + 1));
    await picture(page, 'many-light');
    writeFileSync(
      join(outputFolder, 'many.json'),
      JSON.stringify({ count, first, inverted, whole, longTasks: tasks.map(Math.round) }),
    );
    // The figures are for the record, a busy machine stretches them; a window that is blocked is a defect all the same.
    expect(tasks.filter(duration => duration > 400)).toEqual([]);
  });

  test('stopping keeps what was read', async () => {
    const page = await open(many(20_000));
    await page.locator('.strip-open b').waitFor();
    await page.getByRole('button', { name: 'Stop' }).click();
    await expect.poll(() => page.locator('.head-progress').count()).toBe(0);
    const rows = await page.locator('.strip-open b').textContent();
    expect(Number(rows!.replaceAll(/\D/gu, ''))).toBeGreaterThan(0);
    expect(Number(rows!.replaceAll(/\D/gu, ''))).toBeLessThan(20_000);
    await page.keyboard.press('j');
    await atRest(page);
  });
});
