import type { CorrelationCurves } from './correlation.ts';
import { EXP_MINUS_ONE } from './correlation.ts';

/** A minimum counts when the curve then rises by more than this many standard errors above it. */
const RISE_ERRORS = 3;

export interface DelayChoice {
  readonly dynamics: 'flow' | 'map';
  /** The delay that false neighbours are judged at. */
  readonly delay: number;
  readonly method: string;
  /** Delays whose forecasts are compared. */
  readonly candidates: readonly number[];
  /** Samples of a characteristic time: 1 for maps. */
  readonly correlationLag: number;
}

/**
 * Successive samples count as iterates of a map when the autocorrelation is below 1/e after one sample: a
 * flow sampled that coarsely must be treated as its stroboscopic map anyway. A flow sampled well enough to
 * follow it has its 1/e point later than one sample.
 */
export function decideDynamics(
  curves: Pick<CorrelationCurves, 'autocorrelation'>,
  asked: 'auto' | 'flow' | 'map',
): 'flow' | 'map' {
  if (asked !== 'auto') return asked;
  return (curves.autocorrelation[1] ?? 0) < EXP_MINUS_ONE ? 'map' : 'flow';
}

/** First minimum of the mutual information, else the 1/e point; 1 for maps. */
export function chooseDelay(
  curves: CorrelationCurves,
  asked: 'auto' | 'flow' | 'map',
  given: number | undefined,
): DelayChoice {
  const dynamics = decideDynamics(curves, asked);
  const correlationLag = dynamics === 'map' ? 1 : curves.decayLag;
  if (given !== undefined)
    return { dynamics, delay: given, method: 'given', candidates: [given], correlationLag };
  if (dynamics === 'map')
    return {
      dynamics,
      delay: 1,
      method:
        asked === 'map'
          ? 'one sample, because the record was declared a map'
          : 'one sample, because the autocorrelation is below 1/e after one sample',
      candidates: [1],
      correlationLag,
    };
  const minimum = firstMinimum(curves);
  const decay = curves.decayLag;
  const delay = minimum ?? decay;
  return {
    dynamics,
    delay,
    method:
      minimum === undefined
        ? '1/e point of the autocorrelation (the mutual information has no clear minimum)'
        : 'first minimum of the mutual information (Fraser & Swinney 1986)',
    // Both rules, and half the shorter of the two: the forecast decides.
    candidates: [...new Set([delay, decay, Math.ceil(Math.min(delay, decay) / 2)])],
    correlationLag,
  };
}

/** Lag of the first minimum that the curve leaves again by more than its own error; undefined if none. */
export function firstMinimum({
  mutualInformation,
}: Pick<CorrelationCurves, 'mutualInformation'>): number | undefined {
  const { lags, nats, errors } = mutualInformation;
  let lowest = 0;
  for (let i = 1; i < lags.length; i++) {
    if (nats[i]! < nats[lowest]!) lowest = i;
    else if (nats[i]! > nats[lowest]! + RISE_ERRORS * errors[lowest]!) return lags[lowest]!;
  }
  return undefined;
}
