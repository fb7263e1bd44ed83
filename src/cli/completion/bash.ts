/** Completion for bash (3.2 and newer, without further packages). */

import { type Completed, type CompletedCommand, groupBy } from './CompletionTree.js';

/** The lines that fill COMPREPLY for what is typed so far. */
function reply(completed: Completed): string {
  switch (completed.kind) {
    case 'words':
      return `_wanderlaw_words '${completed.words.join(' ')}'`;
    case 'file':
      return '_wanderlaw_paths -f';
    case 'directory':
      return '_wanderlaw_paths -d';
    case 'anything':
      return ':';
  }
}

/** The script that `eval` or a file in bash_completion.d takes. */
export function writeBashCompletion(commands: readonly CompletedCommand[]): string {
  const values = commands.flatMap(({ name, options }) =>
    options.flatMap(({ flags, value }) =>
      value === null ? [] : flags.map((flag) => ({ pattern: `'${name} ${flag}'`, reply: reply(value) })),
    ),
  );
  const valueCases = [...groupBy(values, (value) => value.reply)].map(
    ([text, group]) => `    ${group.map(({ pattern }) => pattern).join(' | ')})\n      ${text}; return ;;`,
  );
  const optionCases = commands.map(
    ({ name, options }) =>
      `      ${name}) _wanderlaw_words '${options.flatMap(({ flags }) => flags).join(' ')}' ;;`,
  );
  const operandCases = [...groupBy(commands, ({ operand }) => reply(operand))].map(
    ([text, group]) => `    ${group.map(({ name }) => name).join(' | ')}) ${text} ;;`,
  );
  return `# Completion of wanderlaw for bash:  eval "$(wanderlaw completion bash)"
_wanderlaw_words() {
  local IFS=$' \\t\\n'
  COMPREPLY=($(compgen -W "$1" -- "$cur"))
  # a word that ends in a colon waits for a number
  if [[ \${#COMPREPLY[@]} -eq 1 && \${COMPREPLY[0]} == *: ]]; then compopt -o nospace 2>/dev/null; fi
}
_wanderlaw_paths() {
  local IFS=$'\\n'
  COMPREPLY=($(compgen "$1" -- "$cur"))
  compopt -o filenames 2>/dev/null
}
_wanderlaw() {
  local cur=\${COMP_WORDS[COMP_CWORD]} previous=\${COMP_WORDS[COMP_CWORD - 1]} command='' i
  if [[ $cur == '=' ]]; then cur=''
  elif [[ $previous == '=' ]]; then previous=\${COMP_WORDS[COMP_CWORD - 2]}; fi
  for ((i = 1; i < COMP_CWORD; i++)); do
    if [[ \${COMP_WORDS[i]} != -* ]]; then command=\${COMP_WORDS[i]}; break; fi
  done
  COMPREPLY=()
  case "$command $previous" in
${valueCases.join('\n')}
  esac
  if [[ $cur == -* ]]; then
    case $command in
      '') _wanderlaw_words '-h --help -V --version' ;;
${optionCases.join('\n')}
    esac
    return
  fi
  case $command in
    '') _wanderlaw_words '${commands.map(({ name }) => name).join(' ')}' ;;
${operandCases.join('\n')}
  esac
}
complete -F _wanderlaw wanderlaw
`;
}
