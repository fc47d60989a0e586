import type { Refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import { blockingProblem, FEWEST_SAMPLES } from '../recording/quality.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { delayVectors } from '../recording/vectors.ts';
import { mean } from './candidates.ts';
import { type Chosen, chooseByForecast, mostDelays } from './choose.ts';
import { type CorrelationCurves, correlationTask } from './correlation.ts';
import { chooseDelay, type DelayChoice } from './delay.ts';
import { type FalseNeighbourCurves, falseNeighbourTask } from './false-neighbours.ts';
import { separationLag, separationTask } from './theiler.ts';
import type { Reconstruction, ReconstructOptions } from './types.ts';

/** Largest share of the record that neighbours may be barred from around each point. */
const WIDEST_WINDOW = 0.1;
/** A share of false neighbours below this is taken for none (Kennel et al. 1992 look for about 1 %; noise adds some). */
const FEW_FALSE = 0.05;

/**
 * How to rebuild state space from a record: delay, dimension and Theiler window, with the curves that chose
 * them. A record too poor for it gets a refusal.
 */
export async function reconstruct(
  record: PreparedRecord,
  options: ReconstructOptions & { readonly seed: number },
  compute: Compute,
): Promise<Reconstruction | Refusal> {
  const blocked = blockingProblem(record);
  if (blocked) return blocked;
  const { count, channelCount, target, scaled, interval } = record;
  const series = scaled.slice(target * count, (target + 1) * count);
  const curves = await compute.run(correlationTask, { series, present: record.present });
  const choice = chooseDelay(curves, options.dynamics ?? 'auto', options.delay);

  const widest = Math.floor(WIDEST_WINDOW * count);
  const [falseNeighbours, forecast] = await Promise.all([
    judgeFalseNeighbours(record, choice, Math.min(choice.correlationLag, widest), compute),
    chooseByForecast(record, choice, options.embeddingDimension, widest, compute),
  ]);
  if ('ok' in forecast) return forecast;
  const { candidates } = forecast;
  const chosen = decide(forecast, falseNeighbours, choice, channelCount, options.embeddingDimension);

  const vectors = delayVectors(record, { delay: chosen.delay, delaysPerChannel: chosen.dimension });
  const separation = await compute.run(separationTask, {
    vectors,
    farthest: Math.max(1, Math.min(SEPARATION_LAGS * choice.correlationLag, Math.floor(count / 4))),
  });
  const span = (chosen.dimension - 1) * chosen.delay;
  const window = theilerWindow(options.theilerWindow, span, choice, separationLag(separation), widest);
  return {
    delay: { samples: chosen.delay, time: chosen.delay * interval, method: chosen.method },
    embeddingDimension: chosen.dimension * channelCount,
    delaysPerChannel: chosen.dimension,
    theilerWindow: { ...window, time: window.samples * interval },
    dynamics: choice.dynamics,
    correlationTime: { samples: choice.correlationLag, time: choice.correlationLag * interval },
    vectors: vectors.starts.length,
    curves: {
      mutualInformation: {
        lag: Array.from(curves.mutualInformation.lags),
        bits: Array.from(curves.mutualInformation.nats, (v) => Math.max(0, v) / LN2),
      },
      autocorrelation: thinnedCorrelation(curves),
      falseNeighbours: {
        dimension: falseNeighbours.dimension,
        fraction: falseNeighbours.fraction,
        judged: falseNeighbours.judged,
      },
      cao: {
        dimension: falseNeighbours.dimension.slice(0, falseNeighbours.e1.length),
        e1: falseNeighbours.e1,
        e2: falseNeighbours.e2,
      },
      candidates: candidates.map(({ delay, dimension, squares }) => ({
        delay,
        dimension,
        error: Math.sqrt(mean(squares)),
      })),
      separation,
    },
  };
}

const LN2 = log(2);
/** The separation plot is followed to this many correlation times: several cycles of an oscillation. */
const SEPARATION_LAGS = 40;

async function judgeFalseNeighbours(
  record: PreparedRecord,
  choice: DelayChoice,
  exclusion: number,
  compute: Compute,
): Promise<FalseNeighbourCurves> {
  const { scaled, count, channelCount, target } = record;
  let dimensions = mostDelays(channelCount);
  const startsFor = (m: number) =>
    delayVectors(record, { delay: choice.delay, delaysPerChannel: m + 1 }).starts;
  let starts = startsFor(dimensions);
  while (dimensions > 0 && starts.length < FEWEST_SAMPLES) starts = startsFor(--dimensions);
  if (dimensions === 0) return { dimension: [], fraction: [], judged: [], e1: [], e2: [] };
  return compute.run(falseNeighbourTask, {
    data: scaled,
    starts,
    count,
    channelCount,
    target,
    delay: choice.delay,
    dimensions,
    exclusion,
  });
}

/** The forecast decides; where nothing can be forecast, the false neighbours do. */
function decide(
  { best, candidates, lead }: Chosen,
  falseNeighbours: FalseNeighbourCurves,
  choice: DelayChoice,
  channelCount: number,
  given: number | undefined,
): { delay: number; dimension: number; method: string } {
  if (best !== null) {
    const { delay, dimension } = best;
    if (choice.candidates.length === 1) return { delay, dimension, method: choice.method };
    return {
      delay,
      dimension,
      method:
        delay === choice.delay
          ? `${choice.method}, confirmed by forecast skill`
          : `best forecast skill ${lead} ${lead === 1 ? 'sample' : 'samples'} ahead, among the first minimum of the mutual information, the 1/e point and shorter delays`,
    };
  }
  const few = falseNeighbours.fraction.findIndex((f) => f !== null && f < FEW_FALSE);
  // Without either, two coordinates: one shows no motion, and each more thins a record that is noise already.
  const known = given ?? (few >= 0 ? falseNeighbours.dimension[few]! : channelCount > 1 ? 1 : 2);
  const delay = candidates.some((c) => c.delay === choice.delay) ? choice.delay : candidates[0]!.delay;
  const room = Math.max(...candidates.filter((c) => c.delay === delay).map((c) => c.dimension));
  return {
    delay,
    dimension: Math.min(known, room),
    method: `${choice.method}; no candidate forecasts better than the mean`,
  };
}

/** Never below (m − 1)·delay, so that no two neighbours share a sample by construction. */
function theilerWindow(
  given: number | undefined,
  span: number,
  choice: DelayChoice,
  separation: number,
  widest: number,
): { samples: number; method: string } {
  if (given !== undefined)
    return given >= span
      ? { samples: given, method: 'given' }
      : { samples: span, method: `given ${given}, raised to (m − 1)·delay` };
  const found = Math.min(widest, Math.max(1, choice.correlationLag, separation));
  if (span >= found) return { samples: span, method: '(m − 1)·delay' };
  return {
    samples: found,
    method:
      found === widest
        ? 'a tenth of the record (correlations last longer)'
        : separation > choice.correlationLag
          ? 'space–time separation (Provenzale et al. 1992)'
          : '1/e point of the autocorrelation',
  };
}

/** Lags kept for the figure: up to eight decay lags, at most 200 of them. */
function thinnedCorrelation({ autocorrelation, decayLag }: CorrelationCurves) {
  const farthest = Math.min(autocorrelation.length - 1, Math.max(20, 8 * decayLag));
  const stride = Math.max(1, Math.ceil(farthest / 200));
  const lag = Array.from({ length: Math.floor(farthest / stride) + 1 }, (_, i) => i * stride);
  return { lag, value: lag.map((l) => autocorrelation[l]!) };
}
