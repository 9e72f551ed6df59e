/** Attacks on the loopback host: each must be refused, and the host must go on serving its own window. */
import { mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { createConnection } from 'node:net';
import { networkInterfaces, tmpdir } from 'node:os';
import { join } from 'node:path';
import * as fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { serveLoopback } from '../../electron/loopback/serve.ts';
import type { LoopbackHost } from '../../electron/loopback/server.ts';
import { headersFor } from '../../electron/policy.ts';
import { MESSAGE_LIMIT, requests } from '../../renderer/host-messages.ts';
import { admit, ask, type Answer, type Asked } from './loopback-client.ts';

const SECRET = 'the secret of another file';
const CONTENT_LIMIT = 1_000_000;

let folder: string;
let host: LoopbackHost;
let cookie: string;
const logged: string[] = [];

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'deasil-security-'));
  const windowFolder = join(folder, 'window');
  mkdirSync(join(windowFolder, 'assets'), { recursive: true });
  writeFileSync(join(windowFolder, 'index.html'), '<!doctype html><title>Deasil</title>');
  writeFileSync(join(windowFolder, 'assets', 'main-abc.js'), 'export {};');
  writeFileSync(join(windowFolder, 'assets', 'chemistry.worker-abc.js'), 'export {};');
  writeFileSync(join(folder, 'secret.txt'), SECRET);
  writeFileSync(join(folder, 'poses.sdf'), 'poses');
  host = await serveLoopback({
    windowFolder,
    version: 'test',
    files: [join(folder, 'poses.sdf')],
    demo: false,
    log: message => logged.push(message),
    configFolder: join(folder, 'config'),
    stateFolder: join(folder, 'state'),
    contentLimit: CONTENT_LIMIT,
  });
  cookie = await admit(host);
});

afterAll(async () => {
  await host.close();
  rmSync(folder, { recursive: true, force: true });
});

/** A request as the window itself sends it, with parts replaced. */
function own(asked: Partial<Asked> & { path: string }): Promise<Answer> {
  return ask(host.port, {
    method: 'POST',
    ...asked,
    headers: {
      Cookie: cookie,
      Origin: host.origin,
      'Content-Type': 'application/json',
      'Sec-Fetch-Site': 'same-origin',
      ...asked.headers,
    },
  });
}

/** Asserts that the window is still served; run after an attack. */
async function stillServes(): Promise<void> {
  const answer = await own({ path: '/api/info', body: '{}' });
  expect(answer.status).toBe(200);
  expect(JSON.parse(answer.text)).toMatchObject({ ok: true, value: { shell: 'loopback' } });
}

