import { createRandom, type Random } from '../../src/base/random.ts';

/** Random processes that naive tools take for chaos. Each gives `count` samples and is fixed by its seed. */
export type Maker = (count: number, seed: number) => Float64Array;

/** Stream numbers keep the processes of one seed independent. */
export function randomOf(seed: number, stream: number): Random {
  return createRandom(seed, 4000 + stream);
}

const WARM_UP = 2_000;

/** x' = Σ a_k x_{−k} + normal, after a warm-up that forgets the start for every root used here. */
export function autoregressive(coefficients: readonly number[], stream = 1): Maker {
  return (count, seed) => {
    const random = randomOf(seed, stream);
    const past = coefficients.map(() => 0);
    const out = new Float64Array(count);
    for (let i = -WARM_UP; i < count; i++) {
      let x = random.normal();
      for (let k = 0; k < coefficients.length; k++) x += coefficients[k]! * past[k]!;
      past.pop();
      past.unshift(x);
      if (i >= 0) out[i] = x;
    }
    return out;
  };
}

export const white: Maker = autoregressive([]);

/** A pair of complex roots of modulus `decay` and `period` samples: a resonance driven by white noise. */
export function resonance(decay: number, period: number): Maker {
  return autoregressive([2 * decay * Math.cos((2 * Math.PI) / period), -decay * decay], 2);
}

/** Gaussian noise with spectrum f^−a, by filtering in the time domain (Kasdin 1995, Proc. IEEE 83, 802). */
export function powerLaw(a: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 3);
    const n = count + WARM_UP;
    const h = new Float64Array(n);
    h[0] = 1;
    for (let k = 1; k < n; k++) h[k] = (h[k - 1]! * (k - 1 + a / 2)) / k;
    const e = Float64Array.from({ length: n }, () => random.normal());
    const out = new Float64Array(count);
    for (let i = 0; i < count; i++) {
      let sum = 0;
      for (let k = 0; k <= i + WARM_UP; k++) sum += h[k]! * e[i + WARM_UP - k]!;
      out[i] = sum;
    }
    return out;
  };
}

/** A process seen through a static function. */
export function mapped(base: Maker, f: (x: number) => number): Maker {
  return (count, seed) => base(count, seed).map(f);
}

/** Moving average over `width` samples of white noise. */
export function smoothed(width: number): Maker {
  return (count, seed) => {
    const e = white(count + width, seed);
    return Float64Array.from({ length: count }, (_, i) => {
      let sum = 0;
      for (let k = 0; k < width; k++) sum += e[i + k]! * Math.sin((Math.PI * (k + 0.5)) / width);
      return sum;
    });
  };
}

/** Two levels with random switching times of mean `dwell`, plus sensor noise, through a first-order lag. */
export function telegraph(dwell: number, lag: number, noise: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 5);
    let level = 1;
    let x = 0;
    return Float64Array.from({ length: count }, () => {
      if (random.uniform() < 1 / dwell) level = -level;
      x += (level - x) / Math.max(1, lag);
      return x + noise * random.normal();
    });
  };
}

/** Volatility that remembers: variance 0.05 + 0.15 x² + 0.8 variance (Bollerslev 1986, J. Econom. 31, 307). */
export const changingVariance: Maker = (count, seed) => {
  const random = randomOf(seed, 6);
  let variance = 1;
  const out = new Float64Array(count);
  for (let i = -WARM_UP; i < count; i++) {
    const x = Math.sqrt(variance) * random.normal();
    variance = 0.05 + 0.15 * x * x + 0.8 * variance;
    if (i >= 0) out[i] = x;
  }
  return out;
};

/** First-order autoregression whose innovation's strength follows a cycle of `period` samples. */
export function cyclostationary(period: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 7);
    let x = 0;
    return Float64Array.from({ length: count }, (_, i) => {
      x = 0.6 * x + (1 + 0.8 * Math.sin((2 * Math.PI * i) / period)) * random.normal();
      return x;
    });
  };
}

