import { cos, exp, sin } from '../base/elementary.ts';
import { createRandom } from '../base/random.ts';
import { simulate } from '../model/simulate.ts';
import type { FunctionModel } from '../model/types.ts';
import type { Recording } from '../recording/types.ts';

/**
 * Three invented records of one test hall. The loop is the main example; its two neighbours look as
 * irregular on a screen and are something else.
 */
export const DEMO_NAMES = ['loop', 'deck', 'gears'] as const;
export type DemoName = (typeof DEMO_NAMES)[number];

export function demoRecord(name: DemoName): Recording {
  return { loop: coolingLoop, deck: pumpDeck, gears: gearPair }[name]();
}

/** Seed of everything random in the demo. */
const SEED = 4;

/**
 * Single-phase natural circulation in a closed loop, heated below and cooled above, reduced to the flow
 * velocity u and the horizontal and vertical temperature differences (Ehrhard & Müller 1990, J. Fluid
 * Mech. 217, 487, with a constant heat-transfer coefficient, which gives the Lorenz form with b = 1).
 * Above its critical heating the flow reverses at irregular times.
 */
const LOOP: FunctionModel = {
  kind: 'flow',
  name: 'natural-circulation loop',
  source: 'Ehrhard & Müller 1990, J. Fluid Mech. 217, 487',
  variables: ['velocity', 'horizontal', 'vertical'],
  parameters: { friction: 10, heating: 28 },
  field([u, h, v], out, _time, { friction, heating }) {
    out[0] = friction! * (h! - u!);
    out[1] = heating! * u! - h! - u! * v!;
    out[2] = u! * h! - v!;
  },
  start: [1, 2, 20],
};

/** Seconds per time unit of the model: a parcel goes once around the loop in about 13 s. */
const LOOP_SECONDS = 20;
/** Kelvin per unit of the model's horizontal temperature difference. */
const LOOP_KELVIN = 0.9;
const LOOP_INTERVAL = 0.25;

/** Temperature difference between the two legs: 4 Hz, 12 bits over ±40 K, sensor noise 0.05 K. */
function coolingLoop(): Recording {
  const samples = 12_000;
  const { horizontal } = simulate(LOOP, { samples, interval: LOOP_INTERVAL / LOOP_SECONDS, transient: 100 });
  const noise = createRandom(SEED, 0);
  return {
    samples: acquire(
      horizontal!.map((h) => LOOP_KELVIN * h + 0.05 * noise.normal()),
      -40,
      40,
      12,
    ),
    interval: LOOP_INTERVAL,
    unit: 'K',
    timeUnit: 's',
    name: 'Cooling loop, temperature difference between the legs',
    resolution: 80 / 4096,
  };
}

/**
 * Vibration of the pump deck: broadband forcing through one resonance of the structure (a damped
 * oscillator at 11 Hz, damping ratio 3 %, driven by white noise). 200 Hz, mm/s, 12 bits.
 */
function pumpDeck(): Recording {
  const samples = 12_000;
  const interval = 0.005;
  const random = createRandom(SEED, 1);
  const omega = 2 * Math.PI * 11;
  const decay = exp(-0.03 * omega * interval);
  const a1 = 2 * decay * cos(omega * Math.sqrt(1 - 0.03 * 0.03) * interval);
  const a2 = -decay * decay;
  const out = new Float64Array(samples);
  let [x1, x2] = [0, 0];
  for (let i = -2000; i < samples; i++) {
    const x = a1 * x1 + a2 * x2 + 0.12 * random.normal();
    [x1, x2] = [x, x1];
    if (i >= 0) out[i] = x;
  }
  return {
    samples: acquire(out, -10, 10, 12),
    interval,
    unit: 'mm/s',
    timeUnit: 's',
    name: 'Pump deck, vibration velocity',
    resolution: 20 / 4096,
  };
}

/**
 * Two gears in mesh: shaft tones of 23.7 Hz and 23.7 / golden ratio Hz with their sum (mesh modulation),
 * incommensurate, with a little sensor noise. 500 Hz, m/s², 12 bits.
 */
function gearPair(): Recording {
  const samples = 12_000;
  const interval = 0.002;
  const random = createRandom(SEED, 2);
  const first = 2 * Math.PI * 23.7 * interval;
  const second = (first * 2) / (1 + Math.sqrt(5));
  const out = Float64Array.from(
    { length: samples },
    (_, i) => 3 * sin(first * i) + 2 * sin(second * i) * (1 + 0.3 * cos(first * i)) + 0.03 * random.normal(),
  );
  return {
    samples: acquire(out, -10, 10, 12),
    interval,
    unit: 'm/s²',
    timeUnit: 's',
    name: 'Gear pair, casing acceleration',
    resolution: 20 / 4096,
  };
}

/** An ideal quantiser of `bits` bits over [low, high), clipped at its ends. */
function acquire(values: Float64Array, low: number, high: number, bits: number): Float64Array {
  const step = (high - low) / 2 ** bits;
  return values.map((value) => {
    const level = Math.round((Math.min(Math.max(value, low), high - step) - low) / step);
    return low + level * step;
  });
}
