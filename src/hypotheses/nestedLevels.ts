/**
 * One p-value from tests at several levels of detail.
 *
 * Level l looks at the first m_l of a list of numbers that should vanish. With ν degrees of freedom behind their
 * covariance, T²_l is Hotelling's, (ν − m_l + 1)/(ν m_l) T²_l follows F(m_l, ν − m_l + 1), and the smallest of the
 * levels' p-values is judged against what it would be by chance: jointly the T²_l are those of nested stretches of
 * one normal vector and one Wishart matrix, whatever the covariance, so their law is simulated once and for all.
 *
 * Source  Hotelling, The generalization of Student's ratio, Ann. Math. Statist. 2 (1931) 360; Wishart matrices by
 *         Bartlett's decomposition: Anderson, An Introduction to Multivariate Statistical Analysis (3rd ed. 2003),
 *         ch. 5 and 7; the smallest of dependent p-values: Westfall & Young, Resampling-Based Multiple Testing (1993).
 */

import { randomStream, type RandomStream } from '../numerics/random/RandomStream.js';
import { fisherTail } from '../numerics/special/fisherTail.js';

const DRAWS = 4000; // p near 0.05 is then known to 0.0035
const TRUSTED = 0.02; // smaller p-values are continued in proportion, since too few draws lie there

/** F statistic of a T² with its two degrees of freedom and tail probability. */
export function judgeHotelling(
  statistic: number,
  between: number,
  freedom: number,
): { readonly f: number; readonly within: number; readonly p: number } {
  const within = freedom - between + 1;
  const f = (within * statistic) / (freedom * between);
  return { f, within, p: fisherTail(f, between, within) };
}

/**
 * Probability that the smallest p-value over the levels is at most as small as the one found, all being true.
 *
 * @param sizes  m_l, increasing, each ≤ ν
 * @param freedom  ν
 * @param smallest  the smallest p-value found
 */
export function correctForLevels(
  sizes: readonly number[],
  freedom: number,
  smallest: number,
  seed: number,
): number {
  if (sizes.length === 1) return smallest;
  const stream = randomStream(seed, 'levels of a test');
  const drawn = Float64Array.from({ length: DRAWS }, () => drawSmallest(sizes, freedom, stream)).sort();
  const edge = drawn[Math.floor(TRUSTED * DRAWS)];
  if (smallest < edge) return TRUSTED * (smallest / edge);
  let below = 0;
  while (below < DRAWS && drawn[below] <= smallest) below++;
  return below / DRAWS;
}

/** T²_l = ν Σ_{i ≤ m_l} y_i² with A y = z, A the lower-triangular Bartlett factor of a Wishart matrix. */
function drawSmallest(sizes: readonly number[], freedom: number, stream: RandomStream): number {
  const size = sizes[sizes.length - 1];
  const solved = new Float64Array(size);
  let squares = 0;
  let smallest = 1;
  let level = 0;
  for (let i = 0; i < size; i++) {
    let sum = stream.normal();
    for (let j = 0; j < i; j++) sum -= stream.normal() * solved[j];
    solved[i] = sum / Math.sqrt(drawChiSquare(freedom - i, stream));
    squares += solved[i] ** 2;
    if (i + 1 === sizes[level]) {
      smallest = Math.min(smallest, judgeHotelling(freedom * squares, sizes[level], freedom).p);
      level++;
    }
  }
  return smallest;
}

/** Chi-square variable, as a sum of squares of normals or, for many degrees of freedom, by Marsaglia & Tsang. */
function drawChiSquare(freedom: number, stream: RandomStream): number {
  // Marsaglia & Tsang, A simple method for generating gamma variables, ACM TOMS 26 (2000) 363; shape ≥ 1/2 + 1/2.
  if (freedom === 1) return stream.normal() ** 2;
  const d = freedom / 2 - 1 / 3;
  const c = 1 / Math.sqrt(9 * d);
  for (;;) {
    const x = stream.normal();
    const v = (1 + c * x) ** 3;
    if (v <= 0) continue;
    if (Math.log(1 - stream.uniform()) < 0.5 * x * x + d - d * v + d * Math.log(v)) return 2 * d * v;
  }
}
