import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import { blockingProblem, FEWEST_SAMPLES } from '../recording/quality.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { delayVectors } from '../recording/vectors.ts';
import { type CandidateErrors, candidateTask, mean, meanDifference, parsimonious } from './candidates.ts';
import { type CorrelationCurves, correlationTask } from './correlation.ts';
import { chooseDelay, type DelayChoice } from './delay.ts';
import { type FalseNeighbourCurves, falseNeighbourTask } from './false-neighbours.ts';
import { separationLag, separationTask } from './theiler.ts';
import type { Reconstruction, ReconstructOptions } from './types.ts';

/** Delays per channel tried at most, and coordinates in all. */
const MOST_DELAYS = 10;
const MOST_COORDINATES = 16;
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

  const shapes = candidateShapes(record, choice, options.embeddingDimension);
  if ('ok' in shapes) return shapes;
  const { dimensions, delays, lead, starts } = shapes;
  const reach = Math.max(...delays) * (dimensions[dimensions.length - 1]! - 1);
  const widest = Math.floor(WIDEST_WINDOW * count);
  const exclusion = Math.min(Math.max(choice.correlationLag, reach), widest) + lead;

  const [falseNeighbours, tried] = await Promise.all([
    judgeFalseNeighbours(record, choice, Math.min(choice.correlationLag, widest), compute),
    compute.map(
      candidateTask,
      delays.map((delay) => ({
        data: scaled,
        starts,
        count,
        channelCount,
        target,
        delay,
        dimensions,
        lead,
        exclusion,
        stopEarly: options.embeddingDimension === undefined,
      })),
    ),
  ]);
  const candidates = tried.flat();
  const chosen = decide(candidates, falseNeighbours, choice, channelCount, options.embeddingDimension);

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

/**
 * The grid of candidates, cut down to shapes the record has room for: all are judged on the same vectors, at
 * least 200 and, so that gaps do not leave a biased rest, at least half of those that two delays would have.
 */
function candidateShapes(record: PreparedRecord, choice: DelayChoice, given: number | undefined) {
  const most =
    given ?? Math.max(1, Math.min(MOST_DELAYS, Math.floor(MOST_COORDINATES / record.channelCount)));
  // A lead of one characteristic time: at one sample of an oversampled flow every candidate is good.
  const lead = Math.max(1, Math.min(choice.correlationLag, Math.floor(record.count / 20)));
  const longest = Math.max(...choice.candidates);
  const wanted = (m: number, delay: number) =>
    delayVectors(record, { delay, delaysPerChannel: m }, lead).starts;
  const plain = countVectors(record, longest, lead);
  let m = most;
  let delays = choice.candidates;
  let starts = wanted(m, longest);
  while (given === undefined && m > 1 && starts.length < Math.max(FEWEST_SAMPLES, plain / 2))
    starts = wanted(--m, longest);
  if (given !== undefined && starts.length < FEWEST_SAMPLES && delays.length > 1) {
    delays = [Math.min(...delays)];
    starts = wanted(m, delays[0]!);
  }
  if (starts.length < FEWEST_SAMPLES) {
    const needed = FEWEST_SAMPLES + (m - 1) * Math.min(...delays) + lead;
    return refusal(
      'TOO_SHORT',
      `The record leaves ${starts.length} complete delay vectors (${m} ${m === 1 ? 'coordinate' : 'coordinates'} ${Math.min(...delays)} samples apart, forecast ${lead} samples ahead, ${record.segments.length} unbroken ${record.segments.length === 1 ? 'stretch' : 'stretches'}); at least ${FEWEST_SAMPLES} are needed to compare forecasts on parts of it.`,
      `Record at least ${needed} samples without a gap${given !== undefined || choice.method === 'given' ? ', or ask for a shorter delay or a smaller dimension' : ''}.`,
      { vectors: starts.length, needed },
    );
  }
  return {
    dimensions: given !== undefined ? [given] : Array.from({ length: m }, (_, i) => i + 1),
    delays,
    lead,
    starts,
  };
}

/** Vectors of two delays (the fewest that show a direction of motion). */
function countVectors(record: PreparedRecord, delay: number, lead: number): number {
  return record.segments.reduce((n, s) => n + Math.max(0, s.end - s.start - delay - lead), 0);
}

async function judgeFalseNeighbours(
  record: PreparedRecord,
  choice: DelayChoice,
  exclusion: number,
  compute: Compute,
): Promise<FalseNeighbourCurves> {
  const { scaled, count, channelCount, target } = record;
  let dimensions = Math.max(1, Math.min(MOST_DELAYS, Math.floor(MOST_COORDINATES / channelCount)));
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
  candidates: readonly CandidateErrors[],
  falseNeighbours: FalseNeighbourCurves,
  choice: DelayChoice,
  channelCount: number,
  given: number | undefined,
): { delay: number; dimension: number; method: string } {
  // A signal that goes up and down takes every value at least twice a cycle: one coordinate of one channel
  // can never tell where on its orbit a flow is.
  const enough = choice.dynamics === 'map' || channelCount > 1 ? 1 : 2;
  const admitted = candidates.filter((c) => c.dimension >= enough);
  const best = parsimonious(admitted.length > 0 ? admitted : candidates);
  const climatology = new Float64Array(best.squares.length).fill(1);
  const gain = meanDifference(climatology, best.squares);
  if (given !== undefined || gain.mean > 2 * gain.error)
    return {
      delay: best.delay,
      dimension: best.dimension,
      method:
        choice.candidates.length === 1
          ? choice.method
          : best.delay === choice.delay
            ? `${choice.method}, confirmed by forecast skill`
            : 'best forecast skill among the first minimum of the mutual information, the 1/e point and half the shorter',
    };
  const few = falseNeighbours.fraction.findIndex((f) => f !== null && f < FEW_FALSE);
  // Without either, two coordinates: one shows no motion, and each more thins a record that is noise already.
  const known = few >= 0 ? falseNeighbours.dimension[few]! : 2;
  const allowed = candidates.filter((c) => c.delay === choice.delay).map((c) => c.dimension);
  return {
    delay: choice.delay,
    dimension: Math.min(known, Math.max(...allowed)),
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
