/**
 * Nonlinear least squares: Levenberg's damped Gauss–Newton steps with Marquardt's scaling.
 *
 * Source  Levenberg, A method for the solution of certain non-linear problems in least squares, Quart. Appl. Math. 2
 *         (1944) 164; Marquardt, J. SIAM 11 (1963) 431; Moré, The Levenberg–Marquardt algorithm, Lect. Notes Math. 630
 *         (1978) 105.
 */

import { factorCholeskyInto, solveLowerInPlace, solveUpperInPlace } from '../linear/choleskyFactor.js';

export interface SquaresOptions {
  /** Budget of steps; default 60. */
  readonly steps?: number;
  /** Stop when a step would lower the sum by less than this fraction; default 1e-10. */
  readonly tolerance?: number;
  /** Length p: size of each variable for which the steps of its derivative are made; default |start|, or 1. */
  readonly scales?: ArrayLike<number>;
}

export interface SquaresMinimum {
  readonly point: Float64Array;
  /** Sum of squared residuals there. */
  readonly value: number;
  /** Shape (n, p): derivatives of the residuals there. */
  readonly jacobian: Float64Array;
  /** False where the budget ended first. */
  readonly converged: boolean;
}

/** Writes the n residuals at a point; NaN or infinite entries make the point forbidden. */
export type ResidualsInto = (point: Float64Array, out: Float64Array) => void;

const FIRST_DAMPING = 1e-3; // relative to the diagonal of JᵀJ
const SMALLEST_DAMPING = 1e-12;
const LARGEST_DAMPING = 1e12; // a step this short no longer changes the point
const RELATIVE_STEP = 6e-6; // of central differences: the cube root of rounding

/**
 * Point at which the sum of squared residuals is smallest, downhill from `start`.
 *
 * @param start  length p, left untouched
 * @param residuals  n of them
 *
 * Cost  (2p + 1) evaluations and O(n p²) a step.
 */
export function minimizeSquares(
  residuals: ResidualsInto,
  n: number,
  start: ArrayLike<number>,
  options: SquaresOptions = {},
): SquaresMinimum {
  const { steps = 60, tolerance = 1e-10 } = options;
  const p = start.length;
  const scales = options.scales ?? Array.from(start, (value) => Math.abs(value) || 1);
  let point: Float64Array = Float64Array.from(start);
  const here = new Float64Array(n);
  const there = new Float64Array(n);
  let value = measure(residuals, point, here);
  const jacobian = new Float64Array(n * p);
  const normal = new Float64Array(p * p);
  const damped = new Float64Array(p * p);
  const lower = new Float64Array(p * p);
  const gradient = new Float64Array(p);
  const step = new Float64Array(p);
  let damping = FIRST_DAMPING;
  differentiateInto(residuals, point, scales, n, jacobian);
  for (let count = 0; count < steps && p > 0 && value > 0; count++) {
    formNormal(jacobian, here, n, p, normal, gradient);
    let accepted = false;
    while (!accepted && damping < LARGEST_DAMPING) {
      damped.set(normal);
      for (let i = 0; i < p; i++) damped[i * p + i] += damping * (normal[i * p + i] || 1) + Number.MIN_VALUE;
      if (factorCholeskyInto(damped, p, lower)) {
        for (let i = 0; i < p; i++) step[i] = -gradient[i];
        solveLowerInPlace(lower, p, step);
        solveUpperInPlace(lower, p, step);
        const next = point.map((coordinate, i) => coordinate + step[i]);
        const reached = measure(residuals, next, there);
        if (reached < value) {
          const gain = value - reached;
          accepted = true;
          point = next;
          value = reached;
          here.set(there);
          damping = Math.max(SMALLEST_DAMPING, damping / 10);
          differentiateInto(residuals, point, scales, n, jacobian);
          if (gain <= tolerance * (value + tolerance)) return { point, value, jacobian, converged: true };
          continue;
        }
      }
      damping *= 10;
    }
    if (!accepted) return { point, value, jacobian, converged: Number.isFinite(value) };
  }
  return { point, value, jacobian, converged: p === 0 || value === 0 };
}

function measure(residuals: ResidualsInto, point: Float64Array, out: Float64Array): number {
  residuals(point, out);
  let sum = 0;
  for (let i = 0; i < out.length; i++) sum += out[i] * out[i];
  return Number.isNaN(sum) ? Infinity : sum;
}

/** Central differences; no slope where one of the sides is forbidden. */
function differentiateInto(
  residuals: ResidualsInto,
  point: Float64Array,
  scales: ArrayLike<number>,
  n: number,
  jacobian: Float64Array,
): void {
  const p = point.length;
  const low = new Float64Array(n);
  const high = new Float64Array(n);
  const moved = point.slice();
  for (let j = 0; j < p; j++) {
    const h = RELATIVE_STEP * Math.max(Math.abs(point[j]), Math.abs(scales[j]));
    moved[j] = point[j] + h;
    residuals(moved, high);
    moved[j] = point[j] - h;
    residuals(moved, low);
    moved[j] = point[j];
    for (let i = 0; i < n; i++) {
      const slope = (high[i] - low[i]) / (2 * h);
      jacobian[i * p + j] = Number.isFinite(slope) ? slope : 0;
    }
  }
}

function formNormal(
  jacobian: Float64Array,
  residuals: Float64Array,
  n: number,
  p: number,
  normal: Float64Array,
  gradient: Float64Array,
): void {
  normal.fill(0);
  gradient.fill(0);
  for (let row = 0; row < n; row++) {
    for (let i = 0; i < p; i++) {
      const value = jacobian[row * p + i];
      gradient[i] += value * residuals[row];
      for (let j = 0; j <= i; j++) normal[i * p + j] += value * jacobian[row * p + j];
    }
  }
  for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) normal[j * p + i] = normal[i * p + j];
}
