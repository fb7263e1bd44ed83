/**
 * How far replicates stray from the estimate, column by column and place by place, and how many of those standard
 * deviations make an interval or a band that holds everywhere at once.
 */

import { quantileSorted } from '../numerics/statistics/quantile.js';
import { normalQuantile } from '../numerics/special/normal.js';
import { studentQuantile } from '../numerics/special/student.js';
import type { Model } from '../fields/CoefficientField.js';
import { evaluateColumns, evaluateReplicate, planColumns } from './columns.js';
import { type ColumnScale, measureDistance } from './scales.js';

/** Estimate and spread of one column; deviations and distances are on the column's scale. */
export interface ColumnSpread {
  readonly name: string;
  readonly scale: ColumnScale;
  /** Length m. */
  readonly values: Float64Array;
  /** Length m; root mean square distance of the replicates from the estimate. */
  readonly deviations: Float64Array;
  /** Shape (R, m); distances of each replicate from the estimate, on the column's scale. */
  readonly distances: readonly Float64Array[];
}

/**
 * Spread of every column at every place.
 *
 * @param places  shape (m, d), length
 * @param replicates  R coefficient vectors
 */
export function measureSpread(
  model: Model,
  replicates: readonly ArrayLike<number>[],
  places: Float64Array,
): ColumnSpread[] {
  const plan = planColumns(model);
  const estimate = evaluateColumns(model, places);
  const perReplicate = replicates.map((parameters) => evaluateReplicate(model, parameters, places));
  const columnOf = (name: string): number => plan.findIndex((column) => column.name === name);
  return plan.map(({ name, scale }, column) => {
    const values = estimate[column];
    const axes = name.startsWith('temperature_') ? name.slice('temperature_'.length) : null;
    const noise = axes ? columnOf(`noise_${axes}`) : -1;
    const friction = axes ? columnOf(`friction_${axes}`) : -1;
    const distances = perReplicate.map((columns) =>
      values.map((value, place) => {
        if (axes) {
          // A ratio: to first order, so that a replicate with friction near zero does not swamp the rest.
          const noiseChange = columns[noise][place] / estimate[noise][place];
          return noiseChange - columns[friction][place] / estimate[friction][place];
        }
        return measureDistance(scale, value, columns[column][place]);
      }),
    );
    const deviations = values.map((_, place) => {
      let sum = 0;
      for (const row of distances) sum += row[place] ** 2;
      return Math.sqrt(sum / distances.length);
    });
    return { name, scale, values, deviations, distances };
  });
}

/**
 * Half-width of a pointwise interval in standard deviations: Student's t with the freedom that blocks and replicates
 * leave to the standard deviation.
 */
export function pointwiseMultiplier(confidence: number, blocks: number, replicates: number): number {
  const freedom = 1 / (1 / Math.max(1, blocks - 1) + 1 / replicates);
  return studentQuantile((1 + confidence) / 2, freedom);
}

/**
 * Half-width of the band that holds at all places at once: the confidence quantile over replicates of the largest
 * distance in standard deviations, widened like the pointwise interval for the few blocks behind the deviations.
 *
 * Source  maximal-deviation bootstrap: e.g. Ruppert, Wand & Carroll, Semiparametric Regression (2003), ch. 6.5.
 */
export function simultaneousMultiplier(spread: ColumnSpread, confidence: number, pointwise: number): number {
  const largest = Float64Array.from(spread.distances, (row) => {
    let most = 0;
    for (let place = 0; place < row.length; place++) {
      const deviation = spread.deviations[place];
      if (deviation > 0) most = Math.max(most, Math.abs(row[place]) / deviation);
    }
    return most;
  }).sort();
  const widening = pointwise / normalQuantile((1 + confidence) / 2);
  return Math.max(pointwise, quantileSorted(largest, confidence) * widening);
}
