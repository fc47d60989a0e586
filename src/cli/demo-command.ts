import { resolve } from 'node:path';
import { badOption, LeadspanError } from '../base/errors.ts';
import { writeWhole } from '../node/write-file.ts';
import type { Recording } from '../recording/types.ts';
import { percent } from '../report/format.ts';
import { renderReport } from '../report/index.ts';
import { headline, REGIME_WORDS } from '../report/words.ts';
import { DEMO_NAMES, type DemoName, demoRecord } from './demo-records.ts';
import type { CommandHelp } from './help.ts';
import { type Arguments, ENGINE_OPTIONS } from './options.ts';
import { requireWritable } from './outputs.ts';
import { exitStatus, runAssess } from './run-assess.ts';
import { assessmentTable } from './table.ts';
import { type Terminal, wrap } from './terminal.ts';

const DEFAULT_REPORT = 'leadspan-demo.html';

export const DEMO_HELP: CommandHelp = {
  name: 'demo',
  usage: 'demo',
  purpose:
    'Assesses a built-in record of a natural-circulation cooling loop, and two neighbours in the same hall for contrast. All three are invented, from published models.',
  options: {
    record: {
      value: 'NAME',
      help: `only one record: ${DEMO_NAMES.join(', ')} (loop: cooling loop; deck: pump-deck vibration; gears: gear pair)`,
    },
    report: { value: 'FILE', help: `where the HTML report goes (default ${DEFAULT_REPORT})` },
    csv: { value: 'FILE', help: 'write the record as a CSV table instead of assessing it; - prints it' },
    json: { value: 'FILE', help: 'write the assessment as JSON; - prints it instead of the table' },
    ...ENGINE_OPTIONS,
  },
  examples: ['leadspan demo', 'leadspan demo --record gears --csv gears.csv'],
};

export async function demoCommand(args: Arguments, terminal: Terminal): Promise<number> {
  if (args.positionals.length > 0)
    throw new LeadspanError('BAD_OPTION', `leadspan demo takes no file; got ${args.positionals.join(' ')}.`, {
      field: 'file',
    });
  const only = args.text('record');
  if (only !== undefined && !DEMO_NAMES.includes(only as DemoName))
    badOption('--record', `one of ${DEMO_NAMES.join(', ')}`, only);
  const main = (only ?? 'loop') as DemoName;
  const reportFile = args.text('report') ?? DEFAULT_REPORT;
  const csvFile = args.text('csv');
  const jsonFile = args.text('json');
  for (const [option, file] of Object.entries({ report: reportFile, csv: csvFile, json: jsonFile }))
    await requireWritable(option, file);

  const recording = demoRecord(main);
  if (csvFile !== undefined) {
    const text = toCsv(recording);
    if (csvFile === '-') terminal.out(text);
    else await writeWhole(csvFile, text);
    return 0;
  }

  const assessment = await runAssess(args, terminal, recording, {});
  if (jsonFile === '-') {
    terminal.out(`${JSON.stringify(assessment, null, 2)}\n`);
    return exitStatus(assessment);
  }
  terminal.out(`${assessmentTable(assessment, terminal.width)}`);
  if (jsonFile !== undefined) await writeWhole(jsonFile, `${JSON.stringify(assessment, null, 2)}\n`);
  await writeWhole(reportFile, await renderReport(assessment));
  terminal.out(`\nReport: ${resolve(reportFile)}\n`);

  if (only === undefined) {
    terminal.out('\nTwo neighbours in the same hall, as irregular on a screen:\n');
    for (const name of DEMO_NAMES.filter((n) => n !== main)) {
      const other = await runAssess(args, terminal, demoRecord(name), { include: { record: false } });
      const text = `${other.record.name}: ${REGIME_WORDS[other.regime.call]}, confidence ${percent(other.regime.confidence)}. ${headline(other)}`;
      terminal.out(`  · ${wrap(text, terminal.width - 4, '    ')}\n`);
    }
  }
  return exitStatus(assessment);
}

function toCsv(recording: Recording): string {
  const samples = recording.samples as Float64Array;
  const interval = recording.interval!;
  const rows = Array.from(
    samples,
    (value, i) => `${Number((i * interval).toFixed(6))},${Number(value.toPrecision(9))}`,
  );
  return `time [${recording.timeUnit}],value [${recording.unit}]\n${rows.join('\n')}\n`;
}
