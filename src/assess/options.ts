import type { OptionRule } from '../base/options.ts';

/** Rules of the options every job takes. */
export const JOB_RULES = {
  signal: {
    kind: 'any',
    check: (v) => (typeof (v as AbortSignal)?.addEventListener === 'function' ? undefined : 'an AbortSignal'),
  },
  onProgress: { kind: 'any', check: (v) => (typeof v === 'function' ? undefined : 'a function') },
  deadline: { kind: 'number', min: 1, max: 2 ** 31 - 1 },
  memoryLimit: { kind: 'number', min: 2 ** 20, max: 2 ** 32 },
  seed: { kind: 'number', min: 0, max: 2 ** 32 - 1, integer: true },
} as const satisfies Record<string, OptionRule>;

export const RECORDING_RULES = {
  resample: { kind: 'choice', of: ['linear'] },
  detrend: { kind: 'choice', of: ['none', 'linear'] },
} as const satisfies Record<string, OptionRule>;

export const RECONSTRUCT_RULES = {
  delay: { kind: 'number', min: 1, max: 100_000, integer: true },
  embeddingDimension: { kind: 'number', min: 1, max: 32, integer: true },
  theilerWindow: { kind: 'number', min: 0, max: 1_000_000, integer: true },
  dynamics: { kind: 'choice', of: ['auto', 'flow', 'map'] },
} as const satisfies Record<string, OptionRule>;

export const DIMENSION_RULES = {
  maximumDimension: { kind: 'number', min: 4, max: 32, integer: true },
  references: { kind: 'number', min: 100, max: 1_000_000, integer: true },
} as const satisfies Record<string, OptionRule>;

export const DIVERGENCE_RULES = {
  references: { kind: 'number', min: 100, max: 1_000_000, integer: true },
  steps: { kind: 'number', min: 8, max: 100_000, integer: true },
} as const satisfies Record<string, OptionRule>;

export const NULL_TEST_RULES = {
  surrogates: { kind: 'number', min: 19, max: 999, integer: true },
} as const satisfies Record<string, OptionRule>;

export const LEAD_TIME_RULES = {
  tolerance: { kind: 'number', min: 0, above: 0, max: Number.MAX_VALUE },
  confidence: { kind: 'number', min: 0.5, max: 0.99 },
  leadSteps: { kind: 'number', min: 1, max: 100_000, integer: true },
} as const satisfies Record<string, OptionRule>;

export const FORECAST_RULES = {
  ...LEAD_TIME_RULES,
  steps: { kind: 'number', min: 1, max: 100_000, integer: true },
} as const satisfies Record<string, OptionRule>;

export const MODEL_SPECTRUM_RULES = {
  duration: { kind: 'number', min: 0, above: 0, max: 1e9 },
  standardError: { kind: 'number', min: 0, above: 0, max: 1e9 },
  transient: { kind: 'number', min: 0, max: 1e9 },
  step: { kind: 'number', min: 0, above: 0, max: 1e6 },
  exponents: { kind: 'number', min: 1, max: 1000, integer: true },
} as const satisfies Record<string, OptionRule>;

export const ASSESS_RULES = {
  ...RECORDING_RULES,
  ...RECONSTRUCT_RULES,
  ...LEAD_TIME_RULES,
  ...NULL_TEST_RULES,
  include: {
    kind: 'any',
    check: (v) =>
      typeof v === 'object' &&
      v !== null &&
      Object.entries(v).every(([k, on]) => k === 'record' && (on === undefined || typeof on === 'boolean'))
        ? undefined
        : '{ record?: boolean }',
  },
} as const satisfies Record<string, OptionRule>;
