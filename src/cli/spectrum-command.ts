import { LeadspanError } from '../base/errors.ts';
import { referenceModelNames } from '../model/reference.ts';
import { writeWhole } from '../node/write-file.ts';
import type { CommandHelp } from './help.ts';
import { type Arguments, ENGINE_OPTIONS, given } from './options.ts';
import { requireWritable } from './outputs.ts';
import { withEngine } from './run-assess.ts';
import { spectrumTable } from './table.ts';
import type { Terminal } from './terminal.ts';

export const SPECTRUM_HELP: CommandHelp = {
  name: 'spectrum',
  usage: 'spectrum NAME',
  purpose: `Lyapunov spectrum of a reference model from its equations. NAME is one of: ${referenceModelNames().join(', ')}.`,
  options: {
    duration: {
      value: 'TIME',
      type: 'number',
      help: 'time units (steps for maps) to average over (default chosen)',
    },
    'standard-error': {
      value: 'SIZE',
      type: 'number',
      help: "stop when the largest exponent's standard error is below this",
    },
    transient: { value: 'TIME', type: 'number', help: 'time left out at the start (default chosen)' },
    step: { value: 'TIME', type: 'number', help: 'integration step for flows (default chosen)' },
    exponents: { value: 'N', type: 'number', help: 'how many, largest first (default all)' },
    json: { value: 'FILE', help: 'write the result as JSON; - prints it instead of the table' },
    ...ENGINE_OPTIONS,
  },
  examples: ['leadspan spectrum lorenz', 'leadspan spectrum henon --standard-error 1e-4'],
};

export async function spectrumCommand(args: Arguments, terminal: Terminal): Promise<number> {
  if (args.positionals.length !== 1)
    throw new LeadspanError(
      'BAD_OPTION',
      `leadspan spectrum takes one NAME, got ${args.positionals.length}. It is one of: ${referenceModelNames().join(', ')}.`,
      { field: 'name' },
    );
  const jsonFile = args.text('json');
  await requireWritable('json', jsonFile);
  const result = await withEngine(args, terminal, (engine, job) =>
    engine.modelSpectrum(args.positionals[0]!, {
      ...job,
      ...given({
        duration: args.number('duration'),
        standardError: args.number('standard-error'),
        transient: args.number('transient'),
        step: args.number('step'),
        exponents: args.number('exponents'),
      }),
    }),
  );
  if (jsonFile === '-') terminal.out(`${JSON.stringify(result, null, 2)}\n`);
  else {
    terminal.out(spectrumTable(result, terminal.width));
    if (jsonFile !== undefined) await writeWhole(jsonFile, `${JSON.stringify(result, null, 2)}\n`);
  }
  return result.exponents.every((exponent) => exponent.ok) ? 0 : 1;
}
