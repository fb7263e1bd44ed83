/** `completion SHELL`: the script that teaches a shell what can be typed. */

import type { CompletedCommand } from '../completion/CompletionTree.js';
import { readCompletionTree } from '../completion/CompletionTree.js';
import { writeBashCompletion } from '../completion/bash.js';
import { writeFishCompletion } from '../completion/fish.js';
import { writeZshCompletion } from '../completion/zsh.js';
import { choiceValue } from '../optionValues.js';
import { type Call, SHELLS } from '../commandTable.js';
import { createProgram } from '../createProgram.js';

const WRITERS: Readonly<Record<string, (commands: readonly CompletedCommand[]) => string>> = {
  bash: writeBashCompletion,
  zsh: writeZshCompletion,
  fish: writeFishCompletion,
};

/** @throws UsageError  for a shell that is not known */
export async function runCompletion({ operands, terminal }: Call): Promise<void> {
  const shell = choiceValue(SHELLS)(operands[0], 'shell');
  await terminal.print(WRITERS[shell](readCompletionTree(createProgram(terminal))));
}
