import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import type { LocalSpec } from './local.ts';
import { MOST_MONOMIALS, monomialCount } from './polynomial.ts';
import type { PredictorSpec } from './predictors.ts';
import {
  chooseOrigins,
  heldOutErrors,
  type PreparedSetting,
  prepareSetting,
  sparseLeads,
} from './setting.ts';
import { saturationColumn, score } from './skill.ts';

/** Origins on which structures are compared, spread over the record. */
export const TUNING_ORIGINS = 128;
/** Leads averaged when saturation is looked for: a factor of two in lead, so that a chance low is no reach. */
const SMOOTHED = 5;
/** Iterated predictors carry at most this many samples at a time (targets of one fit). */
const LONGEST_STEP = 32;

export interface Pilot {
  /** Direct local structures, best first. */
  readonly ranked: readonly LocalSpec[];
  /** Samples until the error is that of the record's mean; `cap` when it never is. */
  readonly horizon: number;
}

/**
 * A first look with direct local forecasts at sparse leads: how far do forecasts reach at all, and which
 * neighbourhoods are good?
 */
export async function lookAhead(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  cap: number,
  compute: Compute,
): Promise<Pilot> {
  const prepared = prepareSetting(record, reconstruction, cap);
  const leads = sparseLeads(cap);
  const origins = chooseOrigins(prepared.starts, TUNING_ORIGINS);
  const specs = directStructures(reconstruction.embeddingDimension, prepared.admissible);
  const errors = await heldOutErrors(prepared.setting, specs, origins, leads, compute);
  const [reference] = await heldOutErrors(
    prepared.setting,
    [{ kind: 'climatology' }],
    origins,
    leads,
    compute,
  );
  const reach = errors.map((e) => {
    const column = saturationColumn(e, reference!, leads.length, SMOOTHED);
    return column < 0 ? cap : leads[column]!;
  });
  const scores = errors.map((e) => score(e, leads.length));
  const order = specs.map((_, i) => i).sort((a, b) => scores[a]! - scores[b]! || a - b);
  return { ranked: order.map((i) => specs[i]!), horizon: Math.max(...reach) };
}

/**
 * The structure with the best held-out score: direct and iterated local predictors around the best
 * neighbourhoods of the pilot, and polynomials of the delays.
 */
export async function chooseStructure(
  prepared: PreparedSetting,
  reconstruction: Reconstruction,
  pilot: Pilot,
  compute: Compute,
): Promise<PredictorSpec> {
  const { setting } = prepared;
  // Steps much shorter than half a correlation time cost more compositions and tell no more.
  const half = Math.floor(reconstruction.correlationTime.samples / 2);
  const step = Math.min(Math.max(setting.delay, half), LONGEST_STEP, setting.reach);
  const linear = pilot.ranked.filter((s) => s.order === 1);
  const constant = pilot.ranked.filter((s) => s.order === 0);
  const specs: PredictorSpec[] = [
    ...pilot.ranked.slice(0, 3),
    ...[...linear.slice(0, 2), ...constant.slice(0, 1)].map((s) => ({ ...s, step })),
    ...polynomialStructures(prepared, step),
  ];
  return bestOf(prepared, specs, compute);
}

/** The spec with the lowest score on the tuning origins; the earlier one among equals. */
export async function bestOf(
  prepared: PreparedSetting,
  specs: readonly PredictorSpec[],
  compute: Compute,
  most = TUNING_ORIGINS,
): Promise<PredictorSpec> {
  const leads = sparseLeads(prepared.setting.reach);
  const origins = chooseOrigins(prepared.starts, most);
  const errors = await heldOutErrors(prepared.setting, specs, origins, leads, compute);
  const scores = errors.map((e) => score(e, leads.length));
  let best = 0;
  for (let i = 1; i < specs.length; i++) if (scores[i]! < scores[best]!) best = i;
  return specs[best]!;
}

/** The same predictor with other neighbourhoods: smoother for more noise, smaller for a shorter record. */
export function variantsOf(
  spec: PredictorSpec,
  embeddingDimension: number,
  change: 'noisier' | 'shorter',
): PredictorSpec[] {
  if (spec.kind === 'local') {
    const least = spec.order === 1 ? embeddingDimension + 2 : 2;
    return (change === 'noisier' ? [1, 2, 4] : [1, 0.5]).map((factor) => ({
      ...spec,
      neighbours: Math.min(200, Math.max(least, Math.round(factor * spec.neighbours))),
    }));
  }
  if (spec.kind === 'polynomial')
    return [
      ...RIDGES.map((ridge) => ({ ...spec, ridge })),
      // More noise than a polynomial bears may call for a local fit.
      ...directStructures(embeddingDimension, Number.POSITIVE_INFINITY)
        .filter((s) => s.order === 1)
        .slice(-2),
    ];
  return [spec];
}

/** Ridges on monomials of unit mean square: rounding alone, a clean and a noisy record. */
const RIDGES = [1e-9, 1e-6, 1e-3] as const;

function polynomialStructures(prepared: PreparedSetting, step: number): PredictorSpec[] {
  const { setting } = prepared;
  const m = setting.offsets.length;
  // The two highest affordable degrees of 2 … 5, ten library vectors to the monomial.
  const degrees = [5, 4, 3, 2]
    .filter((d) => monomialCount(m, d) <= Math.min(MOST_MONOMIALS, prepared.admissible / 10))
    .slice(0, 2);
  const steps = [...new Set([step, Math.max(1, Math.floor(step / 4))])];
  return degrees.flatMap((degree) =>
    steps.flatMap((by) => RIDGES.map((ridge) => ({ kind: 'polynomial', degree, ridge, step: by }) as const)),
  );
}

/**
 * Neighbourhoods from twice to sixteen times the m + 1 coefficients of a linear map (below, it is not
 * determined; above, it is no longer local in records of the lengths met), two ridges; and means over 4, 16
 * and 64 neighbours.
 */
function directStructures(m: number, admissible: number): LocalSpec[] {
  const most = Math.min(200, Math.floor(admissible / 4));
  const linear = [2, 4, 8, 16]
    .map((factor) => Math.min(factor * (m + 1), most))
    .filter((k, i, all) => k >= m + 2 && all.indexOf(k) === i)
    .flatMap((neighbours) =>
      [1e-6, 1e-2].map((ridge) => ({ kind: 'local', order: 1, neighbours, ridge, step: 0 }) as const),
    );
  const constant = [4, 16, 64]
    .filter((k) => k <= Math.max(4, most))
    .map((neighbours) => ({ kind: 'local', order: 0, neighbours, ridge: 0, step: 0 }) as const);
  return [...linear, ...constant];
}
