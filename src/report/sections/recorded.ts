/** What was recorded: counts, a picture of the tracks, and where they have been. */

import type { Chart } from '../charts/Drawing.js';
import { drawTracksInPlane, drawTracksInTime, type TrackLine } from '../charts/trackChart.js';
import { drawVisits } from '../charts/visitChart.js';
import { drawFigure, keyEntry } from '../figure.js';
import {
  formatAxisLabel,
  formatCount,
  formatNumber,
  formatPercent,
  formatPowerOfTen,
  formatQuantity,
} from '../format.js';
import { Html, html } from '../html.js';
import { drawClassLegend, drawMap, spreadColours } from '../charts/mapChart.js';
import { roundClasses } from '../charts/ticks.js';
import { readNumber } from '../surveyFacts.js';
import { BROAD_WIDTH, labelPosition, NARROW_WIDTH, type PageContext, type Section } from './Section.js';
import { countVisited, layPlane, sumAlongAxis } from './visitedGrid.js';

/** Coordinates `first` and `second` of the sampled tracks; −1 is the time. */
function pickLines(context: PageContext, first: number, second: number): TrackLine[] {
  return context.fit.trackSample.map((track) => ({
    name: track.name,
    points: track.points.map((point) => [point[first + 1] ?? 0, point[second + 1] ?? 0] as const),
  }));
}

function drawBoth(draw: (width: number) => Chart) {
  return { broad: draw(BROAD_WIDTH), narrow: draw(NARROW_WIDTH) };
}

function drawTracksFigure(context: PageContext): Html {
  const { fit, drawing, units, coordinates } = context;
  const region = fit.visited;
  const shown = fit.trackSample.length;
  const note = `${shown} of ${formatCount(fit.data.tracks)} tracks, thinned for the picture.`;
  if (fit.data.dimensions === 1) {
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
    return drawFigure({ title: 'Tracks', note, label: `${shown} recorded tracks against time`, chart });
  }
  const planes =
    fit.data.dimensions === 2
      ? [[0, 1]]
      : [
          [0, 1],
          [0, 2],
          [1, 2],
        ];
  return html`${planes.map(([first = 0, second = 1]) => {
    const plane = layPlane(region, first, second);
    const names = [coordinates[first] ?? '', coordinates[second] ?? ''];
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
            const d = fit.data.dimensions;
            const at = [first, second].map((axis) => formatNumber(plane.places[index * d + axis] ?? 0));
            return `Cell at ${names[0]} = ${at[0]}, ${names[1]} = ${at[1]}`;
          },
        },
      );
    const title =
      fit.data.dimensions === 2 ? 'Tracks' : `Tracks, seen along ${coordinates[3 - first - second] ?? ''}`;
    const hatching = fit.data.dimensions === 2 ? 'not visited' : 'not visited in the middle plane';
    return drawFigure({
      title,
      note,
      key: keyEntry('hatched', hatching),
      label: `Recorded tracks over ${names.join(' and ')}`,
      chart: fit.data.dimensions === 2 ? drawBoth(draw) : draw(NARROW_WIDTH),
    });
  })}`;
}

function drawVisitFigure(context: PageContext, axis: number, broad: boolean): Html {
  const { fit, drawing, units, coordinates } = context;
  const counts = sumAlongAxis(fit.visited, axis);
  const [low, high] = [fit.visited.low[axis] ?? 0, fit.visited.high[axis] ?? 1];
  const draw = (width: number) =>
    drawVisits(
      drawing,
      { low, high, counts, threshold: fit.data.dimensions === 1 ? fit.visited.threshold : 1 },
      {
        width,
        height: broad ? 300 : 200,
        xLabel: labelPosition(context, axis),
        yLabel: (exponent) => `positions per cell${exponent === 0 ? '' : ` (${formatPowerOfTen(exponent)})`}`,
        describe: (index) => {
          const edge = (i: number) => formatNumber(low + ((high - low) * i) / counts.length);
          return `${coordinates[axis]} from ${edge(index)} to ${edge(index + 1)}: ${formatCount(counts[index] ?? 0)} positions`;
        },
      },
    );
  return drawFigure({
    title: `Where the recording was, along ${coordinates[axis] ?? ''}`,
    note: `Cells of ${formatQuantity((high - low) / counts.length, 'position', units)}.`,
    label: `Positions per cell along ${coordinates[axis] ?? ''}`,
    chart: broad ? drawBoth(draw) : draw(NARROW_WIDTH),
  });
}

