import { badInput } from '../base/errors.ts';
import type {
  CorrelationInput,
  DivergenceInput,
  FieldName,
  FlowInput,
  HalfSpectrum,
  JointCountsInput,
  NeighbourhoodDivergenceInput,
  SurrogateInput,
} from '../base/kernels.ts';
import {
  allFinite,
  choice,
  finite,
  float64Array,
  inRange,
  int32Array,
  isSmooth,
  notNegative,
  object,
  rowEnds,
  span,
  uint8Array,
  whole,
} from './checks.ts';

export function checkCorrelation(input: CorrelationInput): void {
  object('input', input);
  const { series, valid, delay, dimensions, exclusion, smallestExponent } = input;
  float64Array('series', series);
  whole('delay', delay, 1);
  whole('dimensions', dimensions, 1, 32);
  const length = series.length - (dimensions - 1) * delay;
  if (length < 0) badInput('series', `of length ${(dimensions - 1) * delay} or more`, series);
  uint8Array('valid', valid, length);
  whole('exclusion', exclusion, 0);
  // All 64 edges are normal doubles: the largest is below 2^(smallestExponent + 16).
  whole('smallestExponent', smallestExponent, -1022, 1007);
  for (let t = 0; t < length; t++) if (valid[t]! > 1) badInput(`valid[${t}]`, '0 or 1', valid[t]);
  if (allFinite(series)) return;
  for (let t = 0; t < length; t++)
    if (valid[t] === 1)
      for (let d = 0; d < dimensions; d++)
        if (!Number.isFinite(series[t + d * delay]!))
          badInput(
            `series[${t + d * delay}]`,
            `finite (valid[${t}] says the vector is complete)`,
            series[t + d * delay],
          );
}

export function checkReferences(references: Int32Array, { valid }: CorrelationInput): void {
  int32Array('references', references);
  inRange('references', references, 0, valid.length - 1);
  for (let i = 0; i < references.length; i++)
    if (valid[references[i]!] !== 1)
      badInput(`references[${i}]`, 'a start that `valid` marks 1', references[i]);
}

export function checkJointCounts(input: JointCountsInput): void {
  object('input', input);
  const { symbols, bins, lags } = input;
  uint8Array('symbols', symbols);
  whole('bins', bins, 2, 128);
  int32Array('lags', lags);
  inRange('lags', lags, 0, 2 ** 31 - 1);
  for (let t = 0; t < symbols.length; t++)
    if (symbols[t]! >= bins && symbols[t] !== 255)
      badInput(`symbols[${t}]`, `from 0 to ${bins - 1}, or 255 for a missing sample`, symbols[t]);
}

export function checkDivergence(input: DivergenceInput): void {
  object('input', input);
  const { data, first, second, lengths, offsets, steps, blockStarts } = input;
  float64Array('data', data);
  int32Array('first', first);
  int32Array('second', second, first.length);
  int32Array('lengths', lengths, first.length);
  int32Array('offsets', offsets);
  if (offsets.length === 0) badInput('offsets', 'of length 1 or more', offsets);
  whole('steps', steps, 0);
  inRange('lengths', lengths, 0, steps);
  int32Array('blockStarts', blockStarts);
  rowEnds('blockStarts', blockStarts, first.length);
  const runs = presentUntil(data);
  checkRuns('first', data, runs, first, lengths, offsets);
  checkRuns('second', data, runs, second, lengths, offsets);
}

export function checkNeighbourhoodDivergence(input: NeighbourhoodDivergenceInput): void {
  object('input', input);
  const { data, references, rowStarts, neighbours, lengths, steps, blockStarts } = input;
  float64Array('data', data);
  int32Array('references', references);
  int32Array('rowStarts', rowStarts, references.length + 1);
  int32Array('neighbours', neighbours);
  int32Array('lengths', lengths, neighbours.length);
  whole('steps', steps, 0);
  inRange('lengths', lengths, 0, steps);
  rowEnds('rowStarts', rowStarts, neighbours.length);
  int32Array('blockStarts', blockStarts);
  rowEnds('blockStarts', blockStarts, references.length);
  const runs = presentUntil(data);
  const self = Int32Array.of(0);
  checkRuns('neighbours', data, runs, neighbours, lengths, self);
  const longest = new Int32Array(references.length);
  for (let r = 0; r < references.length; r++)
    longest[r] = span(lengths.subarray(rowStarts[r]!, rowStarts[r + 1]!)).high;
  checkRuns('references', data, runs, references, longest, self);
}

