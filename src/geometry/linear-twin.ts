import { defineTask } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';
import { amplitudeAdjustedSurrogate } from '../recording/surrogate.ts';
import { BLOCKS, drawReferences } from './setup.ts';
import { correlationSumsTask, type PairCounts, type SumsTaskInput } from './sums.ts';

export interface LinearTwinInput extends Omit<SumsTaskInput, 'references' | 'wideExclusion' | 'valid'> {
  /** `series` is a stretch of the record of a length 2^a·3^b·5^c. */
  readonly references: number;
  readonly seed: number;
}

/** Iterations of a surrogate at most; most settle within a few dozen. */
const ITERATIONS = 60;

/**
 * Correlation sums of an amplitude-adjusted surrogate (Schreiber & Schmitz 1996, Phys. Rev. Lett. 77, 635): what
 * linear noise with the spectrum and the values of the record would show.
 */
export const linearTwinTask = defineTask(
  'geometry.linearTwin',
  function* (kernels: Kernels, input: LinearTwinInput): Generator<number, PairCounts[], void> {
    const { references, seed, series: values, ...rest } = input;
    const permutation = createRandom(seed, 33).permutation(values.length);
    const series = yield* amplitudeAdjustedSurrogate(kernels, values, permutation, ITERATIONS);
    yield 0.1;
    const valid = new Uint8Array(series.length - (input.dimensions - 1) * input.delay).fill(1);
    const out: PairCounts[] = [];
    for (const block of drawReferences(valid, references, seed)) {
      const sums = correlationSumsTask.run(kernels, {
        ...rest,
        series,
        valid,
        references: block,
        wideExclusion: 0,
      });
      let step = sums.next();
      while (!step.done) {
        yield 0.1 + (0.9 * out.length) / BLOCKS;
        step = sums.next();
      }
      out.push(step.value.all);
    }
    return out;
  },
);
