import { finding } from '../base/answer.ts';
import { type Compute, defineTask } from '../base/compute.ts';
import { badOption } from '../base/errors.ts';
import type { Kernels } from '../base/kernels.ts';
import { blockStatistics, kaplanYorkeAnswer, studentQuantile } from './averages.ts';
import { referenceModel } from './reference.ts';
import { resolveModel } from './simulate.ts';
import { functionFlow, functionMap, kernelFlow, type TangentSystem } from './systems.ts';
import type {
  FunctionModel,
  Model,
  ModelSpectrum,
  ModelSpectrumOptions,
  Parameters,
  ReferenceModel,
} from './types.ts';

/** Level of the intervals. */
const LEVEL = 0.9;
/** Default length of the average, in Gram–Schmidt blocks: about 1e6 Runge–Kutta steps of a built-in flow. */
const DEFAULT_BLOCKS = { kernel: 100_000, flow: 5_000, map: 500_000 };
/** `standardError` gives up at this multiple of the default length. */
const MOST_TIMES = 50;
const DEFAULT_STEP = 0.01;
/** Blocks left out after the transient while the tangents turn to their directions. */
const ALIGNMENT_BLOCKS = 200;

export type SpectrumOptions = ModelSpectrumOptions & { readonly seed: number };

interface SpectrumInput {
  readonly name: string;
  readonly parameters: Parameters;
  readonly options: ModelSpectrumOptions;
}

/** Reference models run in workers: their functions are looked up by name there. */
export const spectrumTask = defineTask<SpectrumInput, ModelSpectrum>(
  'model.spectrum',
  function* (kernels, { name, parameters, options }) {
    return yield* spectrumOf(referenceModel(name, parameters), options, kernels);
  },
);

/**
 * Lyapunov spectrum from equations, with standard errors from block averages, the Kaplan–Yorke dimension,
 * and the checks that can be made: the sum against the mean divergence, and the zero exponent of a flow.
 * Reference models run as a task; function models on the caller's thread, in slices.
 * @throws LeadspanError BAD_INPUT, BAD_OPTION, ABORTED
 */
export async function modelSpectrum(
  model: Model,
  options: SpectrumOptions,
  compute: Compute,
): Promise<ModelSpectrum> {
  const resolved = resolveModel(model);
  const { duration, standardError, transient, step, exponents } = options;
  if (exponents !== undefined && exponents > resolved.variables.length)
    badOption('exponents', `at most the number of variables, ${resolved.variables.length}`, exponents);
  if (duration !== undefined && standardError !== undefined)
    badOption('standardError', 'left out when duration is given', standardError);
  if (typeof model === 'string' || !('field' in model))
    return compute.run(spectrumTask, {
      name: resolved.name!,
      parameters: resolved.parameters ?? {},
      options: definedOnly({ duration, standardError, transient, step, exponents }),
    });
  const steps = spectrumOf(resolved, options, undefined);
  for (;;) {
    const until = performance.now() + 10;
    let next = steps.next();
    while (!next.done && performance.now() < until) next = steps.next();
    if (next.done) return next.value;
    await compute.breathe();
  }
}

const definedOnly = <T extends object>(o: T) =>
  Object.fromEntries(Object.entries(o).filter(([, v]) => v !== undefined)) as ModelSpectrumOptions;

function* spectrumOf(
  model: FunctionModel | ReferenceModel,
  options: ModelSpectrumOptions,
  kernels: Kernels | undefined,
): Generator<number, ModelSpectrum, void> {
  const n = model.variables.length;
  const count = options.exponents ?? n;
  const system = systemOf(model, count, options, kernels);
  const kind = system.derivatives === 'kernel' ? 'kernel' : model.kind;
  const unit = DEFAULT_BLOCKS[kind];
  // Time for the orbit to reach its attractor.
  const transient =
    options.transient ?? (kind === 'kernel' ? 1000 * system.blockTime : kind === 'map' ? 1000 : 100);
  system.skip(transient);
  system.advance(ALIGNMENT_BLOCKS);

  const wanted =
    options.duration === undefined ? unit : Math.max(1, Math.ceil(options.duration / system.blockTime));
  const most = options.standardError === undefined ? wanted : unit * MOST_TIMES;
  const rows = new BlockRows(count);
  // About a millisecond of built-in work a slice; a few evaluations of a user's field.
  const slice = kind === 'kernel' ? Math.max(1, Math.ceil(2000 / (n * count))) : kind === 'map' ? 2000 : 2;
  let goal = Math.min(wanted, most);
  for (;;) {
    while (rows.blocks < goal) {
      const { logNorms, divergences } = system.advance(Math.min(slice, goal - rows.blocks));
      rows.append(logNorms, divergences);
      yield Math.min(0.99, rows.blocks / most);
    }
    if (options.standardError === undefined || goal >= most) break;
    const { errors } = blockStatistics(rows.logNorms(), count, system.blockTime);
    if (errors[0]! <= options.standardError) break;
    goal = Math.min(most, goal * 2);
  }
  return summarise(model, system, rows, count, transient);
}

