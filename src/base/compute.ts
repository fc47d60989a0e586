import type { Kernels } from './kernels.ts';

/**
 * A piece of heavy work that can run on any thread: a pure function of the kernels and a plain-data input
 * (structured-clonable). It is a generator so that it runs in slices: it yields its progress (0 … 1) at
 * least every 10 ms of work, and between slices the executor answers cancellation and reports progress.
 * Everything random comes from a seed in the input.
 */
export interface Task<Input, Output> {
  /** Unique, `folder.what`, e.g. `geometry.correlation`. Workers look tasks up by this name. */
  readonly name: string;
  run(kernels: Kernels, input: Input): Generator<number, Output, void>;
}

/** Runs tasks: inline in slices, or on a pool of workers. Results do not depend on which. */
export interface Compute {
  /** Runs one task. Rejects with `ABORTED` within 50 ms of the signal. */
  run<Input, Output>(task: Task<Input, Output>, input: Input): Promise<Output>;
  /**
   * Runs one task on many inputs, as many at a time as there are threads; outputs in the order of inputs.
   * Inputs must be cut into blocks in a way that does not depend on the number of threads.
   */
  map<Input, Output>(task: Task<Input, Output>, inputs: readonly Input[]): Promise<Output[]>;
  /**
   * A part of the whole for progress reports: `share` (0 … 1) of this compute's bar, under `stage`'s name.
   * Parts may run at the same time.
   */
  part(stage: string, share: number): Compute;
  /** Marks this part as complete in the progress reports. */
  finish(): void;
  /** Throws `ABORTED` when the caller's signal has fired. Call between pieces of policy work. */
  throwIfAborted(): void;
  /** Lets timers and messages run (policy code that loops for more than 10 ms calls this). */
  breathe(): Promise<void>;
  /** Bytes this job may use at once for its own arrays (kernels' memory included). */
  readonly memoryLimit: number;
}

export function defineTask<Input, Output>(
  name: string,
  run: (kernels: Kernels, input: Input) => Generator<number, Output, void>,
): Task<Input, Output> {
  return { name, run };
}

/** Runs a task to its end on this thread without slicing. For tests and for kernels users. */
export function runToEnd<Input, Output>(task: Task<Input, Output>, kernels: Kernels, input: Input): Output {
  const steps = task.run(kernels, input);
  for (;;) {
    const step = steps.next();
    if (step.done) return step.value;
  }
}
