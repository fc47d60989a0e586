import type { Compute } from '../base/compute.ts';
import { defineTask } from '../base/compute.ts';
import { estimateDivergence } from '../divergence/largest.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { NoiseResult } from '../geometry/types.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import { makeSurrogate } from './null-test.ts';
import { matchedStretch } from './stretch.ts';
import type { Reason } from './types.ts';

/** Surrogates whose growth is compared: with none of 9 growing as fast, p ≤ 0.1, beside the null test's own level. */
const SURROGATES = 9;
const REFERENCES = 1000;
/** Forecast error must rise by this factor from the first lead to the last: less is not loss of skill. */
const SKILL_LOSS = 2;

export interface Growth extends EvidenceLine {
  readonly verdict: 'exponential' | 'none' | 'like-noise';
  readonly skillFalls: boolean;
}

const surrogateTask = defineTask<{ values: Float64Array; seed: number; number: number }, Float64Array>(
  'evidence.surrogate',
  function* (kernels, input) {
    return yield* makeSurrogate(kernels, input.values, input.seed, input.number);
  },
);

export const GROWTH_TASKS = [surrogateTask] as const;

/** Do small differences grow exponentially, faster than in linear noise, and does forecast skill fall with lead? */
export async function examineGrowth(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  divergence: DivergenceResult,
  noise: NoiseResult,
  leadTime: LeadTimeResult,
  seed: number,
  compute: Compute,
): Promise<Growth> {
  const { largest } = divergence;
  const fall = skillFall(leadTime);
  if (!largest.ok)
    return {
      verdict: 'none',
      skillFalls: fall.falls,
      reasons: [neutral('NO_GROWTH', largest.why), ...fall.reasons],
    };
  if (!(largest.low > 0))
    return {
      verdict: 'none',
      skillFalls: fall.falls,
      reasons: [
        {
          code: 'GROWTH_NOT_SIGNIFICANT',
          text: `The largest exponent's interval, ${short(largest.low)} to ${short(largest.high)} ${largest.unit}, does not exclude zero.`,
          value: largest.value,
          threshold: 0,
          speaksFor: 'none',
        },
        ...fall.reasons,
      ],
    };
  const rates = await surrogateRates(record, reconstruction, noise, seed, compute);
  const asFast = rates.filter((rate) => rate >= largest.value).length;
  const reasons: Reason[] = [
    {
      code: asFast > 0 ? 'GROWTH_LIKE_NOISE' : 'EXPONENTIAL_GROWTH',
      text:
        `Small differences grow exponentially at ${short(largest.value)} ${largest.unit} (${short(largest.low)} to ${short(largest.high)}); ` +
        (asFast > 0
          ? `so do those of ${asFast} of ${SURROGATES} surrogates of linear noise.`
          : `${rates.length === 0 ? 'none' : `${rates.length} of`} ${SURROGATES} surrogates of linear noise ${rates.length === 0 ? 'do' : 'grow too, all slower'}.`),
      value: largest.value,
      threshold: rates.length > 0 ? Math.max(...rates) : 0,
      speaksFor: asFast > 0 ? 'noise' : 'chaotic',
    },
    ...fall.reasons,
  ];
  return { verdict: asFast > 0 ? 'like-noise' : 'exponential', skillFalls: fall.falls, reasons };
}

/** Growth rates that the same estimator finds in surrogates; surrogates without exponential growth give none. */
async function surrogateRates(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  noise: NoiseResult,
  seed: number,
  compute: Compute,
): Promise<number[]> {
  const stretch = matchedStretch(record);
  if (stretch === null) return [];
  const from = record.target * record.count + stretch.start;
  const values = record.scaled.slice(from, from + stretch.count);
  const series = await compute.map(
    surrogateTask,
    // Numbers beyond those of the null test: independent of it.
    Array.from({ length: SURROGATES }, (_, i) => ({ values, seed, number: 10_000 + i })),
  );
  const rates: number[] = [];
  for (const scaled of series) {
    const result = await estimateDivergence(
      asRecord(record, scaled),
      { ...reconstruction, embeddingDimension: reconstruction.delaysPerChannel },
      { references: REFERENCES, seed, noise: noise.level },
      compute,
    );
    if (result.largest.ok && result.largest.low > 0) rates.push(result.largest.value);
  }
  return rates;
}

/** A single-channel record of a surrogate, in the original's units. */
function asRecord(record: PreparedRecord, scaled: Float64Array): PreparedRecord {
  const { target } = record;
  return {
    ...record,
    count: scaled.length,
    scaled,
    present: new Uint8Array(scaled.length).fill(1),
    segments: [{ start: 0, end: scaled.length }],
    channelCount: 1,
    target: 0,
    means: [record.means[target]!],
    stds: [record.stds[target]!],
    channelUnits: [record.channelUnits[target]!],
    missing: 0,
  };
}

function skillFall(leadTime: LeadTimeResult): {
  readonly falls: boolean;
  readonly reasons: readonly Reason[];
} {
  const first = leadTime.curve[0];
  const last = leadTime.curve.at(-1);
  if (!first || !last || !(first.rms > 0))
    return { falls: false, reasons: [neutral('NO_FORECAST', 'No forecast error could be measured.')] };
  const factor = last.rms / first.rms;
  const skill = first.rms / first.climatology;
  const falls = factor >= SKILL_LOSS && skill < 1;
  return {
    falls,
    reasons: [
      {
        code: falls ? 'SKILL_FALLS' : 'SKILL_DOES_NOT_FALL',
        text: `The forecast's error grows ${short(factor)} times from the first lead to the last, starting at ${short(skill)} of climatology's.`,
        value: factor,
        threshold: SKILL_LOSS,
        speaksFor: falls ? 'chaotic' : 'none',
      },
    ],
  };
}
