/** The window's side of the loopback host: calls over HTTP to the address the page came from. */
import type { Host, HostEvent, HostFile } from './host.ts';
import { type Answer, fileName, HostError, hostEvent, type Method, type Request } from './host-messages.ts';
import { checkAnswer, openEnvelope } from './host-electron.ts';

/** What of the browser the host uses; tests in Node bring their own. */
export interface LoopbackEnvironment {
  /** Where the host is, "" for where the page came from. */
  readonly origin: string;
  readonly fetch: typeof fetch;
  readonly openEvents: (address: string, onMessage: (data: string) => void) => () => void;
  /** Asks the person for files; empty when cancelled. */
  readonly pickFiles: () => Promise<readonly File[]>;
  /** Hands a file to the browser's downloads. */
  readonly download: (name: string, bytes: Uint8Array) => void;
}

export function loopbackHost(environment: LoopbackEnvironment = browserEnvironment()): Host {
  async function post(path: string, type: string, body: BodyInit): Promise<Response> {
    let response: Response;
    try {
      response = await environment.fetch(`${environment.origin}/api/${path}`, {
        method: 'POST',
        headers: { 'Content-Type': type },
        body,
        credentials: 'same-origin',
        redirect: 'error',
      });
    } catch (error) {
      throw new HostError(
        'unreachable',
        'Deasil no longer answers: start it again, then reload this page',
        error,
      );
    }
    return response;
  }

  /** The value of an answer; what is not ours (a refusal in plain text) becomes an error with its text. */
  async function answer<M extends Method>(method: M, response: Response): Promise<Answer<M>> {
    const type = response.headers.get('content-type') ?? '';
    if (response.ok && type.startsWith('application/octet-stream')) {
      return checkAnswer(method, new Uint8Array(await response.arrayBuffer()));
    }
    if (type.startsWith('application/json')) return openEnvelope(method, await response.json());
    const code = response.status === 403 ? 'unauthorised' : 'internal';
    throw new HostError(code, (await response.text()).trim());
  }

  async function call<M extends Method>(method: M, message: Request<M>): Promise<Answer<M>> {
    return answer(method, await post(method, 'application/json', JSON.stringify(message)));
  }

  async function offer(name: string, content: BodyInit): Promise<HostFile> {
    const checked = fileName.safeParse(name);
    if (!checked.success) throw new HostError('bad-request', `"${name}" is not a file name`);
    const message = encodeURIComponent(JSON.stringify({ name }));
    return answer('offer', await post(`offer?message=${message}`, 'application/octet-stream', content));
  }

  return {
    info: () => call('info', {}),
    startFiles: () => call('startFiles', {}),
    async open() {
      const files: HostFile[] = [];
      for (const file of await environment.pickFiles()) files.push(await offer(file.name, file));
      return files;
    },
    offer: (name, bytes) => offer(name, bytes as Uint8Array<ArrayBuffer>),
    offerFile: file => offer(file.name, file),
    read: (id, offset, length) => call('read', { id, offset, length }),
    async save(request) {
      const checked = fileName.safeParse(request.name);
      if (!checked.success) throw new HostError('bad-request', `"${request.name}" is not a file name`);
      environment.download(request.name, request.bytes);
      return request.name;
    },
    readSession: id => call('readSession', { id }),
    async writeSession(id, json) {
      await call('writeSession', { id, json });
    },
    recent: () => call('recent', {}),
    async watch(id, on) {
      await call('watch', { id, on });
    },
    onEvent(listener: (event: HostEvent) => void): () => void {
      return environment.openEvents(`${environment.origin}/api/events`, data => {
        listener(hostEvent.parse(JSON.parse(data)));
      });
    },
  };
}

function browserEnvironment(): LoopbackEnvironment {
  return {
    origin: '',
    fetch: (input, init) => fetch(input, init),
    openEvents(address, onMessage) {
      const source = new EventSource(address);
      source.addEventListener('message', (event: MessageEvent<string>) => {
        onMessage(event.data);
      });
      return () => {
        source.close();
      };
    },
    pickFiles,
    download,
  };
}

/** The browser's own file dialog. */
function pickFiles(): Promise<readonly File[]> {
  return new Promise(resolve => {
    const input = document.createElement('input');
    input.type = 'file';
    input.multiple = true;
    input.hidden = true;
    input.setAttribute('aria-hidden', 'true');
    const finish = (files: readonly File[]): void => {
      input.remove();
      resolve(files);
    };
    input.addEventListener('change', () => {
      finish([...(input.files ?? [])]);
    });
    input.addEventListener('cancel', () => {
      finish([]);
    });
    document.body.append(input);
    input.click();
  });
}

/** How long a browser may take to begin a download, ms. */
const DOWNLOAD_GRACE = 60_000;

function download(name: string, bytes: Uint8Array): void {
  const address = URL.createObjectURL(new Blob([bytes as Uint8Array<ArrayBuffer>]));
  const link = document.createElement('a');
  link.href = address;
  link.download = name;
  link.click();
  setTimeout(() => {
    URL.revokeObjectURL(address);
  }, DOWNLOAD_GRACE);
}
