/** What the machine does for the window, the same in the Electron shell and on loopback: every message is checked here. */
import { z } from 'zod';
import type { HostEvent, HostFile, HostInfo } from '../renderer/host.ts';
import {
  type Answer,
  CONTENT_LIMIT,
  describeIssues,
  HostError,
  type Method,
  type Request,
  requests,
} from '../renderer/host-messages.ts';
import { FileTable } from './files/file-table.ts';
import { RecentList } from './files/recent.ts';
import { readSession, writeSession } from './files/sessions.ts';
import { Watcher } from './files/watcher.ts';
import { join } from 'node:path';

/** What differs between the two shells. */
export interface Shell {
  readonly info: HostInfo;
  /** The recent list lives here. */
  readonly configFolder: string;
  /** Sessions of content without a path live here. */
  readonly stateFolder: string;
  /** Asks the person for files to open; null where the page has to do it. */
  readonly chooseFiles: (() => Promise<readonly string[]>) | null;
  /** Asks where to save and writes; null where the page has to do it. */
  readonly save: ((request: Request<'save'>, bytes: Uint8Array) => Promise<string | null>) | null;
  /** Sends an event to the window. */
  readonly send: (event: HostEvent) => void;
  /** Notes what went wrong without a caller to tell. */
  readonly log: (message: string) => void;
}

/** Bytes that travel beside a call. */
export type Body = AsyncIterable<Uint8Array>;

async function* noBody(): Body {}

async function collect(body: Body, limit: number, what: string): Promise<Uint8Array> {
  const chunks: Uint8Array[] = [];
  let total = 0;
  for await (const chunk of body) {
    total += chunk.length;
    if (total > limit) throw new HostError('too-large', `${what} is larger than ${limit} bytes`);
    chunks.push(chunk);
  }
  return Buffer.concat(chunks);
}

export class HostService {
  readonly files = new FileTable();
  readonly #shell: Shell;
  readonly #recent: RecentList;
  readonly #watcher: Watcher;
  #start: readonly HostFile[] = [];

  constructor(shell: Shell) {
    this.#shell = shell;
    this.#recent = new RecentList(join(shell.configFolder, 'recent.json'));
    this.#watcher = new Watcher(this.files, file => {
      shell.send({ type: 'changed', file });
    });
  }

  /**
   * Enters the files named at start. What cannot be opened is told to `log`, the rest is opened.
   *
   * @param demo Whether they are the demo: not for the recent list, their sessions kept apart from the program.
   */
  async setStartFiles(paths: readonly string[], demo: boolean): Promise<readonly HostFile[]> {
    this.#start = await this.#enter(paths, demo);
    return this.#start;
  }

  /** Opens files named while running (a second start, a file association) and tells the window. */
  async openPaths(paths: readonly string[], demo = false): Promise<readonly HostFile[]> {
    const files = await this.#enter(paths, demo);
    if (files.length > 0) this.#shell.send({ type: 'opened', files });
    return files;
  }

  /** Enters one file that the person dropped on the window. @throws HostError `not-readable`. */
  async enterPath(path: string): Promise<HostFile> {
    const file = await this.files.add(path);
    await this.#remember([this.files.entry(file.id).path]);
    return file;
  }

  async #enter(paths: readonly string[], demo: boolean): Promise<HostFile[]> {
    const files: HostFile[] = [];
    const entered: string[] = [];
    for (const path of paths) {
      try {
        const file = await this.files.add(path, demo);
        files.push(file);
        entered.push(this.files.entry(file.id).path);
      } catch (error) {
        this.#shell.log(error instanceof Error ? error.message : String(error));
      }
    }
    if (!demo && entered.length > 0) await this.#remember(entered);
    return files;
  }

  async #remember(paths: readonly string[]): Promise<void> {
    await this.#recent.add(paths).catch((error: unknown) => {
      this.#shell.log(
        `the list of recent files was not kept: ${error instanceof Error ? error.message : String(error)}`,
      );
    });
  }

  /**
   * Answers one call of the window.
   *
   * @param method The name as it came; anything but a method of `Host` is refused.
   * @param message The message as it came, not yet checked.
   * @param body Bytes beside it (`offer`, `save`).
   * @throws HostError
   */
  async call(method: string, message: unknown, body: Body = noBody()): Promise<Answer<Method>> {
    if (!isMethod(method)) throw new HostError('bad-request', `the host has no call "${method}"`);
    switch (method) {
      case 'info':
        check(method, message);
        return this.#shell.info;
      case 'startFiles':
        check(method, message);
        return [...this.#start];
      case 'open':
        check(method, message);
        return await this.#open();
      case 'offer':
        return await this.files.offer(check(method, message).name, body);
      case 'read': {
        const { id, offset, length } = check(method, message);
        return await this.files.read(id, offset, length);
      }
      case 'save':
        return await this.#save(check(method, message), body);
      case 'readSession':
        return await readSession(this.files.entry(check(method, message).id), this.#shell.stateFolder);
      case 'writeSession': {
        const { id, json } = check(method, message);
        await writeSession(this.files.entry(id), this.#shell.stateFolder, json);
        return null;
      }
      case 'recent':
        check(method, message);
        return await this.#recentFiles();
      case 'watch':
        break;
    }
    const { id, on } = check(method, message);
    this.#watcher.set(this.files.entry(id), on);
    return null;
  }

  async #open(): Promise<HostFile[]> {
    if (!this.#shell.chooseFiles)
      throw new HostError('unsupported', 'here the page itself asks for the file');
    return await this.#enter(await this.#shell.chooseFiles(), false);
  }

  async #save(request: Request<'save'>, body: Body): Promise<string | null> {
    if (!this.#shell.save) throw new HostError('unsupported', 'here the page itself saves');
    return await this.#shell.save(request, await collect(body, CONTENT_LIMIT, request.name));
  }

  async #recentFiles(): Promise<HostFile[]> {
    const files: HostFile[] = [];
    for (const path of await this.#recent.paths()) {
      // A file that is gone is left out; it may come back.
      const file = await this.files.add(path).catch(() => null);
      if (file) files.push(file);
    }
    return files;
  }

  /** Ends watching and removes private copies. */
  dispose(): void {
    this.#watcher.dispose();
    this.files.dispose();
  }
}

function isMethod(name: string): name is Method {
  return Object.hasOwn(requests, name);
}

function check<M extends Method>(method: M, message: unknown): Request<M> {
  const schema: z.ZodType<Request<M>> = requests[method] as unknown as z.ZodType<Request<M>>;
  const result = schema.safeParse(message);
  if (result.success) return result.data;
  throw new HostError(
    'bad-request',
    `the call "${method}" was not understood: ${describeIssues(result.error)}`,
  );
}
