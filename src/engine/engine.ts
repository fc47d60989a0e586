import { assess } from '../assess/assess.ts';
import { estimateAssessBytes } from '../assess/memory.ts';
import {
  ASSESS_RULES,
  DIMENSION_RULES,
  DIVERGENCE_RULES,
  FORECAST_RULES,
  JOB_RULES,
  LEAD_TIME_RULES,
  MODEL_SPECTRUM_RULES,
  NULL_TEST_RULES,
  RECONSTRUCT_RULES,
  RECORDING_RULES,
} from '../assess/options.ts';
import {
  dimensionOf,
  divergenceOf,
  forecastOf,
  leadTimeOf,
  nullTestOf,
  type RecordReconstruction,
  reconstructionOf,
} from '../assess/single.ts';
import type { Assessment, AssessOptions } from '../assess/types.ts';
import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { LeadspanError } from '../base/errors.ts';
import type { BackendName, Kernels } from '../base/kernels.ts';
import { checkOptions, type JobOptions, type OptionRule } from '../base/options.ts';
import { VERSION } from '../base/version.ts';
import { type BackendModule, createKernels } from '../core/create.ts';
import { loadBackend, type OpenOptions } from '../core/open.ts';
import type { DivergenceOptions, DivergenceResult } from '../divergence/types.ts';
import type { NullTestOptions, NullTestResult } from '../evidence/types.ts';
import type { ForecastOptions, ForecastResult, LeadTimeOptions, LeadTimeResult } from '../forecast/types.ts';
import type { DimensionOptions, DimensionResult, NoiseResult } from '../geometry/types.ts';
import { modelSpectrum } from '../model/spectrum.ts';
import type { Model, ModelSpectrum, ModelSpectrumOptions } from '../model/types.ts';
import type { ReconstructOptions } from '../reconstruct/types.ts';
import type { Recording, RecordingOptions } from '../recording/types.ts';
import { Job } from './job.ts';
import { availableThreads } from './platform.ts';
import { WorkerPool } from './pool.ts';
import type { WebWorkerLike } from './spawn.ts';

/** One gibibyte: what a browser tab or a small server container gives without complaint. */
const DEFAULT_MEMORY_LIMIT = 2 ** 30;
/** More threads than this gain nothing: an assessment has about that many independent pieces at a time. */
const MOST_THREADS = 16;

export interface EngineOptions extends OpenOptions {
  /** Worker threads; 'auto' (default): as many as the host has, at most 16. 0 runs inline, in slices. */
  readonly threads?: 'auto' | number;
  /** Bytes one job may take for its own arrays; default 1 GiB. */
  readonly memoryLimit?: number;
  /** Makes a web worker from the host's own copy of `leadspan/worker.js`, for policies that forbid Blob workers. */
  readonly worker?: () => WebWorkerLike;
}

export interface EngineInfo {
  readonly version: string;
  readonly backend: BackendName;
  /** Worker threads running; 0: inline. */
  readonly threads: number;
  /** What the host would not allow, once each. */
  readonly notices: readonly string[];
}

const ENGINE_RULES = {
  backend: { kind: 'choice', of: ['auto', 'wasm', 'wasm-simd', 'wasm-scalar', 'js'] },
  wasm: { kind: 'any' },
  threads: {
    kind: 'any',
    check: (v) =>
      v === 'auto' || (Number.isInteger(v) && (v as number) >= 0 && (v as number) <= 64)
        ? undefined
        : "'auto' or a whole number from 0 to 64",
  },
  memoryLimit: JOB_RULES.memoryLimit,
  worker: {
    kind: 'any',
    check: (v) => (typeof v === 'function' ? undefined : 'a function that returns a Worker'),
  },
} as const satisfies Record<string, OptionRule>;

