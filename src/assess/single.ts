import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { badInput } from '../base/errors.ts';
import type { JobOptions } from '../base/options.ts';
import { estimateDivergence } from '../divergence/largest.ts';
import type { DivergenceOptions, DivergenceResult } from '../divergence/types.ts';
import { nullTest } from '../evidence/null-test.ts';
import type { NullTestOptions, NullTestResult } from '../evidence/types.ts';
import { forecast } from '../forecast/forecast.ts';
import { estimateLeadTime } from '../forecast/lead-time.ts';
import type { ForecastOptions, ForecastResult, LeadTimeOptions, LeadTimeResult } from '../forecast/types.ts';
import { estimateDimension } from '../geometry/dimension.ts';
import { estimateNoise } from '../geometry/noise.ts';
import type { DimensionOptions, DimensionResult, NoiseResult } from '../geometry/types.ts';
import { reconstruct } from '../reconstruct/reconstruct.ts';
import type { Reconstruction, ReconstructOptions } from '../reconstruct/types.ts';
import { prepareRecording } from '../recording/prepare.ts';
import { assessStationarity } from '../recording/stationarity.ts';
import type { PreparedRecord, Recording, RecordingOptions } from '../recording/types.ts';
import { DEFAULT_CONFIDENCE, DEFAULT_SURROGATES, DEFAULT_TOLERANCE_STDS } from './assess.ts';
import { withholdLeadTime } from './consistency.ts';
import { refusedLeadTime } from './refused.ts';

/** A reconstruction together with the record it was made from: all that the geometry needs. */
export interface RecordReconstruction extends Reconstruction {
  readonly record: PreparedRecord;
}

type Prepared = ReconstructOptions & RecordingOptions & JobOptions;

const seedOf = (options: JobOptions) => options.seed ?? 1;

export async function reconstructionOf(
  recording: Recording,
  options: Prepared,
  compute: Compute,
): Promise<RecordReconstruction | Refusal> {
  const record = prepareRecording(recording, options);
  const result = await reconstruct(record, { ...options, seed: seedOf(options) }, compute);
  return 'ok' in result ? result : { ...result, record };
}

export async function dimensionOf(
  reconstruction: RecordReconstruction,
  options: DimensionOptions & JobOptions,
  compute: Compute,
): Promise<DimensionResult & { readonly noise: NoiseResult }> {
  const { record } = requireReconstruction(reconstruction);
  const seed = seedOf(options);
  const [result, noise] = await Promise.all([
    estimateDimension(record, reconstruction, { ...options, seed }, compute.part('dimension', 0.7)),
    estimateNoise(record, reconstruction, { seed }, compute.part('noise', 0.3)),
  ]);
  return { ...result, noise };
}

export async function divergenceOf(
  reconstruction: RecordReconstruction,
  options: DivergenceOptions & JobOptions,
  compute: Compute,
): Promise<DivergenceResult> {
  const { record } = requireReconstruction(reconstruction);
  const seed = seedOf(options);
  const noise = await estimateNoise(record, reconstruction, { seed }, compute.part('noise', 0.3));
  return estimateDivergence(
    record,
    reconstruction,
    { ...options, seed, noise: noise.level },
    compute.part('divergence', 0.7),
  );
}

export async function nullTestOf(
  recording: Recording,
  options: NullTestOptions & Prepared,
  compute: Compute,
): Promise<NullTestResult | Refusal> {
  const reconstruction = await reconstructionOf(recording, options, compute.part('reconstruction', 0.2));
  if ('ok' in reconstruction) return reconstruction;
  const surrogates = options.surrogates ?? DEFAULT_SURROGATES;
  return nullTest(
    reconstruction.record,
    reconstruction,
    { seed: seedOf(options), surrogates },
    compute.part('nullTest', 0.8),
  );
}

export async function leadTimeOf(
  recording: Recording,
  options: LeadTimeOptions & Prepared,
  compute: Compute,
): Promise<LeadTimeResult> {
  const context = await forecastContext(recording, options, compute);
  if ('ok' in context)
    return refusedLeadTime(context, options.tolerance ?? 0, options.confidence ?? DEFAULT_CONFIDENCE);
  const { record, reconstruction, stationarity, settings } = context;
  const result = await estimateLeadTime(record, reconstruction, settings, compute.part('leadTime', 0.5));
  return withholdLeadTime(result, stationarity);
}

export async function forecastOf(
  recording: Recording,
  options: ForecastOptions & Prepared,
  compute: Compute,
): Promise<ForecastResult | Refusal> {
  const context = await forecastContext(recording, options, compute);
  if ('ok' in context) return context;
  const { record, reconstruction, stationarity, settings } = context;
  if (stationarity.verdict === 'drifting')
    return refusal(
      'NONSTATIONARY',
      `Intervals measured on this record would not hold after it. ${stationarity.text}`,
      "Forecast from a stretch with constant conditions, or remove a slow trend with detrend: 'linear'.",
    );
  return forecast(
    record,
    reconstruction,
    { ...settings, ...(options.steps === undefined ? {} : { steps: options.steps }) },
    compute.part('forecast', 0.5),
  );
}

/** What every forecast needs to know first: state space, noise, growth, and whether the record keeps its character. */
async function forecastContext(recording: Recording, options: LeadTimeOptions & Prepared, compute: Compute) {
  const reconstruction = await reconstructionOf(recording, options, compute.part('reconstruction', 0.15));
  if ('ok' in reconstruction) return reconstruction;
  const { record } = reconstruction;
  const seed = seedOf(options);
  const [stationarity, noise] = await Promise.all([
    assessStationarity(record, reconstruction, { seed }, compute.part('stationarity', 0.1)),
    estimateNoise(record, reconstruction, { seed }, compute.part('noise', 0.1)),
  ]);
  const divergence = await estimateDivergence(
    record,
    reconstruction,
    { seed, noise: noise.level },
    compute.part('divergence', 0.15),
  );
  const settings = {
    seed,
    noise: noise.level,
    largest: divergence.largest,
    tolerance: options.tolerance ?? DEFAULT_TOLERANCE_STDS * record.stds[record.target]!,
    confidence: options.confidence ?? DEFAULT_CONFIDENCE,
    ...(options.leadSteps === undefined ? {} : { leadSteps: options.leadSteps }),
  };
  return { record, reconstruction: reconstruction as Reconstruction, stationarity, settings };
}

function requireReconstruction(value: RecordReconstruction): RecordReconstruction {
  if (typeof value !== 'object' || value === null || !('record' in value) || !('delay' in value))
    badInput(
      'reconstruction',
      'the result of engine.reconstruct (a refusal carries no reconstruction)',
      value,
    );
  return value;
}