/** For each position the first missing sample from there on (the length when none); undefined: none at all. */
function presentUntil(data: Float64Array): Int32Array | undefined {
  if (allFinite(data)) return undefined;
  const until = new Int32Array(data.length);
  let next = data.length;
  for (let t = data.length - 1; t >= 0; t--) {
    if (!Number.isFinite(data[t]!)) next = t;
    until[t] = next;
  }
  return until;
}

/** start + offset + 0 … length inside `data`, with no missing sample on the way. */
function checkRuns(
  field: string,
  data: Float64Array,
  runs: Int32Array | undefined,
  starts: Int32Array,
  lengths: Int32Array,
  offsets: Int32Array,
): void {
  const { low, high } = span(offsets);
  for (let i = 0; i < starts.length; i++) {
    const start = starts[i]!;
    const end = start + lengths[i]!;
    if (start < 0 || start + low < 0 || end + high >= data.length)
      badInput(
        `${field}[${i}]`,
        `followed for ${lengths[i]} steps inside data of length ${data.length}`,
        start,
      );
    if (runs)
      for (let d = 0; d < offsets.length; d++)
        if (runs[start + offsets[d]!]! <= end + offsets[d]!)
          badInput(`${field}[${i}]`, `followed for ${lengths[i]} steps without a missing sample`, start);
  }
}

export function checkMatrix(matrix: Float64Array, rows: number, columns: number): void {
  whole('rows', rows, 1);
  whole('columns', columns, 1);
  float64Array('matrix', matrix, rows * columns);
  finite('matrix', matrix);
}

/** Parameters and states of the built-in fields, in the order documented in `src/model/`. */
const FIELDS: Readonly<Record<FieldName, { readonly parameters: number; readonly states: number | 'any' }>> =
  {
    lorenz: { parameters: 3, states: 3 },
    rossler: { parameters: 3, states: 3 },
    'hyperchaotic-rossler': { parameters: 4, states: 4 },
    chua: { parameters: 4, states: 3 },
    ueda: { parameters: 2, states: 3 },
    'quadratic-jerk': { parameters: 1, states: 3 },
    'lorenz-96': { parameters: 1, states: 'any' },
  };

export function checkFlow(input: FlowInput): void {
  object('input', input);
  const { field, parameters, state, tangents, tangentCount, step, stepsPerBlock, blocks } = input;
  choice('field', field, Object.keys(FIELDS));
  const shape = FIELDS[field];
  float64Array('parameters', parameters, shape.parameters);
  finite('parameters', parameters);
  float64Array('state', state, shape.states === 'any' ? undefined : shape.states);
  // The ring of Lorenz 1996 couples i − 2, i − 1, i, i + 1: four sites at least.
  if (state.length < 3 || (shape.states === 'any' && state.length < 4))
    badInput('state', 'of length 4 or more', state);
  finite('state', state);
  whole('tangentCount', tangentCount, 0, state.length);
  float64Array('tangents', tangents, state.length * tangentCount);
  finite('tangents', tangents);
  notNegative('step', typeof step === 'number' ? Math.abs(step) : step);
  if (step === 0) badInput('step', 'other than 0', step);
  whole('stepsPerBlock', stepsPerBlock, 1);
  whole('blocks', blocks, 0);
}

function checkSmooth(field: string, takes: string, got: unknown, length: number, least: number): void {
  if (length < least || !isSmooth(length)) badInput(field, `${takes} 2^a·3^b·5^c, at least ${least}`, got);
}

export function checkSeries(series: Float64Array): void {
  float64Array('series', series);
  checkSmooth('series', 'of length', series, series.length, 2);
  finite('series', series);
}

export function checkSpectrum(spectrum: HalfSpectrum, length: number): void {
  whole('length', length, 2);
  checkSmooth('length', 'of the form', length, length, 2);
  object('spectrum', spectrum);
  const bins = Math.floor(length / 2) + 1;
  float64Array('spectrum.real', spectrum.real, bins);
  float64Array('spectrum.imaginary', spectrum.imaginary, bins);
  finite('spectrum.real', spectrum.real);
  finite('spectrum.imaginary', spectrum.imaginary);
}

export function checkSurrogate(input: SurrogateInput): void {
  object('input', input);
  const { values, permutation, iterations } = input;
  float64Array('values', values);
  checkSmooth('values', 'of length', values, values.length, 8);
  finite('values', values);
  int32Array('permutation', permutation, values.length);
  inRange('permutation', permutation, 0, values.length - 1);
  const seen = new Uint8Array(values.length);
  for (let i = 0; i < permutation.length; i++) {
    if (seen[permutation[i]!] === 1)
      badInput(`permutation[${i}]`, 'an ordinal not listed before', permutation[i]);
    seen[permutation[i]!] = 1;
  }
  whole('iterations', iterations, 1);
}
