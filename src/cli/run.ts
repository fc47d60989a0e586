import { isLeadspanError, LeadspanError } from '../base/errors.ts';
import { nearestName } from '../base/options.ts';
import { VERSION } from '../base/version.ts';
import { ASSESS_HELP, assessCommand } from './assess-command.ts';
import { DEMO_HELP, demoCommand } from './demo-command.ts';
import { type CommandHelp, commandHelp, overview } from './help.ts';
import { type Arguments, parseArguments } from './options.ts';
import { SPECTRUM_HELP, spectrumCommand } from './spectrum-command.ts';
import type { Terminal } from './terminal.ts';

interface Command {
  readonly help: CommandHelp;
  run(args: Arguments, terminal: Terminal): Promise<number>;
}

const COMMANDS: readonly Command[] = [
  { help: ASSESS_HELP, run: assessCommand },
  { help: DEMO_HELP, run: demoCommand },
  { help: SPECTRUM_HELP, run: spectrumCommand },
];

/**
 * Runs the command line.
 * @returns exit status: 0 answered, 1 inconclusive or refused, 2 misuse, 3 a failure of ours, 130 interrupted
 */
export async function run(argv: readonly string[], terminal: Terminal): Promise<number> {
  try {
    const [name, ...rest] = argv;
    if (name === undefined || name === '--help' || name === 'help') {
      terminal.out(overview(COMMANDS.map((command) => command.help)));
      return name === undefined ? 2 : 0;
    }
    if (name === '--version') {
      terminal.out(`${VERSION}\n`);
      return 0;
    }
    const command = COMMANDS.find(({ help }) => help.name === name);
    if (!command) {
      const names = COMMANDS.map(({ help }) => help.name);
      const guess = nearestName(name, names);
      throw new LeadspanError(
        'BAD_OPTION',
        `There is no command ${JSON.stringify(name)}${guess ? `; did you mean ${guess}?` : '.'} The commands are: ${names.join(', ')}.`,
      );
    }
    const args = parseArguments(rest, command.help.options, name);
    if (args.has('help')) {
      terminal.out(commandHelp(command.help));
      return 0;
    }
    return await command.run(args, terminal);
  } catch (error) {
    if (terminal.interrupt.aborted) {
      terminal.err('Interrupted.\n');
      return 130;
    }
    if (isLeadspanError(error)) {
      terminal.err(`leadspan: ${error.message}\n`);
      return error.code === 'KERNEL_FAILED' || error.code === 'CLOSED' ? 3 : 2;
    }
    terminal.err(
      `leadspan: an error of ours, please report it. ${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`,
    );
    return 3;
  }
}
