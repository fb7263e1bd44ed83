/** Tests and challenges for people at a terminal: a line for each verdict, with what was found beneath. */

import { formatInterval } from '../format.js';
import { tameText } from '../html.js';
import type { ReportedChallenge, ReportedTest } from '../ReportInput.js';
import { sayAssumption, sayChallenges, sayP, sayStatement, sayTests } from '../statements.js';
import { writeParagraph, writeTitle } from './layout.js';
import { type Paint, PLAIN_STYLE, type SummaryStyle } from './SummaryStyle.js';

interface Finding {
  readonly mark: string;
  readonly verdict: string;
  readonly paint: Paint;
  readonly statement: string;
  readonly p: number | null;
  /** Sentences and numbers beneath. */
  readonly more: readonly string[];
}

function writeFinding({ mark, verdict, paint, statement, p, more }: Finding, style: SummaryStyle): string {
  const first = `${mark} ${statement}: ${verdict} (${sayP(p)}).`;
  const rest = more
    .filter((text) => text !== '')
    .map((text) =>
      // Two columns further in than the verdict.
      writeParagraph(text, style.width - 2, style.colors.dim)
        .replace(/^/gm, '  ')
        .replace(/ +$/, ''),
    );
  return writeParagraph(first, style.width, paint) + rest.join('');
}

/** Tests of statements: each verdict with its p-value, parameters and note. */
export function formatTestSummary(tests: readonly ReportedTest[], style: SummaryStyle = PLAIN_STYLE): string {
  const { bold, dim } = style.colors;
  const findings = tests.map((test) => {
    const parameters = Object.entries(test.parameters).map(
      ([name, { value, low, high }]) => `${tameText(name, 40)} = ${formatInterval(value, low, high)}`,
    );
    return writeFinding(
      {
        mark: test.rejected ? '✗' : '–',
        verdict: test.rejected ? 'rejected' : 'not rejected',
        paint: test.rejected ? bold : (text) => text,
        statement: sayStatement(test),
        p: test.p,
        more: [tameText(test.note, 600), parameters.join('; ')],
      },
      style,
    );
  });
  return `${writeTitle('Tests', style)}${findings.join('')}${writeParagraph(sayTests(tests), style.width, dim)}`;
}

/** Challenges of the model's assumptions: each verdict with its p-value and note. */
export function formatChallengeSummary(
  checks: readonly ReportedChallenge[],
  style: SummaryStyle = PLAIN_STYLE,
): string {
  const { green, red } = style.colors;
  const findings = checks.map((check) =>
    writeFinding(
      {
        mark: check.holds ? '✓' : '✗',
        verdict: check.holds ? 'holds' : 'fails',
        paint: check.holds ? green : red,
        statement: sayAssumption(check),
        p: check.p,
        more: [tameText(check.note, 600)],
      },
      style,
    ),
  );
  const standing = checks.every((check) => check.holds) ? green : red;
  return `${writeTitle('Assumptions of the model', style)}${findings.join('')}${writeParagraph(sayChallenges(checks), style.width, standing)}`;
}