/** Positions per cell in two dimensions. */
function drawVisitMap(context: PageContext): Html {
  const { fit, drawing, units, coordinates } = context;
  const { grid, places, counts } = layPlane(fit.visited, 0, 1);
  const edges = roundClasses(0, Math.max(...counts), 6);
  const colours = spreadColours(edges.length - 1);
  const classOf = (i: number) =>
    Math.max(0, edges.findIndex((edge, k) => k > 0 && (counts[i] ?? 0) <= edge) - 1);
  const describe = (i: number) => {
    const at = [0, 1].map((axis) => `${coordinates[axis]} = ${formatNumber(places[2 * i + axis] ?? 0)}`);
    return `Cell at ${at.join(', ')}: ${formatCount(counts[i] ?? 0)} positions`;
  };
  const size = [0, 1].map((axis) =>
    formatQuantity(
      ((grid.high[axis] ?? 1) - (grid.low[axis] ?? 0)) / (grid.cells[axis] ?? 1),
      'position',
      units,
    ),
  );
  return drawFigure({
    title: 'Where the recording was',
    note: `Positions per cell of ${size.join(' by ')}.`,
    key: html`${new Html(drawClassLegend(edges, colours))}${keyEntry('hatched', 'not visited')}`,
    label: 'Map of the number of positions per cell',
    chart: drawBoth((width) =>
      drawMap(drawing, grid, {
        width,
        xLabel: labelPosition(context, 0),
        yLabel: labelPosition(context, 1),
        colours,
        classOf,
        describe,
      }),
    ),
  });
}

export function writeRecorded(context: PageContext): Section {
  const { fit, units } = context;
  const { data } = fit;
  const missing = readNumber(fit.survey, 'missingFrames');
  const visited = countVisited(fit.visited);
  const facts = [
    ['Tracks', formatCount(data.tracks)],
    ['Positions', formatCount(data.positions)],
    ['Sampling interval', formatQuantity(data.samplingInterval, 'time', units)],
    ['Positions per track', formatCount(data.positions / Math.max(1, data.tracks))],
    missing === null ? null : ['Missing frames', formatCount(missing)],
    ['Visited cells', `${formatCount(visited)} of ${formatCount(fit.visited.counts.length)}`],
  ].filter((fact) => fact !== null);
  const axes = Array.from({ length: data.dimensions }, (_, axis) => axis);
  const visits =
    data.dimensions === 2
      ? drawVisitMap(context)
      : axes.map((axis) => drawVisitFigure(context, axis, data.dimensions === 1));
  const body = html`<dl class="facts">${facts.map(([name, value]) => html`<div><dt>${name}</dt><dd>${value}</dd></div>`)}</dl>
<p class="hint">A cell counts as visited with at least ${formatCount(fit.visited.threshold)} positions; the visited
cells hold ${formatPercent(shareInside(fit.visited))} of all positions. Everything below speaks of them alone.</p>
<div class="pictures${data.dimensions < 3 ? ' two' : ''}">${drawTracksFigure(context)}${visits}</div>`;
  return { id: 'recorded', title: 'What was recorded', body };
}

function shareInside(region: PageContext['fit']['visited']): number {
  let inside = 0;
  let total = 0;
  for (const count of region.counts) {
    total += count;
    if (count >= region.threshold) inside += count;
  }
  return total === 0 ? 0 : inside / total;
}
