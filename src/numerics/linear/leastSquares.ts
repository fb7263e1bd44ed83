/**
 * Ordinary least squares by orthogonal triangles: the careful way, for regressions of a size that fits in memory.
 *
 * Source  Golub & Van Loan, Matrix Computations (4th ed. 2013), ch. 5.2–5.3; iterative refinement: Björck, Numerical
 *         Methods for Least Squares Problems (1996), ch. 2.9.
 */

import { Matrix, QrDecomposition } from 'ml-matrix';
import { NumericalError, UsageError } from '../../errors.js';

export interface LeastSquares {
  /** Length k. */
  readonly coefficients: Float64Array;
  /** Length k; NaN where there are no more rows than coefficients. */
  readonly standardErrors: Float64Array;
  /** Square root of the residual sum of squares over the degrees of freedom n − k. */
  readonly residualDeviation: number;
  /** R²: the share of the variance about the mean that is explained; meaningful where a column is constant. */
  readonly determination: number;
  /** n − k. */
  readonly freedom: number;
}

/** Sine of the angle between a column and the ones before it below which they count as the same direction. */
const SAME_DIRECTION = 1e-12;

const REFINEMENTS = 2; // each gains as many digits as the scaled problem has; the second is for safety

/**
 * Coefficients that minimise the sum of squared residuals.
 *
 * Columns are scaled to unit length first, so that their units do not matter to the rounding.
 *
 * @param design  shape (n, k) row-major; give a column of ones for an intercept
 * @param response  length n
 * @throws UsageError  where the shapes do not belong together or there are fewer rows than columns
 * @throws NumericalError  where a column is a combination of the ones before it
 *
 * Cost  O(n k²).
 */
export function solveLeastSquares(design: Float64Array, response: Float64Array): LeastSquares {
  const n = response.length;
  const k = design.length / n;
  if (!Number.isInteger(k) || k < 1 || n < k) {
    throw new UsageError(
      `a regression of ${n} rows needs a design of ${n} times at least one and at most ${n} numbers, but got ${design.length}`,
      { rows: n, numbers: design.length },
    );
  }
  const scales = measureColumns(design, n, k);
  const scaled = Matrix.zeros(n, k);
  for (let row = 0; row < n; row++) {
    for (let j = 0; j < k; j++) scaled.set(row, j, design[row * k + j] / scales[j]);
  }
  const factor = new QrDecomposition(scaled);
  const triangle = factor.upperTriangularMatrix;
  checkRank(triangle, scales);

  let solution = factor.solve(Matrix.columnVector(response));
  for (let round = 0; round < REFINEMENTS; round++) {
    solution = Matrix.add(solution, factor.solve(residualsOf(scaled, solution, response)));
  }
  const freedom = n - k;
  const residuals = residualsOf(scaled, solution, response);
  const squares = residuals.dot(residuals);
  const residualDeviation = freedom > 0 ? Math.sqrt(squares / freedom) : NaN;
  return {
    coefficients: Float64Array.from({ length: k }, (_, j) => solution.get(j, 0) / scales[j]),
    standardErrors: inverseRowNorms(triangle).map((norm, j) => (norm * residualDeviation) / scales[j]),
    residualDeviation,
    determination: 1 - squares / squaresAboutMean(response),
    freedom,
  };
}

function measureColumns(design: Float64Array, n: number, k: number): Float64Array {
  const squares = new Float64Array(k);
  for (let row = 0; row < n; row++) {
    for (let j = 0; j < k; j++) squares[j] += design[row * k + j] ** 2;
  }
  return squares.map((value) => Math.sqrt(value) || 1);
}

function checkRank(triangle: Matrix, scales: Float64Array): void {
  for (let j = 0; j < scales.length; j++) {
    if (Math.abs(triangle.get(j, j)) > SAME_DIRECTION) continue;
    throw new NumericalError(
      `column ${j + 1} of ${scales.length} of the regression is zero or a combination of the columns before it; leave it out or use fewer functions`,
      { column: j + 1, columns: scales.length },
    );
  }
}

function residualsOf(scaled: Matrix, solution: Matrix, response: Float64Array): Matrix {
  const { rows, columns } = scaled;
  const out = Matrix.zeros(rows, 1);
  for (let row = 0; row < rows; row++) {
    let rest = response[row];
    for (let j = 0; j < columns; j++) rest -= scaled.get(row, j) * solution.get(j, 0);
    out.set(row, 0, rest);
  }
  return out;
}

/** Lengths of the rows of R⁻¹: square roots of the diagonal of (RᵀR)⁻¹. */
function inverseRowNorms(triangle: Matrix): Float64Array {
  const k = triangle.columns;
  const inverse = Matrix.zeros(k, k);
  const norms = new Float64Array(k);
  for (let column = 0; column < k; column++) {
    for (let row = column; row >= 0; row--) {
      let sum = row === column ? 1 : 0;
      for (let l = row + 1; l <= column; l++) sum -= triangle.get(row, l) * inverse.get(l, column);
      const value = sum / triangle.get(row, row);
      inverse.set(row, column, value);
      norms[row] += value * value;
    }
  }
  return norms.map(Math.sqrt);
}

function squaresAboutMean(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  const mean = sum / values.length;
  let squares = 0;
  for (let i = 0; i < values.length; i++) squares += (values[i] - mean) ** 2;
  return squares;
}
