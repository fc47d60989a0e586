import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { delayVectors } from '../reconstruct/vectors.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { spread } from './error.ts';
import { type ForecastSetting, isGlobal, type PredictorSpec, spanOf } from './predictors.ts';
import { predictTask } from './task.ts';

/** Library vectors at most, evenly thinned: at 20,000 the search tree still builds in a few milliseconds. */
export const MOST_LIBRARY = 20_000;
/** Time blocks of the global fits. Ten leave nine tenths of the record, less the exclusions, to each fit. */
const FOLDS = 10;
/** Origins per task; does not depend on the number of threads. */
const BLOCK = 256;

/** A setting together with every time from which a held-out forecast can start. */
export interface PreparedSetting {
  readonly setting: ForecastSetting;
  /** Complete vectors with `reach` present samples after them, ascending; the library is thinned from these. */
  readonly starts: Int32Array;
  /** Library vectors left to an origin in the middle of the record, at least. */
  readonly admissible: number;
}

/** State space and library of a record, with `reach` known samples after every vector. */
export function prepareSetting(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  reach: number,
): PreparedSetting {
  const delay = reconstruction.delay.samples;
  const { starts, offsets } = delayVectors(
    record,
    { delay, delaysPerChannel: reconstruction.delaysPerChannel },
    reach,
  );
  const span = spanOf({ offsets, count: record.count });
  const exclusion = span + reach + reconstruction.theilerWindow.samples;
  const stride = Math.max(1, Math.ceil(starts.length / MOST_LIBRARY));
  const library = stride > 1 ? starts.filter((_, i) => i % stride === 0) : starts;
  const first = starts.length > 0 ? starts[0]! : 0;
  const end = starts.length > 0 ? starts[starts.length - 1]! + 1 : 0;
  return {
    setting: {
      data: record.scaled,
      present: record.present,
      count: record.count,
      channels: record.channelCount,
      target: record.target,
      offsets,
      library,
      reach,
      exclusion,
      foldEdges: Array.from({ length: FOLDS + 1 }, (_, f) => Math.round(first + ((end - first) * f) / FOLDS)),
      delay,
    },
    starts,
    admissible: Math.floor((starts.length - (2 * exclusion + 1)) / stride),
  };
}

/** The same setting for a forecast after the end of the record: everything measured may be used. */
export function afterTheEnd(setting: ForecastSetting, window: number): ForecastSetting {
  return { ...setting, exclusion: window, foldEdges: [] };
}

/** At most `most` of the times, evenly spread. */
export function chooseOrigins(starts: Int32Array, most: number): Int32Array {
  return spread(starts.length, most).map((i) => starts[i]!);
}

/** 1 … steps. */
export function everyLead(steps: number): Int32Array {
  return Int32Array.from({ length: steps }, (_, i) => i + 1);
}

/** Ascending leads 1 … steps, about five to the octave. */
export function sparseLeads(steps: number): Int32Array {
  const leads: number[] = [];
  for (let lead = 1; lead <= steps; lead = Math.max(lead + 1, Math.floor(lead * 1.15))) leads.push(lead);
  if (leads[leads.length - 1] !== steps) leads.push(steps);
  return Int32Array.from(leads);
}

/** Forecasts of every spec, cut into fixed blocks of origins for the searching predictors. */
export async function predictAll(
  setting: ForecastSetting,
  specs: readonly PredictorSpec[],
  origins: Int32Array,
  leads: Int32Array,
  compute: Compute,
): Promise<Float64Array[]> {
  const global = specs.filter(isGlobal);
  const local = specs.filter((s) => !isGlobal(s));
  const blocks: Int32Array[] = [];
  for (let from = 0; from < origins.length; from += BLOCK) blocks.push(origins.slice(from, from + BLOCK));
  const inputs = [
    ...(global.length > 0 ? [{ setting, specs: global, origins, leads }] : []),
    ...(local.length > 0 ? blocks.map((block) => ({ setting, specs: local, origins: block, leads })) : []),
  ];
  const outputs = await compute.map(predictTask, inputs);
  const results = new Map<PredictorSpec, Float64Array>();
  if (global.length > 0) {
    const values = outputs.shift()!;
    global.forEach((spec, i) => {
      results.set(spec, values[i]!);
    });
  }
  local.forEach((spec, i) => {
    const joined = new Float64Array(origins.length * leads.length);
    let at = 0;
    for (const output of outputs) {
      joined.set(output[i]!, at);
      at += output[i]!.length;
    }
    results.set(spec, joined);
  });
  return specs.map((spec) => results.get(spec)!);
}

/** Forecast minus what was measured, per spec row-major origins × leads, scaled units. */
export async function heldOutErrors(
  setting: ForecastSetting,
  specs: readonly PredictorSpec[],
  origins: Int32Array,
  leads: Int32Array,
  compute: Compute,
): Promise<Float64Array[]> {
  const forecasts = await predictAll(setting, specs, origins, leads, compute);
  const base = setting.target * setting.count;
  for (const values of forecasts)
    for (let i = 0; i < origins.length; i++)
      for (let l = 0; l < leads.length; l++)
        values[i * leads.length + l]! -= setting.data[base + origins[i]! + leads[l]!]!;
  return forecasts;
}
