/**
 * Look of the figures: ink on paper, one strong colour for the record, one warm colour for what it is
 * compared with, thin lines. The five hues differ in lightness too, so that they survive a grey printer
 * and the common forms of colour blindness (lightness L* about 20, 40, 55, 70, 80).
 */
export const COLOURS = {
  ink: '#1c2733',
  record: '#0b5a6b',
  warm: '#c4621a',
  soft: '#8fa3ad',
  pale: '#c9d5d8',
} as const;

/** Named so that text has the same width wherever the figure is drawn. */
export const FONT = 'Helvetica, Arial, sans-serif';

/** A Vega-Lite v6 specification: plain JSON. */
export interface FigureSpec {
  readonly $schema: 'https://vega.github.io/schema/vega-lite/v6.json';
  /** What the figure shows, with its main number: the text alternative for a screen reader. */
  readonly description: string;
  readonly [key: string]: unknown;
}

const CONFIG = {
  font: FONT,
  background: 'transparent',
  view: { stroke: null },
  axis: {
    labelColor: COLOURS.ink,
    titleColor: COLOURS.ink,
    titleFontWeight: 'normal',
    titleFontSize: 12,
    labelFontSize: 11,
    domainColor: COLOURS.ink,
    tickColor: COLOURS.ink,
    tickSize: 4,
    gridColor: '#e4e9ea',
    gridWidth: 0.6,
  },
  legend: {
    labelColor: COLOURS.ink,
    labelFontSize: 11,
    titleFontWeight: 'normal',
    orient: 'top',
    symbolStrokeWidth: 2,
    labelLimit: 400,
  },
} as const;

/** Completes a specification with size and look. */
export function figure(description: string, parts: Record<string, unknown>): FigureSpec {
  return {
    $schema: 'https://vega.github.io/schema/vega-lite/v6.json',
    description,
    width: 560,
    height: 240,
    config: CONFIG,
    ...parts,
  };
}

/** `label` with its unit in brackets, as on an instrument. */
export function axisTitle(label: string, unit: string): string {
  return unit === '' || unit === '1' ? label : `${label} [${unit}]`;
}
