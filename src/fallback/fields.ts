import { cos, sin } from '../base/elementary.ts';
import type { FieldName } from '../base/kernels.ts';

/**
 * Vector fields built into the kernels, with the action of their Jacobian on tangent vectors (rows =
 * components, columns = tangents) and their divergence. Twin of `assembly/fields.ts`, operation by operation.
 */
export interface Field {
  derivative(s: Float64Array, out: Float64Array, p: Float64Array): void;
  /** out = J(s) · t for the row-major n × c matrix t. */
  tangent(s: Float64Array, t: Float64Array, out: Float64Array, c: number, p: Float64Array): void;
  divergence(s: Float64Array, p: Float64Array): number;
}

/** Lorenz 1963; parameters σ, ρ, β. */
const lorenz: Field = {
  derivative(s, out, p) {
    const x = s[0]!,
      y = s[1]!,
      z = s[2]!;
    out[0] = p[0]! * (y - x);
    out[1] = x * (p[1]! - z) - y;
    out[2] = x * y - p[2]! * z;
  },
  tangent(s, t, out, c, p) {
    const x = s[0]!,
      y = s[1]!,
      z = s[2]!;
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        w = t[2 * c + j]!;
      out[j] = p[0]! * (v - u);
      out[c + j] = (p[1]! - z) * u - v - x * w;
      out[2 * c + j] = y * u + x * v - p[2]! * w;
    }
  },
  divergence: (_s, p) => -p[0]! - 1 - p[2]!,
};

/** Rössler 1976; parameters a, b, c. */
const rossler: Field = {
  derivative(s, out, p) {
    const x = s[0]!,
      y = s[1]!,
      z = s[2]!;
    out[0] = -y - z;
    out[1] = x + p[0]! * y;
    out[2] = p[1]! + z * (x - p[2]!);
  },
  tangent(s, t, out, c, p) {
    const x = s[0]!,
      z = s[2]!;
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        w = t[2 * c + j]!;
      out[j] = -v - w;
      out[c + j] = u + p[0]! * v;
      out[2 * c + j] = z * u + (x - p[2]!) * w;
    }
  },
  divergence: (s, p) => p[0]! + (s[0]! - p[2]!),
};

/** Rössler 1979, hyperchaos; parameters a, b, c, d. */
const hyperchaoticRossler: Field = {
  derivative(s, out, p) {
    const x = s[0]!,
      y = s[1]!,
      z = s[2]!,
      w = s[3]!;
    out[0] = -y - z;
    out[1] = x + p[0]! * y + w;
    out[2] = p[1]! + x * z;
    out[3] = p[2]! * w - p[3]! * z;
  },
  tangent(s, t, out, c, p) {
    const x = s[0]!,
      z = s[2]!;
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        a = t[2 * c + j]!,
        b = t[3 * c + j]!;
      out[j] = -v - a;
      out[c + j] = u + p[0]! * v + b;
      out[2 * c + j] = z * u + x * a;
      out[3 * c + j] = p[2]! * b - p[3]! * a;
    }
  },
  divergence: (s, p) => p[0]! + s[0]! + p[2]!,
};

/** Chua's circuit with a piecewise linear element (Matsumoto 1984); parameters α, β, m₀ (inner), m₁ (outer). */
const chua: Field = {
  derivative(s, out, p) {
    const x = s[0]!,
      y = s[1]!,
      z = s[2]!;
    const f = p[3]! * x + 0.5 * (p[2]! - p[3]!) * (Math.abs(x + 1) - Math.abs(x - 1));
    out[0] = p[0]! * (y - x - f);
    out[1] = x - y + z;
    out[2] = -p[1]! * y;
  },
  tangent(s, t, out, c, p) {
    const slope = Math.abs(s[0]!) < 1 ? p[2]! : p[3]!;
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        w = t[2 * c + j]!;
      out[j] = p[0]! * (v - u - slope * u);
      out[c + j] = u - v + w;
      out[2 * c + j] = -p[1]! * v;
    }
  },
  divergence: (s, p) => -p[0]! * (1 + (Math.abs(s[0]!) < 1 ? p[2]! : p[3]!)) - 1,
};

/** Ueda 1979, x'' + k x' + x³ = B cos θ, θ' = 1; parameters k, B; state x, x', θ. */
const ueda: Field = {
  derivative(s, out, p) {
    const x = s[0]!,
      v = s[1]!;
    out[0] = v;
    out[1] = p[1]! * cos(s[2]!) - p[0]! * v - x * x * x;
    out[2] = 1;
  },
  tangent(s, t, out, c, p) {
    const x = s[0]!;
    const force = p[1]! * sin(s[2]!);
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        w = t[2 * c + j]!;
      out[j] = v;
      out[c + j] = -3 * x * x * u - p[0]! * v - force * w;
      out[2 * c + j] = 0;
    }
  },
  divergence: (_s, p) => -p[0]!,
};

/** Sprott 1997, x''' + A x'' − x'² + x = 0; parameter A; state x, x', x''. */
const quadraticJerk: Field = {
  derivative(s, out, p) {
    const v = s[1]!;
    out[0] = v;
    out[1] = s[2]!;
    out[2] = -p[0]! * s[2]! + v * v - s[0]!;
  },
  tangent(s, t, out, c, p) {
    const v2 = 2 * s[1]!;
    for (let j = 0; j < c; j++) {
      const u = t[j]!,
        v = t[c + j]!,
        w = t[2 * c + j]!;
      out[j] = v;
      out[c + j] = w;
      out[2 * c + j] = -p[0]! * w + v2 * v - u;
    }
  },
  divergence: (_s, p) => -p[0]!,
};

/** Lorenz 1996, x_i' = (x_{i+1} − x_{i−2}) x_{i−1} − x_i + F on a ring; parameter F. */
const lorenz96: Field = {
  derivative(s, out, p) {
    const n = s.length;
    for (let i = 0; i < n; i++) {
      const next = i + 1 < n ? i + 1 : 0;
      const back = i >= 1 ? i - 1 : n - 1;
      const back2 = i >= 2 ? i - 2 : n + i - 2;
      out[i] = (s[next]! - s[back2]!) * s[back]! - s[i]! + p[0]!;
    }
  },
  tangent(s, t, out, c) {
    const n = s.length;
    for (let i = 0; i < n; i++) {
      const next = i + 1 < n ? i + 1 : 0;
      const back = i >= 1 ? i - 1 : n - 1;
      const back2 = i >= 2 ? i - 2 : n + i - 2;
      const b = s[back]!;
      const g = s[next]! - s[back2]!;
      for (let j = 0; j < c; j++)
        out[i * c + j] = b * (t[next * c + j]! - t[back2 * c + j]!) + g * t[back * c + j]! - t[i * c + j]!;
    }
  },
  divergence: (s) => -s.length,
};

export const FIELDS: Readonly<Record<FieldName, Field>> = {
  lorenz,
  rossler,
  'hyperchaotic-rossler': hyperchaoticRossler,
  chua,
  ueda,
  'quadratic-jerk': quadraticJerk,
  'lorenz-96': lorenz96,
};
