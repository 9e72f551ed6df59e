/** The test browser itself: it starts, draws with WebGL 2, and has fonts. */
import { expect, test } from 'vitest';
import { launchBrowser } from './launch.ts';

test('a Chromium starts, offers WebGL 2 in software, and has letters', async () => {
  const browser = await launchBrowser();
  try {
    const page = await browser.newPage();
    const renderer = await page.evaluate(() => {
      const gl = document.createElement('canvas').getContext('webgl2');
      return gl ? String(gl.getParameter(gl.VERSION)) : null;
    });
    expect(renderer).toMatch(/^WebGL 2/);
    const width = await page.evaluate(() => {
      const context = document.createElement('canvas').getContext('2d')!;
      context.font = '20px sans-serif';
      return ['R', 'σ', '−', 'Å'].map(letter => context.measureText(letter).width);
    });
    for (const letter of width) expect(letter).toBeGreaterThan(4);
    expect(new Set(width).size).toBeGreaterThan(1);
  } finally {
    await browser.close();
  }
});
