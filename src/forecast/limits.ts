import { type Answer, finding, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { createRandom } from '../base/random.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { conformalRank, firstExits, orderStatistic } from './exits.ts';
import type { HeldOut } from './held-out.ts';
import { everyLead, heldOutErrors, prepareSetting } from './setting.ts';
import { rmsByLead } from './skill.ts';
import { bestOf, variantsOf } from './structure.ts';
import type { LeadTimeLimit, LeadTimeResult } from './types.ts';

/** Origins of an experiment: the bound's order statistic is then the 25th smallest at 90 %. */
const ORIGINS = 250;
/** Origins on which its neighbourhoods are compared. */
const TUNING = 64;
/** Rows for worse sensors at most, a decimal digit each. */
const WORSE_DIGITS = 2;
const BETTER_DIGITS = 2;
/** A one-sample forecast error within this factor of the sensor's noise is noise: target and state carry one each. */
const AT_SENSOR_FLOOR = 3;
/** A gain or loss is worth naming a limit for when it is this share of the lead time. */
const WORTH = 0.25;
/** Loss from half a record, as a share of the lead time, above which a longer record would help. */
const RECORD_MATTERS = 0.1;

export interface LimitInput {
  readonly trusted: Answer;
  readonly perDecimalDigit: Answer;
  readonly noise: Answer;
  /** Scaled units. */
  readonly tolerance: number;
  readonly confidence: number;
  readonly seed: number;
}

export interface Limits {
  readonly limitedBy: LeadTimeLimit;
  readonly limitedByText: string;
  readonly sensorTable: LeadTimeResult['sensorTable'];
  /** Time units lost per decimal digit of added noise, measured; null when it could not be. */
  readonly measuredGain: number | null;
}

/** ln 10 / λ₁: what one decimal digit buys while differences grow exponentially. Exact for such growth. */
export function gainPerDigit(largest: Answer, timeUnit: string): Answer {
  if (!largest.ok)
    return refusal(
      largest.code,
      `A gain per digit needs a growth rate: ${largest.why}`,
      largest.remedy,
      largest.parameters,
    );
  if (!(largest.low > 0))
    return refusal(
      'NO_EXPONENTIAL_GROWTH',
      `The growth rate ${largest.value} may be zero (from ${largest.low}); digits then buy no fixed time.`,
      'A longer or less noisy record narrows the interval.',
      { low: largest.low, value: largest.value },
    );
  return finding({
    value: Math.LN10 / largest.value,
    low: Math.LN10 / largest.high,
    high: Math.LN10 / largest.low,
    level: largest.level,
    unit: timeUnit,
    method: `ln 10 / λ₁ with λ₁ by ${largest.method}`,
    ...(largest.bound === undefined ? {} : { bound: flipped(largest.bound) }),
  });
}

function flipped(bound: 'two-sided' | 'lower' | 'upper') {
  return bound === 'lower' ? 'upper' : bound === 'upper' ? 'lower' : bound;
}

/**
 * What sets today's limit, by experiment: the lead time again with a worse sensor (noise added to the
 * record) and with half the record as library. The rule, in order:
 * 1. no path leaves the tolerance within the horizon: none found;
 * 2. the one-sample error is at the sensor's noise: the sensor, when a digit more would add at least a
 *    quarter of the lead time; else divergence, which eats digits faster than sensors can supply them;
 * 3. above that noise: the record, when half of it costs more than a tenth of the lead time; else
 *    divergence where growth is exponential; else the model.
 */
export async function findLimits(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  heldOut: HeldOut,
  input: LimitInput,
  compute: Compute,
): Promise<Limits> {
  const { trusted, perDecimalDigit } = input;
  if (!trusted.ok) {
    const short = trusted.code === 'TOO_SHORT';
    return {
      limitedBy: short ? 'record' : 'none-found',
      limitedByText: short
        ? 'The record is too short for a bound on the lead time.'
        : 'There is no lead time that anything could limit.',
      sensorTable: [],
      measuredGain: null,
    };
  }
  const std = record.stds[record.target]!;
  const noise = sensorNoise(record, input.noise);
  const today = { noise, trusted: trusted.value, measured: true };
  if (trusted.bound === 'lower')
    return {
      limitedBy: 'none-found',
      limitedByText: `No limit was met within ${trusted.value} ${record.timeUnit}, the longest lead this record can test.`,
      sensorTable: noise > 0 ? [today] : [],
      measuredGain: null,
    };

  // Worse conditions leave sooner: half as far again as today's bound is far enough.
  const steps = Math.min(heldOut.steps, Math.ceil((1.5 * trusted.value) / record.interval) + 1);
  const stride = Math.max(1, Math.floor(heldOut.origins.length / ORIGINS));
  const origins = heldOut.origins.filter((_, i) => i % stride === 0);
  const boundOf = (errors: Float64Array) => {
    const exits = firstExits(errors, steps, input.tolerance);
    const rank = Math.max(1, conformalRank(exits.length, heldOut.independent, input.confidence));
    return (orderStatistic(exits, rank) - 1) * record.interval;
  };
  const baseline = boundOf(rowsAt(heldOut, stride, steps));

  // Worse sensors by whole digits while noise alone does not fill the tolerance; else by half a digit.
  const levels = [1, 2]
    .slice(0, WORSE_DIGITS)
    .filter((d) => noise * power10(d) <= 0.5 * input.tolerance * std);
  if (levels.length === 0 && noise * ROOT10 <= input.tolerance * std) levels.push(0.5);
  const experiment = async (changed: PreparedRecord, half: boolean) => {
    const prepared = prepareSetting(changed, reconstruction, steps);
    const used = half ? { ...prepared, setting: withHalfLibrary(prepared.setting) } : prepared;
    const specs = variantsOf(heldOut.spec, reconstruction.embeddingDimension, half ? 'shorter' : 'noisier');
    const spec = specs.length > 1 ? await bestOf(used, specs, compute, TUNING) : specs[0]!;
    const [errors] = await heldOutErrors(used.setting, [spec], origins, everyLead(steps), compute);
    return boundOf(errors!);
  };
  const [halved, ...worse] = await Promise.all([
    experiment(record, true),
    ...(noise > 0 ? levels : []).map((digits, row) =>
      experiment(noisier(record, noise / std, power10(digits), input.seed, row), false),
    ),
  ]);
  compute.throwIfAborted();

  const gain = worse.length > 0 ? Math.max(0, (baseline - worse[0]!) / levels[0]!) : null;
  const atFloor = noise > 0 && rmsByLead(heldOut.errors, heldOut.steps)[0]! * std <= AT_SENSOR_FLOOR * noise;
  const digit = perDecimalDigit.ok ? perDecimalDigit.value : null;
  const verdict = decide(trusted.value, baseline, halved!, atFloor, digit, gain, record.timeUnit);
  const extendable = verdict.limitedBy === 'sensor' || verdict.limitedBy === 'divergence';
  const better =
    extendable && atFloor && gain !== null && gain > 0 && digit !== null
      ? Array.from({ length: BETTER_DIGITS }, (_, i) => ({
          noise: noise / power10(BETTER_DIGITS - i),
          trusted: trusted.value + (BETTER_DIGITS - i) * Math.min(gain, digit),
          measured: false,
        }))
      : [];
  const rows = levels.flatMap((digits, i) =>
    Number.isInteger(digits) && worse[i] !== undefined
      ? [{ noise: noise * power10(digits), trusted: worse[i]!, measured: true }]
      : [],
  );
  return { ...verdict, sensorTable: noise > 0 ? [...better, today, ...rows] : [], measuredGain: gain };
}

function decide(
  trusted: number,
  baseline: number,
  halved: number,
  atFloor: boolean,
  digit: number | null,
  gain: number | null,
  unit: string,
): Pick<Limits, 'limitedBy' | 'limitedByText'> {
  const say = (x: number) => `${Number(x.toPrecision(2))} ${unit}`;
  if (atFloor) {
    const buys = digit ?? gain ?? 0;
    if (buys >= WORTH * trusted)
      return {
        limitedBy: 'sensor',
        limitedByText: `One sample ahead the forecast is already as good as the sensor; a sensor better by one decimal digit would add about ${say(buys)}.`,
      };
    if (digit !== null)
      return {
        limitedBy: 'divergence',
        limitedByText: `Small differences grow tenfold in ${say(digit)}, so that even a much better sensor adds little to ${say(trusted)}.`,
      };
  }
  const loss = baseline - halved;
  if (loss > RECORD_MATTERS * baseline)
    return {
      limitedBy: 'record',
      limitedByText: `With half the record the lead time is ${say(loss)} shorter: a longer record would find states more like the present one.`,
    };
  if (digit !== null)
    return {
      limitedBy: 'divergence',
      limitedByText: `Small differences grow tenfold in ${say(digit)}; neither the sensor nor the record's length is found to set the limit.`,
    };
  return {
    limitedBy: 'model',
    limitedByText:
      'Forecasts miss by more than the sensor explains, errors do not grow exponentially, and more record does not help: what happens is in part not determined by the measured past, or the model does not capture it.',
  };
}

/** Noise today in the record's unit: given or estimated, never below the quantiser's; 0 when unknown. */
function sensorNoise(record: PreparedRecord, noise: Answer): number {
  // Rounding to a step q has standard deviation q / √12 (IEEE Std 1241).
  const rounding = record.resolutionStep / Math.sqrt(12);
  // An upper bound alone does not tell how much of today's error is the sensor's.
  const known = record.givenNoise ?? (noise.ok && noise.bound !== 'upper' ? noise.value : 0);
  return Math.max(rounding, known);
}

const ROOT10 = Math.sqrt(10);

/** Powers of ten at half-integer exponents 0 … 2, exactly reproducible. */
function power10(digits: number): number {
  return digits === 0.5 ? ROOT10 : digits === 1 ? 10 : 100;
}

/** The record as a sensor with `factor` times the noise would have seen it (target channel). */
function noisier(
  record: PreparedRecord,
  noise: number,
  factor: number,
  seed: number,
  row: number,
): PreparedRecord {
  const added = noise * Math.sqrt(factor * factor - 1);
  const random = createRandom(seed, 83, row);
  const scaled = record.scaled.slice();
  const base = record.target * record.count;
  for (let t = 0; t < record.count; t++)
    if (record.present[t] === 1) scaled[base + t]! += added * random.normal();
  return { ...record, scaled };
}

/** Every other stretch of the library: half the history, as densely sampled. */
function withHalfLibrary<S extends { readonly library: Int32Array; readonly count: number }>(setting: S): S {
  const stretch = Math.max(1, Math.ceil(setting.count / 20));
  return { ...setting, library: setting.library.filter((t) => Math.floor(t / stretch) % 2 === 0) };
}

/** Errors of every `stride`-th origin at the first `steps` leads. */
function rowsAt(heldOut: HeldOut, stride: number, steps: number): Float64Array {
  const { errors, origins } = heldOut;
  const rows: Float64Array[] = [];
  for (let i = 0; i < origins.length; i += stride)
    rows.push(errors.subarray(i * heldOut.steps, i * heldOut.steps + steps));
  const out = new Float64Array(rows.length * steps);
  rows.forEach((row, i) => {
    out.set(row, i * steps);
  });
  return out;
}
