import type { Compute } from '../base/compute.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import { baseFrequency, lineSpectrumTask } from './lines.ts';
import { LONGEST_STRETCH, smoothLengths } from './stretch.ts';
import type { Reason } from './types.ts';

/** Share of variance in sharp lines above which motion counts as regular: the rest may be 20 % noise (4 % of variance) and more. */
const LINE_SHARE = 0.9;
/** Below this, what is left over is most of the record, so it is not regular motion with some noise. */
const SOME_LINES = 0.5;
/**
 * Forecast error far ahead, in standard deviations, below which errors have stopped growing short of the
 * attractor: chaos and noise end near 1 (independent states differ by √2 of it, the mean by 1).
 */
const STAYS_GOOD = 0.5;

export interface RegularMotion extends EvidenceLine {
  readonly kind: 'periodic' | 'quasiperiodic' | null;
  readonly lineShare: number;
}

/** Do a few sharp lines make up the record, and does the forecast stay good however far ahead? */
export async function findRegularMotion(
  record: PreparedRecord,
  leadTime: LeadTimeResult,
  compute: Compute,
): Promise<RegularMotion> {
  const longest = record.segments.reduce((a, b) => (b.end - b.start > a.end - a.start ? b : a), {
    start: 0,
    end: 0,
  });
  const available = Math.min(longest.end - longest.start, LONGEST_STRETCH);
  const count = smoothLengths(1, available).at(-1) ?? 0;
  if (count < 256)
    return {
      kind: null,
      lineShare: 0,
      reasons: [
        neutral(
          'LINES_NOT_MEASURED',
          `The longest stretch without gaps (${available} samples) is too short for a line spectrum.`,
        ),
      ],
    };
  const from = record.target * record.count + longest.start;
  const spectrum = await compute.run(lineSpectrumTask, { values: record.scaled.slice(from, from + count) });

  const curve = leadTime.curve;
  const last = curve.at(-1);
  const std = record.stds[record.target]!;
  const farError = last ? last.rms / std : null;
  const staysGood = farError !== null && farError < STAYS_GOOD;
  const lined = spectrum.share >= LINE_SHARE;
  const base = baseFrequency(spectrum);
  const kind = lined && staysGood ? (base === null ? 'quasiperiodic' : 'periodic') : null;

  const reasons: Reason[] = [
    {
      code: 'LINE_SPECTRUM',
      text: lined
        ? `${short(spectrum.share * 100)} % of the variance lies in ${spectrum.lines.length} sharp spectral ${spectrum.lines.length === 1 ? 'line' : 'lines'}, ${base === null ? 'which are not multiples of one frequency' : `all multiples of ${short(base / record.interval)} per ${record.timeUnit}`}.`
        : `Sharp spectral lines hold ${short(spectrum.share * 100)} % of the variance; regular motion needs ${LINE_SHARE * 100} %.`,
      value: spectrum.share,
      threshold: LINE_SHARE,
      speaksFor: lined ? (base === null ? 'quasiperiodic' : 'periodic') : 'none',
    },
  ];
  if (farError !== null)
    reasons.push({
      code: 'FAR_FORECAST',
      text: staysGood
        ? `A forecast ${short(last!.lead)} ${record.timeUnit} ahead is still off by only ${short(farError)} standard deviations: errors do not keep growing.`
        : `A forecast ${short(last!.lead)} ${record.timeUnit} ahead is off by ${short(farError)} standard deviations.`,
      value: farError,
      threshold: STAYS_GOOD,
      speaksFor: staysGood ? (base === null ? 'quasiperiodic' : 'periodic') : 'none',
    });
  return { kind, lineShare: spectrum.share, reasons };
}

/** Lines hold enough of the record that a chaotic call would contradict them. */
export const mostlyLines = (motion: RegularMotion) => motion.lineShare >= SOME_LINES && motion.kind === null;
