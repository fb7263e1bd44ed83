/**
 * The look of the page: one column of text, pictures in up to three columns, colours that stay apart for
 * colour-blind readers and in greyscale (every scale runs steadily from light to dark), light and dark.
 */
export const PAGE_STYLE = `
:root {
  color-scheme: light dark;
  --paper: #fcfbf8; --card: #ffffff; --ink: #1c2126; --soft: #4a535b; --muted: #646d75; --rule: #dfdbd2;
  --line: #10507f; --band: #8db4d3; --band-wide: #d5e3ee; --bar: #8db4d3;
  --simulated: #a8480a; --simulated-band: #f3d2b5;
  --good: #1d6b45; --bad: #a03114;
  --track-a: #10507f; --track-b: #c07a3c; --track-c: #3f7f6f; --track-d: #4c3a66;
  --hatch: #d5d0c4; --veil: #ffffff;
  --value-0: #f1ebd0; --value-1: #d2dfb2; --value-2: #a3cba3; --value-3: #6cb09f; --value-4: #3b8c99;
  --value-5: #28648a; --value-6: #253a6b;
  --doubt-0: #f7f0e6; --doubt-1: #efd3af; --doubt-2: #dca676; --doubt-3: #b96c4a; --doubt-4: #763531;
}
@media (prefers-color-scheme: dark) {
  :root {
    --paper: #14181c; --card: #1a1f24; --ink: #e9e6df; --soft: #bfc2c2; --muted: #9aa1a5; --rule: #353c42;
    --line: #7fc0ee; --band: #2f6289; --band-wide: #22394b; --bar: #2f6289;
    --simulated: #f0a35e; --simulated-band: #553a22;
    --good: #6cc79a; --bad: #f08f70;
    --track-a: #7fc0ee; --track-b: #d9975a; --track-c: #6fb5a2; --track-d: #c5b2e6;
    --hatch: #3a4148; --veil: #14181c;
    --value-0: #223058; --value-1: #26507a; --value-2: #31748f; --value-3: #4f998f; --value-4: #86bb91;
    --value-5: #c1d8a4; --value-6: #f4eccb;
    --doubt-0: #33241f; --doubt-1: #5c342a; --doubt-2: #96573c; --doubt-3: #cf915f; --doubt-4: #f6d9ae;
  }
}
* { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; text-size-adjust: 100%; }
body {
  margin: 0; background: var(--paper); color: var(--ink);
  font: 17px/1.55 Charter, "Bitstream Charter", "Iowan Old Style", "Source Serif 4", Cambria, "Liberation Serif", Georgia, serif;
}
main, header, footer { max-width: 1216px; margin: 0 auto; padding: 0 24px; }
header { padding-top: 44px; }
h1, h2, h3, h4, .facts, table, .key, output, nav, figure, summary, .tag, .verdict, dl {
  font-family: "Avenir Next", Avenir, "Segoe UI", "Helvetica Neue", "Liberation Sans", Arial, sans-serif;
}
h1 { font-size: 34px; line-height: 1.18; letter-spacing: -0.012em; font-weight: 650; margin: 0 0 10px; max-width: 28em; overflow-wrap: anywhere; }
h2 { font-size: 24px; line-height: 1.25; letter-spacing: -0.008em; font-weight: 650; margin: 64px 0 12px; padding-top: 18px; border-top: 2px solid var(--ink); }
h2 .number { color: var(--muted); font-weight: 400; margin-right: 0.5em; }
h3 { font-size: 19px; font-weight: 650; margin: 40px 0 6px; }
h4 { font-size: 14.5px; font-weight: 650; margin: 0; line-height: 1.35; }
p, ul { max-width: 42em; margin: 0 0 12px; overflow-wrap: break-word; }
ul { padding-left: 1.2em; }
li { margin-bottom: 6px; }
a { color: inherit; text-decoration-color: var(--muted); text-underline-offset: 3px; }
.lead { font-size: 19px; color: var(--soft); margin-bottom: 22px; }
nav { font-size: 14px; margin-top: 18px; }
nav ol { list-style: none; padding: 0; margin: 0; display: flex; flex-wrap: wrap; gap: 4px 20px; max-width: none; }
.facts { display: grid; grid-template-columns: repeat(auto-fit, minmax(150px, 1fr)); gap: 1px; margin: 0; padding: 0; background: var(--rule); border: 1px solid var(--rule); border-radius: 6px; overflow: hidden; }
.facts div { background: var(--card); padding: 12px 16px 13px; }
.facts dt { font-size: 13px; color: var(--soft); }
.facts dd { margin: 2px 0 0; font-size: 21px; font-weight: 600; line-height: 1.25; font-variant-numeric: tabular-nums; overflow-wrap: anywhere; }
.pictures { display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 340px), 1fr)); gap: 0 28px; margin: 18px 0 4px; }
.pictures.two { grid-template-columns: repeat(auto-fill, minmax(min(100%, 480px), 1fr)); }
figure { margin: 0 0 20px; min-width: 0; break-inside: avoid; }
.pictures > figure { display: grid; grid-row: span 4; grid-template-rows: subgrid; grid-template-columns: minmax(0, 1fr); gap: 0; align-content: start; }
.pictures > .stack, .pictures > .beside { grid-row: span 4; }
.beside { min-width: 0; align-self: start; }
.two output, .stack output { min-height: 1.6em; }
.stack { display: grid; gap: 0; align-content: start; min-width: 0; }
figcaption { margin-bottom: 4px; }
figcaption p { font-size: 13.5px; line-height: 1.45; color: var(--soft); margin: 2px 0 4px; }
.plot { position: relative; }
.plot svg { display: block; width: 100%; height: auto; overflow: visible; color: var(--ink); font-family: "Avenir Next", Avenir, "Segoe UI", "Helvetica Neue", "Liberation Sans", Arial, sans-serif; }
.plot[tabindex] { cursor: crosshair; }
.plot:focus-visible { outline: 2px solid var(--line); outline-offset: 3px; border-radius: 3px; }
.plot .spot { fill: var(--paper); stroke: var(--ink); stroke-width: 2; pointer-events: none; }
.narrow { display: none; }
output { display: block; min-height: 2.95em; font-size: 13.5px; line-height: 1.4; color: var(--soft); font-variant-numeric: tabular-nums; padding-top: 4px; overflow-wrap: anywhere; }
.key { font-size: 13px; color: var(--soft); display: flex; flex-wrap: wrap; gap: 3px 16px; margin: 2px 0 4px; align-items: center; }
.key .entry { display: inline-flex; align-items: center; gap: 7px; }
.sample { display: inline-block; width: 22px; height: 11px; border-radius: 1px; flex: none; }
.sample.line { height: 0; border-top: 3px solid var(--line); }
.sample.band { background: var(--band); }
.sample.band-wide { background: var(--band-wide); }
.sample.dashed { height: 0; border-top: 2px dotted var(--muted); }
.sample.simulated { background: var(--simulated-band); position: relative; }
.sample.simulated::after { content: ""; position: absolute; left: 0; right: 0; top: 50%; border-top: 2px dashed var(--simulated); margin-top: -1px; }
.sample.hatched { background: repeating-linear-gradient(45deg, var(--hatch) 0 1.2px, transparent 1.2px 5px); outline: 1px solid var(--rule); }
.sample.veiled { background: repeating-linear-gradient(-45deg, var(--veil) 0 2.5px, var(--value-3) 2.5px 5px); outline: 1px solid var(--rule); }
.sample.faint { height: 0; border-top: 1.5px solid var(--muted); opacity: 0.6; }
.legend-strip { display: block; width: 100%; max-width: 372px; height: auto; color: var(--soft); font-family: "Avenir Next", Avenir, "Segoe UI", "Helvetica Neue", "Liberation Sans", Arial, sans-serif; }
.verdict { border-left: 5px solid var(--muted); padding: 10px 16px; background: var(--card); max-width: 50em; margin: 14px 0 18px; font-size: 16.5px; line-height: 1.45; }
.verdict.good { border-color: var(--good); } .verdict.bad { border-color: var(--bad); }
.notes { list-style: none; padding: 0; }
.notes li { border-left: 4px solid var(--simulated); background: var(--card); padding: 8px 14px; margin-bottom: 8px; overflow-wrap: anywhere; }
.tag { font-size: 12.5px; color: var(--muted); display: block; }
.scroll { overflow-x: auto; max-width: 100%; margin: 10px 0 16px; }
table { border-collapse: collapse; font-size: 14px; line-height: 1.35; font-variant-numeric: tabular-nums; }
caption { text-align: left; color: var(--soft); padding-bottom: 6px; }
th, td { text-align: right; padding: 5px 14px 5px 0; border-bottom: 1px solid var(--rule); vertical-align: top; }
th:first-child, td:first-child { text-align: left; }
td.words, th.words { text-align: left; min-width: 11em; }
thead th { color: var(--soft); font-weight: 600; border-bottom-color: var(--muted); vertical-align: bottom; }
tbody th { font-weight: 500; }
.yes { color: var(--good); font-weight: 600; } .no { color: var(--bad); font-weight: 600; }
details { margin: 4px 0 10px; }
summary { cursor: pointer; font-size: 14px; color: var(--soft); padding: 4px 0; }
.settings { columns: 2 26em; column-gap: 40px; font-size: 14px; line-height: 1.45; margin: 8px 0 16px; }
.settings div { display: grid; grid-template-columns: minmax(9em, 13em) minmax(0, 1fr); gap: 0 18px; border-bottom: 1px solid var(--rule); padding: 4px 0; break-inside: avoid; }
.settings.single { columns: 1; max-width: 56em; }
.settings dt { color: var(--soft); overflow-wrap: anywhere; }
.settings dd { margin: 0; overflow-wrap: anywhere; min-width: 0; }
.hash { font-family: "Liberation Mono", Menlo, Consolas, monospace; font-size: 12.5px; overflow-wrap: anywhere; color: var(--soft); }
.equation { font-style: italic; font-size: 20px; margin: 8px 0 14px; max-width: none; }
.equation span { font-style: normal; }
.aside { font-size: 15px; color: var(--soft); }
.defs { position: absolute; width: 0; height: 0; overflow: hidden; }
.hint { font-size: 14.5px; color: var(--soft); margin-top: 10px; }
footer { margin-top: 56px; padding-top: 16px; padding-bottom: 40px; font-size: 14px; color: var(--muted); }
@media (max-width: 700px) {
  body { font-size: 16px; }
  main, header, footer { padding-left: 14px; padding-right: 14px; }
  header { padding-top: 26px; }
  h1 { font-size: 26px; } h2 { font-size: 21px; margin-top: 48px; } .lead { font-size: 17px; }
  .facts { grid-template-columns: 1fr 1fr; } .facts dd { font-size: 18px; }
  .broad { display: none; } .narrow { display: block; }
  .settings div { grid-template-columns: minmax(7em, 9em) minmax(0, 1fr); }
  .equation { font-size: 17px; }
}
@media print {
  :root { --paper: #ffffff; --card: #ffffff; }
  body { font-size: 10.5pt; }
  nav, output, .hint { display: none; }
  main, header, footer { max-width: none; padding: 0; }
  h2, h3, h4 { break-after: avoid; } h2 { margin-top: 24pt; }
  .pictures { grid-template-columns: repeat(3, 1fr); gap: 0 14pt; } .pictures.two { grid-template-columns: 1fr 1fr; }
  * { print-color-adjust: exact; -webkit-print-color-adjust: exact; }
}
@media print and (prefers-color-scheme: dark) {
  :root { --ink: #1c2126; }
}
`;
