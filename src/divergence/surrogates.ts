import { type Compute, defineTask } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { matchedStretch } from '../recording/stretch.ts';
import { amplitudeAdjustedSurrogate } from '../recording/surrogate.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type CurveInput, type CurveSums, divergenceCurveTask } from './curve.ts';
import { MeanCurve } from './mean-curve.ts';
import { evenReferences, followable } from './vectors.ts';

/** Nine give a standard deviation known to a quarter. */
const SURROGATES = 9;
const REFERENCES = 500;
/** Samples at most: neighbours of noise are told from those of a rule well before. */
const LONGEST_STRETCH = 4_096;
const ITERATIONS = 40;

export interface SurrogateCurveInput extends CurveInput {
  /** 0: the stretch itself; from 1 on, that surrogate of it. `vectors.data` holds the stretch alone. */
  readonly number: number;
}

/** Divergence curve of a stretch or of an amplitude-adjusted surrogate (Schreiber & Schmitz 1996) of it. */
export const surrogateCurveTask = defineTask(
  'divergence.surrogateCurve',
  function* (kernels: Kernels, input: SurrogateCurveInput): Generator<number, CurveSums, void> {
    const { number, vectors, seed } = input;
    if (number === 0) return yield* divergenceCurveTask.run(kernels, input);
    const permutation = createRandom(seed, 42, number).permutation(vectors.data.length);
    yield 0;
    const data = yield* amplitudeAdjustedSurrogate(kernels, vectors.data, permutation, ITERATIONS);
    yield 0.2;
    return yield* divergenceCurveTask.run(kernels, { ...input, vectors: { ...vectors, data } });
  },
);

export interface SurrogateComparison {
  /** Mean ln distance over the steps below the level, in e-folds: of the record and of its surrogates. */
  readonly record: number;
  readonly surrogates: readonly number[];
  /** How many of their standard deviations the record's neighbours stay closer. */
  readonly standardScore: number;
}

/**
 * Do neighbours stay closer over the steps from … to than those of linear noise with the same spectrum and values?
 * Null where the record has no stretch long enough.
 */
export async function compareSurrogates(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  range: { readonly from: number; readonly to: number },
  shift: number | null,
  seed: number,
  compute: Compute,
): Promise<SurrogateComparison | null> {
  const stretch = matchedStretch(record, LONGEST_STRETCH);
  if (stretch === null) return null;
  const base = record.target * record.count + stretch.start;
  const data = record.scaled.slice(base, base + stretch.count);
  const vectors = followable(
    { scaled: data, count: data.length, channelCount: 1, segments: [{ start: 0, end: data.length }] },
    reconstruction,
    range.to,
    shift,
  );
  const exclusion = Math.min(reconstruction.theilerWindow.samples, Math.floor(data.length / 10));
  if (vectors.starts.length < 4 * exclusion + 200) return null;
  const references = evenReferences(vectors.starts.length, REFERENCES);
  const curves = await compute.map(
    surrogateCurveTask,
    Array.from({ length: SURROGATES + 1 }, (_, number) => ({
      vectors,
      targetOffset: 0,
      references,
      exclusion,
      steps: range.to,
      seed,
      shift,
      number,
    })),
  );
  const [own, ...others] = curves.map((sums) => {
    const curve = new MeanCurve(sums.nearest, range.to);
    return sums.ceiling - curve.mean(0, range.from, range.to);
  });
  const mean = others.reduce((a, b) => a + b, 0) / others.length;
  const variance = others.reduce((a, b) => a + (b - mean) * (b - mean), 0) / (others.length - 1);
  // The curves' own sampling error is about 1/√REFERENCES of a spread of one e-fold.
  const deviation = Math.max(Math.sqrt(variance), 1 / Math.sqrt(REFERENCES));
  return { record: own!, surrogates: others, standardScore: (own! - mean) / deviation };
}
