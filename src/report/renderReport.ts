/**
 * The report: one self-contained page that tells the story of a fit in the order of a methods section.
 */

import { createHash } from 'node:crypto';
import { openDrawing } from './charts/Drawing.js';
import type { Figure } from './figure.js';
import { formatCount } from './format.js';
import { Html, html, tameText } from './html.js';
import { PAGE_FILLS } from './legend.js';
import { PAGE_SCRIPT } from './pageScript.js';
import { PAGE_STYLE } from './pageStyle.js';
import type { ReportInput } from './ReportInput.js';
import { writeCarries } from './sections/carries.js';
import { writeCautions } from './sections/cautions.js';
import { writeCoefficients } from './sections/coefficients.js';
import { writeRecorded } from './sections/recorded.js';
import { writeResimulation } from './sections/resimulation.js';
import { writeScenario } from './sections/scenario.js';
import { createContext, type PageContext, type Section } from './sections/Section.js';
import { writeSettings } from './sections/settings.js';
import { writeTests } from './sections/tests.js';

const hash = (text: string) => `'sha256-${createHash('sha256').update(text).digest('base64')}'`;

function writeHeader(context: PageContext, sections: readonly Section[]): Html {
  const { fit } = context;
  const names = (fit.sources ?? []).map((source) => tameText(source.path.split(/[\\/]/).pop() ?? '', 70));
  const title =
    names.length === 0
      ? 'recorded tracks'
      : names.length === 1
        ? names[0]
        : `${names[0]} and ${names.length - 1} more`;
  const found =
    fit.model.order === 'second'
      ? 'Force, friction and noise at each place'
      : 'Drift and diffusion at each place';
  const space = ['one dimension', 'two dimensions', 'three dimensions'][fit.data.dimensions - 1] ?? '';
  return html`<header>
<p class="source"><bdi>${title}</bdi></p>
<h1>${found}</h1>
<p class="lead">${formatCount(fit.data.tracks)} tracks in ${space}, read as a Langevin equation of ${fit.model.order} order.</p>
<nav aria-label="Sections"><ol>${sections.map((section) => html`<li><a href="#${section.id}">${section.title}</a></li>`)}</ol></nav>
</header>`;
}

/** A page and, one by one, the pictures on it. */
export interface DrawnReport {
  readonly page: string;
  readonly figures: readonly Figure[];
}

/**
 * Draws a page that needs nothing beside itself: style, pictures and one small script are inside, and its content
 * security policy forbids everything else. Text from the user's files appears as text alone.
 *
 * @param input  a fit, with the results of tests, challenges, a re-simulation and a scenario where they are to be shown
 *
 * @example
 * const { page, figures } = await drawReport({ fit, scenario });
 * console.log(page.slice(0, 15)); // → <!doctype html>
 * console.log(figures[0].name, figures[0].table.length); // → tracks 3
 */
export async function drawReport(input: ReportInput): Promise<DrawnReport> {
  const context = createContext(input, await openDrawing());
  const sections = [
    writeRecorded(context),
    writeCarries(context),
    writeCoefficients(context),
    writeTests(context),
    writeResimulation(context),
    writeScenario(context),
    writeSettings(context),
    writeCautions(context),
  ].filter((section) => section !== null);
  const program = tameText(input.fit.program ?? 'wanderlaw', 60);
  const policy = `default-src 'none'; style-src ${hash(PAGE_STYLE)}; script-src ${hash(PAGE_SCRIPT)}; base-uri 'none'; form-action 'none'`;
  const page = html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${new Html(policy)}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="generator" content="${program}">
<title>${tameText(input.fit.sources?.[0]?.path.split(/[\\/]/).pop() ?? 'Tracks', 70)} – fitted coefficients</title>
<style>${new Html(PAGE_STYLE)}</style>
</head>
<body>
${PAGE_FILLS}
${writeHeader(context, sections)}
<main>
${sections.map((section, i) => html`<section id="${section.id}"><h2><span class="number">${i + 1}</span>${section.title}</h2>\n${section.body}</section>\n`)}
</main>
<footer>Written by ${program}.</footer>
<script>${new Html(PAGE_SCRIPT)}</script>
</body>
</html>
`.text;
  return { page, figures: context.figures };
}

/**
 * The page alone, a complete HTML document: see `drawReport`.
 *
 * @example
 * const challenges = challengeModel(fit, tracks, 0.95).checks;
 * const page = await renderReport({ fit, challenges });
 * console.log(page.includes('Assumptions of the model')); // → true
 */
export async function renderReport(input: ReportInput): Promise<string> {
  return (await drawReport(input)).page;
}
