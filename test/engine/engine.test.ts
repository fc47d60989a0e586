import { describe, expect, it } from 'vitest';
import { isLeadspanError } from '../../src/base/errors.ts';
import { createEngine } from '../../src/engine/engine.ts';
import { referenceModel } from '../../src/model/reference.ts';
import { simulate } from '../../src/model/simulate.ts';

const lorenz = (samples: number) =>
  simulate(referenceModel('lorenz'), { samples, interval: 0.05, transient: 50 }).x!;
const failure = (promise: Promise<unknown>) =>
  promise.then(
    () => 'no error',
    (error: unknown) => error,
  );

/** The limit for answering a cancellation, in milliseconds. Timers of a loaded machine are allowed for. */
const ANSWER_MILLISECONDS = 50;

describe.each([
  ['inline', 0],
  ['with a worker', 1],
] as const)('cancellation, %s', (_name, threads) => {
  it('answers an abort at any moment within 50 ms, with ABORTED and its cause', async () => {
    const engine = await createEngine({ threads });
    const samples = lorenz(4000);
    await engine.assess({ samples: samples.subarray(0, 600), interval: 0.05 }); // code is compiled by now
    for (const wait of [0, 20, 90, 240, 500]) {
      const controller = new AbortController();
      let fired = 0;
      setTimeout(() => {
        fired = performance.now();
        controller.abort(new Error('user left'));
      }, wait);
      const error = await failure(engine.assess({ samples, interval: 0.05 }, { signal: controller.signal }));
      const answered = performance.now();
      if (error === 'no error') continue; // done before the abort
      expect(isLeadspanError(error) && error.code).toBe('ABORTED');
      expect((error as Error).cause).toMatchObject({ message: 'user left' });
      expect(answered - fired).toBeLessThan(ANSWER_MILLISECONDS);
    }
    await engine.close();
  });

  it('keeps the event loop free while it works', async () => {
    const engine = await createEngine({ threads });
    const samples = lorenz(4000);
    await engine.assess({ samples: samples.subarray(0, 600), interval: 0.05 });
    const gaps: number[] = [];
    let last = performance.now();
    const timer = setInterval(() => {
      const now = performance.now();
      gaps.push(now - last);
      last = now;
    }, 1);
    await engine.assess({ samples, interval: 0.05 });
    clearInterval(timer);
    // The typical gap, and many of them: a loaded machine takes single slices away, but work in one piece
    // would leave a handful of gaps, all long.
    gaps.sort((x, y) => x - y);
    expect(gaps[gaps.length >> 1]).toBeLessThan(ANSWER_MILLISECONDS);
    expect(gaps.length).toBeGreaterThan(40);
    await engine.close();
  });

  it('is refused at once when the signal has fired before', async () => {
    const engine = await createEngine({ threads });
    expect(
      await failure(engine.assess({ samples: lorenz(600), interval: 0.05 }, { signal: AbortSignal.abort() })),
    ).toMatchObject({ code: 'ABORTED' });
    await engine.close();
  });

  it('gives up at the deadline', async () => {
    const engine = await createEngine({ threads });
    const error = await failure(engine.assess({ samples: lorenz(8000), interval: 0.05 }, { deadline: 30 }));
    expect(error).toMatchObject({ code: 'ABORTED', field: 'deadline' });
    await engine.close();
  });

  it('rejects running jobs with CLOSED when the engine closes, and later calls too', async () => {
    const engine = await createEngine({ threads });
    const running = failure(engine.assess({ samples: lorenz(8000), interval: 0.05 }));
    setTimeout(() => void engine.close(), 30);
    expect(await running).toMatchObject({ code: 'CLOSED' });
    expect(await failure(engine.assess({ samples: [1, 2], interval: 1 }))).toMatchObject({ code: 'CLOSED' });
    await engine.close(); // idempotent
  });

  it('reports progress that never falls and ends at 1', async () => {
    const engine = await createEngine({ threads });
    const seen: number[] = [];
    const stages = new Set<string>();
    await engine.assess(
      { samples: lorenz(1500), interval: 0.05 },
      {
        onProgress: ({ fraction, stage }) => {
          seen.push(fraction);
          stages.add(stage);
        },
      },
    );
    expect(seen.length).toBeGreaterThan(8);
    expect([...seen].sort((a, b) => a - b)).toEqual(seen);
    expect(seen.at(-1)).toBe(1);
    expect(stages.size).toBeGreaterThan(4);
    await engine.close();
  });
});

