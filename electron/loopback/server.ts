/** The loopback host: the window and its calls over HTTP on 127.0.0.1, for one browser that was given a token. */
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { HostEvent } from '../../renderer/host.ts';
import {
  CONTENT_LIMIT,
  HostError,
  MESSAGE_LIMIT,
  requests,
  SESSION_LIMIT,
} from '../../renderer/host-messages.ts';
import { HostService } from '../host-service.ts';
import { headersFor } from '../policy.ts';
import type { WindowFiles } from '../window-files.ts';
import { Credentials } from './credentials.ts';

const ADDRESS = '127.0.0.1';
/** Events kept for a page that lost its connection for a moment. */
const EVENTS_KEPT = 256;
/** A comment on the event stream this often keeps it alive and finds dead connections, ms. */
const HEARTBEAT = 20_000;

/**
 * The page that leads on from the token to the window. A redirect would not do: when the address was followed from
 * another site, the browser keeps a strict cookie back until the next step is taken from here.
 */
const ADMITTED =
  '<!doctype html><html lang="en"><head><meta charset="utf-8"><title>Deasil</title><meta http-equiv="refresh" content="0;url=/"></head><body><p><a href="/">Deasil</a></p></body></html>';

export interface LoopbackOptions {
  readonly window: WindowFiles;
  readonly version: string;
  readonly configFolder: string;
  readonly stateFolder: string;
  readonly log: (message: string) => void;
  /** Most bytes of content handed over; tests lower it. */
  readonly contentLimit?: number;
}

/** HTTP status of each failure; what is not named is 400. */
const STATUS: Readonly<Record<string, number>> = {
  unauthorised: 403,
  'unknown-file': 404,
  'file-changed': 409,
  'not-readable': 422,
  'not-written': 422,
  'too-large': 413,
  unsupported: 405,
  internal: 500,
};

export class LoopbackHost {
  readonly service: HostService;
  readonly #server: Server;
  readonly #options: LoopbackOptions;
  readonly #credentials = new Credentials();
  readonly #streams = new Set<ServerResponse>();
  readonly #events: { readonly number: number; readonly text: string }[] = [];
  #eventNumber = 0;
  #heartbeat: NodeJS.Timeout | null = null;
  #port = 0;

