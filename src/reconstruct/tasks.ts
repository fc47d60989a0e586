import { candidateTask } from './candidates.ts';
import { correlationTask } from './correlation.ts';
import { falseNeighbourTask } from './false-neighbours.ts';
import { separationTask } from './theiler.ts';

/** Tasks of this folder, for the workers' registry. */
export const RECONSTRUCT_TASKS = [
  correlationTask,
  falseNeighbourTask,
  candidateTask,
  separationTask,
] as const;
