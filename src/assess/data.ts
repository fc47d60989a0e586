import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import type { AssessmentData } from './types.ts';

/** Points of the record kept for a figure: more than a screen has pixels. */
const RECORD_POINTS = 2000;
const PORTRAIT_POINTS = 4000;

/** Thinned copies of the target channel for figures, in its own unit. */
export function figureData(record: PreparedRecord, reconstruction: Reconstruction): AssessmentData {
  const { count, target, interval, scaled, present } = record;
  const mean = record.means[target]!;
  const std = record.stds[target]!;
  const valueAt = (i: number) => (present[i] ? scaled[target * count + i]! * std + mean : null);

  const thinning = Math.max(1, Math.ceil(count / RECORD_POINTS));
  const time: number[] = [];
  const value: (number | null)[] = [];
  for (let i = 0; i < count; i += thinning) {
    time.push(i * interval);
    value.push(valueAt(i));
  }

  const delay = reconstruction.delay.samples;
  const x: number[] = [];
  const y: number[] = [];
  for (let i = 0; i + delay < count && x.length < PORTRAIT_POINTS; i++) {
    const a = valueAt(i);
    const b = valueAt(i + delay);
    if (a === null || b === null) continue;
    x.push(a);
    y.push(b);
  }
  return { record: { time, value, thinning }, portrait: { x, y, delay: delay * interval } };
}
