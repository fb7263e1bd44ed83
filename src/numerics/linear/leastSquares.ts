/**
 * Ordinary least squares by orthogonal triangles: the careful way, for regressions of a size that fits in memory.
 *
 * Source  Golub & Van Loan, Matrix Computations (4th ed. 2013), ch. 5.2–5.3; refinement of coefficients and residuals
 *         together: Björck, Iterative refinement of linear least squares solutions I, BIT 7 (1967) 257.
 */

import { Matrix, QrDecomposition, SingularValueDecomposition } from 'ml-matrix';
import { NumericalError, UsageError } from '../../errors.js';
import { AccurateSum } from '../accurateSum.js';

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
  /** Condition number of the design with columns scaled to about unit length: that many times rounding may be lost. */
  readonly conditioning: number;
}

/** Sine of the angle between a column and the ones before it below which they count as the same direction. */
const SAME_DIRECTION = 1e-12;

const REFINEMENTS = 4; // each gains as many digits as the scaled problem leaves to double precision

/**
 * Coefficients that minimise the sum of squared residuals.
 *
 * Columns are scaled to about unit length first, by powers of two (which round nothing), so that their units do not
 * matter.
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

  const { solution, residuals } = refine(factor, scaled, response);
  const freedom = n - k;
  const squares = residuals.reduce((sum, value) => sum + value * value, 0);
  const residualDeviation = freedom > 0 ? Math.sqrt(squares / freedom) : NaN;
  return {
    coefficients: solution.map((value, j) => value / scales[j]),
    standardErrors: inverseRowNorms(triangle).map((norm, j) => (norm * residualDeviation) / scales[j]),
    residualDeviation,
    determination: 1 - squares / squaresAboutMean(response),
    freedom,
    conditioning: new SingularValueDecomposition(triangle).condition,
  };
}

function measureColumns(design: Float64Array, n: number, k: number): Float64Array {
  const squares = new Float64Array(k);
  for (let row = 0; row < n; row++) {
    for (let j = 0; j < k; j++) squares[j] += design[row * k + j] ** 2;
  }
  return squares.map((value) => (value > 0 ? 2 ** Math.round(Math.log2(value) / 2) : 1));
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

/**
 * Solves r + A x = b, Aᵀ r = 0 for coefficients and residuals together. What either equation lacks is summed without
 * rounding before it is rounded once, so that large residuals do not spoil the coefficients.
 */
function refine(
  factor: QrDecomposition,
  scaled: Matrix,
  response: Float64Array,
): { solution: Float64Array; residuals: Float64Array } {
  const { rows: n, columns: k } = scaled;
  const triangle = factor.upperTriangularMatrix;
  const orthogonal = factor.orthogonalMatrix;
  const solution = new Float64Array(k);
  const residuals = new Float64Array(n);
  const sum = new AccurateSum();
  for (let round = 0; round <= REFINEMENTS; round++) {
    const missing = response.map((value, row) => {
      sum.start(value);
      sum.add(-residuals[row]);
      for (let j = 0; j < k; j++) sum.addProduct(-scaled.get(row, j), solution[j]);
      return sum.value();
    });
    const tilted = Float64Array.from({ length: k }, (_, j) => {
      sum.start(0);
      for (let row = 0; row < n; row++) sum.addProduct(-scaled.get(row, j), residuals[row]);
      return sum.value();
    });
    // With A = Q R: R δx = Qᵀ f − R⁻ᵀ g and δr = f − Q (Qᵀ f − R⁻ᵀ g), f and g what the equations lack.
    const step = orthogonal.transpose().mmul(Matrix.columnVector(missing)).to1DArray();
    const turned = solveTransposed(triangle, tilted);
    for (let j = 0; j < k; j++) step[j] -= turned[j];
    for (let row = 0; row < n; row++) {
      let along = 0;
      for (let j = 0; j < k; j++) along += orthogonal.get(row, j) * step[j];
      residuals[row] += missing[row] - along;
    }
    for (let j = k - 1; j >= 0; j--) {
      for (let l = j + 1; l < k; l++) step[j] -= triangle.get(j, l) * step[l];
      step[j] /= triangle.get(j, j);
      solution[j] += step[j];
    }
  }
  return { solution, residuals };
}

/** R⁻ᵀ times a vector, for an upper-triangular R. */
function solveTransposed(triangle: Matrix, right: Float64Array): Float64Array {
  const out = right.slice();
  for (let j = 0; j < out.length; j++) {
    for (let l = 0; l < j; l++) out[j] -= triangle.get(l, j) * out[l];
    out[j] /= triangle.get(j, j);
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
