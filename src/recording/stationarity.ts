import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { type CrossForecast, crossForecastTask } from './cross-forecast.ts';
import { BLOCKS_PER_PART, PARTS, type PartsComparison, partsTask } from './parts.ts';
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
/** … and this many cycles, so that parts of cycles cut off at its ends do not make its mean. */
const BLOCK_CYCLES = 2;

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
  const parts = await compute.run(partsTask, { series, present, shortestBlock, seed });

  const fewest = PARTS * BLOCKS_PER_PART[BLOCKS_PER_PART.length - 1]!;
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
      seed,
    });
  }
  return verdict(record, parts, cross, Math.ceil(fewest * shortestBlock));
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
  if (parts.meanPValue !== null && parts.meanPValue <= level && shift > MATERIAL_SHIFT)
    changes.push(
      `its mean moves by ${shift.toFixed(2)} standard deviations (p = ${parts.meanPValue.toFixed(3)})`,
    );
  if (parts.spreadPValue !== null && parts.spreadPValue <= level && !(spread <= MATERIAL_SPREAD))
    changes.push(
      `its spread changes ${Number.isFinite(spread) ? `by a factor of ${spread.toFixed(2)}` : 'from nothing'} (p = ${parts.spreadPValue.toFixed(3)})`,
    );
  if (
    cross !== undefined &&
    cross.pValue <= level &&
    cross.across > MATERIAL_EXCESS * cross.within &&
    cross.across - cross.within > MATERIAL_ERROR
  )
    changes.push(
      `forecasts made from one part miss in another by ${(cross.across / cross.within).toFixed(2)} times their error at home (p = ${cross.pValue.toFixed(3)})`,
    );
  const open: string[] = [];
  if (parts.meanPValue === null) open.push('means');
  if (parts.spreadPValue === null) open.push('spread');
  if (cross === undefined) open.push('forecast errors');

  const { target } = record;
  const mean = record.means[target]!;
  const std = record.stds[target]!;
  return {
    verdict: changes.length > 0 ? 'drifting' : open.length > 0 ? 'undecided' : 'stationary',
    parts: PARTS,
    means: parts.means.map((m) => mean + m * std),
    stds: parts.stds.map((s) => s * std),
    meanPValue: parts.meanPValue ?? 1,
    spreadPValue: parts.spreadPValue ?? 1,
    crossErrors: relativeErrors(cross),
    crossPValue: cross?.pValue ?? 1,
    text: textOf(changes, open, record.count, needed),
  };
}

function textOf(changes: string[], open: string[], count: number, needed: number): string {
  if (changes.length > 0) return `Between four parts of the record ${changes.join(', and ')}.`;
  if (open.length === 0)
    return 'Four parts of the record agree in mean, spread and mutual forecast errors, as far as its length can show.';
  const what = open.join(' and ');
  return count < needed
    ? `The record is short for its slowest movement, so the ${what} of its parts cannot be told apart from chance; about ${needed} samples would do.`
    : `The record moves slowly over stretches as long as its parts, or has too many gaps, so whether the ${what} of its parts differ by more than chance is undecided.`;
}

/** Exactly periodic parts forecast themselves without error: below this, in standard deviations, all errors are equal. */
const NO_ERROR = 1e-9;

/** Error of forecasting part j from part i over that of forecasting j from itself; empty when not measured. */
function relativeErrors(cross: CrossForecast | undefined): number[] {
  if (cross === undefined) return [];
  return cross.errors.map(
    (error, cell) => (error + NO_ERROR) / (cross.errors[(cell % PARTS) * (PARTS + 1)]! + NO_ERROR),
  );
}
