import { type Compute, runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import type { Reconstruction } from '../../src/reconstruct/types.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import type { PreparedRecord, Recording } from '../../src/recording/types.ts';

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

export const openCompute = async (backend: 'auto' | 'js' | 'wasm-simd' | 'wasm-scalar' = 'auto') =>
  inlineCompute(await openKernels({ backend }));

export const prepare = (
  samples: Recording['samples'],
  interval = 1,
  more: Partial<Recording> = {},
): PreparedRecord => prepareRecording({ samples, interval, ...more });

/** A reconstruction set by hand, so that these tests do not hang on how others choose it. */
export function shape(
  record: PreparedRecord,
  delay: number,
  delaysPerChannel: number,
  window: number,
  correlation: number,
): Reconstruction {
  const { interval, channelCount } = record;
  return {
    delay: { samples: delay, time: delay * interval, method: 'set' },
    embeddingDimension: delaysPerChannel * channelCount,
    delaysPerChannel,
    theilerWindow: { samples: window, time: window * interval, method: 'set' },
    dynamics: correlation === 1 ? 'map' : 'flow',
    correlationTime: { samples: correlation, time: correlation * interval },
    vectors: 0,
    curves: {} as Reconstruction['curves'],
  };
}
