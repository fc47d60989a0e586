import { crossForecastTask } from './cross-forecast.ts';
import { partsTask } from './parts.ts';

/** Tasks of this folder, for the workers' registry. */
export const RECORDING_TASKS = [partsTask, crossForecastTask] as const;
