import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/base/random.ts';
import { delayVectors } from '../../src/reconstruct/vectors.ts';
import { Fnv64 } from '../../src/recording/hash.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';

const noise = (n: number, seed = 1) => {
  const random = createRandom(seed);
  return Float64Array.from({ length: n }, () => random.normal());
};

describe('scaling', () => {
  it('gives zero mean and unit variance', () => {
    const { scaled } = prepareRecording({ samples: noise(5000).map((v) => 3 + 7 * v), interval: 1 });
    const mean = scaled.reduce((s, v) => s + v, 0) / 5000;
    const variance = scaled.reduce((s, v) => s + v * v, 0) / 5000;
    expect(Math.abs(mean)).toBeLessThan(1e-13);
    expect(variance).toBeCloseTo(1, 12);
  });

  it('loses nothing of a 1e-3 signal on a 1e9 offset', () => {
    // The sum 1e9 + s keeps s to 2^-24 s.d.; what it keeps must survive scaling to the last bits.
    const kept = noise(4000).map((v) => 1e9 + 1e-3 * v - 1e9);
    const plain = prepareRecording({ samples: kept, interval: 1 });
    const offset = prepareRecording({ samples: kept.map((v) => 1e9 + v), interval: 1 });
    expect(offset.stds[0]! / plain.stds[0]!).toBeCloseTo(1, 9);
    let worst = 0;
    for (let i = 0; i < 4000; i++) worst = Math.max(worst, Math.abs(offset.scaled[i]! - plain.scaled[i]!));
    // Only the mean is rounded: to 1e9 · 2^-53 = 1.1e-7, that is 1.1e-4 standard deviations, the same for all.
    const shift = offset.scaled[0]! - plain.scaled[0]!;
    expect(worst).toBeLessThan(1.2e-4);
    for (let i = 0; i < 4000; i++)
      expect(Math.abs(offset.scaled[i]! - plain.scaled[i]! - shift)).toBeLessThan(1e-7);
  });

  it.each([1e308, 1e-300, 2 ** 900, 5e-324 * 2 ** 60])(
    'does not overflow or vanish at amplitude %d',
    (amplitude) => {
      const plain = prepareRecording({ samples: noise(500).map((v) => v / 8), interval: 1 });
      const record = prepareRecording({ samples: noise(500).map((v) => (v / 8) * amplitude), interval: 1 });
      expect(Number.isFinite(record.means[0]) && Number.isFinite(record.stds[0])).toBe(true);
      for (let i = 0; i < 500; i++) expect(record.scaled[i]).toBeCloseTo(plain.scaled[i]!, 6);
    },
  );

  it('the extreme pair ±1.79e308 has a finite standard deviation', () => {
    const samples = Array.from({ length: 300 }, (_, i) => (i % 2 ? 1 : -1) * Number.MAX_VALUE);
    expect(prepareRecording({ samples, interval: 1 }).stds[0]).toBe(Number.MAX_VALUE);
  });

  it('is unchanged by units and offsets (property)', () => {
    const base = noise(400);
    const plain = prepareRecording({ samples: base, interval: 1 });
    fc.assert(
      fc.property(
        fc.double({ min: 1e-6, max: 1e6, noNaN: true }),
        fc.double({ min: -1e3, max: 1e3, noNaN: true }),
        (gain, offset) => {
          const record = prepareRecording({ samples: base.map((v) => gain * (v + offset)), interval: 1 });
          for (let i = 0; i < 400; i++)
            expect(Math.abs(record.scaled[i]! - plain.scaled[i]!)).toBeLessThan(1e-9);
        },
      ),
      { numRuns: 50 },
    );
    // A power of two changes no bit.
    const doubled = prepareRecording({ samples: base.map((v) => v * 2 ** 40), interval: 1 });
    expect(doubled.scaled).toEqual(plain.scaled);
  });
});