describe('admission', () => {
  test("the window's own request is answered", stillServes);

  test.each(['/', '/assets/main-abc.js', '/api/events', '/api/info', '/nothing'])(
    'without a cookie %s is refused and tells nothing',
    async path => {
      const answer = await ask(host.port, { path });
      expect(answer.status).toBe(403);
      expect(answer.text).not.toContain('<title>');
    },
  );

  test('without a cookie a call is refused', async () => {
    const answer = await own({ path: '/api/startFiles', body: '{}', headers: { Cookie: '' } });
    expect(answer.status).toBe(403);
    expect(answer.text).not.toContain('poses');
  });

  test('a wrong, shortened, or misplaced secret is refused', async () => {
    const [name, value] = cookie.split('=') as [string, string];
    for (const bad of [
      `${name}=`,
      `${name}=${value.slice(0, -1)}`,
      `${name}=${value}x`,
      `other=${value}`,
      value,
      `${name}=${value.toUpperCase()}`,
    ]) {
      const answer = await own({ path: '/api/info', body: '{}', headers: { Cookie: bad } });
      expect(answer.status).toBe(403);
    }
  });

  test('a token admits once; a spent, wrong or empty one does not', async () => {
    const address = new URL(host.address());
    const path = `/${address.search}`;
    const first = await ask(host.port, { path });
    expect(first.status).toBe(200);
    const setCookie = first.headers['set-cookie']?.[0] ?? '';
    expect(setCookie).toContain('HttpOnly');
    expect(setCookie).toContain('SameSite=Strict');
    expect(setCookie).not.toMatch(/domain|expires|max-age/i);
    expect((await ask(host.port, { path })).status).toBe(403);
    expect((await ask(host.port, { path: '/?token=' })).status).toBe(403);
    expect((await ask(host.port, { path: '/?token=AAAA' })).status).toBe(403);
    expect((await ask(host.port, { path: `/?token=${cookie.split('=')[1]}` })).status).toBe(403);
  });

  test('an admitted browser that follows its old address gets its window', async () => {
    const address = new URL(host.address());
    const path = `/${address.search}`;
    await ask(host.port, { path });
    expect((await ask(host.port, { path, headers: { Cookie: cookie } })).status).toBe(200);
  });

  test('a token is for the address of the page alone', async () => {
    const { search } = new URL(host.address());
    for (const path of [`/api/info${search}`, `/index.html${search}`, `//${search}`]) {
      expect((await ask(host.port, { path })).status).toBe(403);
    }
    expect((await ask(host.port, { path: `/${search}`, method: 'POST' })).status).toBe(403);
    expect((await ask(host.port, { path: `/${search}` })).status).toBe(200);
  });

  test('tokens are long and never alike', () => {
    const tokens = Array.from({ length: 100 }, () => new URL(host.address()).searchParams.get('token') ?? '');
    expect(new Set(tokens).size).toBe(100);
    // 256 bits in base64url.
    for (const token of tokens) expect(token).toMatch(/^[\w-]{43}$/);
  });
});

describe('other pages', () => {
  test.each([
    'http://evil.example',
    'https://127.0.0.1',
    'http://localhost',
    'http://127.0.0.1',
    'http://127.0.0.1:1',
    'null',
    'file://',
    'http://127.0.0.1.evil.example',
  ])('a page of %s is refused even with the cookie', async origin => {
    const answer = await own({ path: '/api/startFiles', body: '{}', headers: { Origin: origin } });
    expect(answer.status).toBe(403);
    expect(answer.headers['access-control-allow-origin']).toBeUndefined();
  });

  test('a preflight of another page gets no leave', async () => {
    const answer = await own({
      path: '/api/read',
      method: 'OPTIONS',
      headers: { Origin: 'http://evil.example', 'Access-Control-Request-Method': 'POST' },
    });
    expect(answer.status).toBe(403);
    expect(Object.keys(answer.headers).filter(name => name.startsWith('access-control'))).toEqual([]);
  });

  test('a call without an origin is refused', async () => {
    const answer = await ask(host.port, {
      path: '/api/info',
      method: 'POST',
      body: '{}',
      headers: { Cookie: cookie, 'Content-Type': 'application/json' },
    });
    expect(answer.status).toBe(403);
  });

  test.each(['cross-site', 'same-site', 'none'])(
    'a fetch that the browser marks %s is refused',
    async site => {
      for (const path of ['/api/events', '/assets/main-abc.js', '/licences.json']) {
        const answer = await ask(host.port, { path, headers: { Cookie: cookie, 'Sec-Fetch-Site': site } });
        expect(answer.status).toBe(403);
      }
    },
  );

  test('the page may be typed in, not linked from elsewhere, and never framed', async () => {
    const status = async (site: string): Promise<number> =>
      (await ask(host.port, { path: '/', headers: { Cookie: cookie, 'Sec-Fetch-Site': site } })).status;
    expect(await status('none')).toBe(200);
    expect(await status('same-origin')).toBe(200);
    expect(await status('cross-site')).toBe(403);
    expect(await status('same-site')).toBe(403);
    const { headers } = await ask(host.port, { path: '/', headers: { Cookie: cookie } });
    expect(headers['content-security-policy']).toContain("frame-ancestors 'none'");
    expect(headers['x-frame-options']).toBe('DENY');
  });

  test('a form of another page cannot call: its content types are refused', async () => {
    for (const type of ['text/plain', 'application/x-www-form-urlencoded', 'multipart/form-data', '']) {
      const answer = await own({ path: '/api/info', body: '{}', headers: { 'Content-Type': type } });
      expect(answer.status).toBe(415);
    }
  });
});

