import { LeadspanError, show } from './errors.ts';

/** Options every job takes. */
export interface JobOptions {
  /** Cancels the job; it rejects with `ABORTED` within 50 ms. */
  readonly signal?: CancelSignal;
  readonly onProgress?: (progress: Progress) => void;
  /** Milliseconds after which the job is cancelled with `ABORTED`. Default: none. */
  readonly deadline?: number;
  /** Bytes the job may use for its own arrays; default: the engine's limit (1 GiB). */
  readonly memoryLimit?: number;
  /** Seed of everything random; integer 0 … 2^32 − 1, default 1. */
  readonly seed?: number;
}

/** What is used of an `AbortSignal`, so that the types compile without the DOM library. */
export interface CancelSignal {
  readonly aborted: boolean;
  readonly reason?: unknown;
  addEventListener(type: 'abort', listener: () => void, options?: { once?: boolean }): void;
  removeEventListener(type: 'abort', listener: () => void): void;
}

export interface Progress {
  /** What is being done, e.g. 'evidence'. */
  readonly stage: string;
  /** Share of the whole job done, 0 … 1, never falling. */
  readonly fraction: number;
}

/** What one option takes. */
export type OptionRule =
  | {
      readonly kind: 'number';
      readonly min: number;
      readonly max: number;
      readonly integer?: boolean;
      readonly above?: number;
    }
  | { readonly kind: 'choice'; readonly of: readonly string[] }
  | { readonly kind: 'boolean' }
  | { readonly kind: 'any'; readonly check?: (value: unknown) => string | undefined };

/**
 * Checks an options object against its rules: unknown names are refused with the nearest known one,
 * values out of range with the range. `undefined` means the default.
 * @throws LeadspanError BAD_OPTION
 */
export function checkOptions(
  options: unknown,
  rules: Readonly<Record<string, OptionRule>>,
  where: string,
): void {
  if (options === undefined) return;
  if (typeof options !== 'object' || options === null || Array.isArray(options))
    throw new LeadspanError('BAD_OPTION', `${where} takes an options object; got ${show(options)}.`, {
      field: where,
    });
  for (const [name, value] of Object.entries(options)) {
    const rule = Object.hasOwn(rules, name) ? rules[name] : undefined;
    if (rule === undefined) {
      const guess = nearestName(name, Object.keys(rules));
      throw new LeadspanError(
        'BAD_OPTION',
        `${where} has no option ${JSON.stringify(name)}${guess ? `; did you mean ${JSON.stringify(guess)}?` : ''} It takes: ${Object.keys(rules).join(', ')}.`,
        { field: name },
      );
    }
    if (value === undefined) continue;
    const wrong = mismatch(value, rule);
    if (wrong !== undefined)
      throw new LeadspanError(
        'BAD_OPTION',
        `Option ${name} of ${where} must be ${wrong}; got ${show(value)}.`,
        { field: name },
      );
  }
}

function mismatch(value: unknown, rule: OptionRule): string | undefined {
  switch (rule.kind) {
    case 'number': {
      const takes = `${rule.integer ? 'a whole number' : 'a number'} ${rule.above !== undefined ? `above ${rule.above} and at most ${rule.max}` : `from ${rule.min} to ${rule.max}`}`;
      if (typeof value !== 'number' || !Number.isFinite(value)) return takes;
      if (rule.integer && !Number.isInteger(value)) return takes;
      return value < rule.min || value > rule.max || (rule.above !== undefined && value <= rule.above)
        ? takes
        : undefined;
    }
    case 'choice':
      return typeof value === 'string' && rule.of.includes(value)
        ? undefined
        : `one of ${rule.of.map((c) => `'${c}'`).join(', ')}`;
    case 'boolean':
      return typeof value === 'boolean' ? undefined : 'true or false';
    case 'any':
      return rule.check?.(value);
  }
}

/** The known name nearest to a misspelt one (edit distance at most a third of its length), or undefined. */
export function nearestName(name: string, known: readonly string[]): string | undefined {
  let best: string | undefined;
  let bestDistance = Math.max(2, Math.floor(name.length / 3)) + 1;
  for (const candidate of known) {
    const d = editDistance(name.toLowerCase(), candidate.toLowerCase());
    if (d < bestDistance) [best, bestDistance] = [candidate, d];
  }
  return best;
}

/** Levenshtein distance (1966), two rows. */
function editDistance(a: string, b: string): number {
  let previous = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++)
      row[j] = Math.min(
        previous[j]! + 1,
        row[j - 1]! + 1,
        previous[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1),
      );
    previous = row;
  }
  return previous[b.length]!;
}
