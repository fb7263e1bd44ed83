/** Completion for zsh, by its own completion system. */

import type { Completed, CompletedCommand, CompletedOption } from './CompletionTree.js';

/** The action part of an argument specification. */
function action(completed: Completed): string {
  switch (completed.kind) {
    case 'words':
      return `(${completed.words.map((word) => word.replaceAll(':', '\\:')).join(' ')})`;
    case 'file':
      return '_files';
    case 'directory':
      return '_files -/';
    case 'anything':
      return ' ';
  }
}

const quote = (text: string): string => `'${text.replaceAll("'", "'\\''")}'`;

/** Text inside brackets or before a colon. */
const tame = (text: string): string => text.replace(/[[\]:\\]/g, '\\$&');

/** May be given more than once: that does no harm where the program takes the last. */
function writeOption({ flags, meaning, value }: CompletedOption): string[] {
  const follows = value === null ? '' : `:${value.placeholder}:${action(value)}`;
  return flags.map((flag) => quote(`*${flag}[${tame(meaning)}]${follows}`));
}

/** The script that a file \`_wanderlaw\` on the fpath, or \`eval\`, takes. */
export function writeZshCompletion(commands: readonly CompletedCommand[]): string {
  const list = commands.map(({ name, summary }) => `    ${quote(`${name}:${tame(summary)}`)}`);
  const cases = commands.map(({ name, options, operand }) => {
    const specifications = [...options.flatMap(writeOption), quote(`*:operand:${action(operand)}`)];
    return `    ${name})\n      _arguments -S \\\n        ${specifications.join(' \\\n        ')} ;;`;
  });
  return `#compdef wanderlaw
# Completion of wanderlaw for zsh:  eval "$(wanderlaw completion zsh)"
_wanderlaw() {
  local -a commands
  commands=(
${list.join('\n')}
  )
  if (( CURRENT == 2 )); then
    _describe command commands
    return
  fi
  shift words
  (( CURRENT-- ))
  case $words[1] in
${cases.join('\n')}
  esac
}
if [[ $funcstack[1] == _wanderlaw ]]; then _wanderlaw "$@"; else compdef _wanderlaw wanderlaw; fi
`;
}
