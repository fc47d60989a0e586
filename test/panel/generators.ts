import type { RegimeCall } from '../../src/evidence/types.ts';
import * as p from './processes.ts';
import * as s from './systems.ts';

/**
 * What the panel is made of: seeded generators with the calls that are right for them. `noise` and `regular`
 * records must never be called chaotic; `chaos` records should be; `other` have several right answers.
 * `inconclusive` is never wrong, and never counts as found.
 */
export interface Generator {
  readonly name: string;
  readonly group: 'noise' | 'regular' | 'chaos' | 'other';
  readonly make: p.Maker;
  /** Calls that are right beside `inconclusive`. */
  readonly right: readonly RegimeCall[];
  /** Only meaningful from this many samples on. */
  readonly from?: number;
}

const noise = (name: string, make: p.Maker): Generator => ({ name, group: 'noise', make, right: ['noise'] });
const periodic = (name: string, make: p.Maker): Generator => ({
  name,
  group: 'regular',
  make,
  right: ['periodic'],
});
const quasiperiodic = (name: string, make: p.Maker): Generator => ({
  name,
  group: 'regular',
  make,
  right: ['quasiperiodic'],
});
const chaos = (name: string, make: p.Maker): Generator => ({
  name,
  group: 'chaos',
  make,
  right: ['chaotic'],
});
const other = (name: string, make: p.Maker, right: readonly RegimeCall[] = []): Generator => ({
  name,
  group: 'other',
  make,
  right,
});

const GOLDEN = (1 + Math.sqrt(5)) / 2;

export const NOISES: readonly Generator[] = [
  noise('white', p.white),
  noise('AR(1) 0.5', p.autoregressive([0.5])),
  noise('AR(1) 0.9', p.autoregressive([0.9])),
  noise('AR(1) 0.99', p.autoregressive([0.99])),
  noise('resonance 0.9', p.resonance(0.9, 12)),
  noise('resonance 0.97', p.resonance(0.97, 20)),
  noise('resonance 0.995', p.resonance(0.995, 25)),
  noise('1/f^0.5', p.powerLaw(0.5)),
  noise('1/f', p.powerLaw(1)),
  noise('1/f^1.5', p.powerLaw(1.5)),
  noise('1/f^2', p.powerLaw(1.9)),
  noise(
    'cubed AR',
    p.mapped(p.autoregressive([0.8]), (x) => x * x * x),
  ),
  noise(
    'exp AR',
    p.mapped(p.autoregressive([0.9]), (x) => Math.exp(x / 2)),
  ),
  noise(
    'exp resonance',
    p.mapped(p.resonance(0.97, 20), (x) => Math.exp(x / 6)),
  ),
  noise(
    'squared resonance',
    p.mapped(p.resonance(0.97, 20), (x) => x * x),
  ),
  noise('|AR|', p.mapped(p.autoregressive([0.9]), Math.abs)),
  noise(
    'clipped AR',
    p.mapped(p.autoregressive([0.9]), (x) => Math.max(-1.5, Math.min(1.5, x))),
  ),
  noise(
    '8 levels AR',
    p.mapped(p.autoregressive([0.9]), (x) => Math.round(x)),
  ),
  noise('smoothed', p.smoothed(12)),
  noise('telegraph', p.telegraph(25, 1, 0.1)),
  noise('lagged telegraph', p.telegraph(25, 6, 0)),
  noise('changing variance', p.changingVariance),
  noise('cyclostationary', p.cyclostationary(25)),
  noise('bounded walk', p.boundedWalk),
  noise('trended walk', p.trendedWalk),
  noise('noise-driven sine map', p.noiseDrivenSine),
  noise('threshold AR', p.thresholdAutoregression),
  noise('bilinear', p.bilinear),
  noise('shot noise', p.shotNoise(0.05, 0.9)),
  noise('double well', p.doubleWell(0.5, 0.2)),
];

/** Narrow-band linear noise through functions that cannot be undone, or hardly: it bends fits into stretching. */
export const DISTORTED: readonly Generator[] = [
  noise(
    'sine of a resonance',
    p.mapped(p.resonance(0.97, 20), (x) => Math.sin(x / 4)),
  ),
  noise(
    'root of a resonance',
    p.mapped(p.resonance(0.98, 15), (x) => Math.sign(x) * Math.sqrt(Math.abs(x))),
  ),
  noise(
    'bent resonance',
    p.mapped(p.resonance(0.97, 20), (x) => x + 0.2 * x * x),
  ),
  noise(
    'levels of a resonance',
    p.mapped(p.resonance(0.97, 20), (x) => Math.floor(x / 2)),
  ),
];

export const NOISY_CYCLES: readonly Generator[] = [
  other('noisy cycle 0.1', p.noisyCycle(0.1, 0.3), ['periodic', 'noise']),
  other('noisy cycle 0.3', p.noisyCycle(0.3, 0.3), ['periodic', 'noise']),
  other('noisy cycle 0.8', p.noisyCycle(0.8, 0.3), ['noise']),
  other('noisy relaxation 0.3', p.noisyCycle(0.3, 0.4, 4), ['periodic', 'noise']),
];

