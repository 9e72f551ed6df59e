/** The window's side of the Electron shell: calls go through the preload's bridge, answers are checked. */
import type { Host, HostEvent, HostFile } from './host.ts';
import {
  type Answer,
  answers,
  describeIssues,
  envelope,
  HostError,
  hostEvent,
  type Method,
  type Request,
} from './host-messages.ts';
import type { z } from 'zod';

/** What the preload puts into the page as `deasilBridge`. */
export interface ElectronBridge {
  /** Sends a call; the answer is an envelope, not yet checked. */
  call(method: string, message: unknown, bytes?: Uint8Array): Promise<unknown>;
  /** Passes on events, not yet checked; the function returned ends that. */
  onEvent(listener: (event: unknown) => void): () => void;
  /** Enters a dropped or picked file by its path; null for one that has none. */
  fileFor(file: File): Promise<unknown>;
}

export function isElectronBridge(value: unknown): value is ElectronBridge {
  return (
    typeof value === 'object' &&
    value !== null &&
    ['call', 'onEvent', 'fileFor'].every(name => typeof Reflect.get(value, name) === 'function')
  );
}

/** Opens an envelope. @throws HostError as the host said, or `internal` for what is no answer to the call. */
export function openEnvelope<M extends Method>(method: M, answer: unknown): Answer<M> {
  const outer = envelope.safeParse(answer);
  if (!outer.success) {
    throw new HostError(
      'internal',
      `the host's answer to "${method}" was not understood: ${describeIssues(outer.error)}`,
    );
  }
  if (!outer.data.ok) throw new HostError(outer.data.error.code, outer.data.error.message);
  return checkAnswer(method, outer.data.value);
}

/** Checks the value of an answer. @throws HostError `internal`. */
export function checkAnswer<M extends Method>(method: M, value: unknown): Answer<M> {
  const schema = answers[method] as unknown as z.ZodType<Answer<M>>;
  const result = schema.safeParse(value);
  if (result.success) return result.data;
  throw new HostError(
    'internal',
    `the host's answer to "${method}" was not understood: ${describeIssues(result.error)}`,
  );
}

export function electronHost(bridge: ElectronBridge): Host {
  async function call<M extends Method>(
    method: M,
    message: Request<M>,
    bytes?: Uint8Array,
  ): Promise<Answer<M>> {
    return openEnvelope(method, await bridge.call(method, message, bytes));
  }
  const host: Host = {
    info: () => call('info', {}),
    startFiles: () => call('startFiles', {}),
    open: () => call('open', {}),
    offer: (name, bytes) => call('offer', { name }, bytes),
    async offerFile(file: File): Promise<HostFile> {
      const entered = await bridge.fileFor(file);
      if (entered !== null) return openEnvelope('offer', entered);
      return host.offer(file.name, new Uint8Array(await file.arrayBuffer()));
    },
    read: (id, offset, length) => call('read', { id, offset, length }),
    save: request => call('save', { name: request.name, extensions: [...request.extensions] }, request.bytes),
    readSession: id => call('readSession', { id }),
    async writeSession(id, json) {
      await call('writeSession', { id, json });
    },
    recent: () => call('recent', {}),
    async watch(id, on) {
      await call('watch', { id, on });
    },
    onEvent(listener: (event: HostEvent) => void): () => void {
      return bridge.onEvent(event => {
        listener(hostEvent.parse(event));
      });
    },
  };
  return host;
}