describe('jobs on one engine', () => {
  it('run side by side, each with its own signal', async () => {
    const engine = await createEngine({ threads: 2 });
    const controller = new AbortController();
    const samples = lorenz(3000);
    const doomed = failure(engine.assess({ samples, interval: 0.05 }, { signal: controller.signal }));
    const kept = engine.assess({ samples: samples.slice(0, 1500), interval: 0.05 });
    setTimeout(() => controller.abort(), 40);
    expect(await doomed).toMatchObject({ code: 'ABORTED' });
    expect((await kept).schema).toBe('leadspan.assessment/1');
    await engine.close();
  });

  it('leave the caller’s samples as they were', async () => {
    const engine = await createEngine({ threads: 1 });
    const samples = lorenz(800);
    const copy = samples.slice();
    await engine.assess({ samples, interval: 0.05 });
    expect(samples).toEqual(copy);
    expect(samples.buffer.byteLength).toBe(800 * 8);
    await engine.close();
  });
});

describe('limits and misuse', () => {
  it('estimates memory and refuses over the limit, with the estimate', async () => {
    const engine = await createEngine({ threads: 0, memoryLimit: 2 ** 20 });
    expect(engine.estimateMemory(10_000)).toBeGreaterThan(2 ** 20);
    const error = await failure(engine.assess({ samples: lorenz(3000), interval: 0.05 }));
    expect(error).toMatchObject({ code: 'MEMORY_LIMIT', field: 'memoryLimit' });
    expect(String(error)).toMatch(/needs about \d+ MB/);
    await engine.close();
  });

  it.each([
    [{ tolerence: 1 }, /did you mean "tolerance"/],
    [{ tolerance: -1 }, /tolerance.*above 0.*got -1/],
    [{ confidence: 2 }, /confidence.*0\.5 to 0\.99.*got 2/],
    [{ surrogates: 5 }, /surrogates.*19 to 999.*got 5/],
    [{ delay: 1.5 }, /delay.*whole number.*got 1\.5/],
    [{ dynamics: 'chaos' }, /dynamics.*'auto', 'flow', 'map'.*got "chaos"/],
    [{ seed: -1 }, /seed/],
    [{ onProgress: 3 }, /onProgress.*a function/],
    [{ signal: {} }, /signal.*AbortSignal/],
    [{ include: { data: true } }, /include/],
  ])('names the option at fault: %j', async (options, message) => {
    const engine = await createEngine({ threads: 0, backend: 'js' });
    const error = await failure(engine.assess({ samples: [1, 2, 3], interval: 1 }, options as never));
    expect(error).toMatchObject({ code: 'BAD_OPTION' });
    expect(String(error)).toMatch(message);
    await engine.close();
  });

  it.each([
    [{ backend: 'gpu' }, /backend.*got "gpu"/],
    [{ threads: -1 }, /threads.*0 to 64/],
    [{ thread: 1 }, /did you mean "threads"/],
  ])('checks the engine’s own options: %j', async (options, message) => {
    const error = await failure(createEngine(options as never));
    expect(error).toMatchObject({ code: 'BAD_OPTION' });
    expect(String(error)).toMatch(message);
  });

  it('falls back to inline with a notice when the host allows no workers', async () => {
    const engine = await createEngine({
      threads: 2,
      worker: () => {
        throw new Error('policy forbids workers');
      },
    });
    expect(engine.info.threads).toBe(0);
    expect(engine.info.notices).toHaveLength(1);
    expect(engine.info.notices[0]).toMatch(/inline.*policy forbids workers/);
    const { regime } = await engine.assess({ samples: lorenz(600), interval: 0.05 });
    expect(regime.call).toBeTypeOf('string');
    await engine.close();
  });

  it('spectrum and mechanism refuse with NOT_YET', async () => {
    const engine = await createEngine({ threads: 0, backend: 'js' });
    expect(await engine.mechanism({ samples: [1], interval: 1 })).toMatchObject({
      ok: false,
      code: 'NOT_YET',
    });
    await engine.close();
  });
});
