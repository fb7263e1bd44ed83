/** How strongly something is correlated with itself some time later: one line per series, with dots at the lags. */

import { formatNumber } from '../format.js';
import type { Chart, Drawing } from './Drawing.js';
import { formatTick } from './ticks.js';

export interface LagSeries {
  readonly name: string;
  /** From lag 1 on. */
  readonly values: readonly number[];
}

/** Strokes of up to three series: they differ in colour, lightness and dashes. */
export const LAG_STROKES = [
  { stroke: 'var(--track-a)', strokeDasharray: 'none' },
  { stroke: 'var(--track-b)', strokeDasharray: '6 3' },
  { stroke: 'var(--track-d)', strokeDasharray: '2 3' },
] as const;

export function drawLags(
  drawing: Drawing,
  lags: readonly number[],
  series: readonly LagSeries[],
  options: {
    readonly width: number;
    readonly height: number;
    readonly xLabel: string;
    readonly yLabel: string;
  },
): Chart {
  const { Plot } = drawing;
  const rows = series.map(({ values }) => values.map((y, i) => ({ x: lags[i] ?? 0, y })));
  const drawn = drawing.draw({
    width: options.width,
    height: options.height,
    marginLeft: 52,
    marginBottom: 40,
    marginTop: 30,
    marginRight: 16,
    x: {
      label: options.xLabel,
      labelArrow: 'none',
      tickFormat: formatTick,
      ticks: options.width / 80,
      domain: [0, lags.at(-1) ?? 1],
    },
    y: {
      label: options.yLabel,
      labelArrow: 'none',
      tickFormat: formatTick,
      nice: true,
      ticks: 5,
      tickSize: 0,
    },
    marks: [
      Plot.gridY({ stroke: 'var(--rule)', strokeOpacity: 1, ticks: 5 }),
      Plot.ruleY([0], { stroke: 'var(--muted)', strokeWidth: 0.75 }),
      ...rows.flatMap((line, number) => {
        const { stroke, strokeDasharray } = LAG_STROKES[number % LAG_STROKES.length] ?? LAG_STROKES[0];
        return [
          Plot.line(line, { x: 'x', y: 'y', stroke, strokeDasharray, strokeWidth: 1.75 }),
          Plot.dot(line, { x: 'x', y: 'y', r: 2.25, fill: stroke }),
        ];
      }),
    ],
  });
  const probes = lags.map((lag, i) => {
    const values = series.map(
      ({ name, values }) => `${series.length > 1 ? `${name} ` : ''}${formatNumber(values[i] ?? NaN, 2)}`,
    );
    return [
      Math.round(drawn.x(lag)),
      Math.round(drawn.y(series[0]?.values[i] ?? 0)),
      `at ${formatNumber(lag)}: ${values.join(', ')}`,
    ] as const;
  });
  return { svg: drawn.svg, probes };
}
