import { surrogateExponentTask } from './growth.ts';
import { localExponentTask } from './local-exponent.ts';
import { surrogateErrorTask } from './null-test.ts';
import { spectralLinesTask } from './spectral-lines.ts';
import { zeroOneTask } from './zero-one.ts';

/** Tasks of this folder, for the workers' registry. */
export const EVIDENCE_TASKS = [
  surrogateErrorTask,
  spectralLinesTask,
  zeroOneTask,
  localExponentTask,
  surrogateExponentTask,
] as const;
