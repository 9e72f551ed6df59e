/** The test browser itself: it starts, and it draws with WebGL 2. */
import { expect, test } from 'vitest';
import { launchBrowser } from './launch.ts';

test('a Chromium starts and offers WebGL 2 in software', async () => {
  const browser = await launchBrowser();
  try {
    const page = await browser.newPage();
    const renderer = await page.evaluate(() => {
      const gl = document.createElement('canvas').getContext('webgl2');
      return gl ? String(gl.getParameter(gl.VERSION)) : null;
    });
    expect(renderer).toMatch(/^WebGL 2/);
  } finally {
    await browser.close();
  }
});
