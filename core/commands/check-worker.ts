/** The worker's side of `check --jobs`: reads the intentions once, then checks the batches it is handed. */
import { parentPort, workerData } from 'node:worker_threads';
import type { Intentions } from '../comparison/intentions.ts';
import { formatNamed } from '../formats/registry.ts';
import {
  batchOfTask,
  checkBatch,
  type WorkerAnswer,
  type WorkerStart,
  type WorkerTask,
} from './check-batch.ts';
import { readIntended } from './intended.ts';
import { nodeIo } from './node-io.ts';

/** Serves batches until the thread is ended. */
export function serveBatches(): void {
  const start = workerData as WorkerStart;
  const port = parentPort;
  if (!port) return;
  let ready: Promise<Intentions | null> | null = null;
  const intentions = (): Promise<Intentions | null> => {
    ready ??=
      start.intended === null
        ? Promise.resolve(null)
        : readIntended(
            nodeIo(null, start.cwd),
            start.intended,
            start.options.limits,
            start.options.settings,
          ).then(result => result.intentions);
    return ready;
  };
  const answer = async (task: WorkerTask): Promise<WorkerAnswer> => {
    const format = formatNamed(task.format);
    if (!format) return { id: task.id, failure: `no format called ${task.format}` };
    return { id: task.id, results: checkBatch(batchOfTask(task, format), await intentions(), start.options) };
  };
  port.on('message', (task: WorkerTask) => {
    answer(task).then(
      result => port.postMessage(result),
      (error: unknown) => {
        const failure = error instanceof Error ? error.message : String(error);
        port.postMessage({ id: task.id, failure } satisfies WorkerAnswer);
      },
    );
  });
}
