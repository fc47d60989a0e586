/**
 * Entry of a worker, on Node's worker_threads and on web workers. Built to one script of its own that the
 * engine carries as text (see "Build" in DEVELOPERS.md) and that is also shipped as `leadspan/worker.js`.
 */
import { isLeadspanError, LeadspanError, toPlainError } from '../base/errors.ts';
import type { Kernels } from '../base/kernels.ts';
import type { BackendModule } from '../core/create.ts';
import { createKernels } from '../core/create.ts';
import type { FromWorker, ToWorker } from './messages.ts';
import { builtin } from './platform.ts';
import { findTask } from './registry.ts';
import { runSliced } from './slices.ts';

const parent = builtin('node:worker_threads')?.parentPort;
const scope = globalThis as unknown as {
  postMessage(message: FromWorker): void;
  onmessage: ((event: { data: ToWorker }) => void) | null;
};
const send = (message: FromWorker) => (parent ? parent.postMessage(message) : scope.postMessage(message));

let backend: BackendModule | undefined;
let kernels: Kernels | undefined;
const cancelled = new Set<number>();

async function runTask(id: number, name: string, input: unknown): Promise<void> {
  try {
    const check = () => {
      if (cancelled.has(id)) throw new LeadspanError('ABORTED', 'The job was cancelled.');
    };
    kernels ??= createKernels(backend!);
    const output = await runSliced(findTask(name), kernels, input, check, (fraction) =>
      send({ kind: 'progress', id, fraction }),
    );
    send({ kind: 'done', id, output });
  } catch (error) {
    // A trap may leave the instance's memory in any state: the next task gets a fresh one.
    if (!isLeadspanError(error)) kernels = undefined;
    send({ kind: 'failed', id, error: toPlainError(error) });
  } finally {
    cancelled.delete(id);
  }
}

function receive(message: ToWorker): void {
  if (message.kind === 'task') void runTask(message.id, message.task, message.input);
  else if (message.kind === 'cancel') cancelled.add(message.id);
  else {
    try {
      backend = message.backend;
      kernels = createKernels(backend);
      send({ kind: 'ready' });
    } catch (error) {
      send({ kind: 'unready', error: toPlainError(error) });
    }
  }
}

if (parent) parent.on('message', receive);
else scope.onmessage = (event) => receive(event.data);
