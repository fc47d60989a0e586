/**
 * `leadspan/figures`: the curves behind the numbers as Vega-Lite v6 specifications, plain JSON, no
 * dependency. Every function takes an Assessment and gives null where it holds nothing to draw.
 */
export { surrogateFigure } from './evidence.ts';
export { dimensionFigure, divergenceFigure, portraitFigure } from './geometry.ts';
export { errorGrowthFigure, skillFigure } from './lead-time.ts';
export { delayFigure, embeddingFigure, recordFigure } from './record.ts';
export { COLOURS, type FigureSpec, FONT } from './theme.ts';