describe('a rebound name', () => {
  test.each(['evil.example', 'localhost', '127.0.0.1', '[::1]', '0.0.0.0', '127.1', '2130706433', ''])(
    'Host %j is refused even with the cookie and a matching origin',
    async name => {
      const rebound = name === '' ? '' : `${name}:${name === '127.0.0.1' ? host.port + 1 : host.port}`;
      for (const path of ['/', '/api/info', `/${new URL(host.address()).search}`]) {
        const answer = await ask(host.port, {
          path,
          headers: { Host: rebound, Cookie: cookie, Origin: `http://${rebound}` },
        });
        expect([400, 403]).toContain(answer.status);
        expect(answer.headers['set-cookie']).toBeUndefined();
      }
    },
  );

  test('the machine answers on 127.0.0.1 only', async () => {
    const others = Object.values(networkInterfaces())
      .flat()
      .filter(address => address !== undefined && address.address !== '127.0.0.1' && address.scopeid !== 0)
      .map(address => address!.address);
    for (const address of ['::1', ...others]) {
      const reached = await new Promise<boolean>(resolve => {
        const socket = createConnection({ host: address, port: host.port, timeout: 1000 });
        socket.on('connect', () => {
          socket.destroy();
          resolve(true);
        });
        socket.on('timeout', () => {
          socket.destroy();
          resolve(false);
        });
        socket.on('error', () => {
          resolve(false);
        });
      });
      expect({ address, reached }).toEqual({ address, reached: false });
    }
  });
});

describe('paths', () => {
  const ATTEMPTS = [
    '/../secret.txt',
    '/assets/../../secret.txt',
    '/..%2fsecret.txt',
    '/%2e%2e/secret.txt',
    '/%2e%2e%2fsecret.txt',
    '/..%5csecret.txt',
    '/..\\secret.txt',
    '/....//secret.txt',
    '/assets/%00/../../secret.txt',
    '/%c0%ae%c0%ae/secret.txt',
    '//etc/passwd',
    '/etc/passwd',
    'http://evil.example/',
    '/secret.txt',
    '/.git/config',
    '/assets/',
    '/assets',
    '/index.html/',
    '/INDEX.HTML',
  ];

  test.each(ATTEMPTS)('%s leads nowhere', async path => {
    const answer = await own({ path, method: 'GET' });
    expect(answer.status).toBeGreaterThanOrEqual(400);
    expect(answer.status).toBeLessThan(500);
    expect(answer.text).not.toContain(SECRET);
    expect(answer.text).not.toContain('root:');
  });

  test('no path at all, of 500 random ones, gives anything but the window', async () => {
    const piece = fc.constantFrom(
      '..',
      '.',
      '%2e%2e',
      '%2f',
      '/',
      '\\',
      'secret.txt',
      'assets',
      'window',
      '%00',
      'etc',
      'passwd',
      '~',
      ':',
    );
    await fc.assert(
      fc.asyncProperty(fc.array(piece, { minLength: 1, maxLength: 8 }), async pieces => {
        const answer = await own({ path: `/${pieces.join('/')}`, method: 'GET' });
        expect(answer.text).not.toContain(SECRET);
        expect(answer.text).not.toContain('root:');
      }),
      { numRuns: 500 },
    );
  });

  test('a path is no handle', async () => {
    for (const id of ['../secret.txt', join(folder, 'secret.txt'), 'secret.txt', '/etc/passwd']) {
      const answer = await own({ path: '/api/read', body: JSON.stringify({ id, offset: 0, length: 100 }) });
      expect(answer.status).toBe(400);
      expect(answer.text).not.toContain(SECRET);
    }
  });

  test('an unknown handle is not found', async () => {
    const message = { id: 'f'.repeat(32), offset: 0, length: 100 };
    expect((await own({ path: '/api/read', body: JSON.stringify(message) })).status).toBe(404);
  });

  test('the path of a file is never told', async () => {
    const answer = await own({ path: '/api/startFiles', body: '{}' });
    expect(answer.text).toContain('poses.sdf');
    expect(answer.text).not.toContain(folder);
  });
});

