/** The window on the demo: opened, stepped through by keyboard, the dial read as drawn, every screen checked for accessibility. */
import type { Browser } from 'playwright-core';
import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest';
import { join } from 'node:path';
import { demoFiles, launchBrowser, openWindow, outputFolder, type OpenedWindow } from './launch.ts';
import { atRest, picture, pixels, readDial, runOf, violations } from './window.ts';

let browser: Browser;
let opened: OpenedWindow | null = null;

beforeAll(async () => {
  browser = await launchBrowser();
});
afterAll(async () => {
  await browser.close();
});
afterEach(async () => {
  const complaints = opened?.complaints ?? [];
  await opened?.close();
  opened = null;
  expect(complaints).toEqual([]);
});

type Options = NonNullable<Parameters<typeof openWindow>[1]>;

async function demo(options: Options = {}): Promise<OpenedWindow['page']> {
  opened = await openWindow(demoFiles(), { browser, reducedMotion: 'reduce', ...options });
  await opened.page.getByRole('listbox', { name: 'Docket' }).waitFor();
  await atRest(opened.page);
  return opened.page;
}

describe('the sight', () => {
  test('numbers the substituents in the sense of the letter, for every centre of the demo', async () => {
    const page = await demo();
    const count = await page.getByRole('listbox', { name: 'Docket' }).getByRole('option').count();
    expect(count).toBe(5);
    const seen: string[] = [];
    for (let u = 0; u < count; u++) {
      const chosen = page.getByRole('option', { selected: true });
      const letter = await chosen.locator('.letter').textContent();
      const dial = await readDial(page);
      if (letter === 'R' || letter === 'S') {
        const expected = letter === 'R' ? 'clockwise' : 'anticlockwise';
        expect(runOf(dial), dial.caption).toBe(expected);
        expect(dial.sweep).toBe(expected);
        expect(dial.caption).toContain(`1 to 2 to 3 runs ${expected}, ${letter}.`);
        seen.push(letter);
      } else {
        expect(letter).toBe('E');
        expect(dial.numerals.map(one => one.text).sort()).toEqual(['1', '1′', '2', '2′']);
        expect(dial.caption).toContain('opposite sides, E');
      }
      await page.keyboard.press('j');
      await atRest(page);
    }
    expect(seen).toEqual(['R', 'S', 'S', 'R']);
  });

  test('draws the centre in the middle and the ligands where the numerals point', async () => {
    const page = await demo();
    await page.keyboard.press('b');
    await atRest(page);
    const dial = await readDial(page);
    const along = dial.numerals.map(({ x, y }) => ({
      x: dial.middle.x + 0.62 * (x - dial.middle.x),
      y: dial.middle.y + 0.62 * (y - dial.middle.y),
    }));
    const [middle, ...ligands] = await pixels(page, [dial.middle, ...along]);
    const distance = (a: readonly number[], b: readonly number[]): number =>
      Math.hypot(...a.map((value, k) => value - b[k]!));
    const paper = [251, 250, 246];
    // The tone of carbon (#6b6f76); C2 of the demo is one.
    expect(distance(middle!, [107, 111, 118])).toBeLessThan(25);
    for (const ligand of ligands) expect(distance(ligand, paper)).toBeGreaterThan(60);
    // Ligand 1 of C2 is N9 (#4f6fae).
    expect(distance(ligands[0]!, [79, 111, 174])).toBeLessThan(40);
  });

  test('shows a flat centre as undecided and an inverted one by mark and word', async () => {
    const page = await demo();
    await page.keyboard.press('Shift+D');
    await page.getByRole('option', { selected: true }).filter({ hasText: 'inverted' }).waitFor();
    await atRest(page);
    expect((await readDial(page)).caption).toMatch(/^C4, .*Intended S: inverted\.$/u);
    await picture(page, 'inverted-light');
    await page.keyboard.press('Shift+D');
    await page.getByRole('option', { selected: true }).filter({ hasText: 'flat' }).waitFor();
    await atRest(page);
    const dial = await readDial(page);
    expect(dial.ring).toContain('dial-bar');
    expect(dial.sweep).toBeNull();
    expect(dial.caption).toContain('the coordinates do not decide');
    await picture(page, 'flat-light');
  });

  test('turned to the far side the sweep runs the other way, and the caption says so', async () => {
    const page = await demo();
    expect(runOf(await readDial(page))).toBe('clockwise');
    await page.keyboard.press('f');
    await atRest(page);
    const far = await readDial(page);
    expect(runOf(far)).toBe('anticlockwise');
    expect(far.caption).toContain('in front: 1 to 2 to 3 runs anticlockwise; from the sight R');
    await picture(page, 'far-side-light');
    await page.keyboard.press('s');
    await atRest(page);
    expect(runOf(await readDial(page))).toBe('clockwise');
  });

  test('turns freely by keyboard and pointer, and returns with one key', async () => {
    const page = await demo();
    const before = await readDial(page);
    await page.getByRole('application', { name: /Sight/u }).focus();
    for (let k = 0; k < 5; k++) await page.keyboard.press('ArrowRight');
    await atRest(page);
    expect((await readDial(page)).numerals).not.toEqual(before.numerals);
    await page.mouse.move(400, 300);
    await page.mouse.down();
    await page.mouse.move(470, 330, { steps: 4 });
    await page.mouse.up();
    await page.keyboard.press('s');
    await atRest(page);
    const back = await readDial(page);
    back.numerals.forEach((numeral, k) => {
      expect(numeral.x).toBeCloseTo(before.numerals[k]!.x, 0);
      expect(numeral.y).toBeCloseTo(before.numerals[k]!.y, 0);
    });
  });

  test('draws only when something changed', async () => {
    const page = await demo();
    await page.waitForTimeout(300);
    const still = (): Promise<string | null> =>
      page.evaluate(() => document.querySelector('svg.dial')!.getAttribute('data-frames'));
    const before = await still();
    await page.waitForTimeout(700);
    expect(await still()).toBe(before);
    await page.keyboard.press('j');
    await atRest(page);
    expect(await still()).not.toBe(before);
  });

  test('an atom that is clicked is named and lit in the ladder', async () => {
    const page = await demo();
    const dial = await readDial(page);
    const one = dial.numerals.find(({ text }) => text === '1')!;
    await page.mouse.click(
      dial.middle.x + 0.65 * (one.x - dial.middle.x),
      dial.middle.y + 0.65 * (one.y - dial.middle.y),
    );
    await page.locator('.atom-lit', { hasText: 'N9' }).waitFor();
    await page
      .getByRole('region', { name: 'Ladder' })
      .locator('button.lit', { hasText: 'N9' })
      .first()
      .waitFor();
  });
});

