/** The sampled tracks: against time in one dimension, in a plane over the visited cells in more. */

import { axisExponent, formatNumber } from '../format.js';
import type { Chart, Drawing } from './Drawing.js';
import { chooseMapHeight, describePlane, MAP_MARGINS, type PlaneGrid } from './mapChart.js';
import { formatTick } from './ticks.js';

/** One sampled track: rows of horizontal and vertical value, already in table units. */
export interface TrackLine {
  readonly name: string;
  readonly points: readonly (readonly [number, number])[];
}

export interface TrackOptions {
  readonly width: number;
  readonly xLabel: (exponent: number) => string;
  readonly yLabel: (exponent: number) => string;
}

/** Strokes that differ in lightness as well as hue, so that neighbours stay apart in greyscale. */
const STROKES = ['var(--track-a)', 'var(--track-b)', 'var(--track-c)', 'var(--track-d)'];

interface TrackRow {
  x: number;
  y: number;
  z: string;
}

/** Rows of every track as drawn; a track starts a new piece where a periodic axis wraps. */
function gatherPieces(
  tracks: readonly TrackLine[],
  factors: readonly [number, number],
  periods: readonly [number, number],
  low: readonly [number, number],
) {
  return tracks.map((track, number) => {
    const rows: TrackRow[] = [];
    let piece = 0;
    let turns: [number, number] | null = null;
    for (const [x, y] of track.points) {
      const now = [x, y].map((value, axis) => {
        const period = periods[axis] ?? 0;
        return period > 0 ? Math.floor((value - (low[axis] ?? 0)) / period) : 0;
      }) as [number, number];
      if (turns && (turns[0] !== now[0] || turns[1] !== now[1])) piece++;
      turns = now;
      rows.push({
        x: (x - now[0] * periods[0]) * factors[0],
        y: (y - now[1] * periods[1]) * factors[1],
        z: `${number}:${piece}`,
      });
    }
    return rows;
  });
}

function chooseStrokes(count: number) {
  const many = count > 12;
  return { strokeWidth: many ? 0.8 : 1.25, strokeOpacity: many ? 0.75 : 0.95 };
}

/** Tracks against time, in one dimension. */
export function drawTracksInTime(
  drawing: Drawing,
  tracks: readonly TrackLine[],
  visited: { readonly low: number; readonly high: number; readonly period: number },
  options: TrackOptions & { readonly height: number },
): Chart {
  const { Plot } = drawing;
  const times = tracks.flatMap((track) => track.points.map((point) => point[0]));
  const xExponent = axisExponent(times);
  const yExponent = axisExponent([visited.low, visited.high]);
  const factors = [10 ** -xExponent, 10 ** -yExponent] as const;
  const pieces = gatherPieces(tracks, factors, [0, visited.period], [0, visited.low]);
  const drawn = drawing.draw({
    width: options.width,
    height: options.height,
    ...MAP_MARGINS,
    marginLeft: 52,
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
      ticks: 5,
      tickSize: 0,
    },
    marks: [
      Plot.gridY({ stroke: 'var(--rule)', strokeOpacity: 1, ticks: 5 }),
      ...pieces.map((rows, i) =>
        Plot.line(rows, {
          x: 'x',
          y: 'y',
          z: 'z',
          stroke: STROKES[i % STROKES.length],
          ...chooseStrokes(tracks.length),
        }),
      ),
    ],
  });
  return { svg: drawn.svg, probes: [] };
}

/** Tracks in a plane over the cells shaded by how often they were visited. */
export function drawTracksInPlane(
  drawing: Drawing,
  tracks: readonly TrackLine[],
  grid: PlaneGrid,
  counts: ArrayLike<number>,
  periods: readonly [number, number],
  options: TrackOptions & { readonly describe: (index: number) => string },
): Chart {
  const { Plot } = drawing;
  const { xExponent, yExponent, edge } = describePlane(grid);
  const [columns, rows] = grid.cells;
  const cells: { x1: number; x2: number; y1: number; y2: number; index: number }[] = [];
  for (let index = 0; index < columns * rows; index++) {
    const i = Math.floor(index / rows);
    const j = index % rows;
    cells.push({ x1: edge(0, i), x2: edge(0, i + 1), y1: edge(1, j), y2: edge(1, j + 1), index });
  }
  const factors = [10 ** -xExponent, 10 ** -yExponent] as const;
  const sides = { x1: 'x1', x2: 'x2', y1: 'y1', y2: 'y2' } as const;
  const isVisited = (index: number) => grid.visited[index] === 1;
  const drawn = drawing.draw({
    width: options.width,
    height: chooseMapHeight(grid, options.width),
    ...MAP_MARGINS,
    x: {
      label: options.xLabel(xExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      domain: [edge(0, 0), edge(0, columns)],
      ticks: 5,
    },
    y: {
      label: options.yLabel(yExponent),
      labelArrow: 'none',
      tickFormat: formatTick,
      domain: [edge(1, 0), edge(1, rows)],
      ticks: 5,
    },
    marks: [
      Plot.rect(
        cells.filter((cell) => !isVisited(cell.index)),
        { ...sides, fill: 'url(#hatch)' },
      ),
      ...gatherPieces(tracks, factors, periods, grid.low).map((points, i) =>
        Plot.line(points, {
          x: 'x',
          y: 'y',
          z: 'z',
          stroke: STROKES[i % STROKES.length],
          clip: true,
          ...chooseStrokes(tracks.length),
        }),
      ),
      Plot.frame({ stroke: 'var(--rule)' }),
    ],
  });
  const probes = cells.map(
    (cell) =>
      [
        Math.round(drawn.x((cell.x1 + cell.x2) / 2)),
        Math.round(drawn.y((cell.y1 + cell.y2) / 2)),
        `${options.describe(cell.index)}: ${formatNumber(counts[cell.index] ?? 0, 6)} positions`,
      ] as const,
  );
  return { svg: drawn.svg, probes };
}
