/** A straight line through points, from a general-purpose library of regressions. */

import { SimpleLinearRegression } from 'ml-regression';
import { UsageError } from '../../errors.js';

export interface StraightLine {
  /** Value at x = 0. */
  readonly intercept: number;
  readonly slope: number;
}

/**
 * The straight line of least squared vertical distance. For standard errors, or columns that are nearly alike, use
 * `solveLeastSquares`.
 *
 * @param x  length n ≥ 2, not all equal
 * @param y  length n
 * @throws UsageError  where a line is not determined
 */
export function fitStraightLine(x: ArrayLike<number>, y: ArrayLike<number>): StraightLine {
  if (x.length !== y.length || x.length < 2) {
    throw new UsageError(
      `a straight line needs at least two points, each with x and y, but got ${x.length} and ${y.length} numbers`,
      { x: x.length, y: y.length },
    );
  }
  const { intercept, slope } = new SimpleLinearRegression(Array.from(x), Array.from(y));
  if (!Number.isFinite(slope)) {
    throw new UsageError(`a straight line needs points at two different x, but all are at ${x[0]}`, {
      x: x[0],
    });
  }
  return { intercept, slope };
}
