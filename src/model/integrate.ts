import { exp, log } from '../base/elementary.ts';
import { LeadspanError } from '../base/errors.ts';

/** dy/dt of a system of any size. */
export type Derivative = (time: number, y: Float64Array, out: Float64Array) => void;

export interface Tolerances {
  readonly relative: number;
  readonly absolute: number;
}

/** Tight enough that step errors stay far below the sampling error of any average along the orbit. */
export const DEFAULT_TOLERANCES: Tolerances = { relative: 1e-9, absolute: 1e-9 };

/** Steps without progress after which an orbit counts as stuck (a singularity, or too wild a field). */
const MOST_STEPS = 1_000_000;

/** Coefficients of Dormand & Prince 1980, J. Comput. Appl. Math. 6, 19, order 5 with an embedded order 4. */
const A = [
  [],
  [1 / 5],
  [3 / 40, 9 / 40],
  [44 / 45, -56 / 15, 32 / 9],
  [19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
  [9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
  [35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84],
] as const;
const C = [0, 1 / 5, 3 / 10, 4 / 5, 8 / 9, 1, 1] as const;
/** Difference of the two results: the error estimate. */
const E = [71 / 57600, 0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40] as const;

/** Adaptive Runge–Kutta integrator that hits wanted times exactly and remembers its step between calls. */
export class DormandPrince {
  readonly #derivative: Derivative;
  readonly #tolerances: Tolerances;
  readonly #stages: readonly Float64Array[];
  readonly #trial: Float64Array;
  #step = 0;

  constructor(derivative: Derivative, size: number, tolerances: Tolerances = DEFAULT_TOLERANCES) {
    this.#derivative = derivative;
    this.#tolerances = tolerances;
    this.#stages = C.map(() => new Float64Array(size));
    this.#trial = new Float64Array(size);
  }

  /**
   * Advances `y` in place from `time` to `end`.
   * @throws LeadspanError BAD_INPUT when the field gives no finite number or the orbit runs away
   */
  advance(y: Float64Array, time: number, end: number): void {
    let t = time;
    if (this.#step === 0) this.#step = (end - time) / 100;
    for (let steps = 0; t < end; steps++) {
      if (steps > MOST_STEPS)
        throw new LeadspanError(
          'BAD_INPUT',
          `The model needs more than ${MOST_STEPS} steps to reach time ${end}: its field is too steep.`,
          { field: 'model.field' },
        );
      const last = t + this.#step >= end;
      const h = last ? end - t : this.#step;
      const error = this.#attempt(y, t, h);
      if (error <= 1) {
        y.set(this.#trial);
        t = last ? end : t + h;
      }
      // Controller of order 5 with the usual safety factor and bounds (Hairer, Nørsett & Wanner 1993, II.4).
      const factor = error === 0 ? 5 : Math.min(5, Math.max(0.2, 0.9 * exp(-0.2 * log(error))));
      if (!last || error > 1) this.#step = h * factor;
    }
  }

  /** One step into `trial`; returns the error in units of the tolerance. */
  #attempt(y: Float64Array, t: number, h: number): number {
    const k = this.#stages;
    const trial = this.#trial;
    for (let s = 0; s < 7; s++) {
      const row = A[s]!;
      for (let i = 0; i < y.length; i++) {
        let sum = 0;
        for (let j = 0; j < row.length; j++) sum += row[j]! * k[j]![i]!;
        trial[i] = y[i]! + h * sum;
      }
      this.#derivative(t + C[s]! * h, trial, k[s]!);
    }
    let square = 0;
    for (let i = 0; i < y.length; i++) {
      let difference = 0;
      for (let s = 0; s < 7; s++) difference += E[s]! * k[s]![i]!;
      const size = Math.max(Math.abs(y[i]!), Math.abs(trial[i]!));
      const part = (h * difference) / (this.#tolerances.absolute + this.#tolerances.relative * size);
      square += part * part;
    }
    const error = Math.sqrt(square / y.length);
    if (!Number.isFinite(error))
      throw new LeadspanError(
        'BAD_INPUT',
        `The model's field gave no finite number near time ${t}, or its orbit runs away.`,
        {
          field: 'model.field',
        },
      );
    return error;
  }
}
