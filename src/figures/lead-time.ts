import type { Assessment } from '../assess/types.ts';
import { axisTitle, COLOURS, type FigureSpec, figure } from './theme.ts';

/** Forecast error by lead with the tolerance and the lead time. Null when no forecast was made. */
export function errorGrowthFigure(assessment: Assessment): FigureSpec | null {
  const { leadTime, record } = assessment;
  if (leadTime.curve.length === 0) return null;
  const { trusted, tolerance } = leadTime;
  const share = Math.round(leadTime.confidence * 100);
  const rows = leadTime.curve.flatMap((p) => [
    { lead: p.lead, error: p.median, line: 'half of the forecasts' },
    { lead: p.lead, error: p.quantile90, line: 'nine in ten forecasts' },
  ]);
  const layers: unknown[] = [
    {
      data: { values: rows },
      mark: { type: 'line', strokeWidth: 2 },
      encoding: {
        x: { field: 'lead', type: 'quantitative', title: axisTitle('Lead', record.timeUnit) },
        y: { field: 'error', type: 'quantitative', title: axisTitle('Error below', record.unit) },
        color: {
          field: 'line',
          type: 'nominal',
          title: null,
          scale: {
            domain: ['half of the forecasts', 'nine in ten forecasts'],
            range: [COLOURS.soft, COLOURS.record],
          },
        },
      },
    },
    {
      data: { values: [{ tolerance }] },
      mark: { type: 'rule', color: COLOURS.warm, strokeDash: [5, 3] },
      encoding: { y: { field: 'tolerance', type: 'quantitative' } },
    },
  ];
  if (trusted.ok) {
    const at = trusted.bound === 'lower' ? trusted.low : trusted.value;
    layers.push(
      {
        data: { values: [{ from: trusted.low, to: trusted.high }] },
        mark: { type: 'rect', color: COLOURS.warm, opacity: 0.15 },
        encoding: { x: { field: 'from', type: 'quantitative' }, x2: { field: 'to' } },
      },
      {
        data: { values: [{ at, text: 'lead time' }] },
        layer: [
          { mark: { type: 'rule', color: COLOURS.warm, strokeWidth: 2 } },
          {
            mark: { type: 'text', align: 'left', dx: 5, y: 8, color: COLOURS.warm, fontSize: 11 },
            encoding: { text: { field: 'text' } },
          },
        ],
        encoding: { x: { field: 'at', type: 'quantitative' } },
      },
    );
  }
  const end = trusted.ok
    ? `The lead time is ${trusted.bound === 'lower' ? 'at least ' : ''}${round(trusted.bound === 'lower' ? trusted.low : trusted.value)} ${record.timeUnit}.`
    : `No lead time: ${trusted.why}`;
  return figure(
    `Forecast error against lead. The dashed line is the tolerance, ${round(tolerance)} ${record.unit}; the lead time is where a path of ${share} in 100 forecasts first leaves it. ${end}`,
    { layer: layers },
  );
}

/** Root mean square error of the forecast beside persistence, climatology and a linear model. */
export function skillFigure(assessment: Assessment): FigureSpec | null {
  const { leadTime, record } = assessment;
  if (leadTime.curve.length === 0) return null;
  const names = {
    rms: 'this forecast',
    linear: 'linear model',
    persistence: 'persistence (no change)',
    climatology: 'climatology (the mean)',
  } as const;
  const keys = Object.keys(names) as (keyof typeof names)[];
  const rows = leadTime.curve.flatMap((p) =>
    keys.map((key) => ({ lead: p.lead, error: p[key], forecast: names[key] })),
  );
  return figure(
    'Root mean square error of the forecast beside three reference forecasts, against lead. Lower is better.',
    {
      data: { values: rows },
      mark: { type: 'line', strokeWidth: 2 },
      encoding: {
        x: { field: 'lead', type: 'quantitative', title: axisTitle('Lead', record.timeUnit) },
        y: { field: 'error', type: 'quantitative', title: axisTitle('RMS error', record.unit) },
        color: {
          field: 'forecast',
          type: 'nominal',
          title: null,
          scale: {
            domain: keys.map((k) => names[k]),
            range: [COLOURS.record, COLOURS.warm, COLOURS.soft, COLOURS.ink],
          },
        },
        strokeDash: {
          field: 'forecast',
          type: 'nominal',
          legend: null,
          scale: {
            domain: keys.map((k) => names[k]),
            range: [
              [1, 0],
              [6, 3],
              [2, 2],
              [8, 3, 2, 3],
            ],
          },
        },
      },
    },
  );
}

const round = (value: number) => String(Number(value.toPrecision(3)));
