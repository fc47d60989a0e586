import type { Task } from '../base/compute.ts';
import { LeadspanError } from '../base/errors.ts';
import { DIVERGENCE_TASKS } from '../divergence/tasks.ts';
import { EVIDENCE_TASKS } from '../evidence/tasks.ts';
import { FORECAST_TASKS } from '../forecast/tasks.ts';
import { GEOMETRY_TASKS } from '../geometry/tasks.ts';
import { spectrumTask } from '../model/spectrum.ts';
import { RECONSTRUCT_TASKS } from '../reconstruct/tasks.ts';
import { RECORDING_TASKS } from '../recording/tasks.ts';

/** Every task that may be sent to a worker, by name. */
const TASKS: ReadonlyMap<string, Task<never, unknown>> = new Map(
  [
    ...RECORDING_TASKS,
    ...RECONSTRUCT_TASKS,
    ...GEOMETRY_TASKS,
    ...DIVERGENCE_TASKS,
    ...FORECAST_TASKS,
    ...EVIDENCE_TASKS,
    spectrumTask,
  ].map((task) => [task.name, task as Task<never, unknown>]),
);

/** @throws LeadspanError KERNEL_FAILED for a task that was not registered (a bug of ours) */
export function findTask(name: string): Task<unknown, unknown> {
  const task = TASKS.get(name);
  if (!task)
    throw new LeadspanError(
      'KERNEL_FAILED',
      `No task is called ${JSON.stringify(name)}; list it in engine/registry.ts.`,
    );
  return task as unknown as Task<unknown, unknown>;
}
