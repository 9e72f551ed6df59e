/** A hostile page in the same browser, admitted cookie and all: what it can do to the loopback host, and what the window itself may do. */
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Browser, BrowserContext, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { serveLoopback } from '../../electron/loopback/serve.ts';
import type { LoopbackHost } from '../../electron/loopback/server.ts';
import { launchBrowser } from './launch.ts';

let folder: string;
let host: LoopbackHost;
let hostile: Server;
let hostileOrigin: string;
let browser: Browser;
let context: BrowserContext;
let page: Page;
/** What the hostile page's server was asked for. */
const leaked: string[] = [];

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-attack-'));
  mkdirSync(join(folder, 'window'));
  writeFileSync(
    join(folder, 'window', 'index.html'),
    '<!doctype html><title>Deasil</title><p>window</p><script src="probe.js"></script>',
  );
  // The developer tools, through which tests evaluate, may build code from text; a script of the page itself may not.
  writeFileSync(
    join(folder, 'window', 'probe.js'),
    "let code = 'done'; try { new Function('return 1')(); } catch { code = 'refused'; } document.body.dataset.code = code;",
  );
  writeFileSync(join(folder, 'poses.sdf'), 'SECRET POSES');
  host = await serveLoopback({
    windowFolder: join(folder, 'window'),
    version: 'test',
    files: [join(folder, 'poses.sdf')],
    demo: false,
    log: () => undefined,
    configFolder: join(folder, 'config'),
    stateFolder: join(folder, 'state'),
  });
  hostile = createServer((request, response) => {
    leaked.push(request.url ?? '');
    response.writeHead(200, { 'Content-Type': 'text/html' });
    response.end('<!doctype html><title>hostile</title>');
  });
  await new Promise<void>(resolve => hostile.listen(0, '127.0.0.1', resolve));
  hostileOrigin = `http://127.0.0.1:${(hostile.address() as AddressInfo).port}`;
  browser = await launchBrowser();
  context = await browser.newContext();
  page = await context.newPage();
  await page.goto(host.address());
  await page.waitForURL(`${host.origin}/`);
});

afterAll(async () => {
  await browser.close();
  await host.close();
  hostile.close();
  rmSync(folder, { recursive: true, force: true });
});

describe('the admitted window', () => {
  test('lost its token from the address and sees no cookie', async () => {
    expect(page.url()).toBe(`${host.origin}/`);
    expect(await page.evaluate(() => document.cookie)).toBe('');
    expect(await page.evaluate(() => history.length)).toBeLessThanOrEqual(2);
  });

  test('calls the host and survives a reload', async () => {
    await page.reload();
    const names = await page.evaluate(async () => {
      const answer = await fetch('/api/startFiles', {
        method: 'POST',
        headers: { 'Content-Type': 'application/json' },
        body: '{}',
      });
      return (await answer.json()) as unknown;
    });
    expect(names).toMatchObject({ ok: true, value: [{ name: 'poses.sdf' }] });
  });

  test('cannot build code from text, run inline scripts, or reach anywhere else', async () => {
    expect(await page.getAttribute('body', 'data-code')).toBe('refused');
    const before = leaked.length;
    const outcome = await page.evaluate(async other => {
      const attempt = async (work: () => unknown): Promise<string> => {
        try {
          await work();
          return 'done';
        } catch {
          return 'refused';
        }
      };
      const loads = (element: HTMLElement, address: string): Promise<void> =>
        new Promise((resolve, reject) => {
          element.addEventListener('load', () => resolve());
          element.addEventListener('error', () => reject(new Error('refused')));
          element.setAttribute('src', address);
          document.body.append(element);
        });
      const inline = document.createElement('script');
      inline.textContent = 'globalThis.inlineRan = true';
      document.head.append(inline);
      return {
        inline: Reflect.get(globalThis, 'inlineRan') === true ? 'done' : 'refused',
        fetch: await attempt(() => fetch(`${other}/leak-fetch`, { mode: 'no-cors' })),
        beacon: navigator.sendBeacon(`${other}/leak-beacon`) ? 'sent' : 'refused',
        image: await attempt(() => loads(document.createElement('img'), `${other}/leak-image`)),
        script: await attempt(() => loads(document.createElement('script'), `${other}/leak-script`)),
        socket: await attempt(
          () =>
            new Promise<void>((resolve, reject) => {
              const socket = new WebSocket(other.replace('http', 'ws'));
              socket.addEventListener('open', () => resolve());
              socket.addEventListener('error', () => reject(new Error('refused')));
            }),
        ),
      };
    }, hostileOrigin);
    expect(outcome).toMatchObject({
      inline: 'refused',
      fetch: 'refused',
      image: 'refused',
      script: 'refused',
      socket: 'refused',
    });
    await new Promise(resolve => setTimeout(resolve, 200));
    expect(leaked.slice(before)).toEqual([]);
  });
});

