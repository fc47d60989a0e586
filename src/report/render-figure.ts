import { LeadspanError } from '../base/errors.ts';
import type { FigureSpec } from '../figures/theme.ts';

/**
 * Renders a Vega-Lite specification to an SVG element, without a browser. The renderer is an optional
 * peer: only reports need it.
 * @throws LeadspanError KERNEL_FAILED when vega and vega-lite are not installed
 */
export async function renderFigure(spec: FigureSpec): Promise<string> {
  const { vega, lite } = await loadRenderer();
  const compiled = lite.compile(spec as never).spec;
  const view = new vega.View(vega.parse(compiled), { renderer: 'none', logLevel: vega.Error });
  try {
    return await view.toSVG();
  } finally {
    view.finalize();
  }
}

async function loadRenderer() {
  try {
    const [vega, lite] = await Promise.all([import('vega'), import('vega-lite')]);
    return { vega, lite };
  } catch (cause) {
    throw new LeadspanError(
      'KERNEL_FAILED',
      'The figures of the report need the optional packages vega and vega-lite: npm install vega vega-lite.',
      { cause },
    );
  }
}
