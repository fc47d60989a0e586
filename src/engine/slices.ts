import type { Task } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';
import { nextMacrotask, SLICE_MILLISECONDS } from './macrotask.ts';

/**
 * Runs a task in slices on this thread.
 * @param check called between slices; throws to cancel
 */
export async function runSliced<Input, Output>(
  task: Task<Input, Output>,
  kernels: Kernels,
  input: Input,
  check: () => void,
  onProgress: (fraction: number) => void,
): Promise<Output> {
  const steps = task.run(kernels, input);
  for (;;) {
    const until = performance.now() + SLICE_MILLISECONDS;
    let step = steps.next();
    while (!step.done && performance.now() < until) step = steps.next();
    if (step.done) return step.value;
    onProgress(step.value);
    await nextMacrotask();
    try {
      check();
    } catch (error) {
      steps.throw(error); // lets the task's `finally` blocks give kernel memory back
      throw error;
    }
  }
}
