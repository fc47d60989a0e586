import type { Kernels } from '../base/kernels.ts';
import { type FourierPlan, fourierPlan } from '../fallback/fourier.ts';
import type { Scope } from './heap.ts';
import type { WasmContext } from './wasm.ts';

/** Tables kept: the lengths in use alternate between a few. */
const PLANS_KEPT = 4;

export function createFourier({
  heap,
  call,
}: WasmContext): Pick<Kernels, 'realSpectrum' | 'realSeries' | 'surrogate'> {
  const plans = new Map<number, FourierPlan>();
  const planOf = (length: number): FourierPlan => {
    let plan = plans.get(length);
    if (!plan) {
      plan = fourierPlan(length);
      if (plans.size === PLANS_KEPT) plans.delete(plans.keys().next().value!);
      plans.set(length, plan);
    }
    return plan;
  };

  /** Scratch and tables of a transform of length n, in the order the kernels take them. */
  const place = (scope: Scope, length: number) => {
    const plan = planOf(length);
    return {
      scratch: [scope.take(16 * plan.complexLength), scope.take(16 * plan.complexLength)] as const,
      tables: [
        scope.put(plan.factors),
        plan.factors.length,
        scope.put(plan.twiddles),
        scope.put(plan.joining),
      ] as const,
    };
  };

  return {
    realSpectrum: (series) =>
      heap.scope((scope) => {
        const bins = (series.length >> 1) + 1;
        const input = scope.put(series);
        const out = scope.take(16 * bins);
        const { scratch, tables } = place(scope, series.length);
        call('realForward', input, series.length, out, ...scratch, ...tables);
        const spectrum = heap.f64(out, 2 * bins);
        const real = new Float64Array(bins);
        const imaginary = new Float64Array(bins);
        for (let k = 0; k < bins; k++) {
          real[k] = spectrum[2 * k]!;
          imaginary[k] = spectrum[2 * k + 1]!;
        }
        return { real, imaginary };
      }),

    realSeries: ({ real, imaginary }, length) =>
      heap.scope((scope) => {
        const interleaved = new Float64Array(2 * real.length);
        for (let k = 0; k < real.length; k++) {
          interleaved[2 * k] = real[k]!;
          interleaved[2 * k + 1] = imaginary[k]!;
        }
        const input = scope.put(interleaved);
        const out = scope.take(8 * length);
        const { scratch, tables } = place(scope, length);
        call('realInverse', input, length, out, ...scratch, ...tables);
        return scope.copyF64(out, length);
      }),

    surrogate: ({ values, permutation, iterations }) =>
      heap.scope((scope) => {
        const n = values.length;
        const bins = (n >> 1) + 1;
        const [input, shuffle] = [scope.put(values), scope.put(permutation)];
        const [ranks, order, sortedOrder] = [scope.take(4 * n), scope.take(4 * n), scope.take(4 * n)];
        const [centred, series, sortedCentred] = [scope.take(8 * n), scope.take(8 * n), scope.take(8 * n)];
        const [spectrum, amplitudes] = [scope.take(16 * bins), scope.take(8 * bins)];
        const sortScratch = scope.take(call('argsortScratch', n));
        const { scratch, tables } = place(scope, n);
        const code = call(
          'surrogateRanks',
          ...[input, shuffle, n, iterations, ranks, order, sortedOrder, centred, series, sortedCentred],
          ...[spectrum, amplitudes, ...scratch, sortScratch, ...tables],
        );
        const ranksView = heap.i32(ranks, n);
        const sortedView = heap.i32(sortedOrder, n);
        const out = new Float64Array(n);
        for (let t = 0; t < n; t++) out[t] = values[sortedView[ranksView[t]!]!]!;
        return {
          values: out,
          ranks: scope.copyI32(ranks, n),
          iterations: code >> 1,
          converged: (code & 1) === 1,
        };
      }),
  };
}
