/** The script of a worker as text, built from `worker.ts` (see "Build" in DEVELOPERS.md). */
import source from '../../dist/worker/leadspan.worker.txt';

export const workerSource: string = source;