const NO_SPECTRUM = refusal(
  'NOT_YET',
  'This version does not compute the exponent spectrum from data.',
  'Use modelSpectrum when the equations are known, or divergence for the largest exponent.',
);
const NO_MECHANISM = refusal(
  'NOT_YET',
  'This version does not identify the mechanism.',
  'Look at the state-space picture of the report.',
);

/**
 * Starts an engine: picks a backend, starts its workers.
 * @throws LeadspanError BAD_OPTION; KERNEL_FAILED when a backend that was asked for by name cannot run
 * @example
 * const engine = await createEngine();
 * const assessment = await engine.assess({ samples, interval: 0.25, unit: 'K' });
 * await engine.close();
 */
export async function createEngine(options: EngineOptions = {}): Promise<Engine> {
  checkOptions(options, ENGINE_RULES, 'createEngine');
  const backend = await loadBackend(options);
  const notices: string[] = [];
  const wanted =
    options.threads === undefined || options.threads === 'auto'
      ? Math.min(availableThreads(), MOST_THREADS)
      : options.threads;
  let pool: WorkerPool | undefined;
  if (wanted > 0) {
    try {
      pool = await WorkerPool.start(backend, wanted, options.worker);
    } catch (error) {
      notices.push(`Workers could not start, so jobs run inline on this thread: ${(error as Error).message}`);
    }
  }
  return new Engine(backend, pool, notices, options.memoryLimit ?? DEFAULT_MEMORY_LIMIT);
}

/** Runs jobs off the main thread, cancellable, with progress. Made by `createEngine`. */
export class Engine {
  readonly #backend: BackendModule;
  readonly #pool: WorkerPool | undefined;
  readonly #notices: readonly string[];
  readonly #memoryLimit: number;
  readonly #jobs = new Set<Job>();
  #inline: Kernels | undefined;
  #closed = false;

  /** @internal Use `createEngine`. */
  constructor(
    backend: BackendModule,
    pool: WorkerPool | undefined,
    notices: readonly string[],
    memoryLimit: number,
  ) {
    this.#backend = backend;
    this.#pool = pool;
    this.#notices = notices;
    this.#memoryLimit = memoryLimit;
    // `await using` where the host has it; the types do not ask for the disposable library.
    const symbol = (Symbol as { asyncDispose?: symbol }).asyncDispose;
    if (symbol) Object.defineProperty(this, symbol, { value: () => this.close() });
  }

  get info(): EngineInfo {
    return {
      version: VERSION,
      backend: this.#backend.backend,
      threads: this.#pool?.threads ?? 0,
      notices: this.#notices,
    };
  }

  /** The whole job. */
  assess(recording: Recording, options: AssessOptions & JobOptions = {}): Promise<Assessment> {
    return this.#run('assess', options, ASSESS_RULES, (compute) =>
      assess(recording, options, compute, { backend: this.#backend.backend, threads: this.info.threads }),
    );
  }

  /** Bytes `assess` would take for its arrays, before anything is taken. */
  estimateMemory(count: number, channels = 1): number {
    return estimateAssessBytes(count, channels, this.info.threads);
  }

  /** How state space is rebuilt. The result carries the record and can be saved, sent, and given back to `dimension` and `divergence`. */
  reconstruct(
    recording: Recording,
    options: ReconstructOptions & RecordingOptions & JobOptions = {},
  ): Promise<RecordReconstruction | Refusal> {
    return this.#run('reconstruct', options, { ...RECONSTRUCT_RULES, ...RECORDING_RULES }, (compute) =>
      reconstructionOf(recording, options, compute),
    );
  }

