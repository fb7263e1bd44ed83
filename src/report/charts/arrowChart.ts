/** A vector field over a plane as arrows; arrows that could as well be zero are drawn faint. */

import { addToPicture, type Chart, type Drawing, FONT_SIZE, guessTextWidth } from './Drawing.js';
import { escapeHtml } from '../html.js';
import { chooseMapHeight, describePlane, MAP_MARGINS, type PlaneGrid } from './mapChart.js';
import { formatTick, roundStepUp } from './ticks.js';

export interface ArrowOptions {
  readonly width: number;
  readonly xLabel: (exponent: number) => string;
  readonly yLabel: (exponent: number) => string;
  /** Components along the two axes of the plane, one number per cell. */
  readonly along: ArrayLike<number>;
  readonly across: ArrayLike<number>;
  /** Can the vector in cell `i` be told from zero? */
  readonly distinct: (index: number) => boolean;
  readonly describe: (index: number) => string;
  /** A length of the field, written with its unit for the key. */
  readonly formatLength: (length: number) => string;
}

/** At most this many arrows along each axis: more would touch. */
const ARROWS_PER_AXIS = 14;

export function drawArrows(drawing: Drawing, grid: PlaneGrid, options: ArrowOptions): Chart {
  const { Plot } = drawing;
  const { xExponent, yExponent, edge } = describePlane(grid);
  const [columns, rows] = grid.cells;
  const height = chooseMapHeight(grid, options.width);
  const inner = [
    options.width - MAP_MARGINS.marginLeft - MAP_MARGINS.marginRight,
    height - MAP_MARGINS.marginTop - MAP_MARGINS.marginBottom,
  ] as const;
  // True to scale, an arrow keeps its direction; squeezed axes squeeze it alike.
  const pixels = [0, 1].map(
    (axis) => (inner[axis] ?? 1) / ((grid.high[axis] ?? 1) - (grid.low[axis] ?? 0)),
  ) as [number, number];
  const steps = [Math.ceil(columns / ARROWS_PER_AXIS), Math.ceil(rows / ARROWS_PER_AXIS)] as const;
  const spacing = Math.min((inner[0] / columns) * steps[0], (inner[1] / rows) * steps[1]);

  const cells: { index: number; x: number; y: number; size: number; rotate: number; distinct: boolean }[] =
    [];
  for (let i = Math.floor((columns % steps[0]) / 2 + steps[0] / 2 - 0.5); i < columns; i += steps[0]) {
    for (let j = Math.floor((rows % steps[1]) / 2 + steps[1] / 2 - 0.5); j < rows; j += steps[1]) {
      const index = i * rows + j;
      const along = options.along[index] ?? 0;
      const across = options.across[index] ?? 0;
      const size = Math.hypot(along, across);
      if (grid.visited[index] !== 1 || !Number.isFinite(size)) continue;
      const rotate = (Math.atan2(along * pixels[0], across * pixels[1]) * 180) / Math.PI;
      const x = (edge(0, i) + edge(0, i + 1)) / 2;
      const y = (edge(1, j) + edge(1, j + 1)) / 2;
      cells.push({ index, x, y, size, rotate, distinct: options.distinct(index) });
    }
  }
  // The longest arrow fills its cell; a rare outlier is let run long.
  const sizes = cells.filter((cell) => cell.distinct).map((cell) => cell.size);
  if (sizes.length === 0) sizes.push(...cells.map((cell) => cell.size));
  sizes.sort((a, b) => a - b);
  const reference = sizes[Math.floor(0.95 * (sizes.length - 1))] || 1;
  const factor = (0.95 * spacing) / reference;
  const longest = 1.4 * spacing;

  const visited = [];
  for (let index = 0; index < columns * rows; index++) {
    if (grid.visited[index] === 1) continue;
    const i = Math.floor(index / rows);
    const j = index % rows;
    visited.push({ x1: edge(0, i), x2: edge(0, i + 1), y1: edge(1, j), y2: edge(1, j + 1) });
  }
  const arrow = { x: 'x', y: 'y', rotate: 'rotate', anchor: 'middle' } as const;
  // Key: a round length, drawn to scale above the frame at the right; below the label of the axis where it needs room.
  let length = roundStepUp(reference * 0.6);
  if (length * factor > longest * 1.5) length /= 2;
  const shaft = length * factor;
  const scale = options.formatLength(length);
  const needed =
    guessTextWidth(options.yLabel(yExponent), FONT_SIZE) + guessTextWidth(scale, FONT_SIZE) + shaft + 30;
  const extra = needed > options.width ? 18 : 0;
  const marginTop = MAP_MARGINS.marginTop + extra;
  const lengthOf = (cell: { size: number }) => Math.min(longest, cell.size * factor);
  const drawn = drawing.draw({
    width: options.width,
    height: height + extra,
    ...MAP_MARGINS,
    marginTop,
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
    length: { type: 'identity' },
    marks: [
      Plot.rect(visited, { x1: 'x1', x2: 'x2', y1: 'y1', y2: 'y2', fill: 'url(#hatch)' }),
      Plot.vector(
        cells.filter((cell) => !cell.distinct),
        {
          ...arrow,
          length: lengthOf,
          stroke: 'var(--muted)',
          strokeOpacity: 0.55,
          strokeWidth: 1,
        },
      ),
      Plot.vector(
        cells.filter((cell) => cell.distinct),
        {
          ...arrow,
          length: lengthOf,
          stroke: 'var(--line)',
          strokeWidth: 1.75,
        },
      ),
      Plot.frame({ stroke: 'var(--rule)' }),
    ],
  });
  const probes = cells.map(
    (cell) =>
      [Math.round(drawn.x(cell.x)), Math.round(drawn.y(cell.y)), options.describe(cell.index)] as const,
  );

  const right = options.width - MAP_MARGINS.marginRight;
  const keyLine = marginTop - 14;
  const key =
    `<path d="M${(right - shaft).toFixed(1)},${keyLine}h${shaft.toFixed(1)}m-5,-4l5,4l-5,4" fill="none" stroke="var(--line)" stroke-width="1.75"/>` +
    `<text x="${(right - shaft - 6).toFixed(1)}" y="${keyLine + 4}" text-anchor="end" font-size="${FONT_SIZE - 1}">${escapeHtml(scale)}</text>`;
  return { svg: addToPicture(drawn.svg, key), probes };
}
