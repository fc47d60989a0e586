import { differenceRegressionTask } from './difference-regression.ts';
import { linearTwinTask } from './linear-twin.ts';
import { returnsTask } from './returns.ts';
import { correlationSumsTask } from './sums.ts';

/** Tasks of this folder, for the workers' registry. */
export const GEOMETRY_TASKS = [
  correlationSumsTask,
  linearTwinTask,
  differenceRegressionTask,
  returnsTask,
] as const;
