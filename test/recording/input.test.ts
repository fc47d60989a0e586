import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { isLeadspanError } from '../../src/base/errors.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import type { Recording } from '../../src/recording/types.ts';

/** The error `prepareRecording` throws, or undefined. */
function errorOf(
  recording: unknown,
  options = {},
): { code: string; field?: string; message: string } | undefined {
  try {
    prepareRecording(recording as Recording, options);
  } catch (error) {
    if (!isLeadspanError(error)) throw error;
    return error as never;
  }
  return undefined;
}
const wave = (n: number) => Array.from({ length: n }, (_, i) => Math.sin(i * 0.3) + 0.1 * Math.sin(i));
const even = (n: number, dt = 0.1) => Array.from({ length: n }, (_, i) => i * dt);

describe('sample types', () => {
  it('takes number[], Float64Array, Float32Array and Int16Array alike', () => {
    const whole = Array.from({ length: 300 }, (_, i) => (i * 7919) % 1000);
    const records = [whole, Float64Array.from(whole), Float32Array.from(whole), Int16Array.from(whole)].map(
      (samples) => prepareRecording({ samples, interval: 1 }),
    );
    for (const record of records) expect(record).toEqual(records[0]);
  });

  it('leaves the caller’s buffers alone', () => {
    const samples = Float64Array.from(wave(300));
    const before = samples.slice();
    const record = prepareRecording({ samples, interval: 1 }, { detrend: 'linear' });
    expect(samples).toEqual(before);
    expect(record.scaled.buffer).not.toBe(samples.buffer);
  });

  it('takes several channels, end to end', () => {
    const record = prepareRecording({
      samples: [wave(300), Float32Array.from(wave(300), (v) => 5 * v + 2)],
      interval: 0.5,
      channelUnits: ['K', 'bar'],
      target: 1,
    });
    expect(record.channelCount).toBe(2);
    expect(record.scaled.length).toBe(600);
    expect(record.channelUnits).toEqual(['K', 'bar']);
    for (let i = 0; i < 300; i++) expect(record.scaled[300 + i]).toBeCloseTo(record.scaled[i]!, 5);
  });
});

