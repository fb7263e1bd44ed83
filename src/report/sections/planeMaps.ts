/** Maps over a plane of the visited region: of a quantity with its uncertainty, and of the uncertainty itself. */

import type { Quantity } from '../../units.js';
import { drawMap, spreadColours, VALUE_COLOURS } from '../charts/mapChart.js';
import { findRange, roundClasses } from '../charts/ticks.js';
import { drawFigure } from '../figure.js';
import { axisExponent, formatAxisLabel, formatNumber, formatPercent } from '../format.js';
import type { Html } from '../html.js';
import type { LegendPart } from '../legend.js';
import { describeValue } from './coefficientCurves.js';
import {
  capitalize,
  describeElsewhere,
  labelPosition,
  NARROW_WIDTH,
  type PageContext,
  tabulatePlaces,
} from './Section.js';
import type { Plane } from './visitedGrid.js';

const DOUBT_COLOURS = Array.from({ length: 5 }, (_, i) => `var(--doubt-${i})`);
/** Classes of relative error: what a reader wants to know is its order of size. */
const DOUBT_EDGES = [0.05, 0.1, 0.2, 0.5];

/** How a map marks cells where little is known. */
export interface Uncertainty {
  /** 0 well known, 1 striped lightly, 2 striped heavily. */
  readonly grade: (index: number) => 0 | 1 | 2;
  /** What light and heavy stripes mean; the empty string where they do not occur. */
  readonly light: string;
  readonly heavy: string;
}

/** Stripes by relative error: a quarter and a half of the value. */
export function stripeByError(error: (index: number) => number, scale: string): Uncertainty {
  return {
    grade: (i) => (error(i) < 0.25 ? 0 : error(i) < 0.5 ? 1 : 2),
    light: `error over a quarter of ${scale}`,
    heavy: 'over half',
  };
}

export interface MapSubject {
  /** Name for files. */
  readonly file: string;
  /** Name in words, e.g. `friction xx`. */
  readonly name: string;
  readonly quantity: Quantity;
  readonly values: Float64Array;
  readonly low: Float64Array;
  readonly high: Float64Array;
  readonly uncertainty: Uncertainty;
  readonly note?: string;
}

/** The place of a cell in words. */
export function describeCell(context: PageContext, plane: Plane, index: number): string {
  const d = context.fit.data.dimensions;
  return context.coordinates
    .map((name, axis) => `${name} = ${formatNumber(plane.places[index * d + axis] ?? 0)}`)
    .join(', ');
}

const nameAxes = (context: PageContext, axes: readonly number[]) =>
  axes.map((axis) => context.coordinates[axis] ?? '').join(' and ');

function findTypicalError({ low, high }: MapSubject, cells: readonly number[]): number {
  const halves = cells.map((i) => ((high[i] ?? 0) - (low[i] ?? 0)) / 2).filter(Number.isFinite);
  halves.sort((a, b) => a - b);
  return halves[Math.floor(halves.length / 2)] ?? 0;
}

/** Round classes for a range; colours do not magnify differences below the typical error. */
function chooseClasses(range: { low: number; high: number }, error: number): number[] {
  const { low, high } = range;
  const isUniform = high - low <= 1e-6 * Math.max(Math.abs(low), Math.abs(high));
  if (isUniform || high - low >= error) return roundClasses(low, high, VALUE_COLOURS.length);
  const room = (error - (high - low)) / 2;
  // What is positive stays so.
  const least = low > 0 ? Math.max(0, low - room) : low - room;
  return roundClasses(least, high + room, VALUE_COLOURS.length);
}

