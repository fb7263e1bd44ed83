/**
 * The direct plug-in bandwidth of local linear regression: the bandwidth that minimises the asymptotic mean integrated
 * squared error, with the unknown curvature and variance replaced by pilot estimates.
 *
 * For n responses with variance σ² spread over a range of length L, a normal kernel and θ_rs = mean of m⁽ʳ⁾(X) m⁽ˢ⁾(X):
 *
 *   h  = [σ² L / (2√π θ₂₂ n)]^{1/5}                    of the regression
 *   g₂ = [C σ² L / (|θ₂₄| n)]^{1/7}                    of the local cubic that estimates θ₂₂;
 *                                                      C = 3/(8√π) where θ₂₄ < 0, 15/(16√π) where θ₂₄ > 0
 *   g₀ = [4 K₃ σ⁴ L / (√(2π) (θ₂₂ n)²)]^{1/9}           of the local line that estimates σ²;  K₃ = 1/2 + 2√2 − 4√3/3
 *
 * The chain starts from quartics fitted to blocks of the sorted data, their number chosen by Mallows' C_p.
 *
 * Source  Ruppert, Sheather & Wand, An effective bandwidth selector for local least squares regression, J. Am. Stat.
 *         Assoc. 90 (1995) 1257; the number of blocks: Mallows, Some comments on C_p, Technometrics 15 (1973) 661.
 */

import { invertMatrix } from '../linear/smallMatrix.js';
import { binLinearly, fitLocalPolynomial, smootherDiagonals } from './localPolynomial.js';

const TRIM = 0.01; // share of the data left out at either end before anything is estimated: stragglers bend quartics
const EDGE = 0.05; // share of the range at either end over which curvature is not averaged: it is unsure there
const MOST_BLOCKS = 5;
const DATA_PER_BLOCK = 20; // a quartic needs at least a few times its five coefficients
const GRID = 401;
const QUARTIC = 5; // coefficients of a quartic

/**
 * The bandwidth (standard deviation of the normal kernel) in the unit of x.
 *
 * @param x  places in any order, at least 30 distinct ones
 * @param y  responses, one per place
 * @returns NaN where the data are too few or too flat for one (no curvature to be seen, or no scatter)
 *
 * Cost  O(n log n).
 */
export function directPlugIn(x: ArrayLike<number>, y: ArrayLike<number>): number {
  const { places, responses } = sortAndTrim(x, y);
  const n = places.length;
  const low = places[0];
  const high = places[n - 1];
  if (n < 2 * DATA_PER_BLOCK || !(high > low)) return Number.NaN;
  const length = high - low;

  const pilot = chooseQuartics(places, responses);
  const cubicConstant = (pilot.theta24 < 0 ? 3 / 8 : 15 / 16) / Math.sqrt(Math.PI);
  const cubicWidth = ((cubicConstant * pilot.variance * length) / (Math.abs(pilot.theta24) * n)) ** (1 / 7);
  const data = binLinearly(places, responses, low, high, GRID);
  const curvature = fitLocalPolynomial(data, cubicWidth, 3, 2);
  const skip = Math.floor(EDGE * GRID);
  let theta22 = 0;
  for (let i = skip; i < GRID - skip; i++) {
    if (data.counts[i] > 0) theta22 += (curvature[i] ** 2 * data.counts[i]) / n;
  }

  const lineConstant = (4 * (0.5 + 2 * Math.SQRT2 - (4 / 3) * Math.sqrt(3))) / Math.sqrt(2 * Math.PI);
  const lineWidth = ((lineConstant * pilot.variance ** 2 * length) / (theta22 * n) ** 2) ** (1 / 9);
  const fitted = fitLocalPolynomial(data, lineWidth, 1);
  const { own, squared } = smootherDiagonals(data, lineWidth, 1);
  let residual = 0;
  for (let i = 0; i < n; i++) residual += responses[i] ** 2;
  let freedom = n;
  for (let i = 0; i < GRID; i++) {
    if (data.counts[i] === 0) continue;
    residual += fitted[i] ** 2 * data.counts[i] - 2 * fitted[i] * data.sums[i];
    freedom += (squared[i] - 2 * own[i]) * data.counts[i];
  }
  return ((residual / freedom) * (length / (2 * Math.sqrt(Math.PI) * theta22 * n))) ** (1 / 5);
}

function sortAndTrim(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
): { places: Float64Array; responses: Float64Array } {
  const order = Uint32Array.from({ length: x.length }, (_, i) => i).sort((a, b) => x[a] - x[b]);
  const cut = Math.floor(TRIM * x.length);
  const kept = order.subarray(cut, x.length - cut);
  return {
    places: Float64Array.from(kept, (i) => x[i]),
    responses: Float64Array.from(kept, (i) => y[i]),
  };
}

interface BlockedQuartics {
  readonly residual: number;
  readonly variance: number;
  readonly theta24: number;
}

/** Quartics on the number of blocks with the least C_p. */
function chooseQuartics(x: Float64Array, y: Float64Array): BlockedQuartics {
  const most = Math.max(1, Math.min(Math.floor(x.length / DATA_PER_BLOCK), MOST_BLOCKS));
  const fits = Array.from({ length: most }, (_, index) => fitQuartics(x, y, index + 1));
  const reference = fits[most - 1].residual / (x.length - QUARTIC * most);
  const scores = fits.map((fit, index) => fit.residual / reference + 2 * QUARTIC * (index + 1));
  return fits[scores.indexOf(Math.min(...scores))];
}

/** One quartic to each of `blocks` stretches of equally many data; the last takes what is left over. */
function fitQuartics(x: Float64Array, y: Float64Array, blocks: number): BlockedQuartics {
  const size = Math.floor(x.length / blocks);
  let residual = 0;
  let theta24 = 0;
  for (let block = 0; block < blocks; block++) {
    const start = block * size;
    const end = block === blocks - 1 ? x.length : start + size;
    const centre = (x[start] + x[end - 1]) / 2;
    const half = (x[end - 1] - x[start]) / 2 || 1;
    const moments = new Float64Array(2 * QUARTIC - 1);
    const right = new Float64Array(QUARTIC);
    for (let i = start; i < end; i++) {
      const u = (x[i] - centre) / half;
      let power = 1;
      for (let j = 0; j < moments.length; j++) {
        moments[j] += power;
        if (j < QUARTIC) right[j] += power * y[i];
        power *= u;
      }
    }
    const matrix = new Float64Array(QUARTIC * QUARTIC);
    for (let i = 0; i < QUARTIC; i++) {
      for (let j = 0; j < QUARTIC; j++) matrix[i * QUARTIC + j] = moments[i + j];
    }
    const inverse = invertMatrix(matrix, QUARTIC);
    const [a0, a1, a2, a3, a4] = right.map((_, row) =>
      right.reduce((sum, value, column) => sum + inverse[row * QUARTIC + column] * value, 0),
    );
    const fourth = (24 * a4) / half ** 4;
    for (let i = start; i < end; i++) {
      const u = (x[i] - centre) / half;
      residual += (y[i] - (a0 + u * (a1 + u * (a2 + u * (a3 + u * a4))))) ** 2;
      theta24 += ((2 * a2 + u * (6 * a3 + u * 12 * a4)) / half ** 2) * fourth;
    }
  }
  return {
    residual,
    variance: residual / (x.length - QUARTIC * blocks),
    theta24: theta24 / x.length,
  };
}
