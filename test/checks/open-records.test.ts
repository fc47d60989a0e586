import { resolve } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Assessment } from '../../src/assess/types.ts';
import { createEngine, type Engine } from '../../src/engine/engine.ts';
import { readRecording } from '../../src/node/read-recording.ts';

const fixture = (name: string) => resolve(import.meta.dirname, '../fixtures', name);

let engine: Engine;
beforeAll(async () => {
  engine = await createEngine({ threads: 2 });
});
afterAll(() => engine.close());

/**
 * Source: MIT-BIH Arrhythmia Database record 208 (Moody & Mark 2001). Low-dimensional chaos in the heart
 * beat is disputed (Glass 2009, Chaos 19, 028501, from memory), and this record has ectopic beats and
 * artefacts: a confident `chaotic` would overclaim.
 */
describe('electrocardiogram, MIT-BIH 208', () => {
  let assessment: Assessment;
  beforeAll(async () => {
    const { recording } = await readRecording(fixture('ecg-mitbih-208-first-60s.csv'), { unit: 'mV' });
    assessment = await engine.assess(recording);
  });

  it('is read as it was recorded', () => {
    expect(assessment.record.count).toBe(21_600);
    expect(1 / assessment.record.interval).toBeCloseTo(360, 0);
  });

  it('is not called chaotic', () => {
    expect(assessment.regime.call).not.toBe('chaotic');
  });

  it('gets no dimension and no exponent that the evidence does not carry', () => {
    if (assessment.record.stationarity.verdict === 'drifting') {
      expect(assessment.dimension.correlation.ok).toBe(false);
      expect(assessment.exponents.largest.ok).toBe(false);
    }
  });
});

/**
 * Source: Andrews & Herzberg 1985. A noisy nonlinear cycle of about 11 years; claims of a low dimension are
 * disputed, the record is too short and noisy (Schreiber 1998, arXiv chao-dyn/9808005, from memory).
 * Predictability is a few years at best.
 */
describe('monthly sunspot numbers', () => {
  let assessment: Assessment;
  beforeAll(async () => {
    const { recording } = await readRecording(fixture('sunspots-monthly-1749-1983.csv'), {
      timeUnit: 'year',
    });
    assessment = await engine.assess(recording);
  });

  it('is read as monthly', () => {
    expect(assessment.record.count).toBe(2820);
    expect(assessment.record.interval).toBeCloseTo(1 / 12, 6);
    expect(assessment.record.timeUnit).toBe('year');
  });

  it('is not called chaotic, periodic or quasiperiodic', () => {
    expect(['noise', 'inconclusive']).toContain(assessment.regime.call);
  });

  it('gets no dimension', () => {
    expect(assessment.dimension.correlation.ok).toBe(false);
  });

  it('has a lead time of years at most, or none', () => {
    const { trusted, median } = assessment.leadTime;
    if (trusted.ok) expect(trusted.value).toBeLessThan(5);
    if (median.ok) expect(median.value).toBeLessThan(8);
  });
});
