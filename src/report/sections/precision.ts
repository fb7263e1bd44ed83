/** How well a coefficient is known over the visited region. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import { parseColumnName } from '../format.js';

/** Half-width of the pointwise interval at place `i`. */
export function halfWidth(column: EvaluatedColumn, i: number): number {
  return ((column.high[i] ?? Number.NaN) - (column.low[i] ?? Number.NaN)) / 2;
}

/**
 * The size against which errors of a column are judged at place `i`: the value itself for quantities that are positive;
 * for those that change sign the largest there is over the visited places: the longest vector for force and drift, the
 * largest entry for off-diagonals.
 *
 * @param columns  all columns at the same places
 */
export function createScale(
  column: EvaluatedColumn,
  columns: readonly EvaluatedColumn[],
  visited: ArrayLike<number>,
): (index: number) => number {
  if (isPositiveColumn(column.name)) return (i) => Math.abs(column.values[i] ?? Number.NaN);
  const quantity = parseColumnName(column.name)?.quantity;
  const related = columns.filter(({ name }) => parseColumnName(name)?.quantity === quantity);
  const isVector = quantity === 'force' || quantity === 'drift';
  let largest = 0;
  for (let i = 0; i < column.values.length; i++) {
    if (visited[i] !== 1) continue;
    const sizes = related.map(({ values }) => Math.abs(values[i] ?? 0));
    largest = Math.max(largest, isVector ? Math.hypot(...sizes) : Math.max(...sizes));
  }
  return () => largest;
}

/** Diagonal entries of friction, noise, temperature and diffusion. */
export function isPositiveColumn(name: string): boolean {
  const parsed = parseColumnName(name);
  if (parsed === null || parsed.quantity === 'force' || parsed.quantity === 'drift') return false;
  return parsed.component[0] === parsed.component[1];
}

export interface PrecisionSummary {
  readonly low: number;
  readonly high: number;
  /** Median over the visited places of the half-width of the interval, in the unit of the column. */
  readonly medianHalfWidth: number;
  /** Median over the visited places of half-width over scale; NaN where the scale is zero. */
  readonly medianError: number;
  /** Share of the visited places where the interval is narrower than the scale. */
  readonly shareKnown: number;
  /** Does the value change by less than round-off over the region? */
  readonly isUniform: boolean;
}

/** Range and precision over the visited places; null where there are none. */
export function summarizePrecision(
  column: EvaluatedColumn,
  columns: readonly EvaluatedColumn[],
  visited: ArrayLike<number>,
): PrecisionSummary | null {
  const scale = createScale(column, columns, visited);
  const halves: number[] = [];
  const errors: number[] = [];
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < column.values.length; i++) {
    const value = column.values[i] ?? Number.NaN;
    if (visited[i] !== 1 || !Number.isFinite(value)) continue;
    low = Math.min(low, value);
    high = Math.max(high, value);
    halves.push(halfWidth(column, i));
    errors.push(halfWidth(column, i) / scale(i));
  }
  if (errors.length === 0) return null;
  const known = errors.filter((error) => error < 0.5).length;
  return {
    low,
    high,
    medianHalfWidth: findMedian(halves),
    medianError: findMedian(errors),
    shareKnown: known / errors.length,
    isUniform: high - low <= 1e-6 * Math.max(Math.abs(low), Math.abs(high)),
  };
}

function findMedian(values: number[]): number {
  values.sort((a, b) => a - b);
  return values[Math.floor(values.length / 2)] ?? Number.NaN;
}
