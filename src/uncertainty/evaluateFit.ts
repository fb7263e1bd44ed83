/**
 * A fit at given places: every coefficient with its pointwise interval and simultaneous band.
 */

import type { FitResult } from '../documents/FitDocument.js';
import { isVisited } from '../tracks/visitedRegion.js';
import { valueAt } from './scales.js';
import { measureSpread } from './spread.js';

export interface EvaluatedColumn {
  readonly name: string;
  /** Length m, as all below. */
  readonly values: Float64Array;
  /** Pointwise interval at the fit's confidence. */
  readonly low: Float64Array;
  readonly high: Float64Array;
  /** Band that holds over the whole visited region at once at the fit's confidence. */
  readonly bandLow: Float64Array;
  readonly bandHigh: Float64Array;
}

/**
 * Evaluates a fit.
 *
 * @param places  shape (m, d), length; outside the visited region the bases are held at their edge and `visited` is 0
 * @returns columns named force_x …, friction_xx …, noise_xx …, temperature_xx … (second order) or drift_x …,
 *          diffusion_xx … (first), in the units of the tracks
 *
 * @example
 * const places = Float64Array.of(-0.5, 0.5); // two places in one dimension
 * const { columns, visited } = evaluateFit(fit, places);
 * console.log(columns.map(({ name }) => name).join()); // → force_x,friction_xx,noise_xx,temperature_xx
 * console.log(visited.join()); // → 1,1
 * const [force] = columns;
 * console.log(force.low[0] > 0 && force.high[1] < 0); // → true
 */
export function evaluateFit(
  fit: FitResult,
  places: Float64Array,
): { columns: EvaluatedColumn[]; visited: Uint8Array } {
  const { multiplier, simultaneous, replicates } = fit.uncertainty;
  const d = fit.model.dimensions;
  const columns = measureSpread(fit.model, replicates, places).map(({ name, scale, values, deviations }) => {
    const shifted = (widths: number) =>
      values.map((value, place) => valueAt(scale, value, widths * deviations[place]));
    const band = simultaneous[name] ?? multiplier;
    return {
      name,
      values,
      low: shifted(-multiplier),
      high: shifted(multiplier),
      bandLow: shifted(-band),
      bandHigh: shifted(band),
    };
  });
  const visited = new Uint8Array(places.length / d);
  for (let place = 0; place < visited.length; place++) {
    visited[place] = isVisited(fit.visited, fit.model.periods, places, place * d) ? 1 : 0;
  }
  return { columns, visited };
}
