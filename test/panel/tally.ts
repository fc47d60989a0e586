import { assess } from '../../src/assess/assess.ts';
import type { Compute } from '../../src/base/compute.ts';
import type { RegimeCall } from '../../src/evidence/types.ts';
import { CHAOS, type Generator, NOISES, NOISY_CYCLES, OTHERS, REGULAR } from './generators.ts';

export const ALL_GENERATORS: readonly Generator[] = [
  ...NOISES,
  ...NOISY_CYCLES,
  ...REGULAR,
  ...CHAOS,
  ...OTHERS,
];

export interface PanelCall {
  readonly generator: string;
  readonly group: Generator['group'];
  readonly seed: number;
  readonly call: RegimeCall;
  readonly confidence: number;
  /** 'right', 'wrong', or 'refused' (inconclusive, never wrong). */
  readonly verdict: 'right' | 'wrong' | 'refused';
}

/** The whole job on one record of a generator, and whether its regime call is right. */
export async function callOf(
  generator: Generator,
  count: number,
  seed: number,
  compute: Compute,
): Promise<PanelCall> {
  const recording = { samples: generator.make(count, seed), interval: 1 };
  const { regime } = await assess(recording, { include: { record: false } }, compute, {
    backend: 'wasm-simd',
    threads: 0,
  });
  const { call, confidence } = regime;
  const verdict = call === 'inconclusive' ? 'refused' : generator.right.includes(call) ? 'right' : 'wrong';
  return { generator: generator.name, group: generator.group, seed, call, confidence, verdict };
}
