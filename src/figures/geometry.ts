import type { Assessment } from '../assess/types.ts';
import { axisTitle, COLOURS, type FigureSpec, figure } from './theme.ts';

/** Growth of small differences on a logarithmic axis, with the straight part used. */
export function divergenceFigure(assessment: Assessment): FigureSpec | null {
  const { curve } = assessment.exponents;
  if (curve === null || curve.time.length === 0) return null;
  const { record } = assessment;
  const rows = curve.time.flatMap((time, i) => [
    { time, log: curve.nearest[i], line: 'nearest neighbours' },
    ...(curve.neighbourhood[i] === null || curve.neighbourhood[i] === undefined
      ? []
      : [{ time, log: curve.neighbourhood[i], line: 'neighbourhoods' }]),
  ]);
  const layers: unknown[] = [
    {
      data: { values: rows },
      mark: { type: 'line', strokeWidth: 2 },
      encoding: {
        x: { field: 'time', type: 'quantitative', title: axisTitle('Time apart', record.timeUnit) },
        y: {
          field: 'log',
          type: 'quantitative',
          title: `ln of mean distance${record.unit ? ` [ln ${record.unit}]` : ''}`,
          scale: { zero: false },
        },
        color: {
          field: 'line',
          type: 'nominal',
          title: null,
          scale: { domain: ['nearest neighbours', 'neighbourhoods'], range: [COLOURS.record, COLOURS.soft] },
        },
      },
    },
    {
      data: { values: [{ ceiling: curve.ceiling }] },
      mark: { type: 'rule', color: COLOURS.ink, strokeDash: [2, 3] },
      encoding: { y: { field: 'ceiling', type: 'quantitative' } },
    },
  ];
  const { fit } = curve;
  if (fit)
    layers.push({
      data: { values: [fit.from, fit.to].map((time) => ({ time, log: fit.intercept + fit.slope * time })) },
      mark: { type: 'line', color: COLOURS.warm, strokeWidth: 3, strokeDash: [6, 3] },
      encoding: { x: { field: 'time', type: 'quantitative' }, y: { field: 'log', type: 'quantitative' } },
    });
  return figure(
    'How small differences grow: mean logarithm of the distance of neighbouring states against the time since they were close. ' +
      `The dotted line is the distance of unrelated states. ${fit ? `The straight part used has a slope of ${fit.slope.toPrecision(3)} per ${record.timeUnit}.` : 'No straight part was found.'}`,
    { layer: layers },
  );
}

/** Local slope of the correlation sum by distance, one line per embedding dimension, with the region used. */
export function dimensionFigure(assessment: Assessment): FigureSpec | null {
  const { curve } = assessment.dimension;
  if (curve === null || curve.radius.length === 0) return null;
  const { record } = assessment;
  const rows = curve.slopes.flatMap(({ dimension, value }) =>
    value.flatMap((slope, i) => (slope === null ? [] : [{ radius: curve.radius[i], slope, dimension }])),
  );
  if (rows.length === 0) return null;
  const layers: unknown[] = [
    {
      data: { values: rows },
      mark: { type: 'line', strokeWidth: 1.5 },
      encoding: {
        x: {
          field: 'radius',
          type: 'quantitative',
          scale: { type: 'log' },
          title: axisTitle('Distance', record.unit),
          axis: { labelOverlap: true },
        },
        y: { field: 'slope', type: 'quantitative', title: 'Local slope' },
        detail: { field: 'dimension', type: 'nominal' },
        color: {
          field: 'dimension',
          type: 'quantitative',
          title: 'Embedding dimension',
          scale: { range: [COLOURS.pale, COLOURS.record] },
          legend: { gradientLength: 120 },
        },
      },
    },
  ];
  if (curve.region)
    layers.unshift({
      data: { values: [curve.region] },
      mark: { type: 'rect', color: COLOURS.warm, opacity: 0.15 },
      encoding: { x: { field: 'low', type: 'quantitative', scale: { type: 'log' } }, x2: { field: 'high' } },
    });
  const answer = assessment.dimension.correlation;
  return figure(
    `Local slope of the correlation sum against distance, one line per embedding dimension; a plateau shared by several lines is the dimension. ${
      answer.ok ? `The plateau is at ${answer.value.toPrecision(3)}.` : `None was accepted: ${answer.why}`
    }`,
    { layer: layers },
  );
}

/** The record against itself one delay later. */
export function portraitFigure(assessment: Assessment): FigureSpec | null {
  if (assessment.data === null || 'ok' in assessment.reconstruction) return null;
  const { x, y, delay } = assessment.data.portrait;
  const { record } = assessment;
  const map = assessment.reconstruction.dynamics === 'map';
  return figure(
    `State-space picture: the record against itself ${Number(delay.toPrecision(3))} ${record.timeUnit} later.`,
    {
      width: 360,
      height: 360,
      data: { values: x.map((value, i) => ({ now: value, later: y[i], order: i })) },
      mark: map
        ? { type: 'circle', size: 5, color: COLOURS.record, opacity: 0.6 }
        : { type: 'line', strokeWidth: 0.5, color: COLOURS.record, opacity: 0.8 },
      encoding: {
        x: {
          field: 'now',
          type: 'quantitative',
          title: axisTitle('x(t)', record.unit),
          scale: { zero: false },
        },
        y: {
          field: 'later',
          type: 'quantitative',
          title: axisTitle('x(t + delay)', record.unit),
          scale: { zero: false },
        },
        ...(map ? {} : { order: { field: 'order', type: 'quantitative' } }),
      },
    },
  );
}