/** A random walk held between walls by reflection. */
export const boundedWalk: Maker = (count, seed) => {
  const random = randomOf(seed, 8);
  let x = 0;
  return Float64Array.from({ length: count }, () => {
    x += random.normal();
    if (x > 20) x = 40 - x;
    if (x < -20) x = -40 - x;
    return x;
  });
};

export const trendedWalk: Maker = (count, seed) => {
  const random = randomOf(seed, 9);
  let x = 0;
  return Float64Array.from({ length: count }, () => (x += 0.1 + random.normal()));
};

/** x' = 2.4 sin x with noise bursts: a map with two stable states driven from one to the other (Freitas et al. 2009, Phys. Rev. E 79, 035201). */
export const noiseDrivenSine: Maker = (count, seed) => {
  const random = randomOf(seed, 10);
  let x = 0.5;
  const out = new Float64Array(count);
  for (let i = -WARM_UP; i < count; i++) {
    const burst = random.uniform() < 0.01 ? 4 * random.uniform() - 2 : 0;
    x = 2.4 * Math.sin(x) + burst;
    if (i >= 0) out[i] = x;
  }
  return out;
};

/** Van der Pol oscillator with noise in its force: a limit cycle whose phase diffuses. `interval` time units a sample. */
export function noisyCycle(strength: number, interval: number, mu = 1): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 11);
    const substeps = Math.max(1, Math.ceil(interval / 0.01));
    const h = interval / substeps;
    let [x, v] = [2, 0];
    const out = new Float64Array(count);
    for (let i = -500; i < count; i++) {
      for (let s = 0; s < substeps; s++) {
        const force = mu * (1 - x * x) * v - x;
        x += h * v;
        v += h * force + strength * Math.sqrt(h) * random.normal();
      }
      if (i >= 0) out[i] = x;
    }
    return out;
  };
}

/** A particle in a double well kicked by noise (overdamped). */
export function doubleWell(strength: number, interval: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 12);
    const substeps = Math.max(1, Math.ceil(interval / 0.02));
    const h = interval / substeps;
    let x = 1;
    const out = new Float64Array(count);
    for (let i = -500; i < count; i++) {
      for (let s = 0; s < substeps; s++) x += h * (x - x * x * x) + strength * Math.sqrt(h) * random.normal();
      if (i >= 0) out[i] = x;
    }
    return out;
  };
}

/** Two linear regimes by the sign of the last value (Tong & Lim 1980, J. R. Stat. Soc. B 42, 245). */
export const thresholdAutoregression: Maker = (count, seed) => {
  const random = randomOf(seed, 13);
  let x = 0;
  const out = new Float64Array(count);
  for (let i = -WARM_UP; i < count; i++) {
    x = (x > 0 ? -0.7 : 0.8) * x + 0.5 * (x > 0 ? 1 : -1) + random.normal();
    if (i >= 0) out[i] = x;
  }
  return out;
};

/** x = e·(0.8 x₋₁) + 0.4 x₋₁ + e: bilinear (Granger & Andersen 1978). */
export const bilinear: Maker = (count, seed) => {
  const random = randomOf(seed, 14);
  let x = 0;
  const out = new Float64Array(count);
  for (let i = -WARM_UP; i < count; i++) {
    const e = 0.5 * random.normal();
    x = 0.4 * x + 0.8 * x * e + e;
    if (i >= 0) out[i] = x;
  }
  return out;
};

/** Decaying pulses at random times (shot noise): asymmetric, far from Gaussian. */
export function shotNoise(rate: number, decay: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 15);
    let x = 0;
    const out = new Float64Array(count);
    for (let i = -WARM_UP; i < count; i++) {
      x *= decay;
      if (random.uniform() < rate) x += 0.5 + random.uniform();
      if (i >= 0) out[i] = x;
    }
    return out;
  };
}