function systemOf(
  model: FunctionModel | ReferenceModel,
  count: number,
  options: ModelSpectrumOptions,
  kernels: Kernels | undefined,
): TangentSystem {
  if (kernels && 'kernel' in model && model.kernel)
    return kernelFlow(kernels, model, count, options.step ?? model.step ?? DEFAULT_STEP);
  if (options.step !== undefined)
    badOption('step', 'left out: this model is integrated with adaptive steps, or is a map', options.step);
  return model.kind === 'map' ? functionMap(model, count) : functionFlow(model, count);
}

function summarise(
  model: FunctionModel | ReferenceModel,
  system: TangentSystem,
  rows: BlockRows,
  count: number,
  transient: number,
): ModelSpectrum {
  const n = model.variables.length;
  const unit = model.kind === 'flow' ? '1/time unit' : '1/step';
  const statistics = blockStatistics(rows.logNorms(), count, system.blockTime);
  // Gram–Schmidt sorts them up to sampling error; near-equal ones may swap.
  const order = Array.from(statistics.means.keys()).sort(
    (a, b) => statistics.means[b]! - statistics.means[a]!,
  );
  const means = order.map((i) => statistics.means[i]!);
  const errors = order.map((i) => statistics.errors[i]!);
  const t = studentQuantile(statistics.batches - 1);
  const evidence = { batches: statistics.batches, batchTime: statistics.batchTime };
  const exponents = means.map((value, i) =>
    finding({
      value,
      low: value - t * errors[i]!,
      high: value + t * errors[i]!,
      level: LEVEL,
      unit,
      method: `${system.method}; interval from batch means`,
      evidence,
    }),
  );

  const divergence = blockStatistics(rows.divergences(), 1, system.blockTime);
  const meanDivergence = divergence.means[0]!;
  const sum = count === n ? means.reduce((a, b) => a + b, 0) : null;
  // Both are averages over the same orbit: they differ by the integrator's error only, which is relative.
  const zero =
    model.kind === 'flow'
      ? means.reduce((best, v, i) => (Math.abs(v) < Math.abs(means[best]!) ? i : best), 0)
      : null;
  return {
    model: model.name ?? 'model given as functions',
    kind: model.kind,
    source: model.source ?? 'given by the caller',
    exponents,
    standardErrors: errors,
    kaplanYorke: kaplanYorkeAnswer(rows.logNorms(), count, n, system.blockTime, LEVEL),
    checks: {
      sum,
      meanDivergence,
      divergenceAgrees:
        sum === null
          ? null
          : Math.abs(sum - meanDivergence) <= SUM_TOLERANCE * Math.max(1, Math.abs(meanDivergence)),
      zeroExponent: zero === null ? null : means[zero]!,
      // The zero exponent falls like ln T / T (Haken 1983), slower than its batch error says: one e-fold over the whole run is allowed.
      zeroAgrees:
        zero === null
          ? null
          : Math.abs(means[zero]!) <= 3 * errors[zero]! + 3 / (rows.blocks * system.blockTime),
    },
    derivatives: system.derivatives,
    duration: rows.blocks * system.blockTime,
    transient,
    step: system.step,
    method: `${system.method}; standard errors from batch means`,
    state: system.state(),
  };
}

/** Sum of exponents and mean divergence: relative agreement of a Runge–Kutta run with usual steps. */
const SUM_TOLERANCE = 1e-3;

/** Growing rows of block results. */
class BlockRows {
  readonly #count: number;
  readonly #norms: Float64Array[] = [];
  readonly #divergences: Float64Array[] = [];
  blocks = 0;

  constructor(count: number) {
    this.#count = count;
  }

  append(logNorms: Float64Array, divergences: Float64Array): void {
    this.#norms.push(logNorms);
    this.#divergences.push(divergences);
    this.blocks += logNorms.length / this.#count;
  }

  logNorms(): Float64Array {
    return joined(this.#norms);
  }

  divergences(): Float64Array {
    return joined(this.#divergences);
  }
}

function joined(parts: readonly Float64Array[]): Float64Array {
  const out = new Float64Array(parts.reduce((length, part) => length + part.length, 0));
  let at = 0;
  for (const part of parts) {
    out.set(part, at);
    at += part.length;
  }
  return out;
}
