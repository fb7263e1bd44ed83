/** Where in space a statement fails: the flexible fit less the statement, place by place, ready to be drawn. */

import { factorCholeskyInto, solveLowerInPlace } from '../numerics/linear/choleskyFactor.js';
import { studentQuantile } from '../numerics/special/student.js';
import type { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';
import { visitedCentres } from '../tracks/visitedRegion.js';
import { createResiduals, type StatementFit, type StatementProblem } from './fitStatement.js';

/** One residual function at one place; the coordinates stand under their names. */
export interface PlaceRow extends Partial<Readonly<Record<(typeof COORDINATE_NAMES)[number], number>>> {
  /** Which residual function: a column name, or the combination of columns that should vanish. */
  readonly column: string;
  /** What the statement says of the column there; 0 where it says that a combination vanishes. */
  readonly expected: number;
  /** What the flexible fit gives, along the modes that were looked at. */
  readonly value: number;
  /** Interval of `value`. */
  readonly low: number;
  readonly high: number;
  /** `value` − `expected` in standard errors of that difference. */
  readonly deviation: number;
}

const MOST_PLACES = 400; // of a picture; more cells are thinned evenly

/**
 * Difference d(q) = Σ_i φ_i(q) h_i with its standard error; the parameters' own error is taken off the covariance of
 * the h_i, since fitting them has made the h_i smaller.
 */
export function tabulatePlaces(
  problem: StatementProblem,
  fit: StatementFit,
  visited: VisitedRegion,
  coordinates: readonly string[],
  confidence: number,
): PlaceRow[] {
  const { statement, modes, modeCount, contrasts } = problem;
  const { values, lower } = createResiduals(problem)(fit.parameters);
  if (lower === null) return [];
  const count = values.length;
  const rows = statement.residualNames.length;
  const d = coordinates.length;
  const places = thinPlaces(visitedCentres(visited), d);
  const m = places.length / d;
  const atPlaces = modes.evaluate(places);
  const expected = statement.target(fit.parameters, places);
  const keep = projectAway(fit.jacobian, count, fit.parameters.length);
  const t = studentQuantile((1 + confidence) / 2, contrasts.blocks - 1);
  const turnBack = statement.logarithmic ? Math.exp : (value: number): number => value;
  const direction = new Float64Array(count);
  const table: PlaceRow[] = [];
  for (let row = 0; row < rows; row++) {
    for (let place = 0; place < m; place++) {
      direction.fill(0);
      let difference = 0;
      for (let mode = 0; mode < modeCount; mode++) {
        const i = contrasts.extraCount + mode * rows + row;
        direction[i] = atPlaces[mode][place];
        difference += direction[i] * values[i];
      }
      const error = Math.sqrt(spreadAlong(direction, lower, keep, count));
      const law = expected === null ? 0 : expected[row][place];
      table.push({
        column: statement.residualNames[row],
        ...Object.fromEntries(coordinates.map((name, axis) => [name, places[place * d + axis]])),
        expected: turnBack(law),
        value: turnBack(law + difference),
        low: turnBack(law + difference - t * error),
        high: turnBack(law + difference + t * error),
        deviation: error > 0 ? difference / error : 0,
      });
    }
  }
  return table;
}

/** Variance of directionᵀ h: |P Lᵀ direction|², P the projection off the whitened tangents of the parameters. */
function spreadAlong(
  direction: Float64Array,
  lower: Float64Array,
  keep: (vector: Float64Array) => void,
  count: number,
): number {
  const whitened = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    for (let j = i; j < count; j++) whitened[i] += lower[j * count + i] * direction[j];
  }
  keep(whitened);
  let sum = 0;
  for (let i = 0; i < count; i++) sum += whitened[i] * whitened[i];
  return sum;
}

/** v ↦ v − J (JᵀJ)⁻¹ Jᵀ v, in place. */
function projectAway(jacobian: Float64Array, count: number, p: number): (vector: Float64Array) => void {
  const normal = new Float64Array(p * p);
  for (let row = 0; row < count; row++) {
    for (let i = 0; i < p; i++)
      for (let j = 0; j < p; j++) normal[i * p + j] += jacobian[row * p + i] * jacobian[row * p + j];
  }
  for (let i = 0; i < p; i++) normal[i * p + i] *= 1 + 1e-12;
  const lower = new Float64Array(p * p);
  if (p === 0 || !factorCholeskyInto(normal, p, lower)) return () => undefined;
  // Rows of Q = L⁻¹ Jᵀ are orthonormal.
  const tangents: Float64Array[] = Array.from({ length: p }, () => new Float64Array(count));
  const column = new Float64Array(p);
  for (let row = 0; row < count; row++) {
    column.set(jacobian.subarray(row * p, row * p + p));
    solveLowerInPlace(lower, p, column);
    for (let i = 0; i < p; i++) tangents[i][row] = column[i];
  }
  return (vector) => {
    for (const tangent of tangents) {
      let along = 0;
      for (let i = 0; i < count; i++) along += tangent[i] * vector[i];
      for (let i = 0; i < count; i++) vector[i] -= along * tangent[i];
    }
  };
}

function thinPlaces(places: Float64Array, d: number): Float64Array {
  const m = places.length / d;
  if (m <= MOST_PLACES) return places;
  const out = new Float64Array(MOST_PLACES * d);
  for (let place = 0; place < MOST_PLACES; place++) {
    const from = Math.floor(((place + 0.5) * m) / MOST_PLACES);
    out.set(places.subarray(from * d, from * d + d), place * d);
  }
  return out;
}
