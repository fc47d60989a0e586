import type { Assessment } from '../assess/types.ts';
import { COLOURS, type FigureSpec, figure } from './theme.ts';

/** The surrogates' statistic as ticks, the record's as a marker. Null when the test was refused. */
export function surrogateFigure(assessment: Assessment): FigureSpec | null {
  const test = assessment.evidence.nullTest;
  if ('ok' in test) return null;
  const p = test.pValue.toFixed(3);
  return figure(
    `${test.statistic}: ${test.record.toPrecision(3)} for the record, ${Math.min(...test.surrogates).toPrecision(3)} to ` +
      `${Math.max(...test.surrogates).toPrecision(3)} for ${test.surrogates.length} surrogates of linear noise (p = ${p}). ` +
      `Linear noise is ${test.rejected ? 'rejected' : 'not rejected'}.`,
    {
      height: 90,
      layer: [
        {
          data: { values: test.surrogates.map((value) => ({ value })) },
          mark: { type: 'tick', thickness: 1.5, size: 46, color: COLOURS.soft },
          encoding: {
            x: {
              field: 'value',
              type: 'quantitative',
              title: capital(test.statistic),
              scale: { zero: false },
            },
          },
        },
        {
          data: { values: [{ value: test.record, text: 'record' }] },
          layer: [
            { mark: { type: 'rule', color: COLOURS.record, strokeWidth: 3 } },
            {
              mark: { type: 'text', align: 'left', dx: 6, y: 10, color: COLOURS.record, fontSize: 11 },
              encoding: { text: { field: 'text' } },
            },
          ],
          encoding: { x: { field: 'value', type: 'quantitative' } },
        },
      ],
    },
  );
}

const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);
