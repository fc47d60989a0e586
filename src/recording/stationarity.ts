import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { type CrossForecast, crossForecastTask, FEWEST_VECTORS } from './cross-forecast.ts';
import { BLOCKS_PER_PART, PARTS, type PartsComparison, type PartsTest, partsTask } from './parts.ts';
import type { PreparedRecord, Stationarity } from './types.ts';
import { delayVectors } from './vectors.ts';

/**
 * Level of the whole verdict, shared by the three tests (Bonferroni). A false `drifting` takes every number
 * away from a good record, so it is kept rare.
 */
const LEVEL = 0.01;
const TESTS = 3;
/**
 * A long record shows changes too small to matter. Below these a change is less than the measurement noise
 * (10 % of the standard deviation) that the methods bear anyway: shift of the mean and change of the
 * spread between parts, and excess of the error across parts over the error within.
 */
const MATERIAL_SHIFT = 0.1;
const MATERIAL_SPREAD = 1.1;
const MATERIAL_EXCESS = 1.1;
/** … and an excess below a hundredth of a standard deviation is the forecast's, not the plant's. */
const MATERIAL_ERROR = 0.01;
/** A block lasts this many correlation times (the correlation of neighbouring blocks is then about a tenth) … */
const BLOCK_CORRELATION_TIMES = 5;
/** … and a cycle: what is cut off at its ends then moves the mean of a part of 8 blocks by less than MATERIAL_SHIFT. */
const BLOCK_CYCLES = 1;

/**
 * Does the record keep its character? Means and spread of four parts by block permutation, and mutual
 * forecast errors between the parts (Schreiber 1997, Phys. Rev. Lett. 78, 843). A record too short for its
 * slowest correlation is `undecided`.
 */
export async function assessStationarity(
  record: PreparedRecord,
  reconstruction: Pick<Reconstruction, 'delay' | 'delaysPerChannel' | 'theilerWindow' | 'correlationTime'>,
  options: { readonly seed: number },
  compute: Compute,
): Promise<Stationarity> {
  const { count, target, scaled, present } = record;
  const { seed } = options;
  const correlation = reconstruction.correlationTime.samples;
  const shortestBlock = Math.max(
    BLOCK_CORRELATION_TIMES * correlation,
    BLOCK_CYCLES * (record.quality.samplesPerCycle ?? 1),
  );
  const series = scaled.slice(target * count, (target + 1) * count);
  const parts = await compute.run(partsTask, {
    series,
    present,
    shortestBlock,
    correlationTime: correlation,
    seed,
  });

  const fewest = PARTS * BLOCKS_PER_PART;
  let cross: CrossForecast | undefined;
  if (count / fewest >= shortestBlock) {
    const lead = correlation;
    cross = await compute.run(crossForecastTask, {
      vectors: delayVectors(
        record,
        { delay: reconstruction.delay.samples, delaysPerChannel: reconstruction.delaysPerChannel },
        lead,
      ),
      count,
      targetOffset: target * count + lead,
      exclusion: reconstruction.theilerWindow.samples + lead,
      correlationTime: correlation,
      seed,
    });
  }
  const needed =
    fewest *
    Math.max(
      shortestBlock,
      FEWEST_VECTORS + (reconstruction.delaysPerChannel - 1) * reconstruction.delay.samples,
    );
  return verdict(record, parts, cross, Math.ceil(needed));
}

function verdict(
  record: PreparedRecord,
  parts: PartsComparison,
  cross: CrossForecast | undefined,
  needed: number,
): Stationarity {
  const level = LEVEL / TESTS;
  const shift = Math.max(...parts.means) - Math.min(...parts.means);
  const spread = Math.max(...parts.stds) / Math.min(...parts.stds);
  const changes: string[] = [];
  const open: string[] = [];
  // Parts that agree within what matters need no test.
  const judge = (test: PartsTest, material: boolean, what: string, text: string) => {
    if (!material) return;
    if (!test.measured || (test.pValue <= level && !test.valid)) open.push(what);
    else if (test.pValue <= level) changes.push(`${text} (p = ${test.pValue.toFixed(3)})`);
  };
  judge(
    parts.mean,
    shift > MATERIAL_SHIFT,
    'means',
    `its mean moves by ${shift.toFixed(2)} standard deviations`,
  );
  judge(
    parts.spread,
    !(spread <= MATERIAL_SPREAD),
    'spread',
    `its spread changes ${Number.isFinite(spread) ? `by a factor of ${spread.toFixed(2)}` : 'from nothing'}`,
  );
  if (cross === undefined) open.push('forecast errors');
  else if (
    cross.pValue <= level &&
    errorRatio(cross.across, cross.within) > MATERIAL_EXCESS &&
    cross.across - cross.within > MATERIAL_ERROR
  )
    changes.push(
      `forecasts made from one part miss in another by ${errorRatio(cross.across, cross.within).toFixed(2)} times their error at home (p = ${cross.pValue.toFixed(3)})`,
    );

  const { target } = record;
  const mean = record.means[target]!;
  const std = record.stds[target]!;
  return {
    verdict: changes.length > 0 ? 'drifting' : open.length > 0 ? 'undecided' : 'stationary',
    parts: PARTS,
    means: parts.means.map((m) => mean + m * std),
    stds: parts.stds.map((s) => s * std),
    meanPValue: parts.mean.pValue,
    spreadPValue: parts.spread.pValue,
    crossErrors: relativeErrors(cross),
    crossPValue: cross?.pValue ?? 1,
    text: textOf(changes, open, record.count, needed),
  };
}

function textOf(changes: string[], open: string[], count: number, needed: number): string {
  if (changes.length > 0) return `Between four parts of the record ${changes.join(', and ')}.`;
  if (open.length === 0)
    return 'Four parts of the record agree in mean, spread and mutual forecast errors, as far as its length can show.';
  const what = open.length > 1 ? `${open.slice(0, -1).join(', ')} and ${open[open.length - 1]}` : open[0]!;
  return count < needed
    ? `The record is short for its slowest movement, so the ${what} of its parts cannot be told apart from chance; about ${needed} samples would do.`
    : `The record moves slowly over stretches as long as its parts, or has too many gaps, so whether the ${what} of its parts differ by more than chance is undecided.`;
}

/** A thousandth of the standard deviation, a 12-bit step: smaller errors are equally perfect. */
const PERFECT = 1e-3;

function errorRatio(away: number, home: number): number {
  return Math.max(away, PERFECT) / Math.max(home, PERFECT);
}

/** Error of forecasting part j from part i over that of forecasting j from itself; empty when not measured. */
function relativeErrors(cross: CrossForecast | undefined): number[] {
  if (cross === undefined) return [];
  return cross.errors.map((error, cell) => errorRatio(error, cross.errors[(cell % PARTS) * (PARTS + 1)]!));
}
