import type { Answer } from '../base/answer.ts';
import type { FieldName } from '../base/kernels.ts';

export type Parameters = Readonly<Record<string, number>>;

/** Equations given as functions. They run on the caller's thread, in slices. */
export interface FunctionModel {
  readonly kind: 'flow' | 'map';
  readonly variables: readonly string[];
  readonly parameters?: Parameters;
  /** Writes dx/dt (flow) or the next state (map) of `state` into `out`. */
  field(state: Float64Array, out: Float64Array, time: number, parameters: Parameters): void;
  /** Writes the row-major n × n Jacobian. Without it central differences are used and the result says so. */
  jacobian?(state: Float64Array, out: Float64Array, time: number, parameters: Parameters): void;
  readonly start: readonly number[];
  readonly name?: string;
  readonly source?: string;
}

/** A system of the literature. */
export interface ReferenceModel extends FunctionModel {
  readonly name: string;
  readonly source: string;
  readonly parameters: Parameters;
  /** Published or exact exponents with their source, for documentation and checks. */
  readonly published?: { readonly exponents: readonly number[]; readonly source: string };
  /** The kernel's built-in twin of `field`, with the order of its parameters. */
  readonly kernel?: { readonly field: FieldName; readonly parameters: readonly string[] };
  /** Sensible fixed step, in time units, for flows. */
  readonly step?: number;
  /** A time unit that carries a few samples per cycle, for making records. */
  readonly sampling?: number;
}

/** Reference model by name, or functions. (Text and delay models come later.) */
export type Model = string | { readonly name: string; readonly parameters?: Parameters } | FunctionModel;

export interface ModelSpectrumOptions {
  /** Time units (steps for maps) over which exponents are averaged; default chosen. */
  readonly duration?: number;
  /** Stop when the largest exponent's standard error is below this. */
  readonly standardError?: number;
  /** Time units (steps) left out at the start; default chosen. */
  readonly transient?: number;
  /** Fixed step for flows; default: the model's own, or chosen by step doubling. */
  readonly step?: number;
  /** Number of exponents, largest first; default all. */
  readonly exponents?: number;
}

export interface ModelSpectrum {
  readonly model: string;
  readonly kind: 'flow' | 'map';
  readonly source: string;
  /** Descending, 1 / time unit (per step for maps), each with its interval. */
  readonly exponents: readonly Answer[];
  /** Standard error of each exponent from block averages. */
  readonly standardErrors: readonly number[];
  readonly kaplanYorke: Answer;
  readonly checks: {
    /** Sum of the exponents and the mean divergence of the field along the orbit: must agree. Null when fewer exponents than variables were asked for. */
    readonly sum: number | null;
    readonly meanDivergence: number;
    readonly divergenceAgrees: boolean | null;
    /** The exponent nearest zero for a flow (must be zero within its error off a fixed point); null for maps. */
    readonly zeroExponent: number | null;
    readonly zeroAgrees: boolean | null;
  };
  /** How derivatives were had: 'given', 'kernel' or 'central differences'. */
  readonly derivatives: 'given' | 'kernel' | 'central differences';
  readonly duration: number;
  readonly transient: number;
  readonly step: number | null;
  readonly method: string;
  readonly state: readonly number[];
}
