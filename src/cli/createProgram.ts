/** From the tables of commands and options to the program that commander parses lines with. */

import { Argument, Command, Option } from 'commander';
import { COMMANDS, type CommandSpec } from './commandTable.js';
import { describeOption, OPTIONS, type OptionSpec } from './options.js';
import type { Terminal } from './Terminal.js';
import { readVersion } from './version.js';

const TAGLINE =
  'Finds the laws behind recorded tracks: force, friction and noise at each place, with honest error bars.';

/** The program as commander parses it; actions run the commands. */
export function createProgram(terminal: Terminal): Command {
  const program = new Command('wanderlaw')
    .description(TAGLINE)
    .version(readVersion(), '-V, --version', 'print the version')
    .helpOption('-h, --help', 'print help')
    .helpCommand(false)
    .usage('COMMAND …')
    .addHelpText(
      'after',
      '\nwanderlaw COMMAND --help, or wanderlaw help COMMAND, explains a command and its options.',
    );
  configure(program, terminal);
  for (const spec of COMMANDS) program.addCommand(createCommand(spec, terminal));
  return program;
}

function createCommand(spec: CommandSpec, terminal: Terminal): Command {
  const command = new Command(spec.name)
    .summary(spec.summary)
    .description(`${capitalize(spec.summary)}.\n${spec.description}`)
    .helpOption('-h, --help', 'print help')
    .addHelpText('after', `\nExamples:\n${spec.examples.map((example) => `  ${example}`).join('\n')}`);
  configure(command, terminal);
  for (const [name, meaning, choices] of spec.operands) {
    const argument = new Argument(name, meaning);
    if (choices !== undefined) argument.argChoices = [...choices]; // checked by the command, in its own words
    command.addArgument(argument);
  }
  for (const name of spec.options) {
    const option = createOption(OPTIONS[name]);
    if (spec.required?.includes(name)) option.makeOptionMandatory();
    command.addOption(option);
  }
  return command.action(async () => {
    const runCommand = await spec.load();
    await runCommand({ operands: command.args, options: command.opts(), terminal });
  });
}

function createOption(spec: OptionSpec): Option {
  const option = new Option(spec.flags, describeOption(spec));
  const name = option.long ?? spec.flags;
  if (spec.choices !== undefined) option.argChoices = [...spec.choices];
  const parse = spec.parse ?? ((text: string) => text);
  if (spec.repeatable) {
    option.argParser((text: string, before: unknown) => [
      ...(Array.isArray(before) ? (before as unknown[]) : []),
      parse(text, name),
    ]);
  } else if (option.required) {
    option.argParser((text: string) => parse(text, name));
  }
  return option;
}

/** Errors are thrown instead of printed, and help goes to the streams of the caller. */
function configure(command: Command, terminal: Terminal): void {
  const { streams } = terminal;
  command
    .exitOverride()
    .showSuggestionAfterError(false)
    .configureHelp({
      helpWidth: terminal.width,
      styleTitle: (text) => terminal.colors.bold(text),
      optionDescription: ({ description }) => description, // which names the choices already, with their meaning
      argumentDescription: ({ description }) => description,
    })
    .configureOutput({
      writeOut: (text) => streams.stdout.write(text),
      writeErr: (text) => streams.stderr.write(text),
      outputError: () => {},
      getOutHasColors: () => terminal.colors.isColorSupported,
      getErrHasColors: () => terminal.noteColors.isColorSupported,
    });
}

function capitalize(text: string): string {
  return text[0].toUpperCase() + text.slice(1);
}