describe('a hostile page on another port of the same machine', () => {
  test('reads nothing, by any request a page can make', async () => {
    const other = await context.newPage();
    await other.goto(hostileOrigin);
    const outcome = await other.evaluate(async target => {
      const read = async (init: RequestInit, path: string): Promise<string> => {
        try {
          const answer = await fetch(`${target}${path}`, { credentials: 'include', ...init });
          return `${answer.type} ${await answer.text()}`;
        } catch {
          return 'refused';
        }
      };
      const json = { method: 'POST', headers: { 'Content-Type': 'application/json' }, body: '{}' };
      const plain = { method: 'POST', headers: { 'Content-Type': 'text/plain' }, body: '{}' };
      return {
        page: await read({}, '/'),
        call: await read(json, '/api/startFiles'),
        simple: await read(plain, '/api/startFiles'),
        opaque: await read({ ...plain, mode: 'no-cors' }, '/api/startFiles'),
        events: await new Promise<string>(resolve => {
          const source = new EventSource(`${target}/api/events`, { withCredentials: true });
          source.addEventListener('open', () => resolve('open'));
          source.addEventListener('error', () => {
            source.close();
            resolve('refused');
          });
        }),
        script: await new Promise<string>(resolve => {
          const script = document.createElement('script');
          script.src = `${target}/`;
          script.addEventListener('load', () => resolve('loaded'));
          script.addEventListener('error', () => resolve('refused'));
          document.head.append(script);
        }),
      };
    }, host.origin);
    expect(outcome).toEqual({
      page: 'refused',
      call: 'refused',
      simple: 'refused',
      opaque: 'refused',
      events: 'refused',
      script: 'refused',
    });
    await other.close();
  });

  test('writes nothing with a form, and cannot put the window into a frame', async () => {
    const other = await context.newPage();
    await other.goto(hostileOrigin);
    await other.evaluate(target => {
      const form = document.createElement('form');
      form.method = 'post';
      form.action = `${target}/api/startFiles`;
      form.enctype = 'text/plain';
      document.body.append(form);
      form.submit();
    }, host.origin);
    await other.waitForURL(`${host.origin}/**`);
    expect(await other.textContent('body')).toContain('Another page may not use this address');
    await other.goto(hostileOrigin);
    await other.evaluate(target => {
      const frame = document.createElement('iframe');
      frame.src = `${target}/`;
      document.body.append(frame);
    }, host.origin);
    await other.waitForTimeout(300);
    for (const frame of other.frames()) expect(await frame.content()).not.toContain('<p>window</p>');
    await other.close();
  });

  test('gets no hold of the window it opens', async () => {
    const other = await context.newPage();
    await other.goto(hostileOrigin);
    const [opened] = await Promise.all([
      context.waitForEvent('page'),
      other.evaluate(target => {
        Reflect.set(globalThis, 'held', window.open(`${target}/`));
      }, host.origin),
    ]);
    await opened.waitForLoadState();
    expect(await opened.content()).not.toContain('<p>window</p>');
    await other.close();
  });
});

test('another browser profile is not admitted', async () => {
  const stranger = await browser.newContext();
  const other = await stranger.newPage();
  expect((await other.goto(`${host.origin}/`))?.status()).toBe(403);
  await stranger.close();
});
