import type { CancelSignal, Progress } from '../base/options.ts';

/** The streams of a run, handed in so that tests can watch them. */
export interface Terminal {
  out(text: string): void;
  err(text: string): void;
  /** True where a person watches stderr. */
  readonly errIsTerminal: boolean;
  /** Columns to wrap text at. */
  readonly width: number;
  /** Fires when the user interrupts. */
  readonly interrupt: CancelSignal;
}

/** A progress line on stderr, drawn only on a terminal and wiped when done. */
export function progressLine(terminal: Terminal): { update: (progress: Progress) => void; wipe: () => void } {
  if (!terminal.errIsTerminal) return { update: () => {}, wipe: () => {} };
  const cells = 30;
  let drawn = false;
  return {
    update: ({ stage, fraction }) => {
      const filled = Math.round(cells * fraction);
      const bar = '█'.repeat(filled) + '░'.repeat(cells - filled);
      terminal.err(`\r${bar} ${String(Math.round(fraction * 100)).padStart(3)} %  ${stage.padEnd(16)}`);
      drawn = true;
    },
    wipe: () => {
      if (drawn) terminal.err(`\r${' '.repeat(cells + 26)}\r`);
      drawn = false;
    },
  };
}

/** Wraps words at `width`, later lines indented. */
export function wrap(text: string, width: number, indent: string): string {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(/\s+/)) {
    const room = width - (lines.length === 0 ? 0 : indent.length);
    if (line !== '' && line.length + 1 + word.length > room) {
      lines.push(line);
      line = word;
    } else line = line === '' ? word : `${line} ${word}`;
  }
  lines.push(line);
  return lines.map((l, i) => (i === 0 ? l : indent + l)).join('\n');
}