export const REGULAR: readonly Generator[] = [
  periodic('tone', s.tones([[23.7, 1]])),
  periodic('tone, 10 % noise', s.withNoise(s.tones([[23.7, 1]]), 0.1)),
  periodic('tone, 30 % noise', s.withNoise(s.tones([[23.7, 1]]), 0.3)),
  periodic('tone, 8 bits', s.quantised(s.tones([[23.7, 1]]), 8)),
  periodic(
    'harmonics, 5 % noise',
    s.withNoise(
      s.tones([
        [31.3, 1],
        [31.3 / 2, 0.5],
        [31.3 / 3, 0.4],
      ]),
      0.05,
    ),
  ),
  periodic('Van der Pol', s.flow(s.vanDerPolField(1), [2, 0], 0.3)),
  periodic('relaxation', s.flow(s.vanDerPolField(5), [2, 0], 0.4)),
  periodic('relaxation, 5 % noise', s.withNoise(s.flow(s.vanDerPolField(5), [2, 0], 0.4), 0.05)),
  periodic('Lorenz r = 160', s.flow(s.lorenzField(160), [1, 1, 150], 0.03, 0.002)),
  periodic(
    'Rössler c = 3.5',
    s.flow(s.rosslerField(0.2, 0.2, 3.5), [1, 1, 0], 0.3, 0.02, (x) => x[0]!, 500),
  ),
  periodic(
    'logistic r = 3.55',
    s.map(([x]) => [3.55 * x! * (1 - x!)], [0.4]),
  ),
  quasiperiodic(
    'two tones',
    s.tones([
      [23.7, 1],
      [23.7 * GOLDEN, 0.7],
    ]),
  ),
  quasiperiodic(
    'two tones, 10 % noise',
    s.withNoise(
      s.tones([
        [23.7, 1],
        [23.7 * GOLDEN, 0.7],
      ]),
      0.1,
    ),
  ),
  quasiperiodic(
    'three tones',
    s.tones([
      [13.7, 1],
      [13.7 * GOLDEN, 0.7],
      [13.7 * Math.SQRT2 * 2, 0.6],
    ]),
  ),
  quasiperiodic(
    'three tones, 5 % noise',
    s.withNoise(
      s.tones([
        [13.7, 1],
        [13.7 * GOLDEN, 0.7],
        [13.7 * Math.SQRT2 * 2, 0.6],
      ]),
      0.05,
    ),
  ),
  quasiperiodic('modulated tone', (n, seed) => {
    const [a, b] = [s.tones([[17.3, 1]])(n, seed), s.tones([[17.3 * 2 * GOLDEN, 1]])(n, seed + 77)];
    return a.map((v, i) => v * (1 + 0.5 * b[i]!) + 0.2 * v * v);
  }),
  quasiperiodic(
    'circle map',
    s.map(
      ([t]) => [t! + (GOLDEN - 1) + (0.8 / (2 * Math.PI)) * Math.sin(2 * Math.PI * t!)],
      [0.1],
      ([t]) => Math.sin(2 * Math.PI * t!),
    ),
  ),
];

/** Clean chaos; `withNoise` makes the noisy versions. */
export const CHAOS: readonly Generator[] = [
  chaos(
    'logistic',
    s.map(([x]) => [4 * x! * (1 - x!)], [0.3]),
  ),
  chaos(
    'logistic 3.7',
    s.map(([x]) => [3.7 * x! * (1 - x!)], [0.3]),
  ),
  chaos(
    'Hénon',
    s.map(([x, y]) => [1 - 1.4 * x! * x! + y!, 0.3 * x!], [0.1, 0.1]),
  ),
  chaos(
    'Ikeda',
    s.map(
      ([x, y]) => {
        const phase = 0.4 - 6 / (1 + x! * x! + y! * y!);
        return [
          1 + 0.9 * (x! * Math.cos(phase) - y! * Math.sin(phase)),
          0.9 * (x! * Math.sin(phase) + y! * Math.cos(phase)),
        ];
      },
      [0.1, 0.1],
    ),
  ),
  chaos('Lorenz', s.flow(s.lorenzField(), [1, 1, 20], 0.06)),
  chaos('Lorenz 0.02', s.flow(s.lorenzField(), [1, 1, 20], 0.02)),
  chaos(
    'Lorenz z',
    s.flow(s.lorenzField(), [1, 1, 20], 0.05, 0.01, (x) => x[2]!),
  ),
  chaos('Rössler', s.flow(s.rosslerField(), [1, 1, 0], 0.4, 0.02)),
  chaos('Rössler c = 10', s.flow(s.rosslerField(0.15, 0.2, 10), [1, 1, 0], 0.3, 0.02)),
  chaos('Mackey–Glass 17', s.mackeyGlass(17, 3)),
  chaos('Mackey–Glass 23', s.mackeyGlass(23, 4)),
  chaos('Ueda', s.flow(s.uedaField(0.05, 7.5), [2.5, 0], 0.2, 0.02)),
  chaos('jerk', s.flow(s.jerkField(2.017), [0, 0, 1], 0.4, 0.02)),
  chaos('Chua cubic', s.flow(s.chuaField, [0.6, 0, -0.6], 0.15, 0.01)),
  chaos(
    'generalised Hénon',
    s.map(([x, y, z]) => [1.76 - y! * y! - 0.1 * z!, x!, y!], [0.1, 0.1, 0.1]),
  ),
];

export const OTHERS: readonly Generator[] = [
  other(
    'switch noise to chaos',
    s.switched(p.autoregressive([0.9]), s.flow(s.lorenzField(), [1, 1, 20], 0.06)),
  ),
  other('drifting noise', (n, seed) =>
    p
      .autoregressive([0.9])(n, seed)
      .map((v, i) => v + (8 * i) / n),
  ),
  other(
    'strange, not chaotic',
    s.map(([x, t]) => [3 * Math.tanh(x!) * Math.cos(2 * Math.PI * t!), (t! + GOLDEN - 1) % 1], [0.5, 0.1]),
    ['quasiperiodic'],
  ),
  other(
    'Lorenz-96, 20',
    s.flow(
      s.lorenz96Field(8),
      Array.from({ length: 20 }, (_, i) => Math.sin(3 * i) * 4),
      0.1,
      0.02,
    ),
    ['noise', 'chaotic'],
  ),
];
