/**
 * Shapes: how a user says which functions may make up a coefficient (`constant`, `polynomial:3`, `spline:8`, …), and
 * the basis each becomes over the visited region.
 */

import { UsageError } from '../errors.js';
import type { BasisSpec } from './Basis.js';

export type Shape =
  | { readonly kind: 'zero' }
  | { readonly kind: 'constant' }
  | { readonly kind: 'polynomial'; readonly degree: number }
  | { readonly kind: 'spline'; readonly count: number | null }
  | { readonly kind: 'waves'; readonly waves: number };

const FORMS = 'zero, constant, linear, polynomial:N, spline, spline:N or waves:N';

/**
 * B-splines per axis where the user leaves the size to the data (roughness is then penalised), by dimension: as fine as
 * the time for a fit allows. Regressions on moments grow with the cube of the number of functions.
 */
const AUTO_SPLINES = [36, 10, 5];
const FINE_SPLINES = [36, 16, 6];

/** Fewest positions per basis function for which the automatic size is kept. */
const POSITIONS_PER_FUNCTION = 20;

/**
 * Reads a shape.
 *
 * @param option  the option it came from, named in the error
 * @throws UsageError  for anything but one of the known shapes
 */
export function parseShape(text: string, option: string): Shape {
  const [kind, size, ...rest] = text.trim().split(':');
  const refuse = (found: string): never => {
    throw new UsageError(`${option} "${text}" ${found}; use one of ${FORMS}`, { option, value: text });
  };
  const whole = (low: number, high: number): number => {
    const value = Number(size);
    if (size === undefined || size.trim() === '' || !Number.isInteger(value) || value < low || value > high) {
      return refuse(`needs a whole number from ${low} to ${high} after the colon`);
    }
    return value;
  };
  if (kind === 'law') {
    return refuse('gives a law, which this estimator cannot fit directly');
  }
  if (rest.length > 0) return refuse('has more than one colon');
  switch (kind) {
    case 'zero':
    case 'constant':
      return size === undefined ? { kind } : refuse('takes no number');
    case 'linear':
      return size === undefined ? { kind: 'polynomial', degree: 1 } : refuse('takes no number');
    case 'polynomial':
      return { kind, degree: whole(0, 12) };
    case 'spline':
      return { kind, count: size === undefined ? null : whole(4, 60) };
    case 'waves':
      return { kind, waves: whole(1, 30) };
    default:
      return refuse('is not a known shape');
  }
}

export interface ShapeContext {
  /** Corners of the visited box, length d each; on periodic axes one period. */
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly periods: readonly number[];
  /** Number of positions that carry the fit. */
  readonly positions: number;
  /** Whether an estimator for fine splines asks. Default no. */
  readonly fine?: boolean;
}

/**
 * The basis of a shape over the visited box, or null for `zero`.
 *
 * @throws UsageError  for polynomials along a periodic axis and waves without one
 */
export function resolveBasis(shape: Shape, context: ShapeContext, option: string): BasisSpec | null {
  const { periods } = context;
  const dimensions = periods.length;
  switch (shape.kind) {
    case 'zero':
      return null;
    case 'constant':
      return { kind: 'constant' };
    case 'polynomial':
      if (shape.degree > 0 && periods.some((period) => period > 0)) {
        throw new UsageError(
          `${option} asks for a polynomial, which cannot close on itself along a periodic axis; use spline or waves:N`,
          { option },
        );
      }
      return {
        kind: 'polynomial',
        degree: shape.degree,
        centre: context.low.map((low, axis) => (low + context.high[axis]) / 2),
        scale: context.low.map((low, axis) => (context.high[axis] - low) / 2 || 1),
      };
    case 'spline': {
      const count = shape.count ?? automaticCount(context, dimensions);
      return {
        kind: 'spline',
        counts: new Array<number>(dimensions).fill(count),
        low: periods.map((period, axis) => (period > 0 ? 0 : context.low[axis])),
        high: periods.map((period, axis) => (period > 0 ? period : context.high[axis])),
        periods: [...periods],
      };
    }
    case 'waves':
      if (periods.every((period) => period === 0)) {
        throw new UsageError(
          `${option} asks for waves, which need a periodic axis; give --period or use spline`,
          {
            option,
          },
        );
      }
      return { kind: 'waves', waves: shape.waves, periods: [...periods] };
  }
}

function automaticCount({ positions, fine }: ShapeContext, dimensions: number): number {
  const affordable = Math.floor((positions / POSITIONS_PER_FUNCTION) ** (1 / dimensions));
  return Math.max(4, Math.min((fine ? FINE_SPLINES : AUTO_SPLINES)[dimensions - 1], affordable));
}
