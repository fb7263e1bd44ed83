/** The look of the page: one column of text, pictures in up to three columns, light, dark, and on paper. */

import { DARK, LIGHT, writeVariables } from './palette.js';

const SANS =
  '"Avenir Next", Avenir, "Segoe UI", "Helvetica Neue", "Liberation Sans", Arial, "DejaVu Sans", sans-serif';
const SERIF =
  'Charter, "Bitstream Charter", "Iowan Old Style", "Source Serif 4", Cambria, "Liberation Serif", Georgia, "DejaVu Serif", serif';
const MONO = '"Liberation Mono", Menlo, Consolas, "DejaVu Sans Mono", monospace';

const TEXT = `
:root { color-scheme: light dark; --sans: ${SANS}; ${writeVariables(LIGHT)} }
@media screen and (prefers-color-scheme: dark) { :root { ${writeVariables(DARK)} } }
* { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; text-size-adjust: 100%; scroll-padding-top: 16px; }
body { margin: 0; overflow-wrap: break-word; background: var(--paper); color: var(--ink); font: 17px/1.55 ${SERIF}; }
main, header, footer { max-width: 1216px; margin: 0 auto; padding: 0 24px; }
header { padding-top: 40px; }
h1, h2, h3, h4, nav, figure, table, summary, dl, .key, .tag, .verdict, .source, .outcome, .figures, output { font-family: var(--sans); }
.source { font-size: 15px; color: var(--muted); margin: 0 0 6px; overflow-wrap: anywhere; max-width: none; }
h1 { font-size: 36px; line-height: 1.15; letter-spacing: -0.014em; font-weight: 650; margin: 0 0 10px; }
h2 { font-size: 25px; line-height: 1.25; letter-spacing: -0.008em; font-weight: 650; margin: 60px 0 14px; padding-top: 16px; border-top: 2px solid var(--ink); }
h2 .number { color: var(--muted); font-weight: 400; margin-right: 0.5em; }
h3 { font-size: 19px; font-weight: 650; margin: 40px 0 6px; }
h4 { font-size: 14.5px; font-weight: 650; margin: 0; line-height: 1.35; overflow-wrap: anywhere; }
p, ul { max-width: 44em; margin: 0 0 12px; overflow-wrap: break-word; }
ul { padding-left: 1.2em; }
li { margin-bottom: 6px; }
a { color: inherit; text-decoration-color: var(--muted); text-underline-offset: 3px; }
.lead { font-size: 19px; color: var(--soft); margin-bottom: 20px; }
nav { font-size: 14px; margin-top: 18px; }
nav ol { list-style: none; padding: 0; margin: 0; display: flex; flex-wrap: wrap; gap: 4px 20px; max-width: none; }
nav li { margin: 0; }
.equation { font-size: 20px; margin: 8px 0 14px; max-width: none; }
.equation small { font-size: 15px; color: var(--soft); margin-left: 0.6em; }
.aside, .hint { font-size: 14.5px; line-height: 1.5; color: var(--soft); }
.hint { margin-top: 10px; }
.tag { font-size: 12.5px; line-height: 1.45; color: var(--muted); display: block; overflow-wrap: anywhere; }
.hash { font-family: ${MONO}; font-size: 12.5px; overflow-wrap: anywhere; color: var(--soft); }
.verdict { border-left: 5px solid var(--muted); padding: 10px 16px; background: var(--card); max-width: 50em; margin: 14px 0 18px; font-size: 16.5px; line-height: 1.45; overflow-wrap: anywhere; }
.verdict.good { border-color: var(--good); } .verdict.bad { border-color: var(--bad); }
.notes { list-style: none; padding: 0; max-width: 56em; }
.notes li { border-left: 4px solid var(--simulated); background: var(--card); padding: 8px 14px; margin-bottom: 8px; overflow-wrap: anywhere; font-size: 15.5px; }
.findings { list-style: none; padding: 0; max-width: none; border-top: 1px solid var(--rule); }
.findings li { display: grid; grid-template-columns: 8em minmax(0, 1fr) minmax(0, 16em); gap: 4px 20px; padding: 10px 0 9px; margin: 0; border-bottom: 1px solid var(--rule); align-items: baseline; }
.findings p { margin: 0; font-size: 16px; line-height: 1.45; overflow-wrap: anywhere; }
.outcome { font-size: 14px; font-weight: 650; color: var(--muted); }
.outcome::before { content: "–"; display: inline-block; width: 1.3em; }
.good .outcome { color: var(--good); } .good .outcome::before { content: "✓"; }
.bad .outcome { color: var(--bad); } .bad .outcome::before { content: "✗"; }
.strong .outcome { color: var(--ink); } .strong .outcome::before { content: "✗"; }
.figures { font-size: 14px; color: var(--soft); text-align: right; font-variant-numeric: tabular-nums; }
.facts { display: grid; grid-template-columns: repeat(auto-fit, minmax(140px, 1fr)); gap: 0; margin: 0; padding: 0; background: var(--card); border: 1px solid var(--rule); border-radius: 6px; overflow: hidden; }
.facts div { box-shadow: 0 0 0 0.5px var(--rule); padding: 12px 16px 13px; }
.facts dt { font-size: 13px; color: var(--soft); }
.facts dd { margin: 2px 0 0; font-size: 21px; font-weight: 600; line-height: 1.25; font-variant-numeric: tabular-nums; overflow-wrap: anywhere; }
.settings { columns: 2 24em; column-gap: 40px; font-size: 14px; line-height: 1.45; margin: 8px 0 16px; }
.settings div { display: grid; grid-template-columns: minmax(9em, 13em) minmax(0, 1fr); gap: 0 18px; border-bottom: 1px solid var(--rule); padding: 4px 0; break-inside: avoid; }
.settings.single { columns: 1; max-width: 60em; }
.settings dt { color: var(--soft); overflow-wrap: anywhere; }
.settings dd { margin: 0; overflow-wrap: anywhere; min-width: 0; }
.scroll { overflow-x: auto; max-width: 100%; margin: 10px 0 14px; }
table { border-collapse: collapse; font-size: 14px; line-height: 1.35; font-variant-numeric: tabular-nums; }
caption { text-align: left; color: var(--soft); padding-bottom: 6px; }
th, td { text-align: right; padding: 5px 18px 5px 0; border-bottom: 1px solid var(--rule); vertical-align: top; }
th:first-child, td:first-child { text-align: left; }
td.words, th.words { text-align: left; }
tbody th.words { min-width: 9em; }
td:not(.words) { white-space: nowrap; }
thead th { color: var(--soft); font-weight: 600; border-bottom-color: var(--muted); vertical-align: bottom; }
tbody th { font-weight: 500; } td strong { font-weight: 600; }
.no { color: var(--bad); font-weight: 600; }
details { margin: 4px 0 10px; }
summary { cursor: pointer; font-size: 14px; color: var(--soft); padding: 4px 0; }
.defs { position: absolute; width: 0; height: 0; overflow: hidden; }
footer { margin-top: 56px; padding-top: 16px; padding-bottom: 40px; font-size: 14px; color: var(--muted); }
:focus-visible { outline: 2px solid var(--line); outline-offset: 3px; border-radius: 3px; }
`;

