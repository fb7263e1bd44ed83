/** One resolved study from the defaults, the file of `--study` and the options on the line; the line wins. */

import { completeStudy, parseStudyInput } from '../documents/parseStudy.js';
import type { Study, StudyInput } from '../documents/Study.js';
import { UsageError } from '../errors.js';
import { readDocument } from './files.js';
import { OPTIONS, type OptionSpec } from './options.js';
import { formatSuggestion } from './suggest.js';
import type { Terminal } from './Terminal.js';

const STUDY_KEYS = Object.values<OptionSpec>(OPTIONS).flatMap(({ study }) => study ?? []);

/** @throws UsageError  where the study file is wrong, or the choices contradict each other */
export async function resolveStudy(
  options: Readonly<Record<string, unknown>>,
  terminal: Terminal,
): Promise<Study> {
  const line: Record<string, unknown> = {};
  for (const key of STUDY_KEYS) if (options[key] !== undefined) line[key] = options[key];
  const file = typeof options.study === 'string' ? await readStudyFile(options.study, terminal) : {};
  checkBelongsToOrder(line, (line.order ?? file.order ?? 'auto') as Study['order']);
  const columns = { ...file.columns, ...(line.columns as StudyInput['columns']) };
  return completeStudy({ ...file, ...line, columns });
}

/** @throws UsageError  where it cannot be read or is no study */
export async function readStudyFile(path: string, terminal: Terminal): Promise<StudyInput> {
  const value = await readDocument(terminal.resolve(path), 'study', path);
  return parseStudyInput(value, { source: path, suggest: formatSuggestion });
}

const OF_SECOND_ORDER = ['force', 'friction', 'noise', 'frictionForm'] as const;
const OF_FIRST_ORDER = ['drift', 'diffusion'] as const;

/** An option that the order leaves without effect is refused rather than ignored. */
function checkBelongsToOrder(line: Readonly<Record<string, unknown>>, order: Study['order']): void {
  if (order === 'auto') return;
  const [strangers, hint] =
    order === 'first'
      ? [OF_SECOND_ORDER, 'at first order use --drift, --diffusion and --noise-form']
      : [OF_FIRST_ORDER, 'at second order use --force, --friction and --noise'];
  for (const key of strangers) {
    if (line[key] === undefined) continue;
    const flag = OPTIONS[key].flags.split(' ')[0];
    throw new UsageError(`${flag} has no meaning at --order ${order}; ${hint}`, { option: flag, order });
  }
}