/** A map of values in round classes, striped where they are uncertain. */
export function drawValueMap(
  context: PageContext,
  subject: MapSubject,
  plane: Plane,
  axes: [number, number],
): Html {
  const { grid } = plane;
  const { values, uncertainty } = subject;
  const visited = Array.from(values.keys()).filter((i) => grid.visited[i] === 1);
  const grades = visited.map((i) => uncertainty.grade(i));
  const sure = visited.filter((_, k) => grades[k] !== 2);
  // Colours follow the cells where something is known; the others take the end classes.
  const judged = sure.length >= 4 ? sure : visited;
  const range = findRange(judged.map((i) => values[i] ?? Number.NaN)) ?? { low: 0, high: 1 };
  const classes = chooseClasses(range, findTypicalError(subject, judged));
  const exponent = axisExponent(classes);
  const value = (i: number) => (values[i] ?? Number.NaN) * 10 ** -exponent;
  const edges = classes.map((edge) => Number((edge * 10 ** -exponent).toPrecision(12)));
  const colours = spreadColours(edges.length - 1);
  const [first, last] = [edges[0] ?? 0, edges[edges.length - 1] ?? 1];
  const chart = drawMap(context.drawing, grid, {
    width: NARROW_WIDTH,
    xLabel: labelPosition(context, axes[0]),
    yLabel: labelPosition(context, axes[1]),
    colours,
    classOf: (i) => {
      if (!Number.isFinite(value(i))) return null;
      // Round-off must not throw what is zero now into the class below, now into the one above.
      const shown = value(i) + 1e-9 * (last - first);
      const found = edges.findIndex((edge, k) => k > 0 && shown < edge);
      return found < 0 ? colours.length - 1 : found - 1;
    },
    uncertainty: uncertainty.grade,
    describe: (i) => `${describeCell(context, plane, i)}: ${describeValue(context, subject, subject, i)}`,
  });
  const open = {
    below: visited.some((i) => value(i) < first - 1e-9),
    above: visited.some((i) => value(i) > last + 1e-9),
  };
  const legend: LegendPart[] =
    colours.length === 1 && !open.below && !open.above
      ? [{ sample: 'uniform', text: `${formatNumber(range.high * 10 ** -exponent)} everywhere` }]
      : [{ edges, colours, open }];
  if (visited.length < values.length) legend.push({ sample: 'hatched', text: 'not visited' });
  if (grades.includes(1)) legend.push({ sample: 'striped-lightly', text: uncertainty.light });
  if (grades.includes(2)) legend.push({ sample: 'striped', text: uncertainty.heavy });
  const elsewhere = describeElsewhere(context, axes);
  return drawFigure(context.figures, {
    name: `${subject.file} map ${axes.map((axis) => context.coordinates[axis]).join('')}`,
    title: formatAxisLabel(capitalize(subject.name), subject.quantity, context.units, exponent),
    note: [elsewhere === '' ? '' : `${capitalize(elsewhere)}.`, subject.note ?? ''].filter(Boolean).join(' '),
    legend,
    label: `Map of ${subject.name} over ${nameAxes(context, axes)}`,
    chart,
    table: [
      ...tabulatePlaces(context, plane.places),
      { name: subject.file, values },
      { name: `${subject.file}_low`, values: subject.low },
      { name: `${subject.file}_high`, values: subject.high },
      { name: 'visited', values: grid.visited },
    ],
  });
}

/** A map of the relative error of something named `subject`. */
export function drawErrorMap(
  context: PageContext,
  subject: { readonly file: string; readonly name: string; readonly scale: string },
  error: (index: number) => number,
  plane: Plane,
  axes: [number, number],
): Html {
  const { grid, places } = plane;
  const cells = grid.visited.length;
  const chart = drawMap(context.drawing, grid, {
    width: NARROW_WIDTH,
    xLabel: labelPosition(context, axes[0]),
    yLabel: labelPosition(context, axes[1]),
    colours: DOUBT_COLOURS,
    classOf: (i) => {
      const found = DOUBT_EDGES.findIndex((edge) => error(i) < edge);
      return found < 0 ? DOUBT_COLOURS.length - 1 : found;
    },
    describe: (i) => `${describeCell(context, plane, i)}: ±${formatPercent(error(i))}`,
  });
  const legend: LegendPart[] = [
    { edges: ['0', '5 %', '10 %', '20 %', '50 %', 'more'], colours: DOUBT_COLOURS },
  ];
  if (Array.from(grid.visited).includes(0)) legend.push({ sample: 'hatched', text: 'not visited' });
  return drawFigure(context.figures, {
    name: `${subject.file} error`,
    title: 'How well it is known',
    fileTitle: `How well the ${subject.name} is known`,
    note: `Half-width of the interval over ${subject.scale}.`,
    legend,
    label: `Map of the error of ${subject.name}`,
    chart,
    table: [
      ...tabulatePlaces(context, places),
      { name: 'relative_error', values: Float64Array.from({ length: cells }, (_, i) => error(i)) },
      { name: 'visited', values: grid.visited },
    ],
  });
}
