import { differenceRegressionTask } from './difference-regression.ts';
import { linearTwinTask } from './linear-twin.ts';
import { correlationSumsTask } from './sums.ts';

/** Tasks of this folder, for the workers' registry. */
export const GEOMETRY_TASKS = [correlationSumsTask, linearTwinTask, differenceRegressionTask] as const;
