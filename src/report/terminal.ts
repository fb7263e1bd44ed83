/** Summaries for people at a terminal, one file per command: plain text, no wider than the terminal. */

export { formatChallengeSummary, formatTestSummary } from './terminal/formatFindings.js';
export { formatFitSummary } from './terminal/formatFitSummary.js';
export { formatResimulationSummary } from './terminal/formatResimulationSummary.js';
export { formatSurveySummary } from './terminal/formatSurveySummary.js';
export { PLAIN_STYLE, type SummaryStyle } from './terminal/SummaryStyle.js';
