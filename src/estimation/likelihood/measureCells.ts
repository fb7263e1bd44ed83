import type { LikelihoodLayout } from './layout.js';

/** Width of the finest spline cell along each axis; infinite where no field has cells. */
export function measureCells(layout: LikelihoodLayout): Float64Array {
  const widths = new Float64Array(layout.dimensions).fill(Infinity);
  for (const { spec } of layout.bases) {
    if (spec.kind !== 'spline') continue;
    for (let axis = 0; axis < widths.length; axis++) {
      const periodic = spec.periods[axis] > 0;
      const span = periodic ? spec.periods[axis] : spec.high[axis] - spec.low[axis];
      widths[axis] = Math.min(
        widths[axis],
        span / (periodic ? spec.counts[axis] : Math.max(1, spec.counts[axis] - 3)),
      );
    }
  }
  return widths;
}
