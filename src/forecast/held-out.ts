import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { describePredictor, type PredictorSpec } from './predictors.ts';
import {
  chooseOrigins,
  everyLead,
  heldOutErrors,
  type PreparedSetting,
  prepareSetting,
  sparseLeads,
} from './setting.ts';
import { compareForecasts, rmsByLead, saturationColumn } from './skill.ts';
import { chooseStructure, lookAhead, TUNING_ORIGINS } from './structure.ts';

/** Origins at most; fewer at long horizons, so that forecasts stay under MOST_FORECASTS. */
const MOST_ORIGINS = 1_000;
const FEWEST_ORIGINS = 200;
const MOST_FORECASTS = 400_000;
/** Longest default horizon in samples: beyond, every-sample paths cost more than they tell. */
const LONGEST_HORIZON = 5_000;
/** The longest horizon is this part of the record, so that ten disjoint paths fit into it. */
const HORIZON_PART = 10;
/** Shortest default horizon in correlation times. */
const CORRELATION_TIMES = 5;
/** One-sided 97.5 % point of Student's t with 9 degrees of freedom (ten blocks) is 2.26. */
const SIGNIFICANT = 2.3;
/** Library vectors left to each origin, at least: a local linear map in a handful of coordinates. */
const FEWEST_LIBRARY = 50;

/** Held-out forecasts of a record: everything lead time and intervals are made from. Scaled units. */
export interface HeldOut {
  readonly prepared: PreparedSetting;
  /** The forecast used: ours, or a reference that ours does not beat; and what it is called. */
  readonly spec: PredictorSpec;
  readonly predictor: string;
  /** Best nonlinear structure found, used or not. */
  readonly ours: PredictorSpec;
  readonly steps: number;
  readonly origins: Int32Array;
  /** Row-major origins × steps, of the forecast used and of the references. */
  readonly errors: Float64Array;
  readonly persistence: Float64Array;
  readonly climatology: Float64Array;
  readonly linear: Float64Array;
  /** Origins' worth of independent ones: stretches longer than the decorrelation window. */
  readonly independent: number;
  /** t-values of the comparisons made, negative when the first forecast is better. */
  readonly comparisons: readonly { readonly first: string; readonly second: string; readonly t: number }[];
}

export interface HeldOutOptions {
  /** Longest lead, samples; default: until errors saturate. */
  readonly leadSteps?: number;
  /** The default horizon is not to be shorter than this, where the record can carry it. */
  readonly atLeast?: number;
}

/** Chooses horizon and structure without looking at any tolerance, and forecasts from held-out origins. */
export async function forecastHeldOut(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: HeldOutOptions,
  compute: Compute,
): Promise<HeldOut | Refusal> {
  if (!(record.stds[record.target]! > 0))
    return refusal('CONSTANT', 'The channel to forecast does not vary.', 'Choose another channel as target.');
  const cap = longestHorizon(record, reconstruction, options);
  if (typeof cap !== 'number') return cap;
  const pilot = await lookAhead(record, reconstruction, cap, compute);
  const shortest = Math.ceil(CORRELATION_TIMES * reconstruction.correlationTime.samples);
  // Half as far again as the pilot's forecasts reach, for structures better than its own.
  let steps =
    options.leadSteps === undefined
      ? Math.min(cap, Math.max(shortest, Math.ceil(1.5 * pilot.horizon), options.atLeast ?? 0, 10))
      : cap;
  let prepared = prepareSetting(record, reconstruction, steps);
  const ours = await chooseStructure(prepared, reconstruction, pilot, compute);
  // The chosen structure may reach farther than the pilot's: lengthen until its errors saturate too.
  while (steps < cap && !(await reachesSaturation(prepared, ours, compute))) {
    compute.throwIfAborted();
    steps = Math.min(cap, 2 * steps);
    prepared = prepareSetting(record, reconstruction, steps);
  }
  return atHorizon(prepared, reconstruction, ours, compute);
}

