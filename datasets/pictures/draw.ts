/**
 * Draws each data set's fit beside the truth: `npm run pictures` writes `datasets/pictures/*.png`. The fits are those of
 * `wanderlaw demo`. Needs Chromium (CHROMIUM names it, else /usr/bin/chromium).
 */

import { createReadStream, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import * as Plot from '@observablehq/plot';
import { parseHTML } from 'linkedom';
import { chromium } from 'playwright-core';
import {
  evaluateFit,
  type FitResult,
  fitTracks,
  formatUnit,
  importTracks,
  type Quantity,
  studySchema,
} from '../../src/index.js';
import { DATA_SET_NAMES, type DataSetName, type Truth, TRUTHS } from '../truth.js';

/** One curve: a column of the fit along a straight line, and the same of the truth. */
interface Panel {
  readonly column: string;
  readonly quantity: Quantity;
  readonly title: string;
  /** Place at a position along the line. */
  readonly place: (along: number) => number[];
  readonly from: number;
  readonly to: number;
  readonly axis: string;
  readonly truth: (place: number[]) => number;
  /** Powers of ten taken out of both axes, for units that make numbers unwieldy. */
  readonly lengthPower?: number;
  readonly valuePower?: number;
}

function listPanels(name: DataSetName): Panel[] {
  if (name === 'settling-beads') {
    const { drift, diffusion } = TRUTHS[name];
    const line = { place: (x: number) => [x], from: 2e-7, to: 7e-6, axis: 'height', lengthPower: -6 };
    return [
      {
        ...line,
        column: 'diffusion_xx',
        quantity: 'diffusion',
        title: 'Diffusion',
        truth: diffusion,
        valuePower: -14,
      },
      {
        ...line,
        column: 'drift_x',
        quantity: 'drift',
        title: 'Drift (Itô)',
        truth: (p) => drift(p)[0],
        valuePower: -8,
      },
    ];
  }
  const { force, friction, noise } = TRUTHS[name];
  if (name === 'stripe-cells') {
    const across = { place: (y: number) => [0, y], from: 0, to: 40, axis: 'across the stripes' };
    return [
      { ...across, column: 'friction_xx', quantity: 'friction', title: 'Friction', truth: friction },
      { ...across, column: 'force_y', quantity: 'force', title: 'Force across', truth: (p) => force(p)[1] },
      { ...across, column: 'noise_xx', quantity: 'noise', title: 'Noise', truth: noise },
    ];
  }
  const across = { place: (x: number) => [x, 0.05], from: -0.45, to: 0.3, axis: 'x, at y = 0.05' };
  const along = { place: (y: number) => [-0.1, y], from: -0.25, to: 0.4, axis: 'y, at x = −0.1' };
  return [
    {
      ...across,
      column: 'friction_xx',
      quantity: 'friction',
      title: 'Friction across the felt',
      truth: friction,
    },
    {
      ...across,
      column: 'force_y',
      quantity: 'force',
      title: 'Force y, through the fan',
      truth: (p) => force(p)[1],
    },
    {
      ...along,
      column: 'force_x',
      quantity: 'force',
      title: 'Force x, beside the fan',
      truth: (p) => force(p)[0],
    },
    { ...along, column: 'noise_xx', quantity: 'noise', title: 'Noise along the felt', truth: noise },
  ];
}

const POINTS = 121;

function drawPanel(fit: FitResult, panel: Panel): string {
  const along = Array.from(
    { length: POINTS },
    (_, i) => panel.from + ((panel.to - panel.from) * i) / (POINTS - 1),
  );
  const places = along.map(panel.place);
  const { columns, visited } = evaluateFit(fit, Float64Array.from(places.flat()));
  const column = columns.find((each) => each.name === panel.column);
  if (!column) throw new Error(`the fit has no column ${panel.column}`);
  const lengthFactor = 10 ** -(panel.lengthPower ?? 0);
  const valueFactor = 10 ** -(panel.valuePower ?? 0);
  const rows = along.map((x, i) => ({
    x: x * lengthFactor,
    value: column.values[i] * valueFactor,
    low: column.low[i] * valueFactor,
    high: column.high[i] * valueFactor,
    bandLow: column.bandLow[i] * valueFactor,
    bandHigh: column.bandHigh[i] * valueFactor,
    truth: panel.truth(places[i]) * valueFactor,
    visited: visited[i] === 1,
  }));
  const shown = rows.filter((row) => row.visited);
  const scaled = (power: number | undefined): string => (power ? `10${superscript(power)} ` : '');
  const { document } = parseHTML('<!doctype html><html><body></body></html>');
  const svg = Plot.plot({
    document,
    width: 330,
    height: 240,
    marginLeft: 48,
    marginBottom: 40,
    marginTop: 32,
    marginRight: 14,
    x: {
      label: `${panel.axis} (${scaled(panel.lengthPower)}${formatUnit('position', fit.data.units)})`,
      labelArrow: 'none',
      labelAnchor: 'center',
      labelOffset: 34,
    },
    y: {
      label: `${panel.title} (${scaled(panel.valuePower)}${formatUnit(panel.quantity, fit.data.units)})`,
      labelArrow: 'none',
      nice: true,
      grid: true,
      zero: panel.quantity !== 'force' && panel.quantity !== 'drift',
    },
    marks: [
      Plot.areaY(shown, { x: 'x', y1: 'bandLow', y2: 'bandHigh', fill: '#dce8f5' }),
      Plot.areaY(shown, { x: 'x', y1: 'low', y2: 'high', fill: '#a9c9ea' }),
      Plot.lineY(shown, { x: 'x', y: 'value', stroke: '#1b5fa8', strokeWidth: 2 }),
      Plot.lineY(rows, { x: 'x', y: 'truth', stroke: '#c2410c', strokeWidth: 1.75, strokeDasharray: '5 3' }),
    ],
  });
  return String(svg.outerHTML);
}

function superscript(power: number): string {
  const digits: Record<string, string> = { '-': '⁻' };
  [...'⁰¹²³⁴⁵⁶⁷⁸⁹'].forEach((digit, i) => {
    digits[i] = digit;
  });
  return [...String(power)].map((digit) => digits[digit]).join('');
}

async function fitDataSet(name: DataSetName): Promise<FitResult> {
  const folder = new URL(`../${name}/`, import.meta.url);
  const descriptor = JSON.parse(readFileSync(new URL('datapackage.json', folder), 'utf8')) as {
    wanderlaw: { study: Record<string, unknown> };
  };
  const study = studySchema.parse(descriptor.wanderlaw.study);
  const chunks = createReadStream(new URL('tracks.csv', folder));
  const { tracks } = await importTracks([{ name: 'tracks.csv', chunks }], study);
  return fitTracks(tracks, study);
}

function composePage(pictures: readonly string[], truth: Truth): string {
  const columns =
    truth.dimensions === 1 ? pictures.length : Math.min(pictures.length, pictures.length === 4 ? 2 : 3);
  return `<!doctype html><meta charset="utf-8"><style>
body{margin:0;background:#fff;font:13px system-ui,sans-serif;color:#222;display:inline-block;padding:12px}
main{display:grid;grid-template-columns:repeat(${columns},max-content);gap:6px 10px}
svg{font:12px system-ui,sans-serif !important}
svg [aria-label='y-axis label']{font-weight:600}
footer{margin:10px 0 2px 34px}
b{display:inline-block;width:22px;height:0;vertical-align:middle;margin:0 6px 0 18px}
b:first-child{margin-left:0}
</style><body><main>${pictures.join('')}</main>
<footer><b style="border-top:2px solid #1b5fa8"></b>fitted<b style="border-top:10px solid #a9c9ea"></b>95 % at one place
<b style="border-top:10px solid #dce8f5"></b>95 % everywhere at once<b style="border-top:2px dashed #c2410c"></b>true</footer>`;
}

const browser = await chromium.launch({ executablePath: process.env.CHROMIUM ?? '/usr/bin/chromium' });
try {
  for (const name of DATA_SET_NAMES) {
    const fit = await fitDataSet(name);
    const page = await browser.newPage({ deviceScaleFactor: 1.5, viewport: { width: 1100, height: 600 } });
    await page.setContent(
      composePage(
        listPanels(name).map((panel) => drawPanel(fit, panel)),
        TRUTHS[name],
      ),
    );
    await page.locator('body').screenshot({ path: fileURLToPath(new URL(`${name}.png`, import.meta.url)) });
    await page.close();
    console.log(`${name}.png`);
  }
} finally {
  await browser.close();
}
