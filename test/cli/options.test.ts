import { describe, expect, it } from 'vitest';
import { parseArguments } from '../../src/cli/options.ts';
import { progressLine, type Terminal, wrap } from '../../src/cli/terminal.ts';

const specs = {
  tolerance: { value: 'SIZE', type: 'number', help: '' },
  column: { value: 'NAME', multiple: true, help: '' },
  quiet: { help: '' },
} as const;

describe('arguments', () => {
  it('reads whole-word options, with = or a space, repeated ones and switches', () => {
    const args = parseArguments(
      ['a.csv', '--tolerance=0.5', '--column', 'x', '--column', 'y', '--quiet'],
      specs,
      'assess',
    );
    expect(args.positionals).toEqual(['a.csv']);
    expect(args.number('tolerance')).toBe(0.5);
    expect(args.list('column')).toEqual(['x', 'y']);
    expect(args.has('quiet')).toBe(true);
    expect(args.number('missing')).toBeUndefined();
  });

  it.each([
    [['--tolerence', '1'], /no option --tolerence; did you mean --tolerance\?/],
    [['--zzz'], /no option --zzz; see leadspan assess --help/],
    [['-t', '1'], /-t/],
    [['--tolerance'], /tolerance/],
    [['--quiet=yes'], /quiet/],
  ])('refuses %j', (argv, message) => {
    expect(() => parseArguments(argv, specs, 'assess')).toThrow(message);
  });

  it.each(['abc', '', '1e999', '1,5'])('refuses %j as a number', (text) => {
    const args = parseArguments([`--tolerance=${text}`], specs, 'assess');
    expect(() => args.number('tolerance')).toThrow(/--tolerance must be a number/);
  });
});

describe('terminal', () => {
  const capture = (errIsTerminal: boolean) => {
    let text = '';
    const terminal = { err: (t: string) => (text += t), errIsTerminal } as unknown as Terminal;
    const line = progressLine(terminal);
    line.update({ stage: 'evidence', fraction: 0.5 });
    const drawn = text;
    line.wipe();
    return { drawn, all: text };
  };

  it('draws progress on a terminal only, and wipes it', () => {
    expect(capture(false).all).toBe('');
    expect(capture(true).drawn).toMatch(/█.*50 %.*evidence/);
    expect(capture(true).all.endsWith('\r')).toBe(true);
  });

  it('wraps words with an indent', () => {
    expect(wrap('one two three four', 9, '  ')).toBe('one two\n  three\n  four');
  });
});