describe('missing samples', () => {
  it('in any channel end the segment', () => {
    const a = noise(10);
    const b = noise(10, 2);
    a[3] = Number.NaN;
    b[7] = Number.NaN;
    const record = prepareRecording({ samples: [a, b], interval: 1 });
    expect(record.segments).toEqual([
      { start: 0, end: 3 },
      { start: 4, end: 7 },
      { start: 8, end: 10 },
    ]);
    expect(record.missing).toBe(2);
    expect(record.scaled[3]).toBe(0);
    expect(record.scaled[13]).toBe(0);
  });

  it('everywhere is a record too short, not an error', () => {
    const record = prepareRecording({ samples: [Number.NaN, Number.NaN], interval: 1 });
    expect(record.segments).toEqual([]);
    expect(record.quality.problems.map((p) => p.code)).toContain('TOO_SHORT');
  });

  it('are never bridged by a delay vector or its target (property)', () => {
    fc.assert(
      fc.property(
        fc.array(fc.boolean(), { minLength: 30, maxLength: 200 }),
        fc.integer({ min: 1, max: 7 }),
        fc.integer({ min: 1, max: 5 }),
        fc.integer({ min: 0, max: 6 }),
        fc.integer({ min: 1, max: 3 }),
        (gaps, delay, delaysPerChannel, ahead, channelCount) => {
          const n = gaps.length;
          const samples = Array.from({ length: channelCount }, (_, c) =>
            noise(n, c + 1).map((v, i) => (gaps[i] && i % 3 === c ? Number.NaN : v)),
          );
          const record = prepareRecording({ samples, interval: 1 });
          const { starts, offsets, data } = delayVectors(record, { delay, delaysPerChannel }, ahead);
          expect(offsets.length).toBe(channelCount * delaysPerChannel);
          const listed = new Set(starts);
          for (let t = 0; t < n; t++) {
            // Brute force: every sample from the oldest coordinate to the last target must be there.
            let complete = t - (delaysPerChannel - 1) * delay >= 0 && t + ahead < n;
            for (let i = t - (delaysPerChannel - 1) * delay; complete && i <= t + ahead; i++)
              if (samples.some((channel) => Number.isNaN(channel[i]))) complete = false;
            expect(listed.has(t)).toBe(complete);
            if (!complete) continue;
            for (let c = 0; c < channelCount; c++)
              for (let k = 0; k < delaysPerChannel; k++)
                expect(data[t + offsets[c * delaysPerChannel + k]!]).toBe(
                  record.scaled[c * n + t - k * delay],
                );
          }
        },
      ),
      { numRuns: 100 },
    );
  });
});

describe('detrending', () => {
  it('is never silent and takes the line off', () => {
    const samples = noise(2000).map((v, i) => v + 0.01 * i);
    const record = prepareRecording({ samples, interval: 0.5, unit: 'K' }, { detrend: 'linear' });
    expect(record.treatments[0]).toMatch(/slope 0\.0[12].* K\/s was subtracted/);
    let products = 0;
    for (let i = 0; i < 2000; i++) products += (i - 999.5) * record.scaled[i]!;
    expect(Math.abs(products / 2000 / 1000)).toBeLessThan(1e-12);
    expect(record.stds[0]).toBeCloseTo(1, 1);
    expect(prepareRecording({ samples, interval: 0.5 }).treatments).toEqual([]);
  });

  it('does not hide the resolution of the acquisition', () => {
    const samples = noise(2000).map((v, i) => Math.round((v + 0.001 * i) / 0.05) * 0.05);
    const record = prepareRecording({ samples, interval: 1 }, { detrend: 'linear' });
    expect(record.resolutionStep).toBeCloseTo(0.05, 9);
  });
});

describe('hash', () => {
  // published: FNV test vectors of the algorithm's authors (draft-eastlake-fnv), 64-bit FNV-1a.
  it.each([
    ['', 'cbf29ce484222325'],
    ['a', 'af63dc4c8601ec8c'],
    ['b', 'af63df4c8601f1a5'],
    ['foobar', '85944171f73967e8'],
  ])('FNV-1a of %o', (text, expected) => {
    expect(new Fnv64().bytes(new TextEncoder().encode(text)).toString()).toBe(expected);
  });

  it('agrees with 64-bit integers (property)', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 200 }), (bytes) => {
        let h = 0xcbf29ce484222325n;
        for (const b of bytes) h = BigInt.asUintN(64, (h ^ BigInt(b)) * 0x100000001b3n);
        expect(new Fnv64().bytes(bytes).toString()).toBe(h.toString(16).padStart(16, '0'));
      }),
    );
  });

  it('changes with one sample and with the interval', () => {
    const samples = noise(300);
    const plain = prepareRecording({ samples, interval: 1 }).hash;
    expect(prepareRecording({ samples: samples.slice(), interval: 1 }).hash).toBe(plain);
    expect(prepareRecording({ samples, interval: 2 }).hash).not.toBe(plain);
    samples[7]! += 1e-12;
    expect(prepareRecording({ samples, interval: 1 }).hash).not.toBe(plain);
  });
});
