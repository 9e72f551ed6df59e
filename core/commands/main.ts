/** Entry of the command, and of the worker threads that it starts from the same file. */
import { isMainThread } from 'node:worker_threads';
import { nodeIo, watchProcess } from './node-io.ts';

if (isMainThread) {
  const { runCommandLine } = await import('./command.ts');
  const interruption = new AbortController();
  watchProcess(interruption);
  const io = nodeIo(new URL(import.meta.url), process.cwd(), interruption);
  process.exitCode = await runCommandLine(process.argv.slice(2), io);
} else {
  const { serveBatches } = await import('./check-worker.ts');
  serveBatches();
}