describe('methods and messages', () => {
  test('a call is posted, the window and events are only read', async () => {
    for (const method of ['GET', 'PUT', 'DELETE', 'PATCH', 'HEAD', 'OPTIONS']) {
      const answer = await own({ path: '/api/info', method });
      expect(answer.status).toBe(405);
      expect(answer.headers.allow).toBe('POST');
    }
    for (const method of ['POST', 'PUT', 'DELETE', 'PATCH']) {
      expect((await own({ path: '/', method, body: '{}' })).status).toBe(405);
      expect((await own({ path: '/api/events', method, body: '{}' })).status).toBe(405);
    }
    await stillServes();
  });

  test.each(['constructor', '__proto__', 'toString', 'hasOwnProperty', 'nothing', '', 'READ'])(
    'there is no call %j',
    async name => {
      const { status } = await own({ path: `/api/${name}`, body: '{}' });
      expect(status).toBe(404);
    },
  );

  test('the dialogs of the shell are not offered on loopback', async () => {
    expect((await own({ path: '/api/open', body: '{}' })).status).toBe(405);
    const message = encodeURIComponent(JSON.stringify({ name: 'x', extensions: [] }));
    const answer = await own({
      path: `/api/save?message=${message}`,
      body: 'x',
      headers: { 'Content-Type': 'application/octet-stream' },
    });
    expect(answer.status).toBe(405);
  });

  test('what is not JSON, or not the message, is refused with the reason', async () => {
    for (const body of [
      '',
      '{',
      '[]',
      'null',
      '7',
      '{"id":7}',
      '{"__proto__":{"id":"x"}}',
      '{"id":"x","offset":0,"length":1,"more":1}',
    ]) {
      const answer = await own({ path: '/api/read', body });
      expect(answer.status).toBe(400);
      expect(JSON.parse(answer.text)).toMatchObject({ ok: false, error: { code: 'bad-request' } });
    }
    await stillServes();
  });

  test('random messages to every call are answered or refused, never a failure of the host', async () => {
    const before = logged.length;
    await fc.assert(
      fc.asyncProperty(fc.constantFrom(...Object.keys(requests)), fc.jsonValue(), async (call, message) => {
        const binary = call === 'offer' || call === 'save';
        const text = JSON.stringify(message);
        const answer = await own({
          path: binary ? `/api/${call}?message=${encodeURIComponent(text)}` : `/api/${call}`,
          body: binary ? 'x' : text,
          headers: { 'Content-Type': binary ? 'application/octet-stream' : 'application/json' },
        });
        expect(answer.status).toBeLessThan(500);
      }),
      { numRuns: 300 },
    );
    expect(logged.slice(before)).toEqual([]);
  });
});

