import { createHash } from 'node:crypto';
import Benchmark from 'benchmark';

/** Bit-exact digest of a kernel's result, to check agreement before timing. */
export function digest(result) {
  const hash = createHash('sha256');
  const feed = (value) => {
    if (ArrayBuffer.isView(value))
      hash.update(new Uint8Array(value.buffer, value.byteOffset, value.byteLength));
    else if (typeof value === 'object' && value !== null)
      for (const key of Object.keys(value).sort()) feed(value[key]);
    else hash.update(`${typeof value}:${value};`);
  };
  feed(result);
  return hash.digest('hex');
}

export const median = (values) => {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
};

/**
 * Times variants in alternation: every round runs each once with benchmark.js, so that drift of a shared
 * machine touches all alike, and ratios are taken within a round.
 * @returns per variant the mean milliseconds of each round
 */
export function alternate(variants, rounds, secondsPerRound) {
  const times = Object.fromEntries(Object.keys(variants).map((name) => [name, []]));
  for (const run of Object.values(variants)) run(); // warm up: the first call is 2–4 times slower
  for (let round = 0; round < rounds; round++)
    for (const [name, run] of Object.entries(variants)) {
      const bench = new Benchmark(name, run, { maxTime: secondsPerRound, minSamples: 2, initCount: 1 });
      bench.run({ async: false });
      if (bench.error) throw bench.error;
      times[name].push(1000 / bench.hz);
    }
  return times;
}

/** One row of the result: median, spread (half the range, relative) and the ratio taken round by round. */
export function row(workload, variant, times, fallback, agrees) {
  const medianMs = median(times);
  return {
    workload,
    variant,
    medianMs,
    spread: (Math.max(...times) - Math.min(...times)) / (2 * medianMs),
    ratioToFallback: median(times.map((t, i) => fallback[i] / t)),
    agrees,
  };
}
