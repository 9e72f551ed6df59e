/** The main process's side of the IPC: checks who asks and what, and answers with an envelope. */
import { z } from 'zod';
import { HostError } from '../renderer/host-messages.ts';
import { CALL_CHANNEL, PATH_CHANNEL } from './bridge.ts';
import type { HostService } from './host-service.ts';

/** What of `ipcMain` is used. */
export interface MainIpc<Event> {
  handle(channel: string, listener: (event: Event, ...args: unknown[]) => Promise<unknown>): void;
}

const callArguments = z.tuple([z.string().max(40), z.unknown(), z.instanceof(Uint8Array).nullable()]);
const pathArguments = z.tuple([z.string().min(1).max(32_768)]);

/**
 * Listens for the window's calls.
 *
 * @param trusted Whether an event comes from the window's own top frame; all other senders are refused.
 * @param log Notes failures that are ours.
 */
export function listen<Event>(
  ipc: MainIpc<Event>,
  service: HostService,
  trusted: (event: Event) => boolean,
  log: (message: string) => void,
): void {
  const answer = async (event: Event, work: () => Promise<unknown>): Promise<unknown> => {
    try {
      if (!trusted(event)) throw new HostError('unauthorised', 'only the window itself may call the host');
      return { ok: true, value: await work() };
    } catch (error) {
      if (error instanceof HostError)
        return { ok: false, error: { code: error.code, message: error.message } };
      log(error instanceof Error ? (error.stack ?? error.message) : String(error));
      return { ok: false, error: { code: 'internal', message: 'the host failed; the terminal says why' } };
    }
  };
  ipc.handle(CALL_CHANNEL, (event, ...args) =>
    answer(event, async () => {
      const [method, message, bytes] = parsed(callArguments, args);
      return await service.call(method, message, bytes === null ? undefined : once(bytes));
    }),
  );
  ipc.handle(PATH_CHANNEL, (event, ...args) =>
    answer(event, async () => {
      const [path] = parsed(pathArguments, args);
      return await service.enterPath(path);
    }),
  );
}

function parsed<T>(schema: z.ZodType<T>, args: unknown[]): T {
  const result = schema.safeParse(args);
  if (!result.success) throw new HostError('bad-request', 'the call was not understood');
  return result.data;
}

async function* once(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  yield bytes;
}
