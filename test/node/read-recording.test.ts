import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { readRecording } from '../../src/node/read-recording.ts';
import { writeWhole } from '../../src/node/write-file.ts';

const folder = mkdtempSync(join(tmpdir(), 'leadspan-test-'));
afterAll(() => rmSync(folder, { recursive: true }));
let files = 0;
function file(content: string | Uint8Array): string {
  const path = join(folder, `file-${files++}.csv`);
  writeFileSync(path, content);
  return path;
}
const failure = (promise: Promise<unknown>) =>
  promise.then(
    () => 'no error',
    (error: Error & { code: string }) => error,
  );

describe('reading tables', () => {
  it('takes a header with units, a time column and quotes', async () => {
    const path = file('"time [ms]","flow, main [kg/s]"\r\n0,"1.5"\r\n10,2.5e0\r\n20,\r\n30,-3\r\n');
    const { recording, notes } = await readRecording(path);
    expect(recording).toMatchObject({ unit: 'kg/s', timeUnit: 'ms' });
    expect(Array.from(recording.samples as Float64Array)).toEqual([1.5, 2.5, Number.NaN, -3]);
    expect(Array.from(recording.times as Float64Array)).toEqual([0, 10, 20, 30]);
    expect(notes.join()).toMatch(/flow, main/);
  });

  it('takes tabs, semicolons, comment lines, a byte-order mark and no header', async () => {
    const tsv = await readRecording(file('1\t10\n2\t20\n3\t30\n'), { columns: ['2'], timeColumn: '1' });
    expect(Array.from(tsv.recording.samples as Float64Array)).toEqual([10, 20, 30]);
    const semicolon = await readRecording(file('\uFEFF# made by a logger\nt;p\n0;1\n1;2\n'));
    expect(Array.from(semicolon.recording.samples as Float64Array)).toEqual([1, 2]);
    const utf16 = await readRecording(
      file(Buffer.concat([Buffer.from([0xff, 0xfe]), Buffer.from('t,p\n0,1\n1,2\n', 'utf16le')])),
    );
    expect(Array.from(utf16.recording.samples as Float64Array)).toEqual([1, 2]);
  });

  it('takes ISO 8601 times as seconds', async () => {
    const path = file('timestamp,x\n2025-03-30 00:30:00,1\n2025-03-30 01:00:00,2\n2025-03-30 01:30:00,3\n');
    const { recording } = await readRecording(path, { timeColumn: 'timestamp' });
    expect(Array.from(recording.times as Float64Array)).toEqual([0, 1800, 3600]);
    expect(recording.timeUnit).toBe('s');
  });

  it('reads several channels and names the target', async () => {
    const path = file('t,a [K],b [bar]\n0,1,5\n1,2,6\n');
    const { recording } = await readRecording(path, { columns: ['a', 'b'], target: 'b' });
    expect(recording).toMatchObject({ target: 1, channelUnits: ['K', 'bar'], unit: 'bar' });
    expect((recording.samples as readonly Float64Array[]).map((c) => Array.from(c))).toEqual([
      [1, 2],
      [5, 6],
    ]);
  });

  it.each([
    [
      'a missing column, with those there are',
      't,pressure,flow\n0,1,2\n',
      { columns: ['presure'] },
      /no column "presure"; did you mean "pressure"\? The columns are: 1 "t", 2 "pressure", 3 "flow"/,
    ],
    [
      'no column named among several',
      't,pressure,flow\n0,1,2\n',
      {},
      /Name the column to read\. The columns are/,
    ],
    ['no time at all', 'a,b\n1,2\n', { columns: ['a'] }, /give interval or timeColumn/],
    ['text in the column', 't,x\n0,1\n1,oops\n', {}, /x, data row 2 must be a number.*got "oops"/],
    ['infinity', 't,x\n0,1\n1,-inf\n', {}, /x, data row 2 must be finite; got "-inf"/],
    ['a decimal comma', 't;x\n0;1,5\n1;2,5\n', {}, /decimal comma/],
    ['rows of different width', 't,x\n0,1\n1,2,3\n', {}, /data row 2 has 3 cells; the first row has 2/],
    ['an empty file', '', {}, /at least one row.*empty file/],
    ['an open quote', 't,x\n0,"1\n', {}, /row/],
    [
      'a bad time',
      'time,x\n2025-01-01T00:00:00Z,1\nlater,2\n',
      {},
      /data row 2 must be an ISO 8601 time; got "later"/,
    ],
  ])('refuses %s', async (_name, content, options, message) => {
    const error = await failure(readRecording(file(content), options));
    expect(error).toMatchObject({ code: 'BAD_INPUT' });
    expect(String(error)).toMatch(message);
  });

  it('refuses binary and unreadable files', async () => {
    const binary = await failure(readRecording(file(Uint8Array.of(0x89, 0x50, 0x4e, 0x47, 0, 1, 2, 3))));
    expect(String(binary)).toMatch(/not a text table.*binary/);
    const latin = await failure(readRecording(file(Uint8Array.of(0x74, 0x2c, 0xe9, 0x0a, 0xff, 0xff))));
    expect(String(latin)).toMatch(/not a text table/);
    expect(await failure(readRecording(join(folder, 'nowhere.csv')))).toMatchObject({
      code: 'BAD_INPUT',
      field: 'file',
    });
    expect(await failure(readRecording(folder))).toMatchObject({ code: 'BAD_INPUT', field: 'file' });
  });
});

describe('writing whole files', () => {
  it('leaves no part behind when the place cannot be written', async () => {
    const error = await failure(writeWhole(join(folder, 'missing', 'out.json'), '{}'));
    expect(error).toMatchObject({ code: 'BAD_INPUT', field: 'output' });
    await writeWhole(join(folder, 'out.json'), '{}');
    expect(readdirSync(folder).filter((name) => name.includes('.part'))).toEqual([]);
  });
});
