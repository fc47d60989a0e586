import { readFileSync } from 'node:fs';
import { resolve } from 'node:path';
import Ajv from 'ajv';
import { beforeAll, describe, expect, it } from 'vitest';
import { assess } from '../../src/assess/assess.ts';
import type { Assessment } from '../../src/assess/types.ts';
import { REFUSAL_CODES } from '../../src/base/answer.ts';
import { referenceModel } from '../../src/model/reference.ts';
import { simulate } from '../../src/model/simulate.ts';
import { openCompute } from '../geometry/compute.ts';

const schema = JSON.parse(
  readFileSync(resolve(import.meta.dirname, '../../dist/assessment.schema.json'), 'utf8'),
);
const validate = new Ajv({ strict: false }).compile(schema);

/** Every object in a tree. */
function* objects(value: unknown): Generator<Record<string, unknown>> {
  if (typeof value !== 'object' || value === null) return;
  if (!Array.isArray(value)) yield value as Record<string, unknown>;
  for (const inner of Object.values(value)) yield* objects(inner);
}

function* numbers(value: unknown): Generator<number> {
  if (typeof value === 'number') yield value;
  else if (typeof value === 'object' && value !== null)
    for (const inner of Object.values(value)) yield* numbers(inner);
}

const lorenz = simulate(referenceModel('lorenz'), { samples: 1500, interval: 0.05, transient: 20 });
const tone = Float64Array.from({ length: 900 }, (_, t) => Math.sin(t / 3));
const records = {
  chaos: { samples: lorenz.x!, interval: 0.05 },
  'two channels with a gap': {
    samples: [lorenz.x!, lorenz.z!.map((v, i) => (i > 500 && i < 520 ? Number.NaN : v))],
    interval: 0.05,
    target: 1,
  },
  'a tone': { samples: tone, interval: 1 },
  'a constant': { samples: new Float64Array(500).fill(3), interval: 1 },
  'one sample': { samples: [1], interval: 1 },
  '200 samples': { samples: tone.slice(0, 200), interval: 1 },
  'a stuck sensor': { samples: tone.map((v, t) => (t > 400 ? tone[400]! : v)), interval: 1 },
  'a clipped sensor': { samples: tone.map((v) => Math.max(-0.5, Math.min(0.5, v))), interval: 1 },
  '1e308 values': { samples: tone.map((v) => v * 1e308), interval: 1 },
  'all missing': { samples: new Float64Array(400).fill(Number.NaN), interval: 1 },
} as const;

describe.each(Object.entries(records))('the assessment of %s', (_name, recording) => {
  let assessment: Assessment;
  beforeAll(async () => {
    assessment = await assess(recording, {}, await openCompute(), { backend: 'wasm-simd', threads: 0 });
  });

  it('fits the schema that is shipped', () => {
    expect(validate(assessment), JSON.stringify(validate.errors?.slice(0, 3))).toBe(true);
  });

  it('is plain JSON without NaN or Infinity', () => {
    expect(JSON.parse(JSON.stringify(assessment))).toEqual(assessment);
    for (const number of numbers(assessment)) expect(Number.isFinite(number)).toBe(true);
  });

  it('answers with findings in their intervals or refusals of the closed set', () => {
    let answers = 0;
    for (const object of objects(assessment)) {
      if (typeof object.ok !== 'boolean') continue;
      answers++;
      if (object.ok) {
        const { low, value, high, level } = object as Record<string, number>;
        const { unit, method } = object as Record<string, string>;
        expect(low! <= value! && value! <= high!).toBe(true);
        expect(level! > 0 && level! < 1).toBe(true);
        expect(unit).toBeTypeOf('string');
        expect(method).toBeTruthy();
      } else {
        expect(Object.keys(REFUSAL_CODES)).toContain(object.code);
        expect(object.why).toBeTruthy();
        expect(object.remedy).toBeTruthy();
      }
    }
    expect(answers).toBeGreaterThan(8);
  });
});