describe('bad input is refused with the field', () => {
  const cases: readonly [string, unknown, string, RegExp][] = [
    ['no object', [1, 2, 3], 'recording', /object \{ samples, interval/],
    ['null', null, 'recording', /got null/],
    [
      'misspelt field',
      { samples: wave(300), intervall: 1 },
      'recording.intervall',
      /did you mean "interval"\?/,
    ],
    ['misspelt samples', { sample: wave(300), interval: 1 }, 'recording.sample', /did you mean "samples"\?/],
    ['no samples', { interval: 1 }, 'recording.samples', /got undefined/],
    ['empty', { samples: [], interval: 1 }, 'recording.samples', /at least one sample/],
    [
      'empty typed array',
      { samples: new Float64Array(), interval: 1 },
      'recording.samples',
      /at least one sample/,
    ],
    ['string', { samples: [1, '2', 3], interval: 1 }, 'recording.samples[1]', /got "2"/],
    [
      'null sample',
      { samples: [1, null], interval: 1 },
      'recording.samples[1]',
      /NaN marks a missing sample/,
    ],
    // biome-ignore lint/suspicious/noSparseArray: a hole is what is tested
    ['hole', { samples: [1, , 3], interval: 1 }, 'recording.samples[1]', /hole/],
    ['bigint', { samples: [1, 2n], interval: 1 }, 'recording.samples[1]', /got 2n/],
    ['bigint array', { samples: new BigInt64Array(3), interval: 1 }, 'recording.samples', /BigInt64Array/],
    ['DataView', { samples: new DataView(new ArrayBuffer(8)), interval: 1 }, 'recording.samples', /numbers/],
    [
      'infinity',
      { samples: [1, 2, Number.POSITIVE_INFINITY], interval: 1 },
      'recording.samples[2]',
      /Infinity/,
    ],
    [
      '−infinity in a channel',
      {
        samples: [
          [1, 2],
          [Number.NEGATIVE_INFINITY, 1],
        ],
        interval: 1,
      },
      'recording.samples[1][0]',
      /finite/,
    ],
    [
      'unequal channels',
      {
        samples: [
          [1, 2],
          [1, 2, 3],
        ],
        interval: 1,
      },
      'recording.samples',
      /channel 1 has 3/,
    ],
    ['mixture', { samples: [[1, 2], 3], interval: 1 }, 'recording.samples[1]', /a channel of numbers/],
    ['empty channel', { samples: [[], []], interval: 1 }, 'recording.samples[0]', /at least one/],
    ['no interval', { samples: wave(300) }, 'recording.interval', /or give times/],
    ['interval 0', { samples: wave(300), interval: 0 }, 'recording.interval', /positive.*got 0/],
    ['interval < 0', { samples: wave(300), interval: -1 }, 'recording.interval', /got -1/],
    ['interval NaN', { samples: wave(300), interval: Number.NaN }, 'recording.interval', /got NaN/],
    ['interval text', { samples: wave(300), interval: '1' }, 'recording.interval', /got "1"/],
    ['target', { samples: wave(300), interval: 1, target: 1 }, 'recording.target', /one channel/],
    ['target 0.5', { samples: [wave(9), wave(9)], interval: 1, target: 0.5 }, 'recording.target', /0 to 1/],
    ['resolution', { samples: wave(300), interval: 1, resolution: 0 }, 'recording.resolution', /positive/],
    ['noise', { samples: wave(300), interval: 1, sensorNoise: -1 }, 'recording.sensorNoise', /at least 0/],
    ['unit', { samples: wave(300), interval: 1, unit: 5 }, 'recording.unit', /string/],
    [
      'units',
      { samples: wave(300), interval: 1, channelUnits: ['K', 'K'] },
      'recording.channelUnits',
      /length 1/,
    ],
    [
      'unit of a channel',
      { samples: wave(300), interval: 1, channelUnits: [5] },
      'recording.channelUnits[0]',
      /string/,
    ],
    ['times too short', { samples: wave(300), times: even(299) }, 'recording.times', /length 300/],
    ['times not sorted', { samples: wave(3), times: [0, 2, 1] }, 'recording.times[2]', /comes after/],
    ['times repeated', { samples: wave(3), times: [0, 1, 1] }, 'recording.times[2]', /repeats/],
    ['time missing', { samples: wave(3), times: [0, Number.NaN, 1] }, 'recording.times[1]', /its time/],
    ['time text', { samples: wave(3), times: [0, '1', 2] }, 'recording.times[1]', /a number/],
    ['times span', { samples: wave(2), times: [-1.7e308, 1.7e308] }, 'recording.times', /finite/],
    [
      'interval against times',
      { samples: wave(300), times: even(300), interval: 0.2 },
      'recording.interval',
      /contradicts/,
    ],
    [
      'huge gap',
      { samples: wave(300), times: even(300).map((t, i) => (i < 150 ? t : t + 1e6)) },
      'recording.times',
      /Split/,
    ],
  ];
  it.each(cases)('%s', (_, recording, field, message) => {
    const error = errorOf(recording);
    expect(error?.code).toBe('BAD_INPUT');
    expect(error?.field).toBe(field);
    expect(error?.message).toMatch(message);
  });

  it('options out of their choices', () => {
    expect(errorOf({ samples: wave(9), interval: 1 }, { resample: 'cubic' })?.code).toBe('BAD_OPTION');
    expect(errorOf({ samples: wave(9), interval: 1 }, { detrend: true })?.code).toBe('BAD_OPTION');
  });

  it('never anything else than an answer or a BAD_INPUT, whatever comes in', () => {
    const value = fc.oneof(
      fc.double(),
      fc.integer(),
      fc.string(),
      fc.constant(null),
      fc.constant(undefined),
      fc.bigInt(),
    );
    const recording = fc.record(
      {
        samples: fc.oneof(fc.array(value), fc.array(fc.array(fc.double())), fc.array(fc.double()), value),
        interval: fc.oneof(fc.double(), value),
        times: fc.oneof(fc.array(fc.double()), value),
        target: value,
        resolution: value,
      },
      { requiredKeys: [] },
    );
    fc.assert(
      fc.property(
        recording,
        fc.constantFrom({}, { resample: 'linear' }, { detrend: 'linear' }),
        (input, options) => {
          const error = errorOf(input, options);
          if (error) expect(error.code).toBe('BAD_INPUT');
          else {
            const record = prepareRecording(input as never, options as never);
            for (const v of record.scaled) expect(Number.isFinite(v)).toBe(true);
            expect(record.means.every(Number.isFinite) && record.stds.every(Number.isFinite)).toBe(true);
          }
        },
      ),
      { numRuns: 500 },
    );
  });
});

describe('time stamps', () => {
  it('give the interval', () => {
    const record = prepareRecording({ samples: wave(300), times: even(300, 0.25).map((t) => t + 1000) });
    expect(record.interval).toBeCloseTo(0.25, 12);
    expect(record.missing).toBe(0);
    expect(record.treatments).toEqual([]);
  });

  it('that agree with the interval keep it exactly', () => {
    expect(prepareRecording({ samples: wave(300), times: even(300), interval: 0.1 }).interval).toBe(0.1);
  });

  it('with 2 % jitter are refused, and interpolated when asked', () => {
    const times = even(500).map((t, i) => t + (i % 2) * 0.002);
    const samples = times.map((t) => 3 * t);
    const error = errorOf({ samples, times });
    expect(error?.message).toMatch(/uneven.*at most 1 %.*resample: 'linear'/);
    const record = prepareRecording({ samples, times }, { resample: 'linear' });
    expect(record.treatments.join()).toMatch(/interpolated/);
    // Exact for a straight line: sample k of the grid must be 3·k·interval.
    const { scaled, means, stds, interval } = record;
    for (let k = 0; k < record.count; k++)
      expect(scaled[k]! * stds[0]! + means[0]!).toBeCloseTo(3 * k * interval, 9);
  });

  it('with 0.5 % jitter pass', () => {
    const times = even(300).map((t, i) => t + (i % 2) * 0.0005);
    expect(errorOf({ samples: wave(300), times })).toBeUndefined();
  });

  it.each([{}, { resample: 'linear' as const }])(
    'a gap becomes missing samples, never filled (%o)',
    (options) => {
      // 40 stamps left out: 100 … 139.
      const kept = Array.from({ length: 400 }, (_, i) => i).filter((i) => i < 100 || i >= 140);
      const record = prepareRecording(
        { samples: kept.map((i) => Math.sin(i * 0.7)), times: kept.map((i) => i * 0.1) },
        options,
      );
      expect(record.count).toBe(400);
      expect(record.missing).toBe(40);
      expect(record.segments).toEqual([
        { start: 0, end: 100 },
        { start: 140, end: 400 },
      ]);
      expect(record.treatments.join()).toMatch(/missing/);
      expect([...record.scaled.subarray(100, 140)].every((v) => v === 0)).toBe(true);
    },
  );

  it('never fill more than 1.5 intervals when resampling (property)', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0.05, max: 5, noNaN: true }), { minLength: 20, maxLength: 80 }),
        (steps) => {
          let t = 0;
          const times = [0, ...steps.map((s) => (t += s))];
          const samples = times.map((_, i) => i % 7);
          let record: ReturnType<typeof prepareRecording>;
          try {
            record = prepareRecording({ samples, times }, { resample: 'linear' });
          } catch {
            return; // gaps too long
          }
          for (let k = 0; k < record.count; k++) {
            const at = times[0]! + k * record.interval;
            const after = times.findIndex((time) => time >= at);
            if (after <= 0) continue;
            const nearest = Math.min(Math.abs(at - times[after - 1]!), Math.abs(times[after]! - at));
            const width = times[after]! - times[after - 1]!;
            if (record.present[k] && nearest > 1e-5 * record.interval)
              expect(width).toBeLessThanOrEqual(1.5 * record.interval * (1 + 1e-9));
          }
        },
      ),
    );
  });
});
