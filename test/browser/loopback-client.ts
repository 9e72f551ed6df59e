/** A plain HTTP client of the loopback host, for tests that speak to it without a browser. */
import { request as httpRequest, type IncomingHttpHeaders } from 'node:http';
import type { LoopbackHost } from '../../electron/loopback/server.ts';

export interface Answer {
  readonly status: number;
  readonly headers: IncomingHttpHeaders;
  readonly text: string;
}

export interface Asked {
  readonly method?: string;
  readonly path: string;
  readonly headers?: Record<string, string>;
  readonly body?: string | Uint8Array | AsyncIterable<Uint8Array>;
}

/** Sends one request exactly as told: no header is added but what HTTP itself needs. */
export function ask(port: number, asked: Asked): Promise<Answer> {
  return new Promise((resolve, reject) => {
    const request = httpRequest(
      {
        host: '127.0.0.1',
        port,
        method: asked.method ?? 'GET',
        path: asked.path,
        headers: { Host: `127.0.0.1:${port}`, ...asked.headers },
        agent: false,
      },
      response => {
        const chunks: Buffer[] = [];
        response.on('data', (chunk: Buffer) => chunks.push(chunk));
        response.on('end', () => {
          resolve({
            status: response.statusCode ?? 0,
            headers: response.headers,
            text: Buffer.concat(chunks).toString('utf8'),
          });
        });
        response.on('error', reject);
      },
    );
    request.on('error', reject);
    const { body } = asked;
    if (body === undefined || typeof body === 'string' || body instanceof Uint8Array) {
      request.end(body);
      return;
    }
    (async () => {
      for await (const chunk of body) {
        if (request.destroyed || request.writableEnded) return;
        if (!request.write(chunk))
          await new Promise<void>(go => {
            const on = (): void => {
              request.off('drain', on).off('close', on);
              go();
            };
            request.on('drain', on).on('close', on);
          });
      }
      request.end();
    })().catch(reject);
  });
}

/** Exchanges a fresh token: the cookie to send from then on. */
export async function admit(host: LoopbackHost): Promise<string> {
  const address = new URL(host.address());
  const answer = await ask(host.port, { path: `${address.pathname}${address.search}` });
  const cookie = answer.headers['set-cookie']?.[0]?.split(';')[0];
  if (cookie === undefined) throw new Error(`not admitted: ${answer.status} ${answer.text}`);
  return cookie;
}

/** Listens to the event stream; the function returned ends that. */
export function listenToEvents(
  address: string,
  cookie: string,
  onMessage: (data: string) => void,
): () => void {
  const url = new URL(address);
  const request = httpRequest(
    {
      host: '127.0.0.1',
      port: url.port,
      path: url.pathname,
      headers: { Host: url.host, Cookie: cookie },
      agent: false,
    },
    response => {
      let rest = '';
      response.setEncoding('utf8');
      response.on('data', (chunk: string) => {
        rest += chunk;
        const blocks = rest.split('\n\n');
        rest = blocks.pop() ?? '';
        for (const block of blocks) {
          const data = block.split('\n').filter(line => line.startsWith('data: '));
          if (data.length > 0) onMessage(data.map(line => line.slice('data: '.length)).join('\n'));
        }
      });
      response.on('error', () => undefined);
    },
  );
  request.on('error', () => undefined);
  request.end();
  return () => {
    request.destroy();
  };
}
