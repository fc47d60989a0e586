import { GROWTH_TASKS } from './growth.ts';
import { lineSpectrumTask } from './lines.ts';
import { surrogateErrorTask } from './null-test.ts';

/** Tasks of this folder, for the workers' registry. */
export const EVIDENCE_TASKS = [surrogateErrorTask, lineSpectrumTask, ...GROWTH_TASKS] as const;
