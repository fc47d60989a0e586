import { afterEach, describe, expect, it } from 'vitest';
import { isLeadspanError } from '../../src/base/errors.ts';
import { loadBackend } from '../../src/core/open.ts';
import type { FromWorker, ToWorker } from '../../src/engine/messages.ts';
import { WorkerPool } from '../../src/engine/pool.ts';
import type { WebWorkerLike } from '../../src/engine/spawn.ts';

/** A worker whose behaviour each test scripts; it runs on this thread. */
class ScriptedWorker implements WebWorkerLike {
  onmessage: ((event: { data: FromWorker }) => void) | null = null;
  onerror: ((event: { message?: string }) => void) | null = null;
  readonly received: ToWorker[] = [];
  terminated = false;
  #answer: (message: ToWorker, worker: ScriptedWorker) => void;
  constructor(answer: (message: ToWorker, worker: ScriptedWorker) => void) {
    this.#answer = answer;
  }
  postMessage(message: unknown): void {
    this.received.push(message as ToWorker);
    queueMicrotask(() => this.#answer(message as ToWorker, this));
  }
  say(message: FromWorker): void {
    this.onmessage?.({ data: message });
  }
  terminate(): void {
    this.terminated = true;
  }
}

const pools: WorkerPool[] = [];
afterEach(() => {
  for (const pool of pools.splice(0)) pool.close();
});

async function startPool(threads: number, make: () => ScriptedWorker): Promise<WorkerPool> {
  const pool = await WorkerPool.start(await loadBackend({ backend: 'js' }), threads, make);
  pools.push(pool);
  return pool;
}

const ready = (message: ToWorker, worker: ScriptedWorker) => {
  if (message.kind === 'start') worker.say({ kind: 'ready' });
};

describe('WorkerPool', () => {
  it('fails the task of a worker that dies, and goes on with a new one', async () => {
    let made = 0;
    const pool = await startPool(1, () => {
      const first = made++ === 0;
      return new ScriptedWorker((message, worker) => {
        ready(message, worker);
        if (message.kind !== 'task') return;
        if (first) worker.onerror?.({ message: 'out of memory' });
        else worker.say({ kind: 'done', id: message.id, output: 42 });
      });
    });
    const job = {};
    const error = await pool.run(job, 'some.task', null, () => {}).output.catch((e: unknown) => e);
    expect(isLeadspanError(error) && error.code).toBe('KERNEL_FAILED');
    expect(String(error)).toMatch(/some\.task.*out of memory/);
    await expect(pool.run(job, 'some.task', null, () => {}).output).resolves.toBe(42);
    expect(made).toBe(2);
  });

  it('serves waiting jobs in turn', async () => {
    const order: unknown[] = [];
    const pool = await startPool(1, () => {
      return new ScriptedWorker((message, worker) => {
        ready(message, worker);
        if (message.kind !== 'task') return;
        order.push(message.input);
        setTimeout(() => worker.say({ kind: 'done', id: message.id, output: null }), 1);
      });
    });
    const [long, short] = [{}, {}];
    await Promise.all([
      ...['long 1', 'long 2', 'long 3'].map((input) => pool.run(long, 't', input, () => {}).output),
      ...['short 1', 'short 2'].map((input) => pool.run(short, 't', input, () => {}).output),
    ]);
    expect(order).toEqual(['long 1', 'long 2', 'short 1', 'long 3', 'short 2']);
  });

  it('cancels the waiting and the running tasks of one job only', async () => {
    const cancels: number[] = [];
    const pool = await startPool(1, () => {
      return new ScriptedWorker((message, worker) => {
        ready(message, worker);
        if (message.kind === 'cancel') {
          cancels.push(message.id);
          worker.say({ kind: 'failed', id: message.id, error: { code: 'ABORTED', message: 'x' } });
        }
        if (message.kind === 'task' && message.input === 'other')
          worker.say({ kind: 'done', id: message.id, output: 'kept' });
      });
    });
    const [doomed, other] = [{}, {}];
    const running = pool.run(doomed, 't', 'a', () => {});
    const waiting = pool.run(doomed, 't', 'b', () => {});
    const kept = pool.run(other, 't', 'other', () => {});
    const { LeadspanError } = await import('../../src/base/errors.ts');
    pool.cancel(doomed, new LeadspanError('ABORTED', 'cancelled'));
    await expect(running.output).rejects.toMatchObject({ code: 'ABORTED' });
    await expect(waiting.output).rejects.toMatchObject({ code: 'ABORTED' });
    await expect(kept.output).resolves.toBe('kept');
    expect(cancels).toEqual([running.id]);
  });

  it('refuses to start when a worker says why it cannot', async () => {
    const start = WorkerPool.start(await loadBackend({ backend: 'js' }), 1, () => {
      return new ScriptedWorker((message, worker) => {
        if (message.kind === 'start')
          worker.say({ kind: 'unready', error: { code: 'KERNEL_FAILED', message: 'no wasm here' } });
      });
    });
    await expect(start).rejects.toThrow(/no wasm here/);
  });

  it('rejects what waits and runs when it is closed', async () => {
    const pool = await startPool(1, () => new ScriptedWorker(ready));
    const running = pool.run({}, 't', 1, () => {}).output;
    const waiting = pool.run({}, 't', 2, () => {}).output;
    pool.close();
    await expect(running).rejects.toMatchObject({ code: 'CLOSED' });
    await expect(waiting).rejects.toMatchObject({ code: 'CLOSED' });
    await expect(pool.run({}, 't', 3, () => {}).output).rejects.toMatchObject({ code: 'CLOSED' });
  });
});
