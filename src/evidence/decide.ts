import type { Refusal } from '../base/answer.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import type { DimensionResult } from '../geometry/types.ts';
import type { Growth } from './growth.ts';
import type { LinearNull } from './linear-null.ts';
import type { OrdinalPatterns } from './ordinal.ts';
import type { Preconditions } from './preconditions.ts';
import type { RegularMotion } from './regular-motion.ts';
import type { NullTestResult, RegimeCall } from './types.ts';

/** All lines of evidence. */
export interface Evidence {
  readonly pre: Preconditions;
  readonly regular: RegularMotion;
  readonly linear: LinearNull;
  readonly growth: Growth;
  readonly ordinal: OrdinalPatterns;
  readonly test: NullTestResult | Refusal;
  readonly divergence: DivergenceResult;
  readonly dimension: DimensionResult;
  readonly count: number;
  /** The record holds enough correlation times for a null that stands to mean something. */
  readonly settled: boolean;
}

export interface Decision {
  readonly call: RegimeCall;
  readonly confidence: number;
  readonly code: string;
  readonly text: string;
}

/** Lines that hold more than this contradict a call of noise. */
const NO_LINES = 0.1;
/** A regular call against growth needs lines that leave nothing (−30 dB): short stretches of a torus look stretching. */
const GROWTH_CONTRADICTS = 0.999;
/** A null that barely stands (p up to this) is no ground for a call of noise. */
const STANDS = 0.05;

/**
 * The rule, in this order:
 *
 * 1. The record itself stands in the way → `inconclusive`.
 * 2. Sharp lines hold it and forecasts last, and no growth contradicts → `periodic` or `quasiperiodic`.
 * 3. `chaotic` needs all of: linear noise rejected; differences grow for certain, materially, faster than
 *    in surrogates; forecasts have lost their skill when that growth says so.
 * 4. `noise` needs: linear noise stands in a record long enough to rule it out, no direction of time, no
 *    lines, no growth.
 * 5. Everything else → `inconclusive`, with what would change it.
 *
 * Being wrong is worse than refusing, so lines that disagree never outvote each other.
 */
export function decide(evidence: Evidence): Decision {
  const { pre, regular, linear, growth } = evidence;
  if (pre.blocked)
    return inconclusive(
      'RECORD_UNFIT',
      0.95,
      'The record itself stands in the way of a call (reasons below).',
    );
  const growing = growth.verdict === 'exponential';
  if (regular.kind !== null) {
    if (growing && regular.lineShare < GROWTH_CONTRADICTS)
      return inconclusive(
        'LINES_AGAINST_GROWTH',
        0.6,
        'Sharp lines hold the record, yet small differences seem to grow. A longer record would show whether the lines are as sharp as they look.',
      );
    return {
      call: regular.kind,
      confidence: regularConfidence(evidence),
      code: 'REGULAR_MOTION',
      text: 'The motion is regular: a few sharp lines hold it, and what the record tells about its future lasts.',
    };
  }
  if (linear.verdict === 'unknown')
    return inconclusive(
      'NO_SURROGATE_TEST',
      0.9,
      'Without a surrogate test noise cannot be ruled out. A longer stretch without gaps would allow it.',
    );
  if (linear.verdict === 'rejected') {
    if (growing)
      return {
        call: 'chaotic',
        confidence: chaoticConfidence(evidence),
        code: 'CHAOTIC',
        text: 'A deterministic rule that forgets: linear noise is ruled out, the rule makes small differences grow, faster than noise would seem to, and forecasts lose their skill as that growth says.',
      };
    return inconclusive(
      growth.verdict === 'like-noise' ? 'GROWTH_LIKE_NOISE' : 'NO_CERTAIN_GROWTH',
      growth.perCycle < 0 ? 0.8 : 0.6,
      growth.verdict === 'like-noise'
        ? 'Linear noise is ruled out, but differences grow no faster than they seem to in noise. A longer or less noisy record would show which it is.'
        : 'Linear noise is ruled out, but no growth of differences is certain: nonlinear or changing noise, a noisy cycle, or chaos under too much noise look like this. A less noisy record, or one several times longer, would settle it.',
    );
  }
  if (regular.lineShare > NO_LINES)
    return inconclusive(
      'SOME_LINES',
      0.7,
      'Linear noise is not ruled out, but sharp lines hold part of the record: tones in noise, perhaps. A longer record would raise the lines out of the noise.',
    );
  if (growing || (!('ok' in evidence.test) && evidence.test.pValue <= STANDS))
    return inconclusive(
      'NULL_STANDS_WEAKLY',
      0.6,
      'Linear noise is not ruled out, but barely, or against signs of growth. A longer record or more surrogates would settle it.',
    );
  if (linear.directed)
    return inconclusive(
      'TIME_HAS_DIRECTION',
      0.7,
      'Forecasts do not tell the record from linear noise, but time has a direction in it, which linear noise has not. A longer record, or one reduced to events, may show the rule.',
    );
  if (!evidence.settled)
    return inconclusive(
      'TOO_FEW_CYCLES',
      0.7,
      'Linear noise is not ruled out, but the record holds so few correlation times that it hardly could be. A record several times longer would settle it.',
    );
  return {
    call: 'noise',
    confidence: noiseConfidence(evidence),
    code: 'LINEAR_NOISE',
    text: 'Linear random forces explain the record. Determinism of many dimensions cannot be told from noise with this many samples.',
  };
}

function inconclusive(code: string, confidence: number, text: string): Decision {
  return { call: 'inconclusive', confidence, code, text };
}

/**
 * Confidence of a call: the share of right calls meant among calls of this strength. It starts from what the rule
 * alone gives and rises with margins that do not depend on each other; it is never 1. For
 * `inconclusive`: the confidence that this record can carry no call.
 */
function chaoticConfidence({ growth, test, divergence, dimension, ordinal, count }: Evidence): number {
  let doubt = 0.2;
  // Each independent sign halves the doubt, more or less.
  if (growth.strength > 6) doubt *= 0.5;
  if (!('ok' in test) && test.record < 0.8 * Math.min(...test.surrogates)) doubt *= 0.6;
  if (divergence.largest.ok && divergence.largest.low > 0) doubt *= 0.6;
  if (dimension.correlation.ok) doubt *= 0.7;
  if (ordinal.missing !== null && ordinal.missing > 0) doubt *= 0.9;
  if (count < 1000) doubt *= 1.5;
  return round(1 - Math.max(0.02, doubt));
}

function regularConfidence({ regular, growth }: Evidence): number {
  let doubt = 0.15;
  if (regular.lineShare > 0.9) doubt *= 0.5;
  if (regular.lineShare > 0.99) doubt *= 0.5;
  if (growth.verdict === 'exponential') doubt = 0.2;
  return round(1 - Math.max(0.02, doubt));
}

/** That a null stands is weaker than its rejection: few samples reject nothing. */
function noiseConfidence({ test, growth, count }: Evidence): number {
  let doubt = 0.25;
  if (!('ok' in test) && test.pValue > 0.2) doubt *= 0.6;
  if (growth.perCycle < -0.5) doubt *= 0.6;
  if (count >= 2000) doubt *= 0.7;
  if (count < 500) doubt *= 1.5;
  return round(1 - doubt);
}

const round = (x: number) => Math.round(100 * x) / 100;
