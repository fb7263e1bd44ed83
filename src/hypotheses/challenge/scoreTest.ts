/**
 * A test that sums of innovation products vanish, made blind to what estimating the coefficients does to them.
 *
 * Each sum s has, under a right model, mean zero, and moves with the coefficients by as much as it is correlated with
 * their scores u. At the estimate the scores add up to nothing, so the sum there has the variance of what the scores
 * do not explain, s − Cov(s, u) Var(u)⁻¹ u, and is judged against it by Hotelling's T². In a right model the terms of all
 * sums are new to their past, hence uncorrelated, so their covariance is that of single rows, or of short stretches of
 * rows where rows are many.
 *
 * Source  C(α) tests: Neyman, Optimal asymptotic tests of composite statistical hypotheses, in Probability and
 *         Statistics: The Harald Cramér Volume (1959) 213; moment form: Wooldridge, A unified approach to robust,
 *         regression-based specification tests, Econometric Theory 6 (1990) 17.
 */

import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../../numerics/linear/choleskyFactor.js';
import { judgeHotelling } from '../nestedLevels.js';
import type { Innovations } from './innovations.js';

export interface ScoreTest {
  /** Length q: the sums, and their standard errors. */
  readonly sums: Float64Array;
  readonly errors: Float64Array;
  readonly f: number;
  readonly p: number;
}

const MOST_STRETCHES = 4000; // their covariance is then known to a few per cent, and cheap
const RIDGE = 1e-9; // relative: scores that do the same thing share the load

/**
 * @param products  shape (n, q): the terms of the sums, row by row of the recording; NaN counts as none
 * @param names  q of them
 */
export function testSums(innovations: Innovations, products: Float64Array, q: number): ScoreTest {
  const { scores, scoreCount: r } = innovations;
  const n = products.length / q;
  const stretches = Math.min(n, MOST_STRETCHES);
  const sums = sumStretches(products, q, stretches);
  const totals = sumStretches(products, q, 1);
  takeOff(sums, q, sumStretches(scores, r, stretches), r);
  const spread = new Float64Array(q * q);
  for (let stretch = 0; stretch < stretches; stretch++) {
    for (let i = 0; i < q; i++) {
      for (let j = 0; j < q; j++) spread[i * q + j] += sums[stretch * q + i] * sums[stretch * q + j];
    }
  }
  const freedom = Math.max(q, stretches - r);
  for (let i = 0; i < q * q; i++) spread[i] *= stretches / freedom;
  const lower = new Float64Array(q * q);
  const whitened = totals.slice();
  let statistic = 0;
  if (factorCholeskyInto(spread, q, lower)) {
    solveLowerInPlace(lower, q, whitened);
    for (let i = 0; i < q; i++) statistic += whitened[i] ** 2;
  }
  const { f, p } = judgeHotelling(statistic, q, freedom);
  return { sums: totals, errors: Float64Array.from(totals, (_, i) => Math.sqrt(spread[i * (q + 1)])), f, p };
}

/** Sums over stretches of rows; NaN counts as none. */
function sumStretches(rows: Float64Array, width: number, stretches: number): Float64Array {
  const n = rows.length / width;
  const sums = new Float64Array(stretches * width);
  for (let row = 0; row < n; row++) {
    const base = Math.floor((row * stretches) / n) * width;
    for (let i = 0; i < width; i++) {
      const value = rows[row * width + i];
      if (value === value) sums[base + i] += value;
    }
  }
  return sums;
}

/** Replaces each row s by s − (Σ s uᵀ)(Σ u uᵀ)⁻¹ u, in place. */
function takeOff(rows: Float64Array, q: number, scores: Float64Array, r: number): void {
  if (r === 0) return;
  const count = rows.length / q;
  const gram = new Float64Array(r * r);
  const cross = new Float64Array(q * r);
  for (let row = 0; row < count; row++) {
    for (let a = 0; a < r; a++) {
      const value = scores[row * r + a];
      for (let b = 0; b < r; b++) gram[a * r + b] += value * scores[row * r + b];
      for (let i = 0; i < q; i++) cross[i * r + a] += value * rows[row * q + i];
    }
  }
  // Unit diagonal first: the scores have different units.
  const sizes = Float64Array.from({ length: r }, (_, a) => Math.sqrt(gram[a * r + a]) || 1);
  for (let a = 0; a < r; a++) {
    for (let b = 0; b < r; b++) gram[a * r + b] /= sizes[a] * sizes[b];
    gram[a * r + a] += RIDGE;
  }
  const lower = new Float64Array(r * r);
  if (!factorCholeskyInto(gram, r, lower)) return;
  const weights = new Float64Array(r);
  for (let i = 0; i < q; i++) {
    for (let a = 0; a < r; a++) weights[a] = cross[i * r + a] / sizes[a];
    solveLowerInPlace(lower, r, weights);
    solveUpperInPlace(lower, r, weights);
    for (let row = 0; row < count; row++) {
      let explained = 0;
      for (let a = 0; a < r; a++) explained += (weights[a] * scores[row * r + a]) / sizes[a];
      rows[row * q + i] -= explained;
    }
  }
}
