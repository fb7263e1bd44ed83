/** `survey TRACKS…`: what was recorded, and whether it can carry a fit. */

import { surveyTracks } from '../../momenta/surveyTracks.js';
import { tabulateMomenta } from '../../momenta/tabulateMomenta.js';
import { formatSurveySummary } from '../../report/terminal.js';
import type { Call } from '../commandTable.js';
import { writeWhole } from '../files.js';
import { readRecording } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';
import { resolveStudy } from '../study.js';
import { formatTable } from '../tables.js';

/** @throws UsageError, DataError */
export async function runSurvey({ operands, options, terminal }: Call): Promise<void> {
  const study = await resolveStudy(options, terminal);
  const momenta = options.momenta as string | undefined;
  checkResultPlace(options.output, operands, terminal);
  checkResultPlace(momenta, operands, terminal, '--momenta');
  const recording = await readRecording(operands, study, terminal);
  const survey = surveyTracks(recording.tracks, { localizationError: study.localizationError });
  const warnings = [...recording.warnings, ...survey.warnings];
  for (const warning of warnings) terminal.warn(warning);
  if (momenta !== undefined) {
    const table = tabulateMomenta(recording.tracks, survey, study.mass ?? 1);
    await writeWhole(terminal.resolve(momenta), formatTable(table.columns), momenta);
    terminal.note(`wrote ${momenta}`);
  }
  const result = {
    ...survey,
    units: recording.tracks.units,
    counts: recording.counts,
    sources: recording.sources,
    warnings,
  };
  const text = wantsJson(options) ? formatJson(result) : formatSurveySummary(result, terminal.summaryStyle);
  await deliver(text, options.output, terminal);
}
