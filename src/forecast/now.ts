import { type Answer, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { defineTask } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type BoundOptions, INTERVAL_LEVEL, intervalAnswer, percent, tooFew, withoutSkill } from './bound.ts';
import { spread } from './error.ts';
import { bootstrapRank, conformalRank, firstExits, orderStatistic } from './exits.ts';
import type { HeldOut } from './held-out.ts';
import { type ForecastSetting, spanOf } from './predictors.ts';
import { everyLead, heldOutErrors } from './setting.ts';

/** A bound from fewer passes than this would rest on single outcomes. */
const FEWEST_PASSES = 50;
const MOST_PASSES = 200;
/** Passes by the present state used: the nearest quarter, a compromise of likeness and number. */
const NEAREST_PART = 4;
/** States whose distance to their nearest neighbour tells what is usual. */
const USUAL = 200;

interface SimilarInput {
  readonly setting: ForecastSetting;
  readonly time: number;
  readonly window: number;
}

interface SimilarOutput {
  /** Times of the nearest state of each pass, nearest first, more than a window apart. */
  readonly passes: Int32Array;
  /** Distance of the state at `time` to the nearest of them, and the largest such distance in the record. */
  readonly distance: number;
  readonly usual: number;
}

/** Independent passes of the record by the state at `time`. Looks at states only, never at outcomes. */
export const similarTask = defineTask<SimilarInput, SimilarOutput>(
  'forecast.similar',
  function* (kernels, input) {
    const { setting, time, window } = input;
    const { data, library, offsets } = setting;
    const distances = new Float64Array(library.length);
    for (let i = 0; i < library.length; i++) {
      let sum = 0;
      for (const offset of offsets) {
        const difference = data[library[i]! + offset]! - data[time + offset]!;
        sum += difference * difference;
      }
      distances[i] = sum;
    }
    yield 0.3;
    const order = Array.from(library, (_, i) => i)
      .filter((i) => time - library[i]! > window)
      .sort((a, b) => distances[a]! - distances[b]! || a - b);
    yield 0.6;
    const passes: number[] = [];
    const taken = new Uint8Array(setting.count);
    for (const i of order) {
      const t = library[i]!;
      if (taken[t] === 1) continue;
      passes.push(t);
      taken.fill(1, Math.max(0, t - window), Math.min(setting.count, t + window + 1));
    }
    const index = kernels.neighbourIndex({ data, starts: library, offsets }, 'euclidean');
    try {
      const nearest = index.nearest(spread(library.length, USUAL), 1, window);
      let usual = 0;
      for (const d of nearest.distances) if (Number.isFinite(d) && d > usual) usual = d;
      const distance = order.length > 0 ? Math.sqrt(distances[order[0]!]!) : Number.MAX_VALUE;
      return { passes: Int32Array.from(passes), distance, usual };
    } finally {
      index.close();
    }
  },
);

/** True when the record ends in a complete delay vector. */
export function endsInState(heldOut: HeldOut): boolean {
  const { setting } = heldOut.prepared;
  const span = spanOf(setting);
  for (let t = setting.count - 1 - span; t < setting.count; t++)
    if (t < 0 || setting.present[t] === 0) return false;
  return true;
}

export function endsInGap() {
  return refusal(
    'NOT_APPLICABLE',
    'The record ends in or just after a gap, so its last state is not known.',
    'Give a record that ends with complete samples.',
  );
}

/**
 * The conformal bound for states like the one the record ends in: the same order statistic over the
 * record's nearest independent passes by that state (conditioning on a neighbourhood chosen without looking
 * at outcomes: Lei & Wasserman 2014, J. R. Stat. Soc. B 76, 71; Guan 2023, Biometrika 110, 33).
 */
export async function trustedNow(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  heldOut: HeldOut,
  options: BoundOptions,
  compute: Compute,
): Promise<Answer> {
  const lack = withoutSkill(heldOut);
  if (lack) return lack;
  if (!endsInState(heldOut)) return endsInGap();
  const { setting } = heldOut.prepared;
  const window = reconstruction.theilerWindow.samples;
  const { passes, distance, usual } = await compute.run(similarTask, {
    setting,
    time: record.count - 1,
    window,
  });
  if (distance > usual)
    return refusal(
      'TOO_SHORT',
      `The record ends in a state unlike any before: its nearest neighbour is ${distance.toFixed(3)} standard deviations away, usual is at most ${usual.toFixed(3)}.`,
      'Record until the state has come back a number of times.',
      { distance, usual },
    );
  const count = Math.min(
    passes.length,
    MOST_PASSES,
    Math.max(FEWEST_PASSES, Math.floor(passes.length / NEAREST_PART)),
  );
  if (count < FEWEST_PASSES)
    return refusal(
      'TOO_SHORT',
      `The record passes by states like its last one ${count} times; a bound for them needs ${FEWEST_PASSES}.`,
      'Record longer; until then use the bound for all states.',
      { passes: count, needed: FEWEST_PASSES },
    );
  const rank = conformalRank(count, count, options.confidence);
  if (rank === 0) return tooFew(count, options.confidence, window);
  const origins = passes.slice(0, count).sort();
  const { steps } = heldOut;
  const [errors] = await heldOutErrors(setting, [heldOut.spec], origins, everyLead(steps), compute);
  const exits = firstExits(errors!, steps, options.tolerance);
  const exit = orderStatistic(exits, rank);
  if (exit <= 1)
    return refusal(
      'NO_SKILL',
      `From states like the last one more than ${percent(1 - options.confidence)} of forecasts are off by more than ${options.toleranceText} within one sample.`,
      'Wait for another state, ask for a wider tolerance or a lower confidence.',
      { confidence: options.confidence, passes: count },
    );
  const spacing = (origins[count - 1]! - origins[0]!) / (count - 1);
  const block = Math.max(1, Math.min(Math.ceil(Math.min(exit, steps) / spacing), Math.floor(count / 10)));
  const ends = bootstrapRank(exits, rank, block, INTERVAL_LEVEL, options.seed, exit);
  return intervalAnswer(exit - 1, ends.low - 1, ends.high - 1, steps, record, exit > steps, {
    origins: count,
    rank,
    predictor: heldOut.predictor,
  });
}