  /** Correlation dimension, entropy and noise level. */
  dimension(
    reconstruction: RecordReconstruction,
    options: DimensionOptions & JobOptions = {},
  ): Promise<DimensionResult & { readonly noise: NoiseResult }> {
    return this.#run('dimension', options, DIMENSION_RULES, (compute) =>
      dimensionOf(reconstruction, options, compute),
    );
  }

  /** Divergence curve and largest Lyapunov exponent. */
  divergence(
    reconstruction: RecordReconstruction,
    options: DivergenceOptions & JobOptions = {},
  ): Promise<DivergenceResult> {
    return this.#run('divergence', options, DIVERGENCE_RULES, (compute) =>
      divergenceOf(reconstruction, options, compute),
    );
  }

  /** Spectrum from data: refuses with `NOT_YET` in this version. */
  spectrum(_reconstruction: RecordReconstruction, options: JobOptions = {}): Promise<Refusal> {
    return this.#run('spectrum', options, {}, async () => NO_SPECTRUM);
  }

  /** Mechanism: refuses with `NOT_YET` in this version. */
  mechanism(_recording: Recording, options: JobOptions = {}): Promise<Refusal> {
    return this.#run('mechanism', options, {}, async () => NO_MECHANISM);
  }

  /** Lyapunov spectrum from equations. Function models run on this thread in slices. */
  modelSpectrum(model: Model, options: ModelSpectrumOptions & JobOptions = {}): Promise<ModelSpectrum> {
    return this.#run('modelSpectrum', options, MODEL_SPECTRUM_RULES, (compute) =>
      modelSpectrum(model, { ...options, seed: options.seed ?? 1 }, compute),
    );
  }

  /** Surrogate test: is the record more predictable than linear noise seen through a static monotone function? */
  nullTest(
    recording: Recording,
    options: NullTestOptions & ReconstructOptions & RecordingOptions & JobOptions = {},
  ): Promise<NullTestResult | Refusal> {
    return this.#run(
      'nullTest',
      options,
      { ...NULL_TEST_RULES, ...RECONSTRUCT_RULES, ...RECORDING_RULES },
      (compute) => nullTestOf(recording, options, compute),
    );
  }

  /** How far ahead a forecast can be trusted. */
  leadTime(
    recording: Recording,
    options: LeadTimeOptions & ReconstructOptions & RecordingOptions & JobOptions = {},
  ): Promise<LeadTimeResult> {
    return this.#run(
      'leadTime',
      options,
      { ...LEAD_TIME_RULES, ...RECONSTRUCT_RULES, ...RECORDING_RULES },
      (compute) => leadTimeOf(recording, options, compute),
    );
  }

  /** The next values with calibrated intervals, and where to stop trusting them. */
  forecast(
    recording: Recording,
    options: ForecastOptions & ReconstructOptions & RecordingOptions & JobOptions = {},
  ): Promise<ForecastResult | Refusal> {
    return this.#run(
      'forecast',
      options,
      { ...FORECAST_RULES, ...RECONSTRUCT_RULES, ...RECORDING_RULES },
      (compute) => forecastOf(recording, options, compute),
    );
  }

  /** Cancels what runs (it rejects with `CLOSED`) and ends the workers. Idempotent. */
  async close(): Promise<void> {
    if (this.#closed) return;
    this.#closed = true;
    for (const job of this.#jobs)
      job.end(new LeadspanError('CLOSED', 'The engine was closed while the job was running.'));
    this.#pool?.close();
    this.#inline?.close();
  }

  async #run<T>(
    method: string,
    options: JobOptions,
    rules: Readonly<Record<string, OptionRule>>,
    work: (compute: Compute) => Promise<T>,
  ): Promise<T> {
    if (this.#closed) throw new LeadspanError('CLOSED', `The engine is closed; ${method} needs an open one.`);
    checkOptions(options, { ...rules, ...JOB_RULES }, method);
    const job = new Job(
      {
        pool: this.#pool,
        inlineKernels: () => {
          this.#inline ??= createKernels(this.#backend);
          return this.#inline;
        },
      },
      options,
    );
    this.#jobs.add(job);
    try {
      return await job.run(work, options.memoryLimit ?? this.#memoryLimit);
    } finally {
      this.#jobs.delete(job);
    }
  }
}