  constructor(options: LoopbackOptions) {
    this.#options = options;
    this.service = new HostService({
      info: { version: options.version, shell: 'loopback', platform: process.platform },
      configFolder: options.configFolder,
      stateFolder: options.stateFolder,
      chooseFiles: null,
      save: null,
      send: event => {
        this.#broadcast(event);
      },
      log: options.log,
    });
    this.#server = createServer({ maxHeaderSize: 16 * 1024 }, (request, response) => {
      this.#serve(request, response).catch((error: unknown) => {
        this.#fail(response, error);
      });
    });
    // The size of bodies is bounded, not the time that a large one takes.
    this.#server.requestTimeout = 0;
    this.#server.headersTimeout = 10_000;
  }

  /** Starts listening on 127.0.0.1. @param port 0 for one that the system picks. */
  async listen(port = 0): Promise<void> {
    await new Promise<void>((resolve, reject) => {
      const refuse = (error: Error): void => {
        const taken = 'code' in error && error.code === 'EADDRINUSE';
        reject(taken ? new Error(`port ${port} is in use; name another, or none`, { cause: error }) : error);
      };
      this.#server.once('error', refuse);
      this.#server.listen(port, ADDRESS, () => {
        this.#server.off('error', refuse);
        resolve();
      });
    });
    this.#port = (this.#server.address() as AddressInfo).port;
    this.#heartbeat = setInterval(() => {
      for (const stream of this.#streams) stream.write(': \n\n');
    }, HEARTBEAT);
    this.#heartbeat.unref();
  }

  get port(): number {
    return this.#port;
  }

  get origin(): string {
    return `http://${ADDRESS}:${this.#port}`;
  }

  /** A fresh address; its token admits one browser, once. */
  address(): string {
    return `${this.origin}/?token=${this.#credentials.issue()}`;
  }

  async close(): Promise<void> {
    if (this.#heartbeat) clearInterval(this.#heartbeat);
    for (const stream of this.#streams) stream.end();
    this.service.dispose();
    await new Promise<void>(resolve => {
      this.#server.close(() => {
        resolve();
      });
      this.#server.closeAllConnections();
    });
  }

  /** Cookies of one host are shared by all its ports: the name tells two running hosts apart. */
  get #cookie(): string {
    return `deasil-${this.#port}`;
  }

  async #serve(request: IncomingMessage, response: ServerResponse): Promise<void> {
    // A name that was rebound to 127.0.0.1 shows in the Host header; only the address itself is answered.
    if (request.headers.host !== `${ADDRESS}:${this.#port}`) {
      this.#plain(response, 403, `Deasil answers at ${this.origin} only.`);
      return;
    }
    const { origin } = request.headers;
    if (origin !== undefined && origin !== this.origin) {
      this.#plain(response, 403, 'Another page may not use this address.');
      return;
    }
    const site = request.headers['sec-fetch-site'];
    const target = request.url ?? '';
    if (!target.startsWith('/') || !URL.canParse(this.origin + target)) {
      this.#plain(response, 400, 'That is no address of Deasil.');
      return;
    }
    const address = new URL(this.origin + target);
    const token = address.searchParams.get('token');
    if (address.pathname === '/' && token !== null && request.method === 'GET') {
      this.#admit(request, response, token);
      return;
    }
    if (!this.#credentials.admits(request.headers.cookie, this.#cookie)) {
      this.#plain(
        response,
        403,
        'This browser has not been admitted. Open the address that Deasil printed in the terminal; press Enter there for a fresh one.',
      );
      return;
    }
    // A page of another site or port may link here at most; it may not fetch.
    const navigation = request.method === 'GET' && address.pathname === '/';
    if (site !== undefined && site !== 'same-origin' && !(navigation && site === 'none')) {
      this.#plain(response, 403, 'Another page may not use this address.');
      return;
    }
    if (address.pathname.startsWith('/api/')) await this.#api(request, response, address);
    else await this.#page(request, response, address.pathname);
  }

  /** Exchanges the token for the cookie and takes it out of the address. */
  #admit(request: IncomingMessage, response: ServerResponse, token: string): void {
    const session = this.#credentials.exchange(token);
    if (session === null && !this.#credentials.admits(request.headers.cookie, this.#cookie)) {
      this.#plain(
        response,
        403,
        'This address was used before. Press Enter in the terminal for a fresh one.',
      );
      return;
    }
    const headers: Record<string, string> = {
      ...headersFor('/'),
      'Content-Type': 'text/html; charset=utf-8',
      'Cache-Control': 'no-store',
    };
    if (session !== null) {
      headers['Set-Cookie'] = `${this.#cookie}=${session}; HttpOnly; SameSite=Strict; Path=/`;
    }
    response.writeHead(200, headers);
    response.end(ADMITTED);
  }

  async #page(request: IncomingMessage, response: ServerResponse, path: string): Promise<void> {
    if (request.method !== 'GET' && request.method !== 'HEAD') {
      response.setHeader('Allow', 'GET, HEAD');
      this.#plain(response, 405, 'The window is only read.');
      return;
    }
    const file = await this.#options.window.get(path);
    if (!file) {
      this.#plain(response, 404, 'The window has no such file.');
      return;
    }
    response.writeHead(200, { ...file.headers, 'Content-Length': file.bytes.length });
    response.end(request.method === 'HEAD' ? undefined : file.bytes);
  }

  async #api(request: IncomingMessage, response: ServerResponse, address: URL): Promise<void> {
    const call = address.pathname.slice('/api/'.length);
    if (call === 'events') {
      if (request.method !== 'GET') {
        response.setHeader('Allow', 'GET');
        this.#plain(response, 405, 'Events are only read.');
        return;
      }
      this.#subscribe(request, response);
      return;
    }
    if (!Object.hasOwn(requests, call)) {
      this.#plain(response, 404, 'The host has no such call.');
      return;
    }
    if (request.method !== 'POST') {
      response.setHeader('Allow', 'POST');
      this.#plain(response, 405, 'Calls are posted.');
      return;
    }
    if (request.headers.origin === undefined) {
      this.#plain(response, 403, 'A call must come from the window.');
      return;
    }
    const type = request.headers['content-type']?.split(';')[0]?.trim();
    const binary = call === 'offer' || call === 'save';
    if (type !== (binary ? 'application/octet-stream' : 'application/json')) {
      this.#plain(response, 415, `A call carries ${binary ? 'bytes' : 'JSON'}.`);
      return;
    }
    const limit = binary
      ? (this.#options.contentLimit ?? CONTENT_LIMIT)
      : call === 'writeSession'
        ? 2 * SESSION_LIMIT
        : MESSAGE_LIMIT;
    const body = limited(request, limit);
    const message = binary
      ? parseJson(address.searchParams.get('message') ?? '')
      : parseJson(Buffer.concat(await gather(body)).toString('utf8'));
    const answer = await this.service.call(call, message, binary ? body : undefined);
    if (answer instanceof Uint8Array) {
      response.writeHead(200, {
        ...headersFor('/api'),
        'Content-Type': 'application/octet-stream',
        'Content-Length': answer.length,
        'Cache-Control': 'no-store',
      });
      response.end(answer);
      return;
    }
    this.#json(response, 200, { ok: true, value: answer });
  }

  #subscribe(request: IncomingMessage, response: ServerResponse): void {
    response.writeHead(200, {
      ...headersFor('/api'),
      'Content-Type': 'text/event-stream',
      'Cache-Control': 'no-store',
      'X-Accel-Buffering': 'no',
    });
    response.write('retry: 500\n\n');
    const last = Number(request.headers['last-event-id'] ?? Number.NaN);
    for (const event of this.#events) {
      if (event.number > last) response.write(event.text);
    }
    this.#streams.add(response);
    response.on('close', () => this.#streams.delete(response));
  }

  #broadcast(event: HostEvent): void {
    const number = ++this.#eventNumber;
    const text = `id: ${number}\ndata: ${JSON.stringify(event)}\n\n`;
    this.#events.push({ number, text });
    if (this.#events.length > EVENTS_KEPT) this.#events.shift();
    for (const stream of this.#streams) stream.write(text);
  }

  #fail(response: ServerResponse, error: unknown): void {
    const known = error instanceof HostError;
    if (!known) this.#options.log(error instanceof Error ? (error.stack ?? error.message) : String(error));
    if (response.headersSent) {
      response.destroy();
      return;
    }
    const code = known ? error.code : 'internal';
    const message = known ? error.message : 'the host failed; the terminal says why';
    const status = STATUS[code] ?? 400;
    // What is left of a refused body is not read: the connection ends with the answer.
    response.setHeader('Connection', 'close');
    this.#json(response, status, { ok: false, error: { code, message } });
  }

  #json(response: ServerResponse, status: number, value: unknown): void {
    response.writeHead(status, {
      ...headersFor('/api'),
      'Content-Type': 'application/json; charset=utf-8',
      'Cache-Control': 'no-store',
    });
    response.end(JSON.stringify(value));
  }

  #plain(response: ServerResponse, status: number, text: string): void {
    response.writeHead(status, {
      ...headersFor('/'),
      'Content-Type': 'text/plain; charset=utf-8',
      'Cache-Control': 'no-store',
      // What a refused request still wants to send is not waited for.
      Connection: 'close',
    });
    response.end(`${text}\n`);
  }
}

/** The body of a request, cut off with an error at a size. */
async function* limited(request: IncomingMessage, limit: number): AsyncGenerator<Uint8Array> {
  const refuse = (): never => {
    throw new HostError('too-large', `the message is larger than ${limit} bytes`);
  };
  if (Number(request.headers['content-length'] ?? 0) > limit) refuse();
  let total = 0;
  // The socket must survive a refusal, so that the answer that says why still gets through.
  for await (const chunk of request.iterator({ destroyOnReturn: false }) as AsyncIterable<Buffer>) {
    total += chunk.length;
    if (total > limit) refuse();
    yield chunk;
  }
}

async function gather(body: AsyncIterable<Uint8Array>): Promise<Uint8Array[]> {
  const chunks: Uint8Array[] = [];
  for await (const chunk of body) chunks.push(chunk);
  return chunks;
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    throw new HostError('bad-request', 'the message is not JSON', error);
  }
}
