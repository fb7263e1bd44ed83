/** What can be typed after `wanderlaw`, read off the commander tree that parses it, so that no list goes stale. */

import type { Argument, Command, Option } from 'commander';

/** What a value or an operand is made of: known words, the name of a file or a directory, or anything. */
export type Completed =
  | { readonly kind: 'words'; readonly words: readonly string[] }
  | { readonly kind: 'file' | 'directory' | 'anything' };

export interface CompletedOption {
  /** `-o` and `--output`, as far as there are both. */
  readonly flags: readonly string[];
  readonly meaning: string;
  /** Null where no value follows. */
  readonly value: (Completed & { readonly placeholder: string }) | null;
}

export interface CompletedCommand {
  readonly name: string;
  readonly summary: string;
  readonly options: readonly CompletedOption[];
  readonly operand: Completed;
}

/** Reads the commands of a program; `help` is one of them, with their names for an operand. */
export function readCompletionTree(program: Command): CompletedCommand[] {
  const commands = program.commands.map((command) => ({
    name: command.name(),
    summary: command.summary(),
    options: [...command.options.map(readOption), HELP_OPTION],
    operand: readOperand(command.registeredArguments),
  }));
  const words = commands.map(({ name }) => name);
  const help = { name: 'help', summary: 'explain a command and its options', options: [] };
  return [...commands, { ...help, operand: { kind: 'words', words } }];
}

const HELP_OPTION: CompletedOption = { flags: ['-h', '--help'], meaning: 'print help', value: null };

function readOption(option: Option): CompletedOption {
  const placeholder = /<(.*?)>/.exec(option.flags)?.[1];
  return {
    flags: [option.short, option.long].filter((flag) => flag !== undefined),
    meaning: shorten(option.description),
    value: placeholder === undefined ? null : { placeholder, ...readValue(option.argChoices, placeholder) },
  };
}

/** Placeholders of values that name something on the disk. */
const FILES: readonly string[] = ['FILE', 'FIT', 'POINTS'];

function readValue(choices: readonly string[] | undefined, placeholder: string): Completed {
  if (choices !== undefined) return { kind: 'words', words: choices };
  if (FILES.includes(placeholder)) return { kind: 'file' };
  return { kind: placeholder === 'DIRECTORY' ? 'directory' : 'anything' };
}

/** Operands are files, except those with known words. */
function readOperand([argument]: readonly Argument[]): Completed {
  if (argument === undefined) return { kind: 'anything' };
  return argument.argChoices === undefined ? { kind: 'file' } : { kind: 'words', words: argument.argChoices };
}

const LONGEST = 70;

/** The first words of a meaning: what fits beside an option in a list. */
function shorten(text: string): string {
  const [head] = text.split(/; | \(|: |, for example/);
  return head.length <= LONGEST ? head : `${head.slice(0, LONGEST).replace(/\s\S*$/, '')} …`;
}

/** Commands by what `key` says of them, for branches that several share. */
export function groupBy<Item>(items: readonly Item[], key: (item: Item) => string): Map<string, Item[]> {
  const groups = new Map<string, Item[]>();
  for (const item of items) {
    const group = groups.get(key(item));
    if (group === undefined) groups.set(key(item), [item]);
    else group.push(item);
  }
  return groups;
}
