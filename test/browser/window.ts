/** What tests of the window share: waiting for the sight, reading the dial, checking accessibility. */
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { join } from 'node:path';
import type { Page } from 'playwright-core';
import { outputFolder } from './launch.ts';

/** Waits until the picture is at rest. */
export async function atRest(page: Page): Promise<void> {
  await page.waitForFunction(
    () => document.querySelector<SVGElement>('svg.dial')?.dataset['still'] === 'true',
    undefined,
    { timeout: 20_000 },
  );
}

export interface ReadDial {
  readonly caption: string;
  readonly numerals: readonly { readonly text: string; readonly x: number; readonly y: number }[];
  /** Middle of the dial, px in the page. */
  readonly middle: { readonly x: number; readonly y: number };
  readonly sweep: string | null;
  readonly ring: string;
  readonly ringWeight: number;
}

/** The dial as it is drawn: where the numerals stand on the page. */
export function readDial(page: Page): Promise<ReadDial> {
  return page.evaluate(() => {
    const svg = document.querySelector<SVGSVGElement>('svg.dial')!;
    const box = svg.getBoundingClientRect();
    const ring = svg.querySelector('.dial-ring')!;
    return {
      caption: svg.getAttribute('aria-label') ?? '',
      numerals: Array.from(svg.querySelectorAll('.numeral'), numeral => {
        const place = numeral.querySelector('text')!.getBoundingClientRect();
        return {
          text: numeral.textContent,
          x: place.x + place.width / 2,
          y: place.y + place.height / 2,
        };
      }),
      middle: { x: box.x + box.width / 2, y: box.y + box.height / 2 },
      sweep: svg.querySelector('.dial-sweep')?.getAttribute('data-turn') ?? null,
      ring: ring.getAttribute('class') ?? '',
      ringWeight: Number(ring.getAttribute('stroke-width')),
    };
  });
}

/** Which way 1, 2, 3 run as one sees them on the page. */
export function runOf(dial: ReadDial): 'clockwise' | 'anticlockwise' {
  const angle = (text: string): number => {
    const numeral = dial.numerals.find(one => one.text === text);
    if (!numeral) throw new Error(`no numeral ${text} on the dial`);
    // y grows downwards, so growing angles run clockwise.
    return Math.atan2(numeral.y - dial.middle.y, numeral.x - dial.middle.x);
  };
  const turn = (from: number, to: number): number => (to - from + 4 * Math.PI) % (2 * Math.PI);
  const [one, two, three] = [angle('1'), angle('2'), angle('3')];
  return turn(one, two) < turn(one, three) ? 'clockwise' : 'anticlockwise';
}

/** Saves a picture of the window to be looked at. */
export async function picture(page: Page, name: string): Promise<void> {
  await page.screenshot({ path: join(outputFolder, `${name}.png`) });
}

const require = createRequire(import.meta.url);
let axeSource: string | null = null;

/** Violations that the automated checker finds on the screen as it stands, one line each. */
export async function violations(page: Page): Promise<string[]> {
  axeSource ??= readFileSync(require.resolve('axe-core/axe.min.js'), 'utf8');
  // The content policy of the page forbids foreign scripts; evaluation by the browser's own tools is not bound by it.
  await page.evaluate(axeSource);
  return page.evaluate(async () => {
    interface Result {
      readonly violations: readonly {
        readonly id: string;
        readonly help: string;
        readonly nodes: readonly { readonly target: readonly unknown[]; readonly failureSummary?: string }[];
      }[];
    }
    const checker = Reflect.get(globalThis, 'axe') as { run(): Promise<Result> };
    const result = await checker.run();
    return result.violations.flatMap(({ id, nodes }) =>
      nodes.map(node => `${id}: ${node.target.join(' ')}: ${node.failureSummary ?? ''}`),
    );
  });
}

/** Colour of a pixel of the page, "r,g,b". */
export async function pixels(
  page: Page,
  points: readonly { readonly x: number; readonly y: number }[],
): Promise<(readonly [number, number, number])[]> {
  const shot = await page.screenshot();
  return page.evaluate(
    async ({ encoded, points }) => {
      const bytes = Uint8Array.from(atob(encoded), c => c.charCodeAt(0));
      const image = await createImageBitmap(new Blob([bytes], { type: 'image/png' }));
      const canvas = new OffscreenCanvas(image.width, image.height);
      const context = canvas.getContext('2d')!;
      context.drawImage(image, 0, 0);
      return points.map(({ x, y }) => {
        const [r, g, b] = context.getImageData(Math.round(x), Math.round(y), 1, 1).data;
        return [r!, g!, b!] as const;
      });
    },
    { encoded: shot.toString('base64'), points: [...points] },
  );
}
