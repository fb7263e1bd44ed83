/** How many positions were recorded in each cell of one axis. */

import { axisExponent } from '../format.js';
import type { Chart, Drawing } from './Drawing.js';
import { formatTick } from './ticks.js';

export interface VisitOptions {
  readonly width: number;
  readonly height: number;
  readonly xLabel: (exponent: number) => string;
  readonly yLabel: (exponent: number) => string;
  readonly describe: (index: number) => string;
}

/** @param counts  positions in each of the equal cells between low and high; the ground of cells under `threshold` is hatched */
export function drawVisits(
  drawing: Drawing,
  axis: {
    readonly low: number;
    readonly high: number;
    readonly counts: readonly number[];
    readonly threshold: number;
  },
  options: VisitOptions,
): Chart {
  const { Plot } = drawing;
  const xExponent = axisExponent([axis.low, axis.high]);
  const yExponent = axis.counts.some((count) => count >= 1e6) ? axisExponent(axis.counts) : 0;
  const edge = (index: number) =>
    (axis.low + ((axis.high - axis.low) * index) / axis.counts.length) * 10 ** -xExponent;
  const bars = axis.counts.map((count, i) => ({
    x1: edge(i),
    x2: edge(i + 1),
    y: count * 10 ** -yExponent,
    count,
  }));
  const drawn = drawing.draw({
    width: options.width,
    height: options.height,
    marginLeft: 52,
    marginBottom: 40,
    marginTop: 28,
    marginRight: 16,
    x: {
      label: options.xLabel(xExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      ticks: options.width / 80,
    },
    y: {
      label: options.yLabel(yExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      nice: true,
      ticks: 4,
      tickSize: 0,
    },
    marks: [
      Plot.gridY({ stroke: 'var(--rule)', strokeOpacity: 1, ticks: 4 }),
      Plot.rectY(
        bars.filter((bar) => bar.count < axis.threshold),
        { x1: 'x1', x2: 'x2', y1: 0, y2: Math.max(...bars.map((bar) => bar.y)), fill: 'url(#hatch)' },
      ),
      Plot.rectY(bars, {
        x1: 'x1',
        x2: 'x2',
        y1: 0,
        y2: 'y',
        fill: (bar: { count: number }) => (bar.count >= axis.threshold ? 'var(--bar)' : 'var(--rare)'),
        insetLeft: 0.5,
        insetRight: 0.5,
      }),
      Plot.ruleY([0], { stroke: 'var(--muted)' }),
    ],
  });
  const probes = bars.map(
    (bar, i) =>
      [Math.round(drawn.x((bar.x1 + bar.x2) / 2)), Math.round(drawn.y(bar.y)), options.describe(i)] as const,
  );
  return { svg: drawn.svg, probes };
}
