import { run } from './run.ts';

/** Widest text that reads well, and what a pipe gets. */
const MOST_COLUMNS = 100;

const interrupt = new AbortController();
// The first interrupt cancels the job in order; the second ends the process at once.
process.once('SIGINT', () => interrupt.abort());
process.once('SIGTERM', () => interrupt.abort());
// A closed pipe (`leadspan … | head`) is not an error.
process.stdout.on('error', (error: NodeJS.ErrnoException) => process.exit(error.code === 'EPIPE' ? 0 : 3));

process.exitCode = await run(process.argv.slice(2), {
  out: (text) => void process.stdout.write(text),
  err: (text) => void process.stderr.write(text),
  errIsTerminal: process.stderr.isTTY === true,
  width: Math.min(process.stdout.columns ?? MOST_COLUMNS, MOST_COLUMNS),
  interrupt: interrupt.signal,
});
