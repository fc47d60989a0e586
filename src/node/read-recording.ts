import { readFile } from 'node:fs/promises';
import { basename } from 'node:path';
import { badInput, LeadspanError, show } from '../base/errors.ts';
import type { Recording } from '../recording/types.ts';
import {
  decodeText,
  describeColumns,
  findColumn,
  numericColumn,
  parseTable,
  splitUnit,
  type TextTable,
  timeColumn,
} from './read-table.ts';

export interface ReadOptions {
  /** Columns to read, by header name or number (1 = first). Default: the only column that is not time. */
  readonly columns?: readonly string[];
  /** Column to forecast, one of `columns`; default the first. */
  readonly target?: string;
  /** Column of time stamps: numbers, or ISO 8601. Default: the column headed `t` or `time…`, when there is one. */
  readonly timeColumn?: string;
  /** Time units per sample, instead of a time column. */
  readonly interval?: number;
  readonly unit?: string;
  readonly timeUnit?: string;
  readonly name?: string;
  readonly resolution?: number;
  readonly sensorNoise?: number;
}

/** A recording read from a file, and what was taken from where. */
export interface ReadRecording {
  readonly recording: Recording;
  /** Plain sentences for the user: which columns were used. */
  readonly notes: readonly string[];
}

const TIME_HEADER = /^(t|time)([\s_([].*)?$/i;

/**
 * Reads a CSV or TSV file.
 * @param file path, or '-' for standard input
 * @throws LeadspanError BAD_INPUT for unreadable, binary or malformed files, unknown columns, cells that are no numbers
 */
export async function readRecording(file: string, options: ReadOptions = {}): Promise<ReadRecording> {
  const name = file === '-' ? 'standard input' : file;
  let bytes: Uint8Array;
  try {
    bytes = file === '-' ? await readStandardInput() : await readFile(file);
  } catch (cause) {
    throw new LeadspanError('BAD_INPUT', `${name} cannot be read: ${(cause as Error).message}.`, {
      field: 'file',
      cause,
    });
  }
  const table = parseTable(decodeText(bytes, name), name);
  return recordingFromTable(table, file === '-' ? 'standard input' : basename(file), options);
}

/** The same from a parsed table. */
export function recordingFromTable(table: TextTable, name: string, options: ReadOptions): ReadRecording {
  const notes: string[] = [];
  const time = chooseTimeColumn(table, options);
  const columns = chooseColumns(table, time, options);
  const heads = columns.map((c) => splitUnit(table.header?.[c] ?? `column ${c + 1}`));
  notes.push(`values from ${heads.map((h) => show(h.name)).join(', ')}`);

  const target =
    options.target === undefined ? 0 : columns.indexOf(findColumn(table, options.target, 'target'));
  if (target < 0)
    badInput('target', `one of the columns read (${heads.map((h) => h.name).join(', ')})`, options.target);

  let times: Float64Array | undefined;
  let timeUnit = options.timeUnit;
  if (time !== undefined) {
    const column = timeColumn(table, time);
    const head = splitUnit(table.header?.[time] ?? `column ${time + 1}`);
    times = column.times;
    timeUnit ??= column.unit ?? head.unit ?? /^t(?:ime)?_(s|ms|min|h|d)$/i.exec(head.name)?.[1];
    notes.push(`time from ${show(head.name)}`);
  }
  const units = heads.map((h) => options.unit ?? h.unit ?? '');
  const samples = columns.map((c) => numericColumn(table, c));
  const recording: Recording = {
    samples: samples.length === 1 ? samples[0]! : samples,
    name: options.name ?? `${name}: ${heads[target]!.name}`,
    unit: units[target]!,
    ...(samples.length > 1 ? { channelUnits: units, target } : {}),
    ...(options.interval === undefined ? {} : { interval: options.interval }),
    ...(times === undefined ? {} : { times }),
    ...(timeUnit === undefined ? {} : { timeUnit }),
    ...(options.resolution === undefined ? {} : { resolution: options.resolution }),
    ...(options.sensorNoise === undefined ? {} : { sensorNoise: options.sensorNoise }),
  };
  return { recording, notes };
}

function chooseTimeColumn(table: TextTable, options: ReadOptions): number | undefined {
  if (options.timeColumn !== undefined) return findColumn(table, options.timeColumn, 'timeColumn');
  const headed = table.header?.findIndex((h) => TIME_HEADER.test(h)) ?? -1;
  if (headed >= 0 && options.interval === undefined) return headed;
  if (options.interval === undefined)
    throw new LeadspanError(
      'BAD_INPUT',
      `The time between samples is not known: give interval or timeColumn. The columns are: ${describeColumns(table)}.`,
      { field: 'interval' },
    );
  return undefined;
}

function chooseColumns(table: TextTable, time: number | undefined, options: ReadOptions): number[] {
  if (options.columns !== undefined && options.columns.length > 0)
    return options.columns.map((column) => findColumn(table, column, 'column'));
  const left = Array.from({ length: table.columns }, (_, c) => c).filter(
    (c) => c !== time && !(time === undefined && TIME_HEADER.test(table.header?.[c] ?? '')),
  );
  if (left.length === 1) return left;
  throw new LeadspanError(
    'BAD_INPUT',
    `Name the column to read. The columns are: ${describeColumns(table)}.`,
    { field: 'column' },
  );
}

async function readStandardInput(): Promise<Uint8Array> {
  const parts: Uint8Array[] = [];
  for await (const part of process.stdin) parts.push(part as Uint8Array);
  return Buffer.concat(parts);
}
