/** Wall-clock milliseconds per stage. Stages may overlap. */
export class Stopwatch {
  readonly #start = performance.now();
  readonly #laps: Record<string, number> = {};

  time<T>(name: string, work: () => T): T {
    const start = performance.now();
    const result = work();
    this.#laps[name] = performance.now() - start;
    return result;
  }

  async timeAsync<T>(name: string, work: () => Promise<T>): Promise<T> {
    const start = performance.now();
    const result = await work();
    this.#laps[name] = performance.now() - start;
    return result;
  }

  /** Rounded to a tenth, with the total. */
  laps(): Record<string, number> {
    const round = (ms: number) => Math.round(ms * 10) / 10;
    const laps = Object.fromEntries(Object.entries(this.#laps).map(([name, ms]) => [name, round(ms)]));
    return { ...laps, total: round(performance.now() - this.#start) };
  }
}
