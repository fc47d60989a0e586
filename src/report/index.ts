import type { Assessment } from '../assess/types.ts';
import { surrogateFigure } from '../figures/evidence.ts';
import { dimensionFigure, divergenceFigure, portraitFigure } from '../figures/geometry.ts';
import { errorGrowthFigure, skillFigure } from '../figures/lead-time.ts';
import { delayFigure, embeddingFigure, recordFigure } from '../figures/record.ts';
import type { FigureSpec } from '../figures/theme.ts';
import { escapeHtml, html, Markup } from './html.ts';
import { renderFigure } from './render-figure.ts';
import {
  answerPlate,
  cautions,
  type Figures,
  goodEnough,
  howFarAhead,
  howObtained,
  ruleOrNoise,
  whatLimits,
} from './sections.ts';
import { STYLE } from './style.ts';

export { renderFigure } from './render-figure.ts';

const FIGURES = {
  errorGrowth: errorGrowthFigure,
  skill: skillFigure,
  surrogates: surrogateFigure,
  divergence: divergenceFigure,
  portrait: portraitFigure,
  dimension: dimensionFigure,
  record: recordFigure,
  delay: delayFigure,
  embedding: embeddingFigure,
} as const satisfies Record<keyof Figures, (assessment: Assessment) => FigureSpec | null>;

/**
 * One self-contained HTML page from an assessment: the answer first, then the evidence by the user's
 * questions. Opens without network, prints, and reads aloud. Needs the optional peers vega and vega-lite.
 * @throws LeadspanError KERNEL_FAILED when they are not installed
 */
export async function renderReport(assessment: Assessment): Promise<string> {
  const figures = {} as Record<keyof Figures, Markup | null>;
  for (const name of Object.keys(FIGURES) as (keyof Figures)[]) {
    const spec = FIGURES[name](assessment);
    figures[name] =
      spec &&
      html`<figure>${pictured(await renderFigure(spec), spec.description)}<figcaption>${spec.description}</figcaption></figure>`;
  }
  const page = html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'; img-src data:">
<title>${assessment.record.name || 'Record'}: assessment</title>
<style>${new Markup(STYLE)}</style>
</head>
<body>
${answerPlate(assessment)}
<main>
${howFarAhead(assessment, figures)}
${ruleOrNoise(assessment, figures)}
${whatLimits(assessment, figures)}
${goodEnough(assessment, figures)}
${cautions(assessment)}
${howObtained(assessment)}
</main>
</body>
</html>
`;
  return page.text;
}

/** One picture with one text alternative, instead of hundreds of marks read out one by one. */
function pictured(svg: string, description: string): Markup {
  return new Markup(svg.replace('<svg ', `<svg role="img" aria-label="${escapeHtml(description)}" `));
}
