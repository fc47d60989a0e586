import { type Refusal, refusal } from '../base/answer.ts';
import { exp } from '../base/elementary.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { BELOW_LEVEL, FEWEST_FOLDS, FEWEST_POINTS, type Growth, type GrowthLimits } from './growth.ts';
import type { MeanCurve } from './mean-curve.ts';

/** A curve that rises by less than this altogether does not grow. */
const FLAT = 0.7;

/** Why a divergence curve has no straight range, with the numbers. */
export function noGrowth(
  record: PreparedRecord,
  curve: MeanCurve,
  growth: Growth,
  limits: GrowthLimits,
): Refusal {
  const { level, room, start, bent } = growth;
  const std = record.stds[record.target]!;
  const first = curve.value(limits.earliest);
  const unit = record.channelUnits[record.target] ?? '';
  const time = (s: number) => `${say(s * record.interval)} ${record.timeUnit}`;
  if (!Number.isFinite(first) || !Number.isFinite(level))
    return refusal(
      'NO_EXPONENTIAL_GROWTH',
      'Neighbouring states coincide and stay together: the record repeats itself.',
      'A record that repeats exactly has no growth to measure.',
    );
  const needed = FEWEST_FOLDS + BELOW_LEVEL;
  if (room < needed && start > limits.earliest)
    return refusal(
      'NOISE_FLOOR',
      `Noise of the sensor hides differences below ${say(exp(limits.floor) * std)} ${unit}, and unrelated states are only ${say(exp(level) * std)} ${unit} apart: ${say(Math.max(0, room))} e-folds of growth between, ${needed} are needed.`,
      'Record with less sensor noise or finer resolution.',
      { room, needed, floor: exp(limits.floor) * std },
    );
  if (level - first < FLAT)
    return refusal(
      'NO_EXPONENTIAL_GROWTH',
      `Neighbouring states, ${say(exp(first) * std)} ${unit} apart after ${time(limits.earliest)}, are ${say(exp(level) * std)} ${unit} apart in the end: ${
        curve.value(0) < level - FLAT
          ? 'differences reach their full size at once, as in noise or a record sampled too slowly'
          : 'differences do not grow, as in periodic and quasiperiodic motion'
      }.`,
      'If the motion is thought to be chaotic, sample faster or longer.',
      { early: exp(first) * std, late: exp(level) * std },
    );
  if (room < needed)
    return refusal(
      'TOO_SHORT',
      `After ${time(limits.earliest)} neighbouring states are ${say(exp(first) * std)} ${unit} apart and level off at ${say(exp(level) * std)} ${unit}: ${say(room)} e-folds of growth, ${needed} are needed to tell exponential growth from other.`,
      'A longer record has closer neighbours; faster sampling shows their growth earlier.',
      { room, needed },
    );
  let end = start;
  while (end < curve.steps && curve.value(end + 1) <= level - BELOW_LEVEL) end++;
  if (end - start + 1 < FEWEST_POINTS[limits.dynamics])
    return refusal(
      'TOO_COARSE',
      `Differences grow to their full size within ${end - start + 1} samples; ${FEWEST_POINTS[limits.dynamics]} on the way are needed.`,
      'Sample faster.',
      { samples: end - start + 1 },
    );
  return refusal(
    'NO_EXPONENTIAL_GROWTH',
    bent === null
      ? `Differences grow by ${say(room)} e-folds, but no straight range of ${FEWEST_FOLDS} e-folds was found.`
      : `Differences grow by ${say(bent.folds)} e-folds between ${time(bent.from)} and ${time(bent.to)}, but not exponentially: the slope changes by ${say(100 * bent.bend)} % from the first half to the second, or a power law fits better.`,
    'Linear noise and slow drift grow like this; if the motion is thought to be chaotic, record longer or with less noise.',
    { room, bend: bent?.bend ?? 0 },
  );
}

const say = (x: number) => String(Number(x.toPrecision(3)));
