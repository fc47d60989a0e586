import { fromPlainError, LeadspanError } from '../base/errors.ts';
import type { BackendModule } from '../core/create.ts';
import type { FromWorker } from './messages.ts';
import { spawnWorker, type WebWorkerLike, type WorkerPort } from './spawn.ts';

/** A web worker blocked by policy may neither load nor fail: after this it counts as refused. */
const READY_MILLISECONDS = 8000;

/** One task on its way. `job` groups tasks for fair turns. */
interface Order {
  readonly id: number;
  readonly job: object;
  readonly task: string;
  readonly input: unknown;
  readonly onProgress: (fraction: number) => void;
  readonly resolve: (output: unknown) => void;
  readonly reject: (error: unknown) => void;
}

interface Member {
  port: WorkerPort;
  order: Order | undefined;
  alive: boolean;
}

/**
 * Workers that take one task at a time. Waiting tasks are served job by job in turn, so that a short job
 * is not stuck behind a long one's queue.
 */
export class WorkerPool {
  readonly #backend: BackendModule;
  readonly #hostWorker: (() => WebWorkerLike) | undefined;
  readonly #members: Member[] = [];
  /** Waiting orders by job, in turn: the first job is served, then moves to the end. */
  readonly #waiting = new Map<object, Order[]>();
  #nextId = 1;
  #closed = false;

  private constructor(backend: BackendModule, hostWorker: (() => WebWorkerLike) | undefined) {
    this.#backend = backend;
    this.#hostWorker = hostWorker;
  }

  /** Starts `threads` workers and waits until every one has said it is ready. */
  static async start(
    backend: BackendModule,
    threads: number,
    hostWorker: (() => WebWorkerLike) | undefined,
  ): Promise<WorkerPool> {
    const pool = new WorkerPool(backend, hostWorker);
    try {
      await Promise.all(Array.from({ length: threads }, () => pool.#add()));
    } catch (error) {
      pool.close();
      throw error;
    }
    return pool;
  }

  get threads(): number {
    return this.#members.filter((member) => member.alive).length;
  }

  run(
    job: object,
    task: string,
    input: unknown,
    onProgress: (fraction: number) => void,
  ): { readonly id: number; readonly output: Promise<unknown> } {
    const id = this.#nextId++;
    const output = new Promise<unknown>((resolve, reject) => {
      if (this.#closed) return reject(new LeadspanError('CLOSED', 'The engine is closed.'));
      const queue = this.#waiting.get(job);
      const order: Order = { id, job, task, input, onProgress, resolve, reject };
      if (queue) queue.push(order);
      else this.#waiting.set(job, [order]);
    });
    this.#dispatch();
    return { id, output };
  }

  /** Drops the job's waiting tasks and tells workers to stop its running ones at their next slice. */
  cancel(job: object, error: LeadspanError): void {
    for (const order of this.#waiting.get(job) ?? []) order.reject(error);
    this.#waiting.delete(job);
    for (const { order, port } of this.#members) {
      if (order?.job !== job) continue;
      port.post({ kind: 'cancel', id: order.id });
      order.reject(error);
    }
  }

  close(): void {
    this.#closed = true;
    const error = new LeadspanError('CLOSED', 'The engine was closed while the job was running.');
    for (const queue of this.#waiting.values()) for (const order of queue) order.reject(error);
    this.#waiting.clear();
    for (const member of this.#members) {
      member.alive = false;
      member.order?.reject(error);
      member.port.terminate();
    }
    this.#members.length = 0;
  }

  async #add(): Promise<void> {
    const member: Member = { port: await spawnWorker(this.#hostWorker), order: undefined, alive: false };
    this.#members.push(member);
    await new Promise<void>((resolve, reject) => {
      const timer = setTimeout(
        () => fail(`it did not answer within ${READY_MILLISECONDS / 1000} s`),
        READY_MILLISECONDS,
      );
      const fail = (why: string) => {
        clearTimeout(timer);
        reject(new LeadspanError('KERNEL_FAILED', `A worker could not start: ${why}.`));
      };
      member.port.onDeath = fail;
      member.port.onMessage = (message) => {
        if (message.kind === 'unready') return fail(message.error.message);
        if (message.kind !== 'ready') return;
        clearTimeout(timer);
        member.alive = true;
        member.port.onMessage = (later) => this.#receive(member, later);
        member.port.onDeath = (why) => this.#bury(member, why);
        member.port.hold(false);
        resolve();
      };
      member.port.post({ kind: 'start', backend: this.#backend });
    });
    if (this.#closed) member.port.terminate();
    else this.#dispatch();
  }

  #receive(member: Member, message: FromWorker): void {
    const order = member.order;
    if (message.kind === 'ready' || message.kind === 'unready' || order?.id !== message.id) return;
    if (message.kind === 'progress') {
      order.onProgress(message.fraction);
      return;
    }
    member.order = undefined;
    member.port.hold(false);
    if (message.kind === 'done') order.resolve(message.output);
    else order.reject(fromPlainError(message.error));
    this.#dispatch();
  }

  /** A worker died: its task fails with a clear error, and another worker takes its place. */
  #bury(member: Member, why: string): void {
    if (!member.alive || this.#closed) return;
    member.alive = false;
    const slot = this.#members.indexOf(member);
    if (slot >= 0) this.#members.splice(slot, 1);
    member.order?.reject(
      new LeadspanError(
        'KERNEL_FAILED',
        `A worker died during '${member.order.task}': ${why}. The engine goes on with a new one.`,
      ),
    );
    member.port.terminate();
    this.#add().catch((error) => {
      if (this.threads > 0) return;
      for (const queue of this.#waiting.values()) for (const order of queue) order.reject(error);
      this.#waiting.clear();
    });
  }

  #dispatch(): void {
    for (const member of this.#members) {
      if (!member.alive || member.order) continue;
      const turn = this.#waiting.entries().next();
      if (turn.done) return;
      const [job, queue] = turn.value;
      const order = queue.shift()!;
      this.#waiting.delete(job);
      if (queue.length > 0) this.#waiting.set(job, queue); // back to the end of the turn
      member.order = order;
      member.port.hold(true);
      try {
        member.port.post({ kind: 'task', id: order.id, task: order.task, input: order.input });
      } catch (cause) {
        member.order = undefined;
        order.reject(
          new LeadspanError('KERNEL_FAILED', `Input of '${order.task}' cannot be sent to a worker.`, {
            cause,
          }),
        );
      }
    }
  }
}
