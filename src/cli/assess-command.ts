import type { AssessOptions } from '../assess/types.ts';
import { LeadspanError } from '../base/errors.ts';
import { readRecording } from '../node/read-recording.ts';
import { writeWhole } from '../node/write-file.ts';
import { renderReport } from '../report/index.ts';
import type { CommandHelp } from './help.ts';
import { type Arguments, ENGINE_OPTIONS, given } from './options.ts';
import { requireWritable } from './outputs.ts';
import { exitStatus, runAssess } from './run-assess.ts';
import { assessmentTable } from './table.ts';
import type { Terminal } from './terminal.ts';

export const ASSESS_HELP: CommandHelp = {
  name: 'assess',
  usage: 'assess FILE',
  purpose: 'Assesses a measured record. FILE is a CSV or TSV table, or - for standard input.',
  options: {
    column: {
      value: 'NAME',
      multiple: true,
      help: 'column with the samples, by header or number; repeat for several channels',
    },
    target: { value: 'NAME', help: 'which of several columns to forecast (default the first)' },
    'time-column': {
      value: 'NAME',
      help: 'column with the time stamps (default: the one headed t or time…)',
    },
    interval: { value: 'TIME', type: 'number', help: 'time between samples, instead of a time column' },
    'time-unit': { value: 'UNIT', help: 'unit of time (default s)' },
    unit: { value: 'UNIT', help: 'unit of the samples' },
    name: { value: 'TEXT', help: 'name of the record in table and report' },
    tolerance: {
      value: 'SIZE',
      type: 'number',
      help: "largest forecast error still useful (default half the record's standard deviation)",
    },
    confidence: {
      value: 'SHARE',
      type: 'number',
      help: 'share of forecasts that must hold, 0.5 to 0.99 (default 0.9)',
    },
    resolution: { value: 'SIZE', type: 'number', help: 'smallest step of the acquisition, when known' },
    'sensor-noise': {
      value: 'SIZE',
      type: 'number',
      help: "standard deviation of the sensor's noise, when known",
    },
    dynamics: {
      value: 'KIND',
      help: 'flow (sampled continuous motion), map (one sample per event) or auto (default)',
    },
    delay: { value: 'SAMPLES', type: 'number', help: 'delay of the reconstruction (default chosen)' },
    'embedding-dimension': {
      value: 'N',
      type: 'number',
      help: 'coordinates of the reconstruction (default chosen)',
    },
    'theiler-window': { value: 'SAMPLES', type: 'number', help: 'decorrelation window (default chosen)' },
    surrogates: { value: 'N', type: 'number', help: 'surrogates of the null test, at least 19 (default 39)' },
    'lead-steps': { value: 'SAMPLES', type: 'number', help: 'longest lead tried (default chosen)' },
    detrend: { value: 'KIND', help: 'linear subtracts a straight line first (default none)' },
    resample: {
      value: 'KIND',
      help: 'linear puts uneven time stamps on an even grid (default: refuse them)',
    },
    json: { value: 'FILE', help: 'write the assessment as JSON; - prints it instead of the table' },
    report: { value: 'FILE', help: 'write a self-contained HTML report' },
    ...ENGINE_OPTIONS,
  },
  examples: [
    'leadspan assess loop.csv --column dT --unit K --tolerance 2 --report loop.html',
    'leadspan assess - --interval 0.25 --json - < samples.txt',
  ],
};

export async function assessCommand(args: Arguments, terminal: Terminal): Promise<number> {
  if (args.positionals.length !== 1)
    throw new LeadspanError(
      'BAD_OPTION',
      `leadspan assess takes one FILE (or - for standard input); got ${args.positionals.length}.`,
      { field: 'file' },
    );
  const jsonFile = args.text('json');
  const reportFile = args.text('report');
  await requireWritable('json', jsonFile);
  await requireWritable('report', reportFile);

  const { recording, notes } = await readRecording(
    args.positionals[0]!,
    given({
      columns: args.list('column'),
      target: args.text('target'),
      timeColumn: args.text('time-column'),
      interval: args.number('interval'),
      unit: args.text('unit'),
      timeUnit: args.text('time-unit'),
      name: args.text('name'),
      resolution: args.number('resolution'),
      sensorNoise: args.number('sensor-noise'),
    }),
  );
  const assessment = await runAssess(args, terminal, recording, assessOptions(args));
  if (jsonFile === '-') terminal.out(`${JSON.stringify(assessment, null, 2)}\n`);
  else {
    terminal.out(`${assessmentTable(assessment, terminal.width)}Read: ${notes.join('; ')}.\n`);
    if (jsonFile !== undefined) await writeWhole(jsonFile, `${JSON.stringify(assessment, null, 2)}\n`);
  }
  if (reportFile !== undefined) {
    await writeWhole(reportFile, await renderReport(assessment));
    terminal.err(`Report written to ${reportFile}\n`);
  }
  return exitStatus(assessment);
}

export function assessOptions(args: Arguments): AssessOptions {
  return given({
    tolerance: args.number('tolerance'),
    confidence: args.number('confidence'),
    dynamics: args.text('dynamics') as AssessOptions['dynamics'],
    delay: args.number('delay'),
    embeddingDimension: args.number('embedding-dimension'),
    theilerWindow: args.number('theiler-window'),
    surrogates: args.number('surrogates'),
    leadSteps: args.number('lead-steps'),
    detrend: args.text('detrend') as AssessOptions['detrend'],
    resample: args.text('resample') as AssessOptions['resample'],
  });
}
