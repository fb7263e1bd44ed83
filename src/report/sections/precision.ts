/** How well a coefficient is known over the visited region. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import { parseColumnName } from '../format.js';

/** Half-width of the pointwise interval at place `i`. */
export function halfWidth(column: EvaluatedColumn, i: number): number {
  return ((column.high[i] ?? Number.NaN) - (column.low[i] ?? Number.NaN)) / 2;
}

/**
 * The size against which errors of a column are judged at place `i`: the value itself for quantities that are
 * positive, the largest size over the visited places for those that change sign (force, drift, off-diagonals).
 */
export function createScale(column: EvaluatedColumn, visited: ArrayLike<number>): (index: number) => number {
  if (isPositiveColumn(column.name)) return (i) => Math.abs(column.values[i] ?? Number.NaN);
  let largest = 0;
  for (let i = 0; i < column.values.length; i++) {
    if (visited[i] === 1) largest = Math.max(largest, Math.abs(column.values[i] ?? 0));
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
  /** Median over the visited places of half-width over scale. */
  readonly medianError: number;
  /** Share of the visited places where the half-width is less than half the scale. */
  readonly shareKnown: number;
}

/** Range and precision over the visited places; null where there are none. */
export function summarizePrecision(
  column: EvaluatedColumn,
  visited: ArrayLike<number>,
): PrecisionSummary | null {
  const scale = createScale(column, visited);
  const errors: number[] = [];
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < column.values.length; i++) {
    const value = column.values[i] ?? Number.NaN;
    if (visited[i] !== 1 || !Number.isFinite(value)) continue;
    low = Math.min(low, value);
    high = Math.max(high, value);
    errors.push(halfWidth(column, i) / scale(i));
  }
  if (errors.length === 0) return null;
  errors.sort((a, b) => a - b);
  const known = errors.filter((error) => error < 0.5).length;
  return {
    low,
    high,
    medianError: errors[Math.floor(errors.length / 2)] ?? Number.NaN,
    shareKnown: known / errors.length,
  };
}
