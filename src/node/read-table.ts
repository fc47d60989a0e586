import Papa from 'papaparse';
import { badInput, LeadspanError, show } from '../base/errors.ts';
import { nearestName } from '../base/options.ts';

/** A delimited text table: CSV, TSV and relatives (RFC 4180 quoting). */
export interface TextTable {
  readonly header: readonly string[] | null;
  readonly rows: readonly (readonly string[])[];
  /** Line of the file in which the first row of `rows` stands, for messages. */
  readonly firstLine: number;
  readonly columns: number;
}

/** Words for a missing sample in common use (common practice). */
const MISSING = new Set(['', 'nan', 'na', 'n/a', 'null', 'none', '-', '--']);
const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/;
const INFINITE = /^[+-]?inf(inity)?$/i;

/** Bytes to text: UTF-8, or UTF-16 with a byte-order mark. Refuses binary files. */
export function decodeText(bytes: Uint8Array, name: string): string {
  const encoding =
    bytes[0] === 0xff && bytes[1] === 0xfe
      ? 'utf-16le'
      : bytes[0] === 0xfe && bytes[1] === 0xff
        ? 'utf-16be'
        : 'utf-8';
  const binary = () =>
    new LeadspanError(
      'BAD_INPUT',
      `${name} is not a text table (it holds binary data); it takes CSV or TSV text.`,
      { field: name },
    );
  if (encoding === 'utf-8' && bytes.subarray(0, 8192).includes(0)) throw binary();
  try {
    return new TextDecoder(encoding, { fatal: true }).decode(bytes);
  } catch {
    throw binary();
  }
}

/** Splits the text into cells. The first row is a header when any of its cells is neither number nor missing. */
export function parseTable(text: string, name: string): TextTable {
  const parsed = Papa.parse<string[]>(text, {
    comments: '#',
    skipEmptyLines: 'greedy',
    delimitersToGuess: [',', '\t', ';', '|'],
  });
  const fault = parsed.errors.find((error) => error.code !== 'UndetectableDelimiter');
  if (fault)
    throw new LeadspanError('BAD_INPUT', `${name}, row ${(fault.row ?? 0) + 1}: ${fault.message}.`, {
      field: name,
    });
  const cells = parsed.data.map((row) => row.map((cell) => cell.trim()));
  if (cells.length === 0) badInput(name, 'a table with at least one row', 'an empty file');
  const first = cells[0]!;
  const isHeader = first.some(
    (cell) => !NUMBER.test(cell) && !MISSING.has(cell.toLowerCase()) && !INFINITE.test(cell),
  );
  const rows = isHeader ? cells.slice(1) : cells;
  const columns = first.length;
  const ragged = rows.findIndex((row) => row.length !== columns);
  if (ragged >= 0)
    throw new LeadspanError(
      'BAD_INPUT',
      `${name}, data row ${ragged + 1} has ${rows[ragged]!.length} cells; the first row has ${columns}.`,
      { field: name },
    );
  return { header: isHeader ? first : null, rows, firstLine: isHeader ? 2 : 1, columns };
}

/** Index of a column given by header name or by number (1 = first). */
export function findColumn(table: TextTable, column: string, option: string): number {
  const named = table.header?.indexOf(column) ?? -1;
  if (named >= 0) return named;
  const bare = table.header?.findIndex((h) => splitUnit(h).name === column) ?? -1;
  if (bare >= 0) return bare;
  if (/^\d+$/.test(column)) {
    const number = Number(column);
    if (number >= 1 && number <= table.columns) return number - 1;
  }
  const guess = table.header ? nearestName(column, table.header) : undefined;
  throw new LeadspanError(
    'BAD_INPUT',
    `There is no column ${show(column)}${guess ? `; did you mean ${show(guess)}?` : '.'} The columns are: ${describeColumns(table)}.`,
    { field: option },
  );
}

export function describeColumns(table: TextTable): string {
  return table.header
    ? table.header.map((h, i) => `${i + 1} ${show(h)}`).join(', ')
    : `1 to ${table.columns} (no header)`;
}

/** One column as numbers; missing cells become NaN. */
export function numericColumn(table: TextTable, column: number): Float64Array {
  const label = table.header?.[column] ?? `column ${column + 1}`;
  return Float64Array.from(table.rows, (row, i) => {
    const cell = row[column]!;
    if (NUMBER.test(cell)) return Number(cell);
    if (MISSING.has(cell.toLowerCase())) return Number.NaN;
    const where = `${label}, data row ${i + 1}`;
    if (INFINITE.test(cell)) return badInput(where, 'finite', cell);
    if (/^[+-]?\d+,\d+$/.test(cell))
      throw new LeadspanError(
        'BAD_INPUT',
        `${where} has a decimal comma (${show(cell)}); write numbers with a decimal point.`,
        { field: label },
      );
    return badInput(where, 'a number (or empty for a missing sample)', cell);
  });
}

const ISO_TIME = /^\d{4}-\d{2}-\d{2}([T ]\d{2}:\d{2}(:\d{2}(\.\d+)?)?(Z|[+-]\d{2}:?\d{2})?)?$/;

/** A time column: numbers, or ISO 8601 stamps, which become seconds since the first. */
export function timeColumn(
  table: TextTable,
  column: number,
): { readonly times: Float64Array; readonly unit: string | undefined } {
  const first = table.rows[0]?.[column] ?? '';
  if (!ISO_TIME.test(first)) return { times: numericColumn(table, column), unit: undefined };
  const label = table.header?.[column] ?? `column ${column + 1}`;
  const stamps = table.rows.map((row, i) => {
    const cell = row[column]!;
    // Without a zone the stamp is read as UTC, so that no daylight-saving change can make a gap.
    const zoned =
      /(Z|[+-]\d{2}:?\d{2})$/.test(cell) || cell.length === 10 ? cell : `${cell.replace(' ', 'T')}Z`;
    const stamp = ISO_TIME.test(cell) ? Date.parse(zoned) : Number.NaN;
    return Number.isNaN(stamp) ? badInput(`${label}, data row ${i + 1}`, 'an ISO 8601 time', cell) : stamp;
  });
  return { times: Float64Array.from(stamps, (ms) => (ms - stamps[0]!) / 1000), unit: 's' };
}

/** `"pressure [kPa]"` or `"pressure (kPa)"` → name and unit. */
export function splitUnit(header: string): { readonly name: string; readonly unit: string | undefined } {
  const match = /^(.*?)\s*[[(]([^\])]+)[\])]$/.exec(header);
  return match ? { name: match[1]!, unit: match[2]! } : { name: header, unit: undefined };
}
