/** The window's side of the layout worker, which is started when the first drawing is wanted. */
import type { Molecule } from '../../core/chemistry/molecule.ts';
import type { LabelledUnit } from '../../core/docket.ts';
import { type LayoutAnswer, layoutAnswer, type LayoutRequest } from './layout-messages.ts';

let worker: Worker | null = null;
let last = 0;
const waiting = new Map<number, (answer: LayoutAnswer) => void>();

function start(): Worker {
  const started = new Worker(new URL('./layout-worker.ts', import.meta.url), {
    type: 'module',
    name: 'layout',
  });
  started.addEventListener('message', (event: MessageEvent<unknown>) => {
    const answer = layoutAnswer.parse(event.data);
    waiting.get(answer.request)?.(answer);
    waiting.delete(answer.request);
  });
  started.addEventListener('error', event => {
    for (const [request, resolve] of waiting) resolve({ request, layout: null, problem: event.message });
    waiting.clear();
    worker = null;
  });
  return started;
}

/** Lays a molecule out in the plane. */
export function layOut(
  molecule: Molecule,
  units: readonly LabelledUnit[],
  focus: readonly number[],
): Promise<LayoutAnswer> {
  worker ??= start();
  const sender = worker;
  return new Promise(resolve => {
    const request = ++last;
    waiting.set(request, resolve);
    const message: LayoutRequest = { request, molecule, units, focus: [...focus] };
    sender.postMessage(message, { transfer: [] });
  });
}
