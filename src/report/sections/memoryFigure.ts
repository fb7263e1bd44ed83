/** The memory of the displacements: what tells the order of the model and the localization error. */

import { drawLags } from '../charts/lagChart.js';
import { drawFigure } from '../figure.js';
import { axisExponent, formatAxisLabel } from '../format.js';
import type { Html } from '../html.js';
import type { Sample } from '../legend.js';
import { isFacts } from '../surveyFacts.js';
import type { PageContext } from './Section.js';
import { drawBoth } from './trackFigures.js';

const SAMPLES: readonly Sample[] = ['series-a', 'series-b', 'series-c'];

/** Correlations of displacements from lag 1 on, axis by axis; null where the survey does not hold them. */
export function readDisplacementMemory(
  survey: Readonly<Record<string, unknown>>,
): { readonly lags: number; readonly correlations: number[][] } | null {
  const list = survey.displacementCovariances;
  if (!isFacts(survey) || !Array.isArray(list) || list.length === 0) return null;
  const correlations = list.map((axis: unknown) => {
    const numbers = Array.isArray(axis) ? axis.filter((value) => typeof value === 'number') : [];
    const variance = numbers[0] ?? 0;
    return variance > 0 ? numbers.slice(1).map((value) => value / variance) : [];
  });
  const lags = Math.min(...correlations.map((values) => values.length));
  return lags < 2 ? null : { lags, correlations: correlations.map((values) => values.slice(0, lags)) };
}

export function drawMemoryFigure(context: PageContext): Html | null {
  const { fit, drawing, units, coordinates } = context;
  const memory = readDisplacementMemory(fit.survey);
  if (memory === null) return null;
  const exponent = axisExponent([memory.lags * fit.data.samplingInterval]);
  const times = Array.from({ length: memory.lags }, (_, i) => (i + 1) * fit.data.samplingInterval);
  const series = memory.correlations.map((values, axis) => ({ name: coordinates[axis] ?? '', values }));
  const chart = drawBoth((width) =>
    drawLags(
      drawing,
      times.map((time) => time * 10 ** -exponent),
      series,
      {
        width,
        height: 260,
        xLabel: formatAxisLabel('time between them', 'time', units, exponent),
        yLabel: 'correlation of displacements',
      },
    ),
  );
  return drawFigure(context.figures, {
    name: 'displacement-memory',
    title: 'How displacements remember each other',
    note: 'Above zero: velocities are remembered. Below zero at the first lag: localization error.',
    legend:
      series.length > 1
        ? series.map(({ name }, axis) => ({ sample: SAMPLES[axis] ?? 'series-a', text: `along ${name}` }))
        : [],
    label: 'Correlation of displacements against the time between them',
    chart,
    table: [
      { name: 'lag', values: times },
      ...series.map(({ name, values }) => ({ name: `correlation_${name}`, values })),
    ],
  });
}
