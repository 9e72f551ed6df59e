/** The window's side of the chemistry worker: questions with answers, bytes through the host, news of the running job. */
import type { Ladder, Settings } from '../../core/docket.ts';
import type { Host } from '../host.ts';
import {
  type FromWorker,
  fromWorker,
  type IntentionInput,
  type Model,
  type OpenedFile,
  type ToWorker,
} from './protocol.ts';

export type News = Extract<FromWorker, { type: 'taken' | 'rows' | 'progress' | 'problem' }>;

export class ChemistryClient {
  readonly #worker: Worker;
  readonly #host: Host;
  readonly #onNews: (news: News) => void;
  readonly #waiting = new Map<number, (answer: FromWorker) => void>();
  #request = 0;
  #job = 0;

  constructor(host: Host, onNews: (news: News) => void) {
    this.#host = host;
    this.#onNews = onNews;
    this.#worker = new Worker(new URL('./chemistry-worker.ts', import.meta.url), {
      type: 'module',
      name: 'chemistry',
    });
    this.#worker.addEventListener('message', (event: MessageEvent<unknown>) => {
      this.#receive(fromWorker.parse(event.data));
    });
    this.#worker.addEventListener('error', event => {
      onNews({ type: 'problem', job: this.#job, message: `the chemistry worker failed: ${event.message}` });
    });
  }

  #send(message: ToWorker): void {
    this.#worker.postMessage(message, { transfer: [] });
  }

  #receive(message: FromWorker): void {
    switch (message.type) {
      case 'read':
        this.#host.read(message.id, message.offset, message.length).then(
          bytes => {
            this.#send({ type: 'bytes', request: message.request, bytes, problem: null });
          },
          (error: unknown) => {
            const problem = error instanceof Error ? error.message : String(error);
            this.#send({ type: 'bytes', request: message.request, bytes: null, problem });
          },
        );
        break;
      case 'examined':
      case 'explained':
      case 'recorded':
      case 'raw': {
        const answer = this.#waiting.get(message.request);
        this.#waiting.delete(message.request);
        answer?.(message);
        break;
      }
      default:
        if (message.job === this.#job || message.job === -1) this.#onNews(message);
    }
  }

  #ask<T extends FromWorker['type']>(
    message: (request: number) => ToWorker,
  ): Promise<Extract<FromWorker, { type: T }>> {
    return new Promise(resolve => {
      const request = ++this.#request;
      this.#waiting.set(request, answer => {
        resolve(answer as Extract<FromWorker, { type: T }>);
      });
      this.#send(message(request));
    });
  }

  /** Opens files in place of what is open; the news tell what comes of it. */
  open(files: readonly OpenedFile[], intention: IntentionInput | null, settings: Settings): void {
    this.#send({ type: 'open', job: ++this.#job, files: [...files], intention, settings });
  }

  intend(intention: IntentionInput | null): void {
    this.#send({ type: 'intend', job: ++this.#job, intention });
  }

  cancel(): void {
    this.#send({ type: 'cancel', job: this.#job });
  }

  async examine(index: number): Promise<Model | null> {
    return (await this.#ask<'examined'>(request => ({ type: 'examine', request, index }))).model;
  }

  async explain(index: number, unit: number): Promise<{ ladder: Ladder | null; problem: string | null }> {
    const answer = await this.#ask<'explained'>(request => ({ type: 'explain', request, index, unit }));
    return { ladder: answer.ladder, problem: answer.problem };
  }

  /** The record of all entries as a document; null when it was stopped. */
  async record(
    form: 'html' | 'csv',
    version: string,
    date: string,
    marks: Extract<ToWorker, { type: 'record' }>['marks'],
  ): Promise<Uint8Array | null> {
    const answer = await this.#ask<'recorded'>(request => ({
      type: 'record',
      request,
      form,
      version,
      date,
      marks,
    }));
    return answer.bytes;
  }

  /** The bytes of entries as they stand in their files. */
  async raw(indices: readonly number[]): Promise<readonly Uint8Array[]> {
    return (await this.#ask<'raw'>(request => ({ type: 'raw', request, indices: [...indices] }))).bytes;
  }
}
