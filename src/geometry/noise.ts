import { type Answer, finding, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { delayVectors } from '../recording/vectors.ts';
import {
  type DifferenceNoise,
  differenceRegressionTask,
  regressDifferences,
} from './difference-regression.ts';
import { LEVEL, LogSums, STUDENT_90 } from './log-sums.ts';
import { type FloorEstimate, floorLevel } from './noise-floor.ts';
import { BLOCKS, setUpSums, spreadStep, spreadTarget } from './setup.ts';
import { sumBlocks } from './sums.ts';
import type { NoiseResult } from './types.ts';

/** Reference points of the correlation sums and embedding dimensions: fewer than for a dimension do. */
const SUM_REFERENCES = 800;
const SUM_DIMENSIONS = 7;
/** The clean motion is taken to be resolved in the reconstruction's dimension, within these. */
const UNFOLDED = [2, 4] as const;
const REFERENCES = 2_000;
/** Vectors searched at most, every n-th beyond. */
const LIBRARY = 50_000;
/** Ranks of the regression: the authors' ten. */
const NEIGHBOURS = 10;
/** Coordinates of the regression at most: in more, no neighbours are near. */
const MOST_COORDINATES = 6;

const METHOD =
  'slopes of the correlation sum below the noise (Schreiber 1993, Phys. Rev. E 48, R13), checked by difference regression (Stefánsson, Končar & Jones 1997)';

/**
 * Standard deviation of measurement noise, in the record's unit, quantisation included. Two independent methods
 * must agree; a record whose noise neither resolves gets an upper bound.
 */
export async function estimateNoise(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: { readonly seed: number },
  compute: Compute,
): Promise<NoiseResult> {
  const setup = setUpSums(record, reconstruction, {
    seed: options.seed,
    references: SUM_REFERENCES,
    maximumDimension: SUM_DIMENSIONS,
  });
  const regression = await byDifferences(record, reconstruction, options.seed, compute);
  let floor: FloorEstimate = { kind: 'none' };
  if (!('ok' in setup)) {
    const blocks = await sumBlocks(setup, 0, compute);
    const sums = new LogSums(
      blocks.map((b) => b.all),
      setup.dimensions,
      setup.smallestExponent,
    );
    const unfolded = Math.max(
      UNFOLDED[0],
      Math.min(UNFOLDED[1], reconstruction.delaysPerChannel, setup.dimensions - 1),
    );
    floor = unfolded < setup.dimensions ? floorLevel(sums, unfolded, setup.range) : floor;
  }
  compute.throwIfAborted();
  return { level: combine(record, floor, regression) };
}

async function byDifferences(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  seed: number,
  compute: Compute,
): Promise<DifferenceNoise | undefined> {
  const { delay, delaysPerChannel, theilerWindow } = reconstruction;
  const most = Math.max(1, Math.floor(MOST_COORDINATES / record.channelCount));
  // On a lattice, neighbours coincide and have no gradient: spread here too.
  const scaled = record.scaled.slice();
  scaled.set(spreadTarget(record, seed), record.target * record.count);
  const all = delayVectors(
    { ...record, scaled },
    { delay: delay.samples, delaysPerChannel: Math.min(most, Math.max(2, delaysPerChannel)) },
    1,
  );
  const stride = Math.max(1, Math.ceil(all.starts.length / LIBRARY));
  const vectors = {
    ...all,
    starts: stride === 1 ? all.starts : all.starts.filter((_, i) => i % stride === 0),
  };
  const n = vectors.starts.length;
  const number = Math.min(n, REFERENCES);
  if (number < 10 * BLOCKS) return undefined;
  const sums = await compute.run(differenceRegressionTask, {
    vectors,
    targetOffset: record.target * record.count + 1,
    references: Int32Array.from({ length: number }, (_, i) => Math.floor((i * n) / number)),
    exclusion: theilerWindow.samples,
    neighbours: NEIGHBOURS,
    blocks: BLOCKS,
  });
  return regressDifferences(sums, BLOCKS);
}

/**
 * The regression brackets the level σ: what the inputs leave unexplained is at least σ² (noise on the output) and at
 * most σ²·(1 + |gradient|²) plus what the neighbours' distance leaves (noise on every input as well).
 */
function combine(
  record: PreparedRecord,
  floor: FloorEstimate,
  regression: DifferenceNoise | undefined,
): Answer {
  const std = record.stds[record.target]!;
  const unit = record.channelUnits[record.target] ?? '';
  const rounding = record.resolutionStep / Math.sqrt(12);
  // The lattice was spread over ±q/2, which added a variance of q²/12.
  const spread = spreadStep(record) / Math.sqrt(12);
  const less = (x: number) => Math.sqrt(Math.max(0, x * x - spread * spread));
  const bracket =
    regression === undefined
      ? undefined
      : {
          low: less(
            Math.sqrt(
              Math.max(0, regression.unexplained - STUDENT_90 * regression.unexplainedError) /
                (1 + regression.gradient),
            ),
          ),
          high: less(
            Math.sqrt(Math.max(0, regression.unexplained) + STUDENT_90 * regression.unexplainedError),
          ),
        };
  const evidence = {
    ...(regression && bracket
      ? {
          regressionLow: bracket.low * std,
          regressionHigh: bracket.high * std,
          gradient: regression.gradient,
        }
      : {}),
    quantisation: rounding,
  };
  if (floor.kind === 'level') {
    const [low, value, high] = [less(floor.low), less(floor.value), less(floor.high)];
    if (bracket && (bracket.high < low || bracket.low > high))
      return refusal(
        'NOT_APPLICABLE',
        `Two estimates of the noise disagree: ${say(value * std)} (${say(low * std)} to ${say(high * std)}) from the smallest distances, ${say(bracket.low * std)} to ${say(bracket.high * std)} from differences of neighbours. The record is not a rule plus independent noise.`,
        'Give the noise of the sensor as `sensorNoise` if it is known.',
        { fromDistances: value * std, regressionLow: bracket.low * std, regressionHigh: bracket.high * std },
      );
    // The middle of the bracket is the other method's estimate: the interval holds both.
    const middle = bracket && bracket.low > 0 ? Math.sqrt(bracket.low * bracket.high) : value;
    return finding({
      value: value * std,
      low: Math.min(low, middle) * std,
      high: Math.max(high, middle) * std,
      level: LEVEL,
      unit,
      method: METHOD,
      evidence: { ...evidence, fromDistances: value * std },
    });
  }
  const bounds = [...(floor.kind === 'upper' ? [less(floor.high)] : []), ...(bracket ? [bracket.high] : [])];
  if (bounds.length === 0)
    return refusal(
      'TOO_SHORT',
      `${record.count} samples leave too few neighbouring states to tell noise from motion.`,
      'Record longer.',
      { count: record.count },
    );
  const high = Math.max(rounding, Math.min(...bounds) * std);
  const value = Math.min(high, Math.max(rounding, (bracket?.low ?? 0) * std));
  return finding({ value, low: value, high, level: LEVEL, unit, method: METHOD, bound: 'upper', evidence });
}

const say = (x: number) => String(Number(x.toPrecision(3)));
