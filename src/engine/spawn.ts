import type { FromWorker, ToWorker } from './messages.ts';
import { builtin, type NodeWorker } from './platform.ts';

/** One worker, the same on every host. */
export interface WorkerPort {
  post(message: ToWorker): void;
  /** Set by the pool before the first message. */
  onMessage: (message: FromWorker) => void;
  /** The worker failed outside a task or ended by itself. */
  onDeath: (why: string) => void;
  /** Keeps the process alive (busy) or not (idle), where the host knows the difference. */
  hold(busy: boolean): void;
  terminate(): void;
}

/** What the engine needs of a web worker given by the host product. */
export interface WebWorkerLike {
  postMessage(message: unknown): void;
  terminate(): void;
  onmessage: unknown;
  onerror: unknown;
}

/**
 * Starts a worker: the host's own (`worker` option), else a thread of Node, else a web worker from a Blob.
 * The worker's script is carried as text because a URL beside the bundle is lost by most bundlers, and a
 * wrong URL can hang without an error. Hosts whose policy forbids Blob workers pass `worker`.
 * @throws whatever the host throws when it allows no workers
 */
export async function spawnWorker(hostWorker: (() => WebWorkerLike) | undefined): Promise<WorkerPort> {
  const threads = builtin('node:worker_threads');
  if (hostWorker) return fromWebWorker(hostWorker());
  // A chunk of its own, loaded only where workers are wanted.
  const { workerSource } = await import('./worker-source.ts');
  if (threads) return fromNodeWorker(new threads.Worker(workerSource, { eval: true, name: 'leadspan' }));
  const url = URL.createObjectURL(new Blob([workerSource], { type: 'text/javascript' }));
  const port = fromWebWorker(new Worker(url, { name: 'leadspan' }) as unknown as WebWorkerLike);
  const terminate = port.terminate;
  port.terminate = () => {
    URL.revokeObjectURL(url);
    terminate();
  };
  return port;
}

function fromNodeWorker(worker: NodeWorker): WorkerPort {
  const port: WorkerPort = {
    post: (message) => worker.postMessage(message),
    onMessage: () => {},
    onDeath: () => {},
    hold: (busy) => (busy ? worker.ref() : worker.unref()),
    terminate: () => void worker.terminate(),
  };
  worker.on('message', (message: FromWorker) => port.onMessage(message));
  worker.on('error', (error: Error) => port.onDeath(error.message));
  worker.on('exit', (code: number) => port.onDeath(`it ended with code ${code}`));
  return port;
}

function fromWebWorker(worker: WebWorkerLike): WorkerPort {
  const port: WorkerPort = {
    post: (message) => worker.postMessage(message),
    onMessage: () => {},
    onDeath: () => {},
    hold: () => {},
    terminate: () => worker.terminate(),
  };
  worker.onmessage = (event: { data: FromWorker }) => port.onMessage(event.data);
  worker.onerror = (event: { message?: string }) => port.onDeath(event.message ?? 'it could not be loaded');
  return port;
}
