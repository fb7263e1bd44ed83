/** `survey TRACKS…`: what was recorded, and whether it can carry a fit. */

import { surveyTracks } from '../../momenta/surveyTracks.js';
import { tabulateMomenta } from '../../momenta/tabulateMomenta.js';
import { formatSurveySummary } from '../../report/terminal.js';
import { tabulateSmoothedMomenta } from '../../uncertainty/tabulateSmoothedMomenta.js';
import { UsageError } from '../../errors.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
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
  const fit = typeof options.fit === 'string' ? await readFit(options.fit, terminal) : null;
  if (fit && momenta === undefined) {
    throw new UsageError('--fit smooths the momenta; say with --momenta where they go', { option: '--fit' });
  }
  const recording = await readRecording(operands, study, terminal);
  const progress = await terminal.startProgress('surveying');
  const survey = surveyTracks(recording.tracks, {
    localizationError: study.localizationError,
    exposure: study.exposure,
    onProgress: (share) => progress.update(share, 1),
  });
  progress.stop();
  const warnings = [...recording.warnings, ...survey.warnings];
  for (const warning of warnings) terminal.warn(warning);
  if (momenta !== undefined) {
    const mass = study.mass ?? fit?.data.mass ?? 1;
    const table = fit
      ? tabulateSmoothedMomenta(recording.tracks, fit, mass)
      : tabulateMomenta(recording.tracks, survey, mass);
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
