/** A section of the page, and what every section is made from. */

import { evaluateFit, type EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import type { Units } from '../../units.js';
import type { Drawing } from '../charts/Drawing.js';
import type { Figure, FigureTable } from '../figure.js';
import { formatAxisLabel, formatQuantity, tameUnits } from '../format.js';
import { type Html, tameText } from '../html.js';
import type { ReportInput } from '../ReportInput.js';
import { cellCentre, findMiddle, gatherVisitedPlaces, layLine, layPlane, type Plane } from './visitedGrid.js';

export interface Section {
  /** Anchor of the section. */
  readonly id: string;
  readonly title: string;
  readonly body: Html;
}

export interface PageContext extends ReportInput {
  readonly drawing: Drawing;
  readonly units: Units;
  /** Names of the coordinates, fit for axes. */
  readonly coordinates: readonly string[];
  /** The pictures drawn so far. */
  readonly figures: Figure[];
  /** What has been evaluated so far. */
  readonly evaluated: Map<string, Evaluated>;
}

export function createContext(input: ReportInput, drawing: Drawing): PageContext {
  const coordinates = input.fit.data.coordinates.map((name) => tameText(name, 16));
  return {
    ...input,
    drawing,
    units: tameUnits(input.fit.data.units),
    coordinates,
    figures: [],
    evaluated: new Map(),
  };
}

/** Widths of pictures, in drawing units: on broad pages with two in a row, and everywhere else. */
export const BROAD_WIDTH = 580;
export const NARROW_WIDTH = 380;

/** Label of a coordinate's axis. */
export function labelPosition(context: PageContext, axis: number): (exponent: number) => string {
  return (exponent) => formatAxisLabel(context.coordinates[axis] ?? '', 'position', context.units, exponent);
}

/** Where a line or plane along `axes` lies, e.g. `at y = 1.2 µm`; empty where the axes are all there are. */
export function describeElsewhere(context: PageContext, axes: readonly number[]): string {
  const middle = findMiddle(context.fit.visited);
  const others = context.coordinates.flatMap((name, axis) => {
    if (axes.includes(axis)) return [];
    const place = cellCentre(context.fit.visited, axis, middle[axis] ?? 0);
    return [`${name} = ${formatQuantity(place, 'position', context.units)}`];
  });
  return others.length === 0 ? '' : `at ${others.join(', ')}`;
}

/** Pairs of axes that span the planes to draw, in two or three dimensions. */
export function listPlanes(dimensions: number): [number, number][] {
  if (dimensions < 2) return [];
  return dimensions === 2
    ? [[0, 1]]
    : [
        [0, 1],
        [0, 2],
        [1, 2],
      ];
}

/** Places as columns of a table: one for each coordinate. */
export function tabulatePlaces(context: PageContext, places: Float64Array): FigureTable {
  const d = context.fit.data.dimensions;
  return context.coordinates.map((name, axis) => ({
    name,
    values: Array.from({ length: places.length / d }, (_, i) => places[i * d + axis] ?? Number.NaN),
  }));
}

/** A note as a sentence: a capital letter in front, a full stop behind, and numbers with a minus sign. */
export function saySentence(text: string): string {
  const signed = text.replace(/(^|[\s(=])-(?=\d)/g, '$1−');
  return capitalize(/[.!?…]$/.test(signed) || signed === '' ? signed : `${signed}.`);
}

export const capitalize = (text: string): string => `${text[0]?.toUpperCase() ?? ''}${text.slice(1)}`;

export interface Evaluated {
  readonly columns: readonly EvaluatedColumn[];
  readonly byName: ReadonlyMap<string, EvaluatedColumn>;
  readonly visited: Uint8Array;
}

/** Evaluates once per key: several pictures show the same places, and every evaluation runs through the replicates. */
function evaluateOnce(context: PageContext, key: string, places: Float64Array): Evaluated {
  const known = context.evaluated.get(key);
  if (known) return known;
  const { columns, visited } = evaluateFit(context.fit, places);
  const evaluated = { columns, byName: new Map(columns.map((column) => [column.name, column])), visited };
  context.evaluated.set(key, evaluated);
  return evaluated;
}

/** The coefficients over the visited region (at visited cells, thinned where they are very many). */
export function evaluateRegion(context: PageContext): Evaluated {
  return evaluateOnce(context, 'region', gatherVisitedPlaces(context.fit.visited));
}

/** The coefficients at `count` places along an axis through the middle of the visited region. */
export function evaluateLine(
  context: PageContext,
  axis: number,
  count: number,
): Evaluated & { x: Float64Array; places: Float64Array } {
  const { x, places } = layLine(context.fit.visited, axis, count);
  return { ...evaluateOnce(context, `line ${axis} ${count}`, places), x, places };
}

/** The coefficients in the cells of the plane of two axes through the middle of the visited region. */
export function evaluatePlane(context: PageContext, first: number, second: number): Evaluated & Plane {
  const plane = layPlane(context.fit.visited, first, second);
  return { ...evaluateOnce(context, `plane ${first} ${second}`, plane.places), ...plane };
}
