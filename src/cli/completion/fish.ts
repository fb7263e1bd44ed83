/** Completion for fish. */

import type { Completed, CompletedCommand, CompletedOption } from './CompletionTree.js';

const quote = (text: string): string => `'${text.replace(/[\\']/g, '\\$&')}'`;

/** What follows an option or a command. */
function follow(completed: Completed): string {
  switch (completed.kind) {
    case 'words':
      return `-x -a ${quote(completed.words.join(' '))}`;
    case 'file':
      return '-r -F';
    case 'directory':
      return "-x -a '(__fish_complete_directories)'";
    case 'anything':
      return '-x';
  }
}

function writeOption({ flags, meaning, value }: CompletedOption): string {
  const names = flags.map((flag) => (flag.startsWith('--') ? `-l ${flag.slice(2)}` : `-s ${flag.slice(1)}`));
  return [...names, value === null ? '' : follow(value), `-d ${quote(meaning)}`].filter(Boolean).join(' ');
}

/** The script that \`source\` or a file in fish/completions takes. */
export function writeFishCompletion(commands: readonly CompletedCommand[]): string {
  const lines = commands.flatMap(({ name, summary, options, operand }) => {
    const within = `complete -c wanderlaw -n '__fish_seen_subcommand_from ${name}'`;
    const operands =
      operand.kind === 'words'
        ? [`${within} -a ${quote(operand.words.join(' '))}`]
        : operand.kind === 'file'
          ? [`${within} -F`]
          : [];
    return [
      `complete -c wanderlaw -n __fish_use_subcommand -a ${name} -d ${quote(summary)}`,
      ...options.map((option) => `${within} ${writeOption(option)}`),
      ...operands,
    ];
  });
  return `# Completion of wanderlaw for fish:  wanderlaw completion fish | source
complete -c wanderlaw -f
${lines.join('\n')}
`;
}
