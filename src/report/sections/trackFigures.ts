/** Pictures of the sampled tracks. */

import type { Chart } from '../charts/Drawing.js';
import { drawTracksInPlane, drawTracksInTime, type TrackLine } from '../charts/trackChart.js';
import { drawFigure, type FigureTable } from '../figure.js';
import { formatAxisLabel, formatCount, formatNumber } from '../format.js';
import { type Html, html, tameText } from '../html.js';
import type { LegendPart } from '../legend.js';
import { BROAD_WIDTH, labelPosition, listPlanes, NARROW_WIDTH, type PageContext } from './Section.js';
import { layPlane } from './visitedGrid.js';

/** A chart for broad pages and one for narrow ones. */
export function drawBoth(draw: (width: number) => Chart): { broad: Chart; narrow: Chart } {
  return { broad: draw(BROAD_WIDTH), narrow: draw(NARROW_WIDTH) };
}

/** Coordinates `first` and `second` of the sampled tracks; −1 is the time. */
function pickLines(context: PageContext, first: number, second: number): TrackLine[] {
  return context.fit.trackSample.map((track) => ({
    name: track.name,
    points: track.points.map((point) => [point[first + 1] ?? 0, point[second + 1] ?? 0] as const),
  }));
}

function tabulateTracks(context: PageContext): FigureTable {
  const rows = context.fit.trackSample.flatMap((track) =>
    track.points.map((point) => ({ name: tameText(track.name, 200), point })),
  );
  const column = (number: number) => rows.map(({ point }) => point[number] ?? Number.NaN);
  return [
    { name: 'track', values: rows.map(({ name }) => name) },
    { name: 'time', values: column(0) },
    ...context.coordinates.map((name, axis) => ({ name, values: column(axis + 1) })),
  ];
}

function drawInTime(context: PageContext, note: string): Html {
  const { fit, drawing, units, coordinates } = context;
  const region = fit.visited;
  const chart = drawBoth((width) =>
    drawTracksInTime(
      drawing,
      pickLines(context, -1, 0),
      { low: region.low[0] ?? 0, high: region.high[0] ?? 1, period: fit.model.periods[0] ?? 0 },
      {
        width,
        height: 300,
        xLabel: (exponent) => formatAxisLabel('time', 'time', units, exponent),
        yLabel: labelPosition(context, 0),
      },
    ),
  );
  return drawFigure(context.figures, {
    name: 'tracks',
    title: 'Tracks',
    note,
    label: `Recorded tracks, ${coordinates[0] ?? ''} against time`,
    chart,
    table: tabulateTracks(context),
  });
}

function drawInPlane(context: PageContext, axes: [number, number], note: string): Html {
  const { fit, drawing, coordinates } = context;
  const [first, second] = axes;
  const d = fit.data.dimensions;
  const plane = layPlane(fit.visited, first, second);
  const names = axes.map((axis) => coordinates[axis] ?? '');
  const draw = (width: number) =>
    drawTracksInPlane(
      drawing,
      pickLines(context, first, second),
      plane.grid,
      plane.counts,
      [fit.model.periods[first] ?? 0, fit.model.periods[second] ?? 0],
      {
        width,
        xLabel: labelPosition(context, first),
        yLabel: labelPosition(context, second),
        describe: (index) => {
          const at = axes.map((axis) => formatNumber(plane.places[index * d + axis] ?? 0));
          return `Cell at ${names[0]} = ${at[0]}, ${names[1]} = ${at[1]}`;
        },
      },
    );
  const isOnly = d === 2;
  const legend: LegendPart[] = Array.from(plane.grid.visited).includes(0)
    ? [{ sample: 'hatched', text: isOnly ? 'not visited' : 'not visited in the middle plane' }]
    : [];
  return drawFigure(context.figures, {
    name: `tracks ${names.join('')}`,
    title: isOnly ? 'Tracks' : `Tracks, seen along ${coordinates[3 - first - second] ?? ''}`,
    note,
    legend,
    label: `Recorded tracks over ${names.join(' and ')}`,
    chart: isOnly ? drawBoth(draw) : draw(NARROW_WIDTH),
    table: tabulateTracks(context),
  });
}

/** Tracks against time in one dimension, over each plane of axes in more. */
export function drawTrackFigures(context: PageContext): Html {
  const { fit } = context;
  const note = `${formatCount(fit.trackSample.length)} of ${formatCount(fit.data.tracks)} tracks, thinned for the picture.`;
  if (fit.data.dimensions === 1) return drawInTime(context, note);
  return html`${listPlanes(fit.data.dimensions).map((axes) => drawInPlane(context, axes, note))}`;
}
