import type { Assessment } from '../assess/types.ts';
import { axisTitle, COLOURS, type FigureSpec, figure } from './theme.ts';

/** The record (thinned). */
export function recordFigure(assessment: Assessment): FigureSpec | null {
  if (assessment.data === null) return null;
  const { time, value, thinning } = assessment.data.record;
  const { record } = assessment;
  return figure(`The record: ${record.count} samples${thinning > 1 ? `, every ${thinning}th drawn` : ''}.`, {
    height: 150,
    data: { values: time.map((t, i) => ({ time: t, value: value[i] })) },
    mark: { type: 'line', strokeWidth: 0.8, color: COLOURS.record, invalid: 'break-paths-show-path-domains' },
    encoding: {
      x: { field: 'time', type: 'quantitative', title: axisTitle('Time', record.timeUnit) },
      y: {
        field: 'value',
        type: 'quantitative',
        title: axisTitle('Value', record.unit),
        scale: { zero: false },
      },
    },
  });
}

/** Mutual information by lag with the delay chosen. */
export function delayFigure(assessment: Assessment): FigureSpec | null {
  if ('ok' in assessment.reconstruction) return null;
  const { curves, delay } = assessment.reconstruction;
  const { record } = assessment;
  if (curves.mutualInformation.lag.length < 2) return null;
  return figure(
    `Mutual information against lag; the delay chosen is ${Number(delay.time.toPrecision(3))} ${record.timeUnit} (${delay.method}).`,
    {
      height: 170,
      layer: [
        {
          data: {
            values: curves.mutualInformation.lag.map((lag, i) => ({
              lag: lag * record.interval,
              bits: curves.mutualInformation.bits[i],
            })),
          },
          mark: { type: 'line', color: COLOURS.record, strokeWidth: 2 },
          encoding: {
            x: { field: 'lag', type: 'quantitative', title: axisTitle('Lag', record.timeUnit) },
            y: { field: 'bits', type: 'quantitative', title: 'Mutual information [bit]' },
          },
        },
        {
          data: { values: [{ lag: delay.time }] },
          mark: { type: 'rule', color: COLOURS.warm, strokeWidth: 2 },
          encoding: { x: { field: 'lag', type: 'quantitative' } },
        },
      ],
    },
  );
}

/** False neighbours by embedding dimension with the dimension chosen. */
export function embeddingFigure(assessment: Assessment): FigureSpec | null {
  if ('ok' in assessment.reconstruction) return null;
  const { curves, delaysPerChannel } = assessment.reconstruction;
  const { dimension, fraction } = curves.falseNeighbours;
  const rows = dimension.flatMap((m, i) =>
    fraction[i] === null ? [] : [{ dimension: m, percent: fraction[i]! * 100 }],
  );
  if (rows.length === 0) return null;
  return figure(
    `Share of false neighbours against the number of delay coordinates; ${delaysPerChannel} were chosen.`,
    {
      height: 170,
      layer: [
        {
          data: { values: rows },
          mark: {
            type: 'line',
            color: COLOURS.record,
            strokeWidth: 2,
            point: { color: COLOURS.record, size: 40 },
          },
          encoding: {
            x: {
              field: 'dimension',
              type: 'quantitative',
              title: 'Delay coordinates',
              axis: { tickMinStep: 1 },
              scale: { zero: false },
            },
            y: { field: 'percent', type: 'quantitative', title: 'False neighbours [%]' },
          },
        },
        {
          data: { values: [{ dimension: delaysPerChannel }] },
          mark: { type: 'rule', color: COLOURS.warm, strokeWidth: 2 },
          encoding: { x: { field: 'dimension', type: 'quantitative' } },
        },
      ],
    },
  );
}