describe('the movement between units', () => {
  test('is over within half a second and passes through views in between', async () => {
    const page = await demo({ reducedMotion: 'no-preference' });
    const places = await page.evaluate(async () => {
      const list: string[] = [];
      window.dispatchEvent(new KeyboardEvent('keydown', { key: 'j' }));
      const start = performance.now();
      while (performance.now() - start < 480) {
        await new Promise(resolve => requestAnimationFrame(resolve));
        list.push(document.querySelector('.numeral text')?.getAttribute('x') ?? '');
      }
      return list;
    });
    expect(new Set(places).size).toBeGreaterThan(2);
    await atRest(page);
    const end = await readDial(page);
    await page.waitForTimeout(200);
    expect((await readDial(page)).numerals).toEqual(end.numerals);
  });
});

describe('the whole job by keyboard', () => {
  test('steps, explains, marks with a remark, undoes and redoes', async () => {
    const page = await demo();
    await page.keyboard.press('d');
    await page.getByRole('option', { selected: true }).filter({ hasText: 'inverted' }).waitFor();
    const ladder = page.getByRole('region', { name: 'Ladder' });
    await ladder.getByText('rule 1a, sphere 2').waitFor();
    await page.keyboard.press('x');
    const reject = page.getByRole('button', { name: 'Reject' });
    expect(await reject.getAttribute('aria-pressed')).toBe('true');
    await page.keyboard.press('r');
    await page.keyboard.type('wrong hand at the alcohol');
    await page.keyboard.press('Enter');
    await page.keyboard.press('Control+z');
    expect(await page.getByRole('textbox', { name: 'Remark on C4' }).inputValue()).toBe('');
    await page.keyboard.press('Control+z');
    expect(await reject.getAttribute('aria-pressed')).toBe('false');
    await page.keyboard.press('Control+Shift+z');
    await page.keyboard.press('Control+Shift+z');
    expect(await reject.getAttribute('aria-pressed')).toBe('true');
    expect(await page.getByRole('textbox', { name: 'Remark on C4' }).inputValue()).toBe(
      'wrong hand at the alcohol',
    );
  });

  test('every command can be found by its words and run from the list', async () => {
    const page = await demo();
    await page.keyboard.press('Control+k');
    await page.getByRole('combobox', { name: 'Find a command' }).fill('far side');
    await page.keyboard.press('Enter');
    await atRest(page);
    expect(runOf(await readDial(page))).toBe('anticlockwise');
  });
});

