import { defineTask } from '../base/compute.ts';
import { predictLinear } from './linear.ts';
import { type LocalSpec, predictLocal } from './local.ts';
import { type PolynomialSpec, predictPolynomial } from './polynomial.ts';
import { climatology, type ForecastSetting, type PredictorSpec, persistence } from './predictors.ts';

export interface PredictInput {
  readonly setting: ForecastSetting;
  readonly specs: readonly PredictorSpec[];
  /** Times of complete delay vectors, ascending. */
  readonly origins: Int32Array;
  /** Samples ahead, ascending, ≥ 1. */
  readonly leads: Int32Array;
}

/** Forecasts of several predictors from the same origins: per spec row-major origins × leads, scaled units. */
export const predictTask = defineTask<PredictInput, Float64Array[]>(
  'forecast.predict',
  function* (kernels, input) {
    const { setting, specs, origins, leads } = input;
    const outputs = new Map<PredictorSpec, Float64Array>();
    const local = specs.filter((s): s is LocalSpec => s.kind === 'local');
    const polynomial = specs.filter((s): s is PolynomialSpec => s.kind === 'polynomial');
    const keep = (kind: readonly PredictorSpec[], values: readonly Float64Array[]) => {
      for (let i = 0; i < kind.length; i++) outputs.set(kind[i]!, values[i]!);
    };
    keep(local, yield* predictLocal(kernels, setting, local, origins, leads));
    keep(polynomial, yield* predictPolynomial(setting, polynomial, origins, leads));
    for (const spec of specs) {
      if (spec.kind === 'linear') outputs.set(spec, yield* predictLinear(setting, origins, leads));
      if (spec.kind === 'persistence') outputs.set(spec, persistence(setting, origins, leads));
      if (spec.kind === 'climatology') outputs.set(spec, climatology(setting, origins, leads));
    }
    return specs.map((spec) => outputs.get(spec)!);
  },
);
