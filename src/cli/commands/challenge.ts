/** `challenge FIT`: the model's own assumptions, tried against the recording. */

import type { ChallengeResult } from '../../hypotheses/challenge/ChallengeResult.js';
import { challengeModel } from '../../hypotheses/challenge/challengeModel.js';
import { formatChallengeSummary } from '../../report/terminal.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readRecordingOfFit } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';

/** @throws UsageError, DataError, NumericalError */
export async function runChallenge({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const overrides = options.tracks as string[] | undefined;
  checkResultPlace(options.output, [fitPath, ...(overrides ?? [])], terminal);
  const fit = await readFit(fitPath, terminal);
  const { tracks } = await readRecordingOfFit(fit, terminal.resolve(fitPath), overrides, terminal);
  const confidence = (options.confidence as number | undefined) ?? fit.study.confidence;
  const progress = await terminal.startProgress('challenging');
  let result: ChallengeResult;
  try {
    result = challengeModel(fit, tracks, confidence, (share) => progress.update(share, 1));
  } finally {
    progress.stop();
  }
  for (const { name, reason } of result.skipped) terminal.note(`${name} was left out: ${reason}`);
  for (const warning of result.warnings) terminal.warn(warning);
  const text = wantsJson(options)
    ? formatJson(result)
    : formatChallengeSummary(result.checks, terminal.summaryStyle);
  await deliver(text, options.output, terminal);
}
