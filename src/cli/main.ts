/** From arguments to an exit status: parses the line, runs the command, turns every error into one sentence. */

import { CommanderError } from 'commander';
import { UsageError, WanderlawError } from '../errors.js';
import { COMMANDS, type CommandSpec } from './commandTable.js';
import { createProgram } from './createProgram.js';
import { OPTIONS } from './options.js';
import { formatSuggestion } from './suggest.js';
import { processStreams, Terminal, type Streams } from './Terminal.js';

/**
 * Runs one command line.
 *
 * @param argv  the words after the program's name
 * @returns the exit status: 0 done; 2 the line, a study, scenario or fit file is wrong or an output cannot be
 *   written; 3 the tracks cannot be read or used; 1 anything else
 */
export async function run(argv: readonly string[], streams: Streams = processStreams()): Promise<number> {
  const terminal = new Terminal(streams, argv.includes('--quiet') || argv.includes('-q'));
  const program = createProgram(terminal);
  try {
    if (argv.length === 0) {
      streams.stderr.write(program.helpInformation({ error: true }));
      return 2;
    }
    await program.parseAsync(expandHelp(argv), { from: 'user' });
    return 0;
  } catch (error) {
    if (error instanceof CommanderError && error.exitCode === 0) return 0; // help or version, already printed
    const failure = error instanceof CommanderError ? explainLineError(error, argv) : error;
    terminal.fail(formatFailure(failure));
    if (argv.includes('--trace') && failure instanceof Error) streams.stderr.write(`${failure.stack}\n`);
    return failure instanceof WanderlawError ? failure.exitStatus : 1;
  }
}

/** `help fit` is `fit --help`; help for a command that is not there is a mistake like any other. */
function expandHelp(argv: readonly string[]): string[] {
  const words = argv[0] === 'help' ? [...argv.slice(1), '--help'] : [...argv];
  const known = words[0]?.startsWith('-') || COMMANDS.some(({ name }) => name === words[0]);
  return known ? words : words.filter((word) => word !== '--help' && word !== '-h');
}

/** The sentence of an error; a fault of the program says so. */
function formatFailure(error: unknown): string {
  const message = (error instanceof Error ? error.message : String(error)).replace(/\s*\n\s*/g, ' ').trim();
  if (error instanceof WanderlawError) return message;
  return `something went wrong inside the program: ${message || 'no message'}; --trace shows where`;
}

/** What commander found wrong with the line, in our words. */
function explainLineError(error: CommanderError, argv: readonly string[]): UsageError {
  const [, quoted = ''] = /'([^']*)'/.exec(error.message) ?? [];
  const command = argv.find((word) => COMMANDS.some(({ name }) => name === word));
  const spec = COMMANDS.find(({ name }) => name === command);
  const help = `wanderlaw ${spec === undefined ? '' : `${spec.name} `}--help`;
  const named = (flags: string): string => /--[\w-]+/.exec(flags)?.[0] ?? flags;
  switch (error.code) {
    case 'commander.unknownCommand': {
      const names = COMMANDS.map(({ name }) => name);
      const suggestion = formatSuggestion(quoted, names);
      return new UsageError(
        `"${quoted}" is not a command${suggestion || '; use one of'} (${names.join(', ')})`,
        {
          command: quoted,
        },
      );
    }
    case 'commander.unknownOption': {
      const known = (spec?.options ?? []).map((name) => /--[\w-]+/.exec(OPTIONS[name].flags)?.[0] ?? '');
      const suggestion = formatSuggestion(quoted, [...known, '--help']);
      return new UsageError(
        `${quoted} is not an option${spec === undefined ? '' : ` of ${spec.name}`}${suggestion || `; ${help} lists them`}`,
        {
          option: quoted,
        },
      );
    }
    case 'commander.optionMissingArgument':
      return new UsageError(`${named(quoted)} needs a value; ${help} explains it`, { option: named(quoted) });
    case 'commander.missingMandatoryOptionValue':
      return new UsageError(`${named(quoted)} is needed; ${help} explains it`, { option: named(quoted) });
    case 'commander.missingArgument':
      return new UsageError(
        `${spec?.name ?? 'the command'} needs ${describeOperand(spec, quoted)}; ${help} explains it`,
      );
    case 'commander.excessArguments':
      return new UsageError(
        `${spec?.name ?? 'the command'} takes fewer words than were given; ${help} explains it`,
      );
    default:
      return new UsageError(error.message.replace(/^error: /, ''));
  }
}

function describeOperand(spec: CommandSpec | undefined, name: string): string {
  const operand = spec?.operands.find(([notation]) => notation.replace(/[<>[\].]/g, '') === name);
  return operand === undefined ? name : operand[1].split(';')[0];
}
