import { refusal } from '../../src/base/answer.ts';
import { type Compute, runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import type { DivergenceResult } from '../../src/divergence/types.ts';
import { nullTest } from '../../src/evidence/null-test.ts';
import { callRegime } from '../../src/evidence/regime.ts';
import type { Regime } from '../../src/evidence/types.ts';
import type { LeadTimeResult } from '../../src/forecast/types.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import { assessStationarity } from '../../src/recording/stationarity.ts';
import type { Recording } from '../../src/recording/types.ts';

/** Runs tasks on this thread, one after the other. */
export function inlineCompute(kernels: Kernels): Compute {
  const compute: Compute = {
    run: async (task, input) => runToEnd(task, kernels, input),
    map: async (task, inputs) => inputs.map((input) => runToEnd(task, kernels, input)),
    part: () => compute,
    finish: () => {},
    throwIfAborted: () => {},
    breathe: async () => {},
    memoryLimit: 2 ** 30,
  };
  return compute;
}

const unknown = refusal('NOT_YET', 'Not estimated in this test.', 'None.');

/**
 * The regime call from the evidence of this folder alone: divergence, dimension, noise and lead time are left out, so
 * that these tests do not hang on them. Null when the record is too poor to reconstruct.
 */
export async function regimeOf(
  samples: Recording['samples'],
  seed: number,
  compute: Compute,
  more: Partial<Recording> = {},
): Promise<Regime | null> {
  const record = prepareRecording({ samples, interval: 1, ...more });
  const reconstruction = await reconstruct(record, { seed }, compute);
  if ('ok' in reconstruction) return null;
  const stationarity = await assessStationarity(record, reconstruction, { seed }, compute);
  return callRegime(
    {
      record,
      reconstruction,
      stationarity,
      nullTest: await nullTest(record, reconstruction, { seed }, compute),
      divergence: { largest: unknown, curve: null } as unknown as DivergenceResult,
      dimension: { correlation: unknown, entropy: unknown, curve: null as never },
      noise: { level: unknown },
      leadTime: null as unknown as LeadTimeResult,
    },
    { seed, surrogates: 39 },
    compute,
  );
}

export function mean(values: readonly number[]): number {
  return values.reduce((sum, v) => sum + v, 0) / values.length;
}
