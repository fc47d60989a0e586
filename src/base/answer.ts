/**
 * A number the data can carry, with an interval; or a refusal that says why not and what would help.
 * NaN and Infinity never leave the API (`finding` throws on them).
 */

/** The closed set of reasons for which a number is refused. Documented in README › Refusals. */
export const REFUSAL_CODES = {
  TOO_SHORT: 'the record has too few samples',
  TOO_COARSE: 'the record is sampled too slowly',
  CONSTANT: 'the record does not vary',
  SATURATED: 'the record is clipped at the ends of its range',
  STUCK: 'the sensor repeats one value',
  NONSTATIONARY: 'the record changes its character while it lasts',
  NO_SCALING_REGION: 'no range of distances shows a constant dimension',
  NO_SATURATION: 'the dimension keeps growing with the embedding',
  NO_EXPONENTIAL_GROWTH: 'small differences do not grow exponentially',
  NOISE_FLOOR: 'noise hides the small distances',
  MODEL_LIMITED: 'the forecast model, not the dynamics, sets the error',
  NO_SKILL: 'no forecast beats the reference forecasts',
  HIGH_DIMENSION: 'the dynamics has more dimensions than the record can resolve',
  NOT_APPLICABLE: 'the quantity has no meaning for this record',
  NOT_YET: 'this version does not compute it',
} as const;

export type RefusalCode = keyof typeof REFUSAL_CODES;

/** Parameters of a message, so that a host can translate it: the text is made from code and parameters. */
export type MessageParameters = Readonly<Record<string, number | string>>;

export interface Finding<T extends number | number[] = number> {
  readonly ok: true;
  readonly value: T;
  /** Ends of the interval that holds the truth with probability `level`. */
  readonly low: T;
  readonly high: T;
  /** 0 … 1, e.g. 0.9. */
  readonly level: number;
  /** Unit of value, low and high; '1' when dimensionless. */
  readonly unit: string;
  /** The published method, with its source. */
  readonly method: string;
  /**
   * Which ends of the interval mean something; default 'two-sided'. 'lower': the truth is at least `low`
   * (`high` repeats `value`); 'upper': at most `high` (`low` repeats `value`).
   */
  readonly bound?: 'two-sided' | 'lower' | 'upper';
  /** Numbers behind the finding, plain data. */
  readonly evidence?: Readonly<Record<string, number | string | boolean | readonly number[]>>;
}

export interface Refusal {
  readonly ok: false;
  readonly code: RefusalCode;
  /** One sentence with the numbers that led to the refusal. */
  readonly why: string;
  /** One sentence: what the user can do about it. */
  readonly remedy: string;
  readonly parameters?: MessageParameters;
}

export type Answer<T extends number | number[] = number> = Finding<T> | Refusal;

/** Makes a finding; throws on NaN, Infinity or an interval that does not hold the value (a bug of ours). */
export function finding<T extends number | number[]>(fields: Omit<Finding<T>, 'ok'>): Finding<T> {
  const list = (v: T): readonly number[] => (typeof v === 'number' ? [v] : v);
  const [value, low, high] = [list(fields.value), list(fields.low), list(fields.high)];
  for (let i = 0; i < value.length; i++) {
    if (!(Number.isFinite(value[i]) && Number.isFinite(low[i]) && Number.isFinite(high[i])))
      throw new RangeError(`finding by ${fields.method}: not finite (${low[i]}, ${value[i]}, ${high[i]})`);
    if (!(low[i]! <= value[i]! && value[i]! <= high[i]!))
      throw new RangeError(`finding by ${fields.method}: ${value[i]} outside [${low[i]}, ${high[i]}]`);
  }
  return { ok: true, ...fields };
}

export function refusal(
  code: RefusalCode,
  why: string,
  remedy: string,
  parameters?: MessageParameters,
): Refusal {
  return { ok: false, code, why, remedy, ...(parameters === undefined ? {} : { parameters }) };
}

/** A remark that a reader must see: code + parameters + English text. */
export interface Caution {
  readonly code: string;
  readonly text: string;
  readonly parameters?: MessageParameters;
}
