import { type ParseArgsConfig, parseArgs } from 'node:util';
import { badOption, LeadspanError } from '../base/errors.ts';
import { nearestName } from '../base/options.ts';

/** One long option of a command. */
export interface OptionSpec {
  /** Word shown for its value; none for a switch. */
  readonly value?: string;
  /** May be given several times. */
  readonly multiple?: boolean;
  readonly help: string;
  readonly type?: 'text' | 'number';
}

export type OptionSpecs = Readonly<Record<string, OptionSpec>>;

/** Parsed command line: values as text or numbers, under the names without dashes. */
export interface Arguments {
  readonly positionals: readonly string[];
  text(name: string): string | undefined;
  list(name: string): readonly string[] | undefined;
  number(name: string): number | undefined;
  has(name: string): boolean;
}

/** Options of every command that runs the engine. */
export const ENGINE_OPTIONS = {
  threads: {
    value: 'N',
    type: 'number',
    help: 'worker threads; 0 runs without workers (default: as many as the machine has)',
  },
  backend: { value: 'NAME', help: 'auto, wasm, wasm-simd, wasm-scalar or js (default auto)' },
  'memory-limit': {
    value: 'MB',
    type: 'number',
    help: 'most memory for the arrays of the job (default 1024)',
  },
  deadline: { value: 'SECONDS', type: 'number', help: 'give up after this time' },
  seed: { value: 'N', type: 'number', help: 'seed of everything random (default 1)' },
} as const satisfies OptionSpecs;

/**
 * Parses long, whole-word options.
 * @throws LeadspanError BAD_OPTION with the nearest known option for a misspelt one
 */
export function parseArguments(argv: readonly string[], specs: OptionSpecs, command: string): Arguments {
  const options: NonNullable<ParseArgsConfig['options']> = Object.fromEntries(
    Object.entries({ ...specs, help: { help: '' } as OptionSpec }).map(([name, spec]) => [
      name,
      {
        type: spec.value === undefined ? ('boolean' as const) : ('string' as const),
        ...(spec.multiple ? { multiple: true } : {}),
      },
    ]),
  );
  for (const word of argv) {
    if (word === '--') break;
    const name = /^--([^=]+)/.exec(word)?.[1];
    if (name === undefined || Object.hasOwn(options, name)) continue;
    const guess = nearestName(name, Object.keys(options));
    throw new LeadspanError(
      'BAD_OPTION',
      `leadspan ${command} has no option --${name}${guess ? `; did you mean --${guess}?` : `; see leadspan ${command} --help.`}`,
      { field: name },
    );
  }
  let parsed: ReturnType<typeof parseArgs>;
  try {
    parsed = parseArgs({ args: [...argv], options, allowPositionals: true, strict: true });
  } catch (cause) {
    throw new LeadspanError('BAD_OPTION', `${(cause as Error).message.split('\n')[0]!.replace(/\.$/, '')}.`, {
      cause,
    });
  }
  const values = parsed.values as Record<string, string | boolean | string[] | undefined>;
  return {
    positionals: parsed.positionals,
    text: (name) => values[name] as string | undefined,
    list: (name) => values[name] as string[] | undefined,
    has: (name) => values[name] !== undefined,
    number: (name) => {
      const text = values[name] as string | undefined;
      if (text === undefined) return undefined;
      const value = text.trim() === '' ? Number.NaN : Number(text);
      if (!Number.isFinite(value)) badOption(`--${name}`, 'a number', text);
      return value;
    },
  };
}

/** Leaves out what was not given, so that defaults apply. */
export function given<T extends Record<string, unknown>>(values: T): { [K in keyof T]?: NonNullable<T[K]> } {
  return Object.fromEntries(Object.entries(values).filter(([, value]) => value !== undefined)) as never;
}
