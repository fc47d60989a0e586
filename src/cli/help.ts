import type { OptionSpecs } from './options.ts';

/** One command of the program, for the help pages. */
export interface CommandHelp {
  readonly name: string;
  readonly usage: string;
  readonly purpose: string;
  readonly options: OptionSpecs;
  readonly examples: readonly string[];
}

export function commandHelp(command: CommandHelp): string {
  const heads = Object.entries(command.options).map(
    ([name, spec]) => `--${name}${spec.value ? ` ${spec.value}` : ''}`,
  );
  const width = Math.max(...heads.map((head) => head.length));
  const lines = Object.values(command.options).map((spec, i) => `  ${heads[i]!.padEnd(width)}  ${spec.help}`);
  return [
    `leadspan ${command.usage}`,
    '',
    command.purpose,
    '',
    'Options',
    ...lines,
    '',
    'Examples',
    ...command.examples.map((example) => `  ${example}`),
    '',
  ].join('\n');
}

export function overview(commands: readonly CommandHelp[]): string {
  const width = Math.max(...commands.map((command) => command.usage.length));
  return [
    'leadspan: from a measured record, is it a rule or noise, how far ahead can a forecast be trusted, and what limits it.',
    '',
    ...commands.map(
      (command) => `  leadspan ${command.usage.padEnd(width)}  ${command.purpose.split('.')[0]}.`,
    ),
    '',
    'Each command explains its options with --help.',
    'Exit status: 0 answered; 1 the regime is inconclusive or the lead time refused; 2 misuse; 3 a failure of ours; 130 interrupted.',
    '',
  ].join('\n');
}