describe('bodies', () => {
  async function* endless(size: number): AsyncGenerator<Uint8Array> {
    const chunk = new Uint8Array(64 * 1024);
    for (let sent = 0; sent < size; sent += chunk.length) yield chunk;
  }

  /** A refusal may reach the sender as an answer or as a closed connection. */
  async function refused(request: Promise<Answer>): Promise<boolean> {
    try {
      return (await request).status === 413;
    } catch (error) {
      return (
        error instanceof Error && 'code' in error && (error.code === 'ECONNRESET' || error.code === 'EPIPE')
      );
    }
  }

  test('an announced oversized message is refused before it is read', async () => {
    expect(await refused(own({ path: '/api/read', body: 'x'.repeat(MESSAGE_LIMIT + 1) }))).toBe(true);
    const announced = await own({ path: '/api/read', body: '', headers: { 'Content-Length': '0' } });
    expect(announced.status).toBe(400);
    await stillServes();
  });

  test('an unannounced one is cut off', async () => {
    const headers = { 'Transfer-Encoding': 'chunked' };
    expect(await refused(own({ path: '/api/read', body: endless(100 * MESSAGE_LIMIT), headers }))).toBe(true);
    await stillServes();
  });

  test('handed-over content beyond the limit is refused, and no copy of it stays', async () => {
    const path = `/api/offer?message=${encodeURIComponent(JSON.stringify({ name: 'large' }))}`;
    const headers = { 'Content-Type': 'application/octet-stream', 'Transfer-Encoding': 'chunked' };
    const kept = (): number =>
      readdirSync(tmpdir()).filter(name => name.startsWith('deasil-content-')).length;
    await own({ path, body: 'small', headers: { 'Content-Type': 'application/octet-stream' } });
    const before = kept();
    expect(await refused(own({ path, body: endless(5 * CONTENT_LIMIT), headers }))).toBe(true);
    expect(kept()).toBeLessThanOrEqual(before);
    await stillServes();
  });

  test('an upload that breaks off leaves the host serving', async () => {
    const path = `/api/offer?message=${encodeURIComponent(JSON.stringify({ name: 'broken' }))}`;
    const socket = createConnection({ host: '127.0.0.1', port: host.port });
    await new Promise(resolve => socket.once('connect', resolve));
    socket.write(
      `POST ${path} HTTP/1.1\r\nHost: 127.0.0.1:${host.port}\r\nOrigin: ${host.origin}\r\nCookie: ${cookie}\r\n` +
        'Content-Type: application/octet-stream\r\nContent-Length: 1000\r\n\r\nonly this',
    );
    await new Promise(resolve => setTimeout(resolve, 50));
    socket.destroy();
    await new Promise(resolve => setTimeout(resolve, 50));
    expect((await own({ path: '/api/info', body: '{}' })).status).toBe(200);
  });

  test('a megabyte of headers is refused', async () => {
    const answer = await own({
      path: '/api/info',
      body: '{}',
      headers: { 'X-Long': 'x'.repeat(1_000_000) },
    }).catch(() => null);
    expect(answer === null || answer.status === 431).toBe(true);
    await stillServes();
  });
});

describe('the policy of what is served', () => {
  test("the page is strict; only the worker's own response allows code from text", async () => {
    const page = await ask(host.port, { path: '/', headers: { Cookie: cookie } });
    const policy = String(page.headers['content-security-policy']);
    expect(policy).toContain("default-src 'none'");
    expect(policy).toContain("script-src 'self';");
    expect(policy).not.toContain('unsafe');
    expect(policy).not.toMatch(/https?:|\*/);
    const script = await ask(host.port, { path: '/assets/main-abc.js', headers: { Cookie: cookie } });
    expect(String(script.headers['content-security-policy'])).not.toContain('unsafe');
    const worker = await ask(host.port, {
      path: '/assets/chemistry.worker-abc.js',
      headers: { Cookie: cookie },
    });
    expect(String(worker.headers['content-security-policy'])).toContain("script-src 'self' 'unsafe-eval'");
  });

  test('every response is typed, unsniffable, unreferred and isolated', async () => {
    for (const path of ['/', '/assets/main-abc.js', '/nothing', '/api/nothing']) {
      const { headers } = await own({ path, method: path.startsWith('/api') ? 'POST' : 'GET' });
      expect(headers['x-content-type-options']).toBe('nosniff');
      expect(headers['referrer-policy']).toBe('no-referrer');
      expect(headers['cross-origin-opener-policy']).toBe('same-origin');
      expect(headers['cross-origin-resource-policy']).toBe('same-origin');
      expect(headers['content-type']).toMatch(/^[a-z]+\/[a-z]+/);
      expect(headers['x-powered-by']).toBeUndefined();
    }
  });

  test('permissions of the page are refused but for the clipboard', () => {
    const policy = headersFor('/')['Permissions-Policy'] ?? '';
    expect(policy).toContain('camera=()');
    expect(policy).toContain('geolocation=()');
    expect(policy.match(/\(self\)/g)?.length).toBe(2);
    expect(policy).toContain('clipboard-read=(self)');
  });
});
