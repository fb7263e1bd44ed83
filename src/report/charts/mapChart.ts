/** A quantity over a plane as cells of a few colour classes; unvisited cells hatched, poorly known ones striped. */

import { axisExponent } from '../format.js';
import type { Chart, Drawing } from './Drawing.js';
import { formatTick } from './ticks.js';

/** Colours of values, from low to high. */
export const VALUE_COLOURS = Array.from({ length: 7 }, (_, i) => `var(--value-${i})`);

/** Colours for `count` classes, spread over the whole scale. */
export function spreadColours(count: number): string[] {
  return Array.from({ length: count }, (_, i) => {
    const position = count === 1 ? 3 : Math.round((i * (VALUE_COLOURS.length - 1)) / (count - 1));
    return VALUE_COLOURS[position] ?? 'none';
  });
}

/** A grid of cells in a plane; cell values run with the second axis fastest. */
export interface PlaneGrid {
  readonly low: readonly [number, number];
  readonly high: readonly [number, number];
  readonly cells: readonly [number, number];
  readonly visited: ArrayLike<number>;
}

export interface MapOptions {
  readonly width: number;
  readonly xLabel: (exponent: number) => string;
  readonly yLabel: (exponent: number) => string;
  /** Colour class of cell `i`; null leaves the cell blank. */
  readonly classOf: (index: number) => number | null;
  /** CSS colour of each class. */
  readonly colours: readonly string[];
  /** How uncertain cell `i` is: 0 well known, 1 striped lightly, 2 striped heavily. */
  readonly uncertainty?: (index: number) => 0 | 1 | 2;
  readonly describe: (index: number) => string;
}

export const MAP_MARGINS = { marginLeft: 48, marginBottom: 40, marginTop: 28, marginRight: 12 } as const;

/** Height of a picture of the grid, true to scale unless that would make it very flat or very tall. */
export function chooseMapHeight(grid: PlaneGrid, width: number): number {
  const inner = width - MAP_MARGINS.marginLeft - MAP_MARGINS.marginRight;
  const ratio = (grid.high[1] - grid.low[1]) / (grid.high[0] - grid.low[0]);
  const shape = Number.isFinite(ratio) && ratio > 0 ? Math.min(1.3, Math.max(0.45, ratio)) : 1;
  return Math.round(inner * shape + MAP_MARGINS.marginTop + MAP_MARGINS.marginBottom);
}

/** Edges of the cells, and the powers of ten their axes are written with. */
export function describePlane(grid: PlaneGrid) {
  const exponents = [0, 1].map((axis) => axisExponent([grid.low[axis] ?? 0, grid.high[axis] ?? 0]));
  const edge = (axis: 0 | 1, index: number) =>
    (grid.low[axis] + ((grid.high[axis] - grid.low[axis]) * index) / grid.cells[axis]) *
    10 ** -(exponents[axis] ?? 0);
  return { xExponent: exponents[0] ?? 0, yExponent: exponents[1] ?? 0, edge };
}

interface Run {
  x1: number;
  x2: number;
  y1: number;
  y2: number;
}

/** Joins neighbouring cells of one column that belong together: fewer shapes, no seams. */
function joinCells(grid: PlaneGrid, keyOf: (index: number) => number | null): Map<number, Run[]> {
  const { edge } = describePlane(grid);
  const runs = new Map<number, Run[]>();
  const [columns, rows] = grid.cells;
  for (let i = 0; i < columns; i++) {
    let open: { key: number; from: number } | null = null;
    for (let j = 0; j <= rows; j++) {
      const key = j < rows ? keyOf(i * rows + j) : null;
      if (open && open.key !== key) {
        const list = runs.get(open.key) ?? [];
        list.push({ x1: edge(0, i), x2: edge(0, i + 1), y1: edge(1, open.from), y2: edge(1, j) });
        runs.set(open.key, list);
        open = null;
      }
      if (!open && key !== null) open = { key, from: j };
    }
  }
  return runs;
}

export function drawMap(drawing: Drawing, grid: PlaneGrid, options: MapOptions): Chart {
  const { Plot } = drawing;
  const { xExponent, yExponent, edge } = describePlane(grid);
  const [columns, rows] = grid.cells;
  const isVisited = (index: number) => grid.visited[index] === 1;
  const classes = joinCells(grid, (index) => (isVisited(index) ? options.classOf(index) : null));
  const sides = { x1: 'x1', x2: 'x2', y1: 'y1', y2: 'y2' } as const;
  const unvisited = joinCells(grid, (index) => (isVisited(index) ? null : 0)).get(0) ?? [];
  const uncertain = joinCells(grid, (index) =>
    isVisited(index) ? options.uncertainty?.(index) || null : null,
  );
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
      Plot.rect(unvisited, { ...sides, fill: 'url(#hatch)' }),
      ...[...classes].map(([key, cells]) =>
        // Smoothed edges would leave seams between neighbouring shapes, and rounded ones gaps.
        Plot.rect(cells, {
          ...sides,
          fill: options.colours[key] ?? 'none',
          shapeRendering: 'crispEdges',
          inset: -0.2,
        }),
      ),
      Plot.rect(uncertain.get(1) ?? [], { ...sides, fill: 'url(#veil-light)' }),
      Plot.rect(uncertain.get(2) ?? [], { ...sides, fill: 'url(#veil)' }),
      Plot.frame({ stroke: 'var(--rule)' }),
    ],
  });
  const probes: [number, number, string][] = [];
  for (let i = 0; i < columns; i++) {
    for (let j = 0; j < rows; j++) {
      const index = i * rows + j;
      if (!isVisited(index)) continue;
      const x = drawn.x((edge(0, i) + edge(0, i + 1)) / 2);
      const y = drawn.y((edge(1, j) + edge(1, j + 1)) / 2);
      probes.push([Math.round(x), Math.round(y), options.describe(index)]);
    }
  }
  return { svg: drawn.svg, probes };
}
