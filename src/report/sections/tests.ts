/** Statements tested on the coefficients, and the model's own assumptions tried against the data. */

import { formatInterval, formatNumber, formatWithError } from '../format.js';
import { type Html, html, tameText } from '../html.js';
import type { ReportedTest } from '../ReportInput.js';
import { sayAssumption, sayChallenges, sayP, sayStatement, sayTests } from '../statements.js';
import { type PageContext, saySentence, type Section } from './Section.js';

interface Finding {
  readonly tone: 'good' | 'bad' | 'strong' | 'open';
  readonly verdict: string;
  readonly statement: string;
  readonly figures: string;
  readonly note: string;
  readonly more?: Html | null;
}

/** One finding a line: verdict, statement, p, and the note. */
function drawFindings(findings: readonly Finding[]): Html {
  return html`<ul class="findings">${findings.map(
    ({ tone, verdict, statement, figures, note, more }) =>
      html`<li class="${tone}"><span class="outcome">${verdict}</span><div><p><strong>${statement}.</strong> ${saySentence(tameText(note, 600))}</p>${more}</div><span class="figures">${figures}</span></li>`,
  )}</ul>`;
}

function drawParameters({ parameters }: Pick<ReportedTest, 'parameters'>): Html | null {
  const entries = Object.entries(parameters);
  if (entries.length === 0) return null;
  return html`<p class="tag">${entries.map(
    ([name, { value, low, high }], i) =>
      html`${i > 0 ? '; ' : ''}<bdi>${tameText(name, 40)}</bdi> = ${formatInterval(value, low, high)}`,
  )}</p>`;
}

/** Several laws side by side, best first. */
function drawComparison({ comparison = [] }: ReportedTest): Html | null {
  if (comparison.length < 2) return null;
  const rows = comparison.map(({ law, parameters, p, rejected, difference, differenceError, tie }, i) => {
    const behind =
      i === 0 ? 'best' : difference === null ? '–' : formatWithError(difference, differenceError ?? 0);
    const verdict = `${rejected ? 'rejected' : 'not rejected'}, ${sayP(p)}`;
    return html`<tr><th class="words">${tameText(law, 120)}${drawParameters({ parameters })}</th><td>${behind}</td><td>${i === 0 ? '' : tie ? 'as good' : 'worse'}</td><td>${verdict}</td></tr>`;
  });
  return html`<div class="scroll" tabindex="0" role="region" aria-label="Laws compared"><table>
<thead><tr><th class="words">Law</th><th>Score behind the best</th><th>Within chance</th><th>By itself</th></tr></thead><tbody>${rows}</tbody></table></div>
<p class="tag">Scores are log predictive densities of data that the parameters were not fitted to.</p>`;
}

export function writeTests(context: PageContext): Section | null {
  const { tests = [], challenges = [] } = context;
  if (tests.length === 0 && challenges.length === 0) return null;
  const tested =
    tests.length === 0
      ? null
      : html`<p>${sayTests(tests)} “Not rejected” does not mean proven: the recording may be too small to tell.</p>${drawFindings(
          tests.map((test) => ({
            tone: test.rejected ? 'strong' : 'open',
            verdict: test.rejected ? 'rejected' : 'not rejected',
            statement: sayStatement(test),
            figures:
              test.statistic === null
                ? sayP(test.p)
                : `${sayP(test.p)}, statistic ${formatNumber(test.statistic)}`,
            note: test.note,
            more: html`${drawParameters(test)}${drawComparison(test)}`,
          })),
        )}`;
  const challenged =
    challenges.length === 0
      ? null
      : html`<h3>Assumptions of the model</h3><p>${sayChallenges(challenges)}</p>${drawFindings(
          challenges.map((check) => ({
            tone: check.holds ? 'good' : 'bad',
            verdict: check.holds ? 'holds' : 'fails',
            statement: sayAssumption(check),
            figures: sayP(check.p),
            note: check.note,
          })),
        )}`;
  return { id: 'tests', title: 'Tests and challenges', body: html`${tested}${challenged}` };
}
