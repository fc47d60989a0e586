import { type Answer, finding } from '../base/answer.ts';
import { log2 } from '../base/elementary.ts';
import type { PreparedRecord, RecordSummary, Stationarity } from './types.ts';

/** √12: a uniform error of width q has standard deviation q / √12 (IEEE Std 1241, 1057). */
const SQRT12 = Math.sqrt(12);

/**
 * The `record` field of an Assessment.
 * @param noise the noise level estimated from the record; a level given by the caller stands in its place
 */
export function summariseRecord(
  record: PreparedRecord,
  stationarity: Stationarity,
  noise: Answer,
): RecordSummary {
  const { target } = record;
  const unit = record.channelUnits[target]!;
  const std = record.stds[target]!;
  const step = record.resolutionStep;
  return {
    name: record.name,
    count: record.count,
    channels: record.channelCount,
    target,
    interval: record.interval,
    timeUnit: record.timeUnit,
    unit,
    mean: record.means[target]!,
    std,
    resolution: {
      step,
      source: record.resolutionSource,
      quantisationNoise: step / SQRT12,
      effectiveBits: step > 0 && std > 0 ? log2((std / step) * SQRT12) : null,
    },
    sensorNoise:
      record.givenNoise === null
        ? noise
        : finding({
            value: record.givenNoise,
            low: record.givenNoise,
            high: record.givenNoise,
            level: 1,
            unit,
            method: 'given by the caller',
          }),
    gaps: { missing: record.missing, runs: gapRuns(record) },
    segments: record.segments,
    saturatedFraction: record.quality.saturatedFraction,
    quality: record.quality,
    stationarity,
    treatments: record.treatments,
  };
}

/** Runs of missing samples: those between segments, and one at each end that is missing. */
function gapRuns({ segments, count, missing }: PreparedRecord): number {
  if (segments.length === 0) return missing > 0 ? 1 : 0;
  const first = segments[0]!.start > 0 ? 1 : 0;
  const last = segments[segments.length - 1]!.end < count ? 1 : 0;
  return segments.length - 1 + first + last;
}
