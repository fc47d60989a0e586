import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { BackendName } from '../base/kernels.ts';
import { VERSION } from '../base/version.ts';
import { estimateDivergence } from '../divergence/largest.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import { nullTest } from '../evidence/null-test.ts';
import { callRegime } from '../evidence/regime.ts';
import type { NullTestResult, Regime } from '../evidence/types.ts';
import { estimateLeadTime } from '../forecast/lead-time.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import { estimateDimension } from '../geometry/dimension.ts';
import { estimateNoise } from '../geometry/noise.ts';
import type { DimensionResult, NoiseResult } from '../geometry/types.ts';
import { reconstruct } from '../reconstruct/reconstruct.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { prepareRecording } from '../recording/prepare.ts';
import { assessStationarity } from '../recording/stationarity.ts';
import { summariseRecord } from '../recording/summary.ts';
import type { PreparedRecord, Recording, Stationarity } from '../recording/types.ts';
import { collectCautions } from './cautions.ts';
import { withholdDimension, withholdDivergence, withholdLeadTime } from './consistency.ts';
import { figureData } from './data.ts';
import { estimateAssessBytes, requireMemory } from './memory.ts';
import { refusedLeadTime, refusedRegime, unknownStationarity } from './refused.ts';
import { Stopwatch } from './stopwatch.ts';
import { ASSESSMENT_SCHEMA, type Assessment, type AssessOptions } from './types.ts';

/** Surrogates by default: 39 carry a one-sided test at the 2.5 % level (smallest p = 1/40). */
export const DEFAULT_SURROGATES = 39;
export const DEFAULT_CONFIDENCE = 0.9;
/** Default tolerance in standard deviations of the record. */
export const DEFAULT_TOLERANCE_STDS = 0.5;

/** Shares of the progress bar, after the time budget of each stage at 10,000 samples. */
const SHARES = {
  reconstruction: 0.08,
  stationarity: 0.06,
  dimension: 0.08,
  noise: 0.04,
  divergence: 0.08,
  nullTest: 0.3,
  leadTime: 0.24,
  regime: 0.12,
};

const NOT_YET_SPECTRUM = refusal(
  'NOT_YET',
  'This version does not compute the exponent spectrum from data.',
  'Use modelSpectrum when the equations are known.',
);
const NOT_YET_MECHANISM = refusal(
  'NOT_YET',
  'This version does not identify the mechanism.',
  'Look at the state-space picture of the report.',
);

/** What runs the job, for provenance and the memory estimate. */
export interface AssessHost {
  readonly backend: BackendName;
  readonly threads: number;
}

/**
 * The main job: record → reconstruction → dimension, noise, divergence, null test, lead time → regime.
 * @throws LeadspanError BAD_INPUT, BAD_OPTION, ABORTED, MEMORY_LIMIT
 */
export async function assess(
  recording: Recording,
  options: AssessOptions,
  compute: Compute,
  host: AssessHost,
): Promise<Assessment> {
  const watch = new Stopwatch();
  const record = watch.time('recording', () => prepareRecording(recording, options));
  requireMemory(
    estimateAssessBytes(record.count, record.channelCount, host.threads),
    compute.memoryLimit,
    'The assessment',
  );

  const seed = options.seed ?? 1;
  const settings: Settings = {
    seed,
    surrogates: options.surrogates ?? DEFAULT_SURROGATES,
    confidence: options.confidence ?? DEFAULT_CONFIDENCE,
    tolerance: options.tolerance ?? DEFAULT_TOLERANCE_STDS * record.stds[record.target]!,
  };
  const stage = <T>(name: keyof typeof SHARES, work: (part: Compute) => Promise<T>): Promise<T> =>
    watch.timeAsync(name, async () => {
      const part = compute.part(name, SHARES[name]);
      const result = await work(part);
      part.finish();
      return result;
    });

  const reconstruction = await stage('reconstruction', (part) =>
    reconstruct(record, { ...reconstructOptions(options), seed }, part),
  );
  const results =
    'ok' in reconstruction
      ? refusedResults(reconstruction, settings)
      : await measure(record, reconstruction, options, settings, stage);
  compute.throwIfAborted();

  return {
    schema: ASSESSMENT_SCHEMA,
    record: summariseRecord(record, results.stationarity, results.noise.level),
    regime: results.regime,
    evidence: { nullTest: results.nullTest },
    reconstruction,
    exponents: {
      largest: results.divergence.largest,
      spectrum: NOT_YET_SPECTRUM,
      kaplanYorke: NOT_YET_SPECTRUM,
      curve: results.divergence.curve,
    },
    dimension: results.dimension,
    noise: results.noise,
    leadTime: results.leadTime,
    mechanism: NOT_YET_MECHANISM,
    cautions: collectCautions(record, results.stationarity, results.noise.level, results.leadTime),
    data:
      options.include?.record === false || 'ok' in reconstruction ? null : figureData(record, reconstruction),
    provenance: {
      version: VERSION,
      backend: host.backend,
      seed,
      options: {
        ...settings,
        ...reconstructOptions(options),
        resample: options.resample ?? null,
        detrend: options.detrend ?? 'none',
      },
      inputHash: record.hash,
      elapsed: watch.laps(),
    },
  };
}