const PICTURES = `
.pictures { display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 330px), 1fr)); gap: 0 28px; margin: 16px 0 4px; }
.pictures.two { grid-template-columns: repeat(auto-fill, minmax(min(100%, 480px), 1fr)); }
.pictures > figure { display: grid; grid-row: span 3; grid-template-rows: subgrid; grid-template-columns: minmax(0, 1fr); row-gap: 0; align-content: start; }
.duo, .trio { display: grid; gap: 0 28px; align-items: start; grid-template-columns: minmax(0, 1fr); margin: 16px 0 4px; }
.duo > *, .trio > * { min-width: 0; } .trio > .pictures { margin: 0; }
.stack { display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 330px), 1fr)); gap: 0 28px; align-content: start; }
@media (min-width: 1000px) {
  .duo { grid-template-columns: minmax(0, 1fr) minmax(0, 1fr); }
  .trio { grid-template-columns: minmax(0, 2fr) minmax(0, 1fr); } .trio > .stack { grid-template-columns: minmax(0, 1fr); }
  .trio.beside { grid-template-columns: minmax(0, 1fr) minmax(0, 2fr); }
}
figure { margin: 0 0 22px; min-width: 0; break-inside: avoid; }
.stack figure { margin-bottom: 12px; }
figcaption { margin-bottom: 2px; }
figcaption p { font-size: 13.5px; line-height: 1.4; color: var(--soft); margin: 1px 0 2px; }
.key { font-size: 13px; line-height: 1.4; color: var(--soft); display: flex; flex-wrap: wrap; gap: 2px 16px; align-items: center; align-content: end; align-self: end; margin: 0 0 4px; }
.key:empty { margin: 0; }
.key .entry { display: inline-flex; align-items: center; gap: 7px; }
.sample { width: 22px; height: 12px; flex: none; color: var(--ink); }
.strip { display: block; width: 100%; max-width: 372px; height: auto; color: var(--soft); font-family: var(--sans); }
.gauge { display: block; width: 140px; height: 16px; }
.plot { position: relative; }
.plot > svg { display: block; width: 100%; height: auto; overflow: visible; color: var(--ink); font-family: var(--sans); }
.plot[tabindex] { cursor: crosshair; touch-action: pan-y; }
.plot .spot { fill: var(--paper); stroke: var(--ink); stroke-width: 2; pointer-events: none; }
output { position: absolute; z-index: 1; top: 0; left: 0; width: max-content; max-width: min(100%, 300px); pointer-events: none; font-size: 13px; line-height: 1.35; color: var(--ink); background: var(--card); border: 1px solid var(--muted); border-radius: 4px; padding: 4px 8px; font-variant-numeric: tabular-nums; overflow-wrap: anywhere; }
output:empty { padding: 0; border: 0; }
.narrow { display: none; }
`;

