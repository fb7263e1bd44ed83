/**
 * Minimum of a function of a few variables without derivatives.
 *
 * Source  Nelder & Mead, A simplex method for function minimization, Computer J. 7 (1965) 308; standard coefficients
 *         (reflection 1, expansion 2, contraction ½, shrinkage ½).
 */

export interface SimplexOptions {
  /** Edge of the first simplex along each variable; default 0.5. */
  readonly edge?: number;
  /** Stop when the values at the corners differ by less than this; default 1e-8. */
  readonly tolerance?: number;
  /** Budget of evaluations; default 200 per variable. */
  readonly evaluations?: number;
}

export interface SimplexMinimum {
  readonly point: Float64Array;
  readonly value: number;
  /** False where the budget ended before the tolerance was met. */
  readonly converged: boolean;
}

/**
 * Searches downhill from `start`; `NaN` counts as +∞, so a function may refuse a point.
 *
 * @param start  length p ≥ 1, left untouched
 */
export function minimizeSimplex(
  evaluate: (point: Float64Array) => number,
  start: ArrayLike<number>,
  options: SimplexOptions = {},
): SimplexMinimum {
  const p = start.length;
  const { edge = 0.5, tolerance = 1e-8, evaluations = 200 * p } = options;
  let used = 0;
  const measure = (point: Float64Array): number => {
    used++;
    const value = evaluate(point);
    return Number.isNaN(value) ? Infinity : value;
  };
  const corners: { point: Float64Array; value: number }[] = [];
  for (let i = 0; i <= p; i++) {
    const point = Float64Array.from(start);
    if (i > 0) point[i - 1] += edge;
    corners.push({ point, value: measure(point) });
  }
  const along = (centre: Float64Array, from: Float64Array, factor: number) => {
    const point = centre.map((value, i) => value + factor * (from[i] - value));
    return { point, value: measure(point) };
  };
  for (;;) {
    corners.sort((a, b) => a.value - b.value);
    const best = corners[0];
    const worst = corners[p];
    const converged = worst.value - best.value <= tolerance;
    if (converged || used >= evaluations) return { point: best.point, value: best.value, converged };
    const centre = new Float64Array(p);
    for (let i = 0; i < p; i++) for (let k = 0; k < p; k++) centre[k] += corners[i].point[k] / p;
    const reflected = along(centre, worst.point, -1);
    if (reflected.value < best.value) {
      const expanded = along(centre, worst.point, -2);
      corners[p] = expanded.value < reflected.value ? expanded : reflected;
      continue;
    }
    if (reflected.value < corners[p - 1].value) {
      corners[p] = reflected;
      continue;
    }
    const outside = reflected.value < worst.value;
    const contracted = along(centre, outside ? reflected.point : worst.point, 0.5);
    if (contracted.value < Math.min(reflected.value, worst.value)) {
      corners[p] = contracted;
      continue;
    }
    for (let i = 1; i <= p; i++) corners[i] = along(best.point, corners[i].point, 0.5);
  }
}
