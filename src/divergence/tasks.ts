import { divergenceCurveTask } from './curve.ts';
import { surrogateCurveTask } from './surrogates.ts';

/** Tasks of this folder, for the workers' registry. */
export const DIVERGENCE_TASKS = [divergenceCurveTask, surrogateCurveTask] as const;