async function atHorizon(
  prepared: PreparedSetting,
  reconstruction: Reconstruction,
  ours: PredictorSpec,
  compute: Compute,
): Promise<HeldOut> {
  const { setting, starts } = prepared;
  const steps = setting.reach;
  const most = Math.max(FEWEST_ORIGINS, Math.min(MOST_ORIGINS, Math.floor(MOST_FORECASTS / steps)));
  const origins = chooseOrigins(starts, most);
  const leads = everyLead(steps);
  const ladder: PredictorSpec[] = [
    { kind: 'climatology' },
    { kind: 'persistence' },
    { kind: 'linear' },
    ours,
  ];
  const errors = await heldOutErrors(setting, ladder, origins, leads, compute);
  const window = reconstruction.theilerWindow.samples;
  const blocks = Math.max(10, Math.min(40, Math.floor(starts.length / (window + steps))));
  const at = sparseLeads(steps);
  const climatology = rmsByLead(errors[0]!, steps);
  // From the simplest up: a forecast is adopted when it is significantly better than the one held so far.
  let chosen = 0;
  const comparisons: HeldOut['comparisons'][number][] = [];
  for (let i = 1; i < ladder.length; i++) {
    const t = compareForecasts(errors[i]!, errors[chosen]!, steps, at, climatology, blocks);
    comparisons.push({
      first: describePredictor(ladder[i]!),
      second: describePredictor(ladder[chosen]!),
      t,
    });
    if (t < -SIGNIFICANT) chosen = i;
  }
  return {
    prepared,
    spec: ladder[chosen]!,
    predictor: describePredictor(ladder[chosen]!),
    ours,
    steps,
    origins,
    errors: errors[chosen]!,
    climatology: errors[0]!,
    persistence: errors[1]!,
    linear: errors[2]!,
    independent: Math.min(origins.length, Math.floor(starts.length / (window + 1))),
    comparisons,
  };
}

/** Over the last quarter of the horizon the forecast is as wrong as the record's mean. */
async function reachesSaturation(
  prepared: PreparedSetting,
  ours: PredictorSpec,
  compute: Compute,
): Promise<boolean> {
  const steps = prepared.setting.reach;
  const leads = everyLead(steps).filter((lead) => 4 * lead > 3 * steps);
  const specs: PredictorSpec[] = [ours, { kind: 'climatology' }];
  const origins = chooseOrigins(prepared.starts, TUNING_ORIGINS);
  const [errors, mean] = await heldOutErrors(prepared.setting, specs, origins, leads, compute);
  return saturationColumn(errors!, mean!, leads.length, leads.length) === 0;
}

/**
 * The longest horizon the record can carry: a tenth of it (a quarter when the caller asks for a length),
 * shorter where gaps leave less than half of the vectors a whole path, or too little library beside one.
 */
function longestHorizon(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: HeldOutOptions,
): number | Refusal {
  const natural = Math.min(LONGEST_HORIZON, Math.floor(record.count / HORIZON_PART));
  const asked = options.leadSteps ?? Math.max(natural, options.atLeast ?? 0);
  let cap = Math.min(asked, Math.max(natural, Math.floor(record.count / 4)));
  const all = prepareSetting(record, reconstruction, 1);
  const least = Math.max(FEWEST_LIBRARY, 4 * (reconstruction.embeddingDimension + 1));
  for (; cap >= 1; cap = Math.floor(cap / 2)) {
    const { starts, admissible } = prepareSetting(record, reconstruction, cap);
    if (2 * starts.length >= all.starts.length && admissible >= least) return cap;
  }
  return refusal(
    'TOO_SHORT',
    `Of ${record.count} samples, ${all.starts.length} complete states remain; held-out forecasts need at least ${least} of them that share no sample with the forecast's path.`,
    'Record longer, or with fewer gaps.',
    { samples: record.count, states: all.starts.length, needed: least },
  );
}
