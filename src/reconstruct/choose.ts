import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { FEWEST_SAMPLES } from '../recording/quality.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { delayVectors } from '../recording/vectors.ts';
import { type CandidateErrors, candidateTask, meanDifference, parsimonious } from './candidates.ts';
import type { DelayChoice } from './delay.ts';

/** Delays per channel tried at most, and coordinates in all. */
export const MOST_DELAYS = 10;
const MOST_COORDINATES = 16;

/** Leads tried: a characteristic time, and a quarter and a sixteenth of it where nothing can be forecast so far. */
const ATTEMPTS = 3;
const SHORTER = 4;

/** Largest number of delays per channel that is tried. */
export function mostDelays(channelCount: number): number {
  return Math.max(1, Math.min(MOST_DELAYS, Math.floor(MOST_COORDINATES / channelCount)));
}

export interface Chosen {
  /** Null when no candidate forecasts better than the mean at any lead. */
  readonly best: { readonly delay: number; readonly dimension: number } | null;
  /** Of the last lead tried. */
  readonly candidates: readonly CandidateErrors[];
  /** Samples ahead that they were compared at. */
  readonly lead: number;
}

/**
 * The delay and dimension that forecast best out of sample, a characteristic time ahead: at one sample of an
 * oversampled flow every candidate is good. Where a characteristic time is too far (a slow wave under the
 * cycles of interest sets it), shorter leads with shorter delays are tried.
 */
export async function chooseByForecast(
  record: PreparedRecord,
  choice: DelayChoice,
  given: number | undefined,
  widestWindow: number,
  compute: Compute,
): Promise<Chosen | Refusal> {
  const { scaled, count, channelCount, target } = record;
  const whole = Math.max(1, Math.min(choice.correlationLag, Math.floor(count / 20)));
  for (let attempt = 0, share = 1; ; attempt++, share *= SHORTER) {
    const lead = Math.ceil(whole / share);
    const shapes = candidateShapes(record, delaysFor(choice, share), lead, given, choice.method === 'given');
    if ('ok' in shapes) return shapes;
    const { dimensions, delays, starts } = shapes;
    const reach = Math.max(...delays) * (dimensions[dimensions.length - 1]! - 1);
    const exclusion = Math.min(Math.max(choice.correlationLag, reach), widestWindow) + lead;
    const tried = await compute.map(
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
        stopEarly: given === undefined,
      })),
    );
    const candidates = tried.flat();
    const last = lead === 1 || attempt + 1 === ATTEMPTS;
    const best = withSkill(candidates, choice, channelCount, given, last ? 1 : 2);
    if (best !== null || last) return { best, candidates, lead };
  }
}

function delaysFor(choice: DelayChoice, share: number): number[] {
  if (share === 1 || choice.method === 'given') return [...choice.candidates];
  return [...new Set([choice.delay, ...choice.candidates.map((delay) => Math.ceil(delay / share))])];
}

/**
 * The grid of candidates, cut down to shapes the record has room for: all are judged on the same vectors, at
 * least 200 and, so that gaps do not leave a biased rest, at least half of those that two delays would have.
 */
function candidateShapes(
  record: PreparedRecord,
  wanted: number[],
  lead: number,
  given: number | undefined,
  delayGiven: boolean,
) {
  let delays = wanted;
  let m = given ?? mostDelays(record.channelCount);
  const startsOf = () =>
    delayVectors(record, { delay: Math.max(...delays), delaysPerChannel: m }, lead).starts;
  const plain = delayVectors(record, { delay: Math.max(...delays), delaysPerChannel: 2 }, lead).starts.length;
  let starts = startsOf();
  while (given === undefined && m > 1 && starts.length < Math.max(FEWEST_SAMPLES, plain / 2)) {
    m--;
    starts = startsOf();
  }
  if (given !== undefined && starts.length < FEWEST_SAMPLES && delays.length > 1) {
    delays = [Math.min(...delays)];
    starts = startsOf();
  }
  if (starts.length >= FEWEST_SAMPLES)
    return {
      dimensions: given === undefined ? Array.from({ length: m }, (_, i) => i + 1) : [given],
      delays,
      starts,
    };
  const delay = Math.min(...delays);
  const needed = FEWEST_SAMPLES + (m - 1) * delay + lead;
  const stretches = record.segments.length;
  return refusal(
    'TOO_SHORT',
    `The record leaves ${starts.length} complete delay vectors (${m} ${m === 1 ? 'coordinate' : `coordinates ${delay} samples apart`}, forecast ${lead} ${lead === 1 ? 'sample' : 'samples'} ahead, ${stretches} unbroken ${stretches === 1 ? 'stretch' : 'stretches'}); at least ${FEWEST_SAMPLES} are needed to compare forecasts on parts of it.`,
    `Record at least ${needed} samples without a gap${given !== undefined || delayGiven ? ', or ask for a shorter delay or a smaller dimension' : ''}.`,
    { vectors: starts.length, needed },
  );
}

/**
 * The parsimonious best when it beats the mean by more than `errors` standard errors: two while a shorter lead
 * can still be tried, else one. (On noise all candidates are worse than the mean, so that chance does not pass
 * this easily.)
 */
function withSkill(
  candidates: readonly CandidateErrors[],
  choice: DelayChoice,
  channelCount: number,
  given: number | undefined,
  errors: number,
): CandidateErrors | null {
  // A signal that goes up and down takes every value at least twice a cycle: one coordinate of one channel
  // can never tell where on its orbit a flow is.
  const enough = choice.dynamics === 'map' || channelCount > 1 ? 1 : 2;
  const admitted = candidates.filter((c) => c.dimension >= enough);
  const best = parsimonious(admitted.length > 0 ? admitted : candidates);
  if (given !== undefined && choice.candidates.length === 1) return best; // nothing left to choose
  const climatology = new Float64Array(best.squares.length).fill(1);
  const gain = meanDifference(climatology, best.squares);
  return gain.mean > errors * gain.error ? best : null;
}
