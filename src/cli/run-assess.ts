import type { Assessment, AssessOptions } from '../assess/types.ts';
import type { JobOptions } from '../base/options.ts';
import { createEngine, type EngineOptions } from '../engine/engine.ts';
import type { Recording } from '../recording/types.ts';
import { type Arguments, given } from './options.ts';
import { progressLine, type Terminal } from './terminal.ts';

/** Runs one job on an engine of its own, with progress on the terminal and the user's interrupt. */
export async function withEngine<T>(
  args: Arguments,
  terminal: Terminal,
  work: (engine: Awaited<ReturnType<typeof createEngine>>, job: JobOptions) => Promise<T>,
): Promise<T> {
  const megabytes = args.number('memory-limit');
  const seconds = args.number('deadline');
  const engine = await createEngine(
    given({
      threads: args.number('threads'),
      backend: args.text('backend') as EngineOptions['backend'],
      memoryLimit: megabytes === undefined ? undefined : megabytes * 2 ** 20,
    }),
  );
  const line = progressLine(terminal);
  try {
    for (const notice of engine.info.notices) terminal.err(`${notice}\n`);
    return await work(engine, {
      signal: terminal.interrupt,
      onProgress: line.update,
      ...given({ seed: args.number('seed'), deadline: seconds === undefined ? undefined : seconds * 1000 }),
    });
  } finally {
    line.wipe();
    await engine.close();
  }
}

export function runAssess(
  args: Arguments,
  terminal: Terminal,
  recording: Recording,
  options: AssessOptions,
): Promise<Assessment> {
  return withEngine(args, terminal, (engine, job) => engine.assess(recording, { ...options, ...job }));
}

/** 0 when answered, 1 when the regime is inconclusive or the lead time refused. */
export function exitStatus(assessment: Assessment): 0 | 1 {
  return assessment.regime.call === 'inconclusive' || !assessment.leadTime.trusted.ok ? 1 : 0;
}
