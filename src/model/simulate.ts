import { badOption, LeadspanError } from '../base/errors.ts';
import { checkFunctionModel } from './check.ts';
import { DormandPrince } from './integrate.ts';
import { referenceModel } from './reference.ts';
import type { Model } from './types.ts';

export interface SimulateOptions {
  /** Samples wanted. */
  readonly samples: number;
  /** Time units between samples (flows; maps give every iterate). Default: the model's own sampling. */
  readonly interval?: number;
  /** Time units (steps) left out at the start. Default 0. */
  readonly transient?: number;
  /** Start state; default the model's. */
  readonly start?: readonly number[];
}

/**
 * A record of a model, one array per variable: for tests, demos and planning. Flows by an adaptive
 * Runge–Kutta scheme of order 5 (Dormand & Prince 1980) that hits every sample time.
 * @throws LeadspanError BAD_OPTION, BAD_INPUT when the orbit runs away
 */
export function simulate(model: Model, options: SimulateOptions): Record<string, Float64Array> {
  const resolved = resolveModel(model);
  const { samples, transient = 0, start = resolved.start } = options;
  if (!Number.isInteger(samples) || samples < 1)
    badOption('samples', 'a whole number of at least 1', samples);
  if (!(transient >= 0) || !Number.isFinite(transient))
    badOption('transient', 'a number of at least 0', transient);
  if (start.length !== resolved.variables.length)
    badOption('start', `${resolved.variables.length} numbers, one per variable`, start);
  const n = resolved.variables.length;
  const parameters = resolved.parameters ?? {};
  const columns = resolved.variables.map(() => new Float64Array(samples));
  let state = Float64Array.from(start);
  const keep = (i: number) => {
    for (let v = 0; v < n; v++) columns[v]![i] = state[v]!;
  };

  if (resolved.kind === 'map') {
    let next = new Float64Array(n);
    for (let i = -Math.ceil(transient); i < samples; i++) {
      if (i >= 0) keep(i);
      resolved.field(state, next, i, parameters);
      [state, next] = [next, state];
    }
  } else {
    const interval = options.interval ?? (resolved as { sampling?: number }).sampling;
    if (interval === undefined || !(interval > 0) || !Number.isFinite(interval))
      badOption('interval', 'a number above 0', options.interval);
    const integrator = new DormandPrince((t, y, out) => resolved.field(y, out, t, parameters), n);
    if (transient > 0) integrator.advance(state, 0, transient);
    for (let i = 0; i < samples; i++) {
      keep(i);
      if (i + 1 < samples)
        integrator.advance(state, transient + i * interval!, transient + (i + 1) * interval!);
    }
  }
  const bad = columns.findIndex((column) => !column.every(Number.isFinite));
  if (bad >= 0)
    throw new LeadspanError(
      'BAD_INPUT',
      `The orbit of the model runs away: ${resolved.variables[bad]} is not finite.`,
      {
        field: 'model.field',
      },
    );
  return Object.fromEntries(resolved.variables.map((name, v) => [name, columns[v]!]));
}

/** A model by name, by name with parameters, or functions; checked. */
export function resolveModel(model: Model) {
  if (typeof model === 'string') return referenceModel(model);
  if (typeof model === 'object' && model !== null && 'name' in model && !('field' in model))
    return referenceModel(model.name, model.parameters);
  return checkFunctionModel(model);
}