interface Settings {
  readonly seed: number;
  readonly surrogates: number;
  readonly confidence: number;
  readonly tolerance: number;
}

/** Everything that needs a state space. */
interface Results {
  readonly stationarity: Stationarity;
  readonly dimension: Omit<DimensionResult, 'curve'> & { readonly curve: DimensionResult['curve'] | null };
  readonly noise: NoiseResult;
  readonly divergence: Omit<DivergenceResult, 'curve'> & { readonly curve: DivergenceResult['curve'] | null };
  readonly nullTest: NullTestResult | Refusal;
  readonly leadTime: LeadTimeResult;
  readonly regime: Regime;
}

type StageRunner = <T>(name: keyof typeof SHARES, work: (part: Compute) => Promise<T>) => Promise<T>;

async function measure(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: AssessOptions,
  settings: Settings,
  stage: StageRunner,
): Promise<Results> {
  const { seed, surrogates } = settings;
  // Independent stages share the threads; results do not depend on the order in which they finish.
  const [stationarity, dimension, test, [noise, divergence, leadTime]] = await Promise.all([
    stage('stationarity', (part) => assessStationarity(record, reconstruction, { seed }, part)),
    stage('dimension', (part) => estimateDimension(record, reconstruction, { seed }, part)),
    stage('nullTest', (part) => nullTest(record, reconstruction, { seed, surrogates }, part)),
    (async () => {
      const noise = await stage('noise', (part) => estimateNoise(record, reconstruction, { seed }, part));
      const divergence = await stage('divergence', (part) =>
        estimateDivergence(record, reconstruction, { seed, noise: noise.level }, part),
      );
      const leadTime = await stage('leadTime', (part) =>
        estimateLeadTime(
          record,
          reconstruction,
          {
            seed,
            noise: noise.level,
            largest: divergence.largest,
            tolerance: settings.tolerance,
            confidence: settings.confidence,
            ...(options.leadSteps === undefined ? {} : { leadSteps: options.leadSteps }),
          },
          part,
        ),
      );
      return [noise, divergence, leadTime] as const;
    })(),
  ]);
  const regime = await stage('regime', (part) =>
    callRegime(
      { record, reconstruction, stationarity, nullTest: test, divergence, dimension, noise, leadTime },
      { seed, surrogates },
      part,
    ),
  );
  const regular = regime.call === 'periodic' || regime.call === 'quasiperiodic';
  return {
    stationarity,
    noise,
    nullTest: test,
    regime,
    dimension: withholdDimension(dimension, stationarity, test, regular),
    divergence: withholdDivergence(divergence, stationarity, test),
    leadTime: withholdLeadTime(leadTime, stationarity),
  };
}

function refusedResults(reason: Refusal, settings: Settings): Results {
  return {
    stationarity: unknownStationarity(reason.why),
    dimension: { correlation: reason, entropy: reason, curve: null },
    noise: { level: reason },
    divergence: { largest: reason, curve: null },
    nullTest: reason,
    leadTime: refusedLeadTime(reason, settings.tolerance, settings.confidence),
    regime: refusedRegime(reason),
  };
}

function reconstructOptions(options: AssessOptions) {
  const { delay, embeddingDimension, theilerWindow, dynamics } = options;
  return {
    ...(delay === undefined ? {} : { delay }),
    ...(embeddingDimension === undefined ? {} : { embeddingDimension }),
    ...(theilerWindow === undefined ? {} : { theilerWindow }),
    ...(dynamics === undefined ? {} : { dynamics }),
  };
}
