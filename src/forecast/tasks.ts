import { forecastErrorTask } from './error.ts';
import { similarTask } from './now.ts';
import { predictTask } from './task.ts';

/** Tasks of this folder, for the workers' registry. */
export const FORECAST_TASKS = [forecastErrorTask, predictTask, similarTask] as const;
