/** HTML with everything from outside escaped: names, units and headers are text, never markup. */

/** A piece of markup that may be inserted as it is. */
export class Markup {
  readonly text: string;
  constructor(text: string) {
    this.text = text;
  }
}

export function escapeHtml(text: string): string {
  return text
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;')
    .replace(/'/g, '&#39;');
}

type Insert = string | number | Markup | null | undefined | false | readonly Insert[];

/** Template tag: inserted strings are escaped, `Markup` is not, lists are joined, null and false vanish. */
export function html(parts: TemplateStringsArray, ...inserts: readonly Insert[]): Markup {
  let text = parts[0]!;
  inserts.forEach((insert, i) => {
    text += render(insert) + parts[i + 1]!;
  });
  return new Markup(text);
}

function render(insert: Insert): string {
  if (insert === null || insert === undefined || insert === false) return '';
  if (insert instanceof Markup) return insert.text;
  if (Array.isArray(insert)) return insert.map(render).join('');
  return escapeHtml(String(insert));
}
