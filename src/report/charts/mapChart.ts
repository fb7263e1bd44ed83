/** A quantity over a plane as cells of a few colour classes; unvisited cells hatched, poorly known ones striped. */

import { axisExponent } from '../format.js';
import { type Chart, type Drawing, FONT_SIZE } from './Drawing.js';
import { stepDecimals } from './ticks.js';

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
  /** Cells to stripe because little is known there. */
  readonly uncertain?: (index: number) => boolean;
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
  const uncertain =
    joinCells(grid, (index) => (isVisited(index) && options.uncertain?.(index) ? 0 : null)).get(0) ?? [];
  const drawn = drawing.draw({
    width: options.width,
    height: chooseMapHeight(grid, options.width),
    ...MAP_MARGINS,
    x: {
      label: options.xLabel(xExponent),
      labelArrow: 'none',
      domain: [edge(0, 0), edge(0, columns)],
      ticks: 5,
    },
    y: {
      label: options.yLabel(yExponent),
      labelArrow: 'none',
      domain: [edge(1, 0), edge(1, rows)],
      ticks: 5,
    },
    marks: [
      Plot.rect(unvisited, { ...sides, fill: 'url(#hatch)' }),
      ...[...classes].map(([key, cells]) =>
        // A hair of stroke in the same colour closes the seams between neighbouring shapes.
        Plot.rect(cells, {
          ...sides,
          fill: options.colours[key] ?? 'none',
          stroke: options.colours[key] ?? 'none',
          strokeWidth: 0.6,
        }),
      ),
      Plot.rect(uncertain, { ...sides, fill: 'url(#veil)' }),
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

/**
 * A strip of the colour classes with their edges.
 *
 * @param edges  one more than there are colours
 * @param label  what the numbers are, with their unit
 */
export function drawClassLegend(
  edges: readonly (number | string)[],
  colours: readonly string[],
  open: { below: boolean; above: boolean } = { below: false, above: false },
): string {
  const width = 372;
  const left = 22;
  const step = (width - 2 * left) / Math.max(colours.length, 1);
  const numbers = edges.filter((edge) => typeof edge === 'number');
  const decimals = stepDecimals(numbers);
  const boxes = colours.map(
    (colour, i) =>
      `<rect x="${(left + i * step).toFixed(1)}" y="2" width="${step.toFixed(1)}" height="12" fill="${colour}"/>`,
  );
  const labels = edges.map((edge, i) => {
    const text = typeof edge === 'string' ? edge : edge.toFixed(decimals).replace('-', '−');
    const sign = i === 0 && open.below ? '≤ ' : i === edges.length - 1 && open.above ? '≥ ' : '';
    return { x: left + i * step, text: sign + text };
  });
  // Every second edge is enough where numbers are long.
  const widest = Math.max(...labels.map((label) => label.text.length)) * FONT_SIZE * 0.56 + 8;
  const every = Math.max(1, Math.ceil(widest / step));
  const texts = labels
    .filter((_, i) => i % every === 0)
    .map((label) => `<text x="${label.x.toFixed(1)}" y="28">${label.text}</text>`);
  return `<svg class="legend-strip" viewBox="0 0 ${width} 32" font-size="11" text-anchor="middle" fill="currentColor" aria-hidden="true">${boxes.join('')}<rect x="${left}" y="2" width="${(step * colours.length).toFixed(1)}" height="12" fill="none" stroke="var(--rule)"/>${texts.join('')}</svg>`;
}