const NARROW_AND_PAPER = `
@media (max-width: 700px) {
  body { font-size: 16px; }
  main, header, footer { padding-left: 14px; padding-right: 14px; }
  header { padding-top: 24px; }
  h1 { font-size: 27px; } h2 { font-size: 21px; margin-top: 44px; } h3 { margin-top: 30px; } .lead { font-size: 17px; }
  .facts { grid-template-columns: 1fr 1fr; } .facts dd { font-size: 18px; } .facts div { padding: 9px 12px; }
  .broad { display: none; } .narrow { display: block; }
  .settings div { grid-template-columns: minmax(7em, 9em) minmax(0, 1fr); }
  .equation { font-size: 16.5px; } .equation .root { white-space: nowrap; }
  .findings li { grid-template-columns: minmax(0, 1fr) auto; } .findings li > div { grid-column: 1 / -1; grid-row: 2; }
  table { font-size: 13px; } th, td { padding-right: 12px; } tbody th.words { min-width: 7.5em; } .gauge { width: 110px; }
}
@media print {
  :root { --paper: #ffffff; --card: #ffffff; }
  body { font-size: 10.5pt; }
  nav, output, .hint, details:not([open]) { display: none; }
  main, header, footer { max-width: none; padding: 0; }
  h1 { font-size: 22pt; } h2 { margin-top: 22pt; font-size: 15pt; } h3 { margin-top: 16pt; }
  h2, h3, h4, figcaption { break-after: avoid; } .facts, .findings li, tr, .verdict { break-inside: avoid; }
  .pictures { grid-template-columns: repeat(3, minmax(0, 1fr)); gap: 0 14pt; } .pictures.two, .trio > .pictures { grid-template-columns: 1fr 1fr; }
  .trio { grid-template-columns: minmax(0, 2fr) minmax(0, 1fr); } .trio.beside { grid-template-columns: minmax(0, 1fr) minmax(0, 2fr); } .duo { grid-template-columns: 1fr 1fr; gap: 0 14pt; } .stack { grid-template-columns: 1fr; }
  .scroll { overflow: visible; } table { font-size: 8pt; } th, td { padding-right: 7pt; }
  figcaption p, .key { font-size: 8.5pt; } h4 { font-size: 9.5pt; }
  * { print-color-adjust: exact; -webkit-print-color-adjust: exact; }
}
`;

export const PAGE_STYLE = TEXT + PICTURES + NARROW_AND_PAPER;
