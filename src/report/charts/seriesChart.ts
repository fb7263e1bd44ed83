/** A series of the recording over the band of its simulated counterparts. */

import type { ResimulationSeries } from '../../checks/ResimulationResult.js';
import { axisExponent, formatNumber, formatPowerOfTen } from '../format.js';
import { tameText } from '../html.js';
import type { Chart, Drawing } from './Drawing.js';
import { formatTick } from './ticks.js';

/** A label that may end in a unit in brackets, with a power of ten put into the brackets. */
function labelWithPower(label: string, exponent: number): string {
  const text = tameText(label, 48);
  if (exponent === 0) return text;
  const bracket = text.lastIndexOf('(');
  const power = formatPowerOfTen(exponent);
  return bracket < 0
    ? `${text} (${power})`
    : `${text.slice(0, bracket + 1)}${power} ${text.slice(bracket + 1)}`;
}

export function drawSeries(
  drawing: Drawing,
  series: ResimulationSeries,
  size: { width: number; height: number },
): Chart {
  const { Plot } = drawing;
  const xExponent = axisExponent(series.x);
  const all = [series.recorded, series.low, series.high].flatMap((values) =>
    values.filter((value) => value !== null),
  );
  const yExponent = axisExponent(all);
  const scaled = (value: number | null | undefined) =>
    value === null || value === undefined ? Number.NaN : value * 10 ** -yExponent;
  const rows = series.x.map((x, i) => ({
    x: x * 10 ** -xExponent,
    recorded: scaled(series.recorded[i]),
    low: scaled(series.low[i]),
    median: scaled(series.median[i]),
    high: scaled(series.high[i]),
  }));
  const drawn = drawing.draw({
    width: size.width,
    height: size.height,
    marginLeft: 52,
    marginBottom: 40,
    marginTop: 30,
    marginRight: 16,
    x: {
      label: labelWithPower(series.xLabel, xExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      ticks: size.width / 80,
    },
    y: {
      label: labelWithPower(series.yLabel, yExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      nice: true,
      ticks: 5,
      tickSize: 0,
    },
    marks: [
      Plot.gridY({ stroke: 'var(--rule)', strokeOpacity: 1, ticks: 5 }),
      Plot.areaY(rows, { x: 'x', y1: 'low', y2: 'high', fill: 'var(--simulated-band)' }),
      Plot.lineY(rows, {
        x: 'x',
        y: 'median',
        stroke: 'var(--simulated)',
        strokeWidth: 1.5,
        strokeDasharray: '5 3',
      }),
      Plot.lineY(rows, { x: 'x', y: 'recorded', stroke: 'var(--line)', strokeWidth: 2 }),
      rows.length <= 40 ? Plot.dot(rows, { x: 'x', y: 'recorded', r: 2.25, fill: 'var(--line)' }) : null,
    ],
  });
  const probes: [number, number, string][] = [];
  rows.forEach((row, i) => {
    const recorded = series.recorded[i] ?? null;
    const shown = Number.isFinite(row.recorded) ? row.recorded : row.median;
    if (!Number.isFinite(shown)) return;
    const [low, high] = [series.low[i] ?? null, series.high[i] ?? null];
    const simulated =
      low === null || high === null ? 'none' : `${formatNumber(low)} to ${formatNumber(high)}`;
    const text = `at ${formatNumber(series.x[i] ?? 0)}: recorded ${recorded === null ? 'none' : formatNumber(recorded)}, re-simulated ${simulated}`;
    probes.push([Math.round(drawn.x(row.x)), Math.round(drawn.y(shown)), text]);
  });
  return { svg: drawn.svg, probes };
}
