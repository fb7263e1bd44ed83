/** Statements tested on the coefficients, and the model's own assumptions tried against the data. */

import { formatInterval, formatNumber, formatP } from '../format.js';
import { type Html, html, tameText } from '../html.js';
import type { PageContext, Section } from './Section.js';

function drawTests(context: PageContext): Html | null {
  if (!context.tests || context.tests.length === 0) return null;
  return html`<div class="scroll"><table><thead><tr><th class="words">Statement</th><th>p</th><th>Verdict</th><th>Statistic</th><th class="words">In words</th></tr></thead><tbody>${context.tests.map(
    (test) =>
      html`<tr><th class="words">${tameText(test.hypothesis, 80)}${Object.entries(test.parameters).map(
        ([name, { value, low, high }]) =>
          html`<span class="tag">${tameText(name, 30)} = ${formatInterval(value, low, high)}</span>`,
      )}</th><td>${formatP(test.p)}</td><td>${test.rejected ? html`<span class="no">rejected</span>` : html`<span class="yes">not rejected</span>`}</td><td>${formatNumber(test.statistic)}</td><td class="words">${tameText(test.note, 600)}</td></tr>`,
  )}</tbody></table></div>`;
}

function drawChallenges(context: PageContext): Html | null {
  if (!context.challenges || context.challenges.length === 0) return null;
  return html`<h3>Assumptions of the model</h3><div class="scroll"><table><thead><tr><th class="words">Assumption tried</th><th>p</th><th>Verdict</th><th class="words">In words</th></tr></thead><tbody>${context.challenges.map(
    (check) =>
      html`<tr><th class="words">${tameText(check.name, 80)}</th><td>${formatP(check.p)}</td><td>${check.holds ? html`<span class="yes">holds</span>` : html`<span class="no">fails</span>`}</td><td class="words">${tameText(check.note, 600)}</td></tr>`,
  )}</tbody></table></div>`;
}

export function writeTests(context: PageContext): Section | null {
  const [tests, challenges] = [drawTests(context), drawChallenges(context)];
  if (!tests && !challenges) return null;
  return { id: 'tests', title: 'Tests and challenges', body: html`${tests}${challenges}` };
}
