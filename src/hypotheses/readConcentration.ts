/** The local concentration as a function of place, from the column of the table that was named for it. */

import { createBasis } from '../fields/createBasis.js';
import { countPositions } from '../tracks/TrackSet.js';
import type { FlexiblePlan } from './flexibleEstimate.js';
import { projectOnBasis } from './imposeField.js';

/** Name under which laws speak of it. */
export const CONCENTRATION = 'concentration';

const ROWS = 20_000; // plenty for some dozen spline functions

/** Values at places, shape (m, d). */
export type ConcentrationReader = (places: Float64Array) => Float64Array;

/** Splines through the recorded concentrations, on the basis of the flexible fit; null without a column. */
export function createConcentrationReader({ tracks, basis: spec }: FlexiblePlan): ConcentrationReader | null {
  const { concentrations, positions, dimensions: d } = tracks;
  if (concentrations === undefined) return null;
  const n = countPositions(tracks);
  const count = Math.min(n, ROWS);
  const nodes = new Float64Array(count * d);
  const values = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const row = Math.floor(((i + 0.5) * n) / count);
    nodes.set(positions.subarray(row * d, row * d + d), i * d);
    values[i] = concentrations[row];
  }
  const [coefficients] = projectOnBasis(spec, nodes, [values], d);
  const basis = createBasis(spec, d);
  const indices = new Int32Array(basis.support);
  const functions = new Float64Array(basis.support);
  return (places) =>
    Float64Array.from({ length: places.length / d }, (_, place) => {
      const found = basis.evaluateInto(places, place * d, indices, functions);
      let sum = 0;
      for (let i = 0; i < found; i++) sum += coefficients[indices[i]] * functions[i];
      return sum;
    });
}
