import type { Compute } from '../base/compute.ts';
import { forecastErrorTask } from '../forecast/error.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { baseFrequencies } from './base-frequencies.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import { spectralLinesTask } from './spectral-lines.ts';
import { longestStretch } from './stretch.ts';
import type { Reason } from './types.ts';
import { zeroOneTask } from './zero-one.ts';

/** Less than half of the variance in lines is a record that is mostly something else. */
const MOSTLY_LINES = 0.5;
/**
 * With all but 3 % in lines the rest is too little to tell noise from irregular motion by what a forecast
 * loses (chaos can lose twice the rest); if differences do not grow either, the lines decide.
 */
const ALL_LINES = 0.97;
/**
 * Variance that a forecast may lose between one step and a quarter of the record and still be called lasting.
 * Noise on a regular motion loses none; 2 % is what the distance to the nearest recorded state leaves.
 */
const LASTING = 0.02;
/** … and two standard errors of a mean square of 1,000 forecasts, relative to the short forecast's own. */
const SAMPLING = 0.1;
/** Neighbours averaged by the forecasts here: few, so that recurrences are followed closely. */
const NEIGHBOURS = 8;
const ORIGINS = 1000;
/** 0–1 test: below, regular; above 1 minus this, irregular (Gottwald & Melbourne 2009 find both ends well apart by 1,000 samples). */
const REGULAR_SCORE = 0.2;

/** Below this the surroundings in which a line is judged are the whole spectrum. */
const FEWEST_SAMPLES = 256;

export interface RegularMotion extends EvidenceLine {
  readonly kind: 'periodic' | 'quasiperiodic' | null;
  readonly lineShare: number;
  /** Spread left when sharp and broad lines are taken out, in standard deviations: what chaos must lose. */
  readonly rest: number;
  /** Variance forgotten between a short and a long lead; null when not measured. */
  readonly forgotten: number | null;
}

/**
 * Regular motion: a few sharp lines hold the record, and what the record was still tells what it will be
 * after any time. Noise on top of it (the sensor's, say) is allowed: it does not grow with the lead.
 */
export async function findRegularMotion(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  seed: number,
  compute: Compute,
): Promise<RegularMotion> {
  const values = longestStretch(record);
  if (values.length < FEWEST_SAMPLES)
    return {
      kind: null,
      lineShare: 0,
      rest: 1,
      forgotten: null,
      reasons: [
        neutral(
          'LINES_NOT_MEASURED',
          `The longest stretch without gaps (${values.length} samples) is too short for a line spectrum.`,
        ),
      ],
    };
  const step = Math.max(1, reconstruction.correlationTime.samples);
  const decorrelated = Float64Array.from(
    { length: Math.floor(values.length / step) },
    (_, i) => values[i * step]!,
  );
  const [spectrum, score] = await Promise.all([
    compute.run(spectralLinesTask, { values }),
    compute.run(zeroOneTask, { samples: decorrelated, seed }),
  ]);
  const rest = Math.sqrt(Math.max(0, 1 - Math.min(1, spectrum.share + spectrum.broadShare)));
  const lined = spectrum.share >= MOSTLY_LINES;
  const lasting = lined ? await measureForgetting(values, reconstruction, compute) : null;
  const all = spectrum.share >= ALL_LINES;
  const holds = all || (lasting !== null && lasting.forgotten <= LASTING + SAMPLING * lasting.near);
  const { bases } = baseFrequencies(spectrum.lines, values.length, 1 - spectrum.share);
  const kind = lined && holds ? (bases.length > 1 ? 'quasiperiodic' : 'periodic') : null;

  const reasons: Reason[] = [lineReason(record, spectrum.share, spectrum.lines.length, bases, kind)];
  if (lasting !== null)
    reasons.push({
      code: holds ? 'FORECAST_LASTS' : 'FORECAST_FADES',
      text: `Between ${short(lasting.nearLead * record.interval)} and ${short(lasting.farLead * record.interval)} ${record.timeUnit} ahead the forecast loses ${short(100 * Math.max(0, lasting.forgotten))} % of the variance: ${holds ? 'what it knows, it keeps' : 'the record forgets'}.`,
      value: lasting.forgotten,
      threshold: LASTING + SAMPLING * lasting.near,
      speaksFor: kind ?? 'none',
      assumes: 'A quarter of the record is long enough for what will be forgotten to be forgotten.',
    });
  if (score !== undefined)
    reasons.push({
      code: 'ZERO_ONE',
      text: `The 0–1 test gives ${short(score)} (0: regular, 1: irregular, be it chaos or noise).`,
      value: score,
      threshold: REGULAR_SCORE,
      speaksFor: score < REGULAR_SCORE && kind !== null ? kind : 'none',
      assumes:
        'Samples are a correlation time apart; noise on a regular motion raises the score, slow growth lowers it.',
    });
  else
    reasons.push(
      neutral(
        'ZERO_ONE_NOT_MEASURED',
        `The record holds ${decorrelated.length} correlation times; the 0–1 test needs 200.`,
      ),
    );
  return {
    kind,
    lineShare: spectrum.share,
    rest,
    forgotten: lasting?.forgotten ?? null,
    reasons,
  };
}

async function measureForgetting(values: Float64Array, reconstruction: Reconstruction, compute: Compute) {
  const nearLead = reconstruction.delay.samples;
  const farLead = Math.max(nearLead + 1, Math.floor(values.length / 4));
  const [near, far] = await compute.map(
    forecastErrorTask,
    [nearLead, farLead].map((lead) => ({ ...forecastShape(values, reconstruction), lead })),
  );
  if (near!.error === null || far!.error === null) return null;
  const [a, b] = [near!.error * near!.error, far!.error * far!.error];
  return { nearLead, farLead, near: a, forgotten: b - a };
}

/** Locally constant forecasts in the record's own state space (target channel alone). */
export function forecastShape(series: Float64Array, reconstruction: Reconstruction) {
  return {
    series,
    delay: reconstruction.delay.samples,
    dimension: Math.max(2, reconstruction.delaysPerChannel),
    window: Math.min(reconstruction.theilerWindow.samples, Math.floor(series.length / 10)),
    neighbours: NEIGHBOURS,
    references: ORIGINS,
  };
}

function lineReason(
  record: PreparedRecord,
  share: number,
  count: number,
  bases: readonly number[],
  kind: RegularMotion['kind'],
): Reason {
  const percent = short(100 * share);
  const text =
    count === 0
      ? 'The spectrum has no sharp line.'
      : `${percent} % of the variance lies in ${count} sharp spectral ${count === 1 ? 'line' : 'lines'}, ` +
        (bases.length === 1
          ? `all multiples of ${short(bases[0]! / record.interval)} per ${record.timeUnit}.`
          : `which take ${bases.length} base frequencies to explain (${bases.map((b) => short(b / record.interval)).join(', ')} per ${record.timeUnit}).`);
  return {
    code: 'LINE_SPECTRUM',
    text: share >= MOSTLY_LINES ? text : `${text} Regular motion needs ${100 * MOSTLY_LINES} % in lines.`,
    value: share,
    threshold: MOSTLY_LINES,
    speaksFor: kind ?? 'none',
    assumes: 'Frequencies hold still while the record lasts; phase-coherent chaos has strong lines too.',
  };
}