describe.each(['light', 'dark'] as const)('every screen, %s', scheme => {
  test('is free of violations and looks as it should', async () => {
    const page = await demo({ colorScheme: scheme });
    await page.getByRole('region', { name: 'Drawing' }).getByRole('img').waitFor();
    await picture(page, `sight-${scheme}`);
    expect(await violations(page)).toEqual([]);
    for (let k = 0; k < 4; k++) await page.keyboard.press('j');
    await atRest(page);
    await picture(page, `double-bond-${scheme}`);
    expect(await violations(page)).toEqual([]);
    await page.keyboard.press('l');
    await page.getByRole('grid', { name: 'Ledger' }).waitFor();
    await atRest(page);
    await picture(page, `ledger-${scheme}`);
    expect(await violations(page)).toEqual([]);
    await page.keyboard.press('l');
    await page.keyboard.press('Control+k');
    await picture(page, `commands-${scheme}`);
    expect(await violations(page)).toEqual([]);
    await page.keyboard.press('Escape');
    await page.keyboard.press('Control+i');
    await picture(page, `intend-${scheme}`);
    expect(await violations(page)).toEqual([]);
  });

  test('the empty window says what to do', async () => {
    opened = await openWindow([], { browser, colorScheme: scheme });
    await opened.page.getByRole('button', { name: 'Open files' }).waitFor();
    await picture(opened.page, `empty-${scheme}`);
    expect(await violations(opened.page)).toEqual([]);
  });
});

test('zoomed to 200 % everything can still be reached', async () => {
  const page = await demo({ width: 640, height: 400, deviceScaleFactor: 2 });
  for (const name of ['Docket', 'Ladder', 'Sight']) {
    const section = page.getByRole('region', { name, exact: true }).first();
    await section.scrollIntoViewIfNeeded();
    const box = await section.boundingBox();
    expect(box!.width).toBeGreaterThan(200);
  }
  await picture(page, 'zoomed-200');
  expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(640);
});

test('on paper: the sight, the caption and the limits, without the controls', async () => {
  const page = await demo();
  await page.emulateMedia({ media: 'print' });
  expect(await page.getByRole('button', { name: 'Find a command' }).isVisible()).toBe(false);
  expect(await page.getByRole('navigation', { name: 'Ledger' }).isVisible()).toBe(false);
  for (const text of ['C2, seen with H26 behind', 'is not a proof of absolute configuration']) {
    expect(await page.getByText(text).first().isVisible()).toBe(true);
  }
  await atRest(page);
  await page.screenshot({ path: join(outputFolder, 'print.png'), fullPage: true });
});

test('the mirror image stands beside the model with the other hand', async () => {
  const page = await demo();
  await page.keyboard.press('m');
  await page.getByText('mirror image, S').waitFor();
  await atRest(page);
  await picture(page, 'mirror-light');
  const sweeps = await page
    .locator('.dial-sweep')
    .evaluateAll(all => all.map(one => one.getAttribute('data-turn')));
  expect(sweeps).toEqual(['clockwise', 'anticlockwise']);
  const dial = await readDial(page);
  // What stands to the right of the model's middle stands as far to the left of the mirror image's.
  const [model, mirror] = [dial.numerals.slice(0, 3), dial.numerals.slice(3)];
  const seam = dial.middle.x;
  model.forEach((numeral, k) => {
    expect(mirror[k]!.text).toBe(numeral.text);
    expect(mirror[k]!.x - seam).toBeCloseTo(seam - numeral.x, 0);
    expect(mirror[k]!.y).toBeCloseTo(numeral.y, 0);
  });
});

test('preferences are kept for the next window', async () => {
  const page = await demo();
  await page.keyboard.press('b');
  await atRest(page);
  expect(await page.locator('.atom-label').count()).toBe(0);
  await page.reload();
  await page.getByRole('option').first().waitFor();
  await atRest(page);
  expect(await page.locator('.atom-label').count()).toBe(0);
  await page.keyboard.press('b');
  await expect.poll(() => page.locator('.atom-label').count()).toBeGreaterThan(0);
});
