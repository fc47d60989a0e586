import { type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { tooFew, trustedBound } from './bound.ts';
import { conformalRank } from './exits.ts';
import { forecastHeldOut, type HeldOut } from './held-out.ts';
import { boundOptions, type LeadTimeInput } from './lead-time.ts';
import { endsInGap, endsInState, trustedNow } from './now.ts';
import { afterTheEnd, everyLead, predictAll } from './setting.ts';
import type { ForecastOptions, ForecastResult } from './types.ts';

/**
 * The samples after the end of the record, with an interval per lead that holds `confidence` of what comes,
 * from the signed errors of held-out forecasts (split conformal: Vovk, Gammerman & Shafer 2005; for
 * dependent data, Oliveira et al. 2024, J. Mach. Learn. Res. 25), and the lead up to which to trust the path.
 */
export async function forecast(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: ForecastOptions & LeadTimeInput,
  compute: Compute,
): Promise<ForecastResult | Refusal> {
  const level = options.confidence ?? 0.9;
  const { steps: asked, leadSteps } = options;
  const heldOut = await forecastHeldOut(
    record,
    reconstruction,
    { ...(leadSteps === undefined ? {} : { leadSteps }), ...(asked === undefined ? {} : { atLeast: asked }) },
    compute,
  );
  if ('ok' in heldOut) return heldOut;
  if (!endsInState(heldOut)) return endsInGap();
  const bound = boundOptions(
    record,
    options.tolerance ?? 0.5 * record.stds[record.target]!,
    level,
    options.seed,
  );
  const overall = trustedBound(record, reconstruction, heldOut, bound);
  const trusted = overall.ok ? await trustedNow(record, reconstruction, heldOut, bound, compute) : overall;
  // By default twice as far as the path can be trusted, so that its end is seen.
  const usual = trusted.ok
    ? Math.ceil((2 * trusted.value) / record.interval)
    : Math.ceil(5 * reconstruction.correlationTime.samples);
  const steps = asked ?? Math.max(1, Math.min(usual, heldOut.steps));
  if (steps > heldOut.steps)
    return refusal(
      'TOO_SHORT',
      `Errors of held-out forecasts can be measured up to ${heldOut.steps} samples ahead, not up to ${steps}.`,
      'Ask for fewer steps, or record longer.',
      { steps, measured: heldOut.steps },
    );
  const margins = conformalMargins(heldOut, steps, level);
  if (margins === undefined) return tooFew(heldOut.independent, level, reconstruction.theilerWindow.samples);
  const [scaled] = await predictAll(
    afterTheEnd(heldOut.prepared.setting, reconstruction.theilerWindow.samples),
    [heldOut.spec],
    Int32Array.of(record.count - 1),
    everyLead(steps),
    compute,
  );
  const mean = record.means[record.target]!;
  const std = record.stds[record.target]!;
  const values = Array.from(scaled!, (x) => mean + std * x);
  return {
    time: Array.from({ length: steps }, (_, h) => (h + 1) * record.interval),
    values,
    low: values.map((x, h) => x - std * margins.below[h]!),
    high: values.map((x, h) => x + std * margins.above[h]!),
    level,
    trusted,
  };
}

/**
 * How far the truth may lie below and above the forecast, per lead: each side leaves out half of 1 − level,
 * or, with few independent origins, both together through |error|. Undefined with still fewer.
 */
function conformalMargins(heldOut: HeldOut, leads: number, level: number) {
  const { errors, steps, independent } = heldOut;
  const n = heldOut.origins.length;
  const oneSided = conformalRank(n, independent, 0.5 + level / 2);
  const twoSided = conformalRank(n, independent, level);
  if (twoSided === 0) return undefined;
  const below = new Float64Array(leads);
  const above = new Float64Array(leads);
  const column = new Float64Array(n);
  for (let h = 0; h < leads; h++) {
    for (let i = 0; i < n; i++) {
      const e = errors[i * steps + h]!;
      column[i] = oneSided > 0 ? e : Math.abs(e);
    }
    column.sort();
    if (oneSided > 0) {
      // error = forecast − truth: the truth is below by the large errors, above by the small ones.
      below[h] = Math.max(0, column[n - oneSided]!);
      above[h] = Math.max(0, -column[oneSided - 1]!);
    } else {
      below[h] = column[n - twoSided]!;
      above[h] = below[h]!;
    }
  }
  return { below, above };
}
