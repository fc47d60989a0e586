import type { Compute, Task } from '../base/compute.ts';
import { LeadspanError } from '../base/errors.ts';
import type { Kernels } from '../base/kernels.ts';
import type { JobOptions } from '../base/options.ts';
import { nextMacrotask } from './macrotask.ts';
import type { WorkerPool } from './pool.ts';
import { runSliced } from './slices.ts';

/** Where tasks run. */
export interface Executor {
  readonly pool: WorkerPool | undefined;
  /** Kernels of this thread, for inline mode. */
  inlineKernels(): Kernels;
}

/** One call of the engine: its cancellation, its progress, its way to the executor. */
export class Job {
  readonly #executor: Executor;
  readonly #options: JobOptions;
  readonly #progress = new ProgressMeter();
  readonly #inFlight = new Set<(error: LeadspanError) => void>();
  #ended: LeadspanError | undefined;
  #timer: ReturnType<typeof setTimeout> | undefined;

  constructor(executor: Executor, options: JobOptions) {
    this.#executor = executor;
    this.#options = options;
  }

  /** Runs `work` with this job's compute; settles at once when the job is cancelled, late or closed. */
  async run<T>(work: (compute: Compute) => Promise<T>, memoryLimit: number): Promise<T> {
    const { signal, deadline, onProgress } = this.#options;
    const abort = () =>
      this.end(new LeadspanError('ABORTED', 'The job was cancelled.', { cause: signal?.reason }));
    if (signal?.aborted) abort();
    signal?.addEventListener('abort', abort, { once: true });
    if (deadline !== undefined)
      this.#timer = setTimeout(
        () =>
          this.end(
            new LeadspanError('ABORTED', `The deadline of ${deadline} ms has passed.`, { field: 'deadline' }),
          ),
        deadline,
      );
    if (onProgress) this.#progress.onChange = onProgress;
    try {
      this.#throwIfEnded();
      const cancelled = new Promise<never>((_, reject) => this.#inFlight.add(reject));
      cancelled.catch(() => {});
      const result = await Promise.race([work(this.#compute(this.#progress.root, memoryLimit)), cancelled]);
      this.#progress.root.finish();
      return result;
    } finally {
      signal?.removeEventListener('abort', abort);
      clearTimeout(this.#timer);
      this.#ended ??= new LeadspanError('CLOSED', 'The job is over.');
    }
  }

  /** Ends the job now with `error`. */
  end(error: LeadspanError): void {
    if (this.#ended) return;
    this.#ended = error;
    this.#executor.pool?.cancel(this, error);
    for (const reject of this.#inFlight) reject(error);
  }

  #throwIfEnded(): void {
    if (this.#ended) throw this.#ended;
  }

  #compute(bar: ProgressBar, memoryLimit: number): Compute {
    const check = () => this.#throwIfEnded();
    const runOne = async <I, O>(
      task: Task<I, O>,
      input: I,
      onProgress: (fraction: number) => void,
    ): Promise<O> => {
      check();
      const { pool } = this.#executor;
      if (pool) return pool.run(this, task.name, input, onProgress).output as Promise<O>;
      return runSliced(task, this.#executor.inlineKernels(), input, check, onProgress);
    };
    return {
      memoryLimit,
      throwIfAborted: check,
      breathe: async () => {
        await nextMacrotask();
        check();
      },
      part: (stage, share) => this.#compute(bar.part(stage, share), memoryLimit),
      finish: () => bar.finish(),
      run: (task, input) => {
        const lap = bar.lap(1);
        return runOne(task, input, (fraction) => lap(0, fraction));
      },
      map: (task, inputs) => {
        const lap = bar.lap(inputs.length);
        return this.#mapOver(inputs, (input, i) => runOne(task, input, (fraction) => lap(i, fraction)), lap);
      },
    };
  }

  async #mapOver<I, O>(
    inputs: readonly I[],
    one: (input: I, i: number) => Promise<O>,
    lap: (i: number, fraction: number) => void,
  ): Promise<O[]> {
    const outputs = new Array<O>(inputs.length);
    // At most as many inputs in the queue as can run soon: a cloned input costs memory while it waits.
    const lanes = Math.min(inputs.length, this.#executor.pool ? this.#executor.pool.threads + 1 : 1);
    let next = 0;
    const lane = async () => {
      while (next < inputs.length) {
        const i = next++;
        outputs[i] = await one(inputs[i]!, i);
        lap(i, 1);
      }
    };
    await Promise.all(Array.from({ length: lanes }, lane));
    return outputs;
  }
}

/** A tree of progress bars whose root never falls. */
class ProgressMeter {
  onChange: ((progress: { stage: string; fraction: number }) => void) | undefined;
  #reported = 0;
  readonly root = new ProgressBar('start', (stage, fraction) => {
    if (!this.onChange) return;
    const value = Math.min(1, Math.max(this.#reported, fraction));
    // A hundred and one reports are enough for any bar.
    if (value < 1 && value - this.#reported < 0.01) return;
    if (value === this.#reported) return;
    this.#reported = value;
    this.onChange({ stage, fraction: value });
  });
}

class ProgressBar {
  readonly #stage: string;
  readonly #report: (stage: string, fraction: number) => void;
  #fraction = 0;

  constructor(stage: string, report: (stage: string, fraction: number) => void) {
    this.#stage = stage;
    this.#report = report;
  }

  part(stage: string, share: number): ProgressBar {
    let last = 0;
    return new ProgressBar(stage, (name, fraction) => {
      this.#move(this.#fraction + share * (fraction - last), name);
      last = fraction;
    });
  }

  /** A run of `count` tasks. How many runs a part makes is not known: each takes half of what is left. */
  lap(count: number): (i: number, fraction: number) => void {
    const start = this.#fraction;
    const span = (1 - start) / 2;
    const done = new Float64Array(Math.max(count, 1));
    let sum = 0;
    return (i, fraction) => {
      sum += fraction - done[i]!;
      done[i] = fraction;
      this.#move(Math.max(this.#fraction, start + (span * sum) / done.length), this.#stage);
    };
  }

  finish(): void {
    this.#move(1, this.#stage);
  }

  #move(fraction: number, stage: string): void {
    this.#fraction = Math.min(1, fraction);
    this.#report(stage, this.#fraction);
  }
}
