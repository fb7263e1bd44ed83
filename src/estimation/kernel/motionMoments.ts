/**
 * Binned moments of force and friction (second order) or drift (first order): the same rows, instruments and responses
 * as in the regression on differences, dealt to the knots of a grid.
 *
 * The place a row is binned at must not share localization error or process noise with its response. At second order it
 * is where y_{k−2} and the velocity before it lead to expect the particle at t_k, which blurs less than y_{k−2} itself;
 * at first order it is y_{k−1}. The coefficients act at y_k.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import { tooShort, visitDriftRows } from '../differences/firstOrder.js';
import {
  secondDifference,
  tooShortForAccelerations,
  visitAccelerations,
} from '../differences/forceFriction.js';
import type { EstimationPlan } from '../Estimate.js';
import {
  addFolds,
  type BinnedMoments,
  type KnotWeights,
  MomentCollector,
  type MomentSums,
} from './BinnedMoments.js';
import { type KernelGrid, isInside } from './grid.js';

/** What is done with one row: `at` and `seen` are the knots of its binning place and of the place it acts at. */
export type MotionVisitor = (
  row: number,
  at: KnotWeights,
  seen: KnotWeights,
  z: Float64Array,
  x: Float64Array,
  responses: Float64Array,
) => void;

export interface MotionDesign {
  readonly order: 'first' | 'second';
  /** Lag of the velocity instrument; with lag 1 the moments are to be corrected for the localization error. */
  readonly lag: 1 | 2;
  /** 1 + d with velocities among the regressors, else 1. */
  readonly instruments: number;
  /** How much of the way covered in the interval before y_{k−2} is expected to be covered again until y_k. */
  readonly reach: number;
}

const HISTORY = 3; // positions before a row of second order: up to y_{k−3}

/** Decides on instruments and binning places. */
export function designMotion(tracks: TrackSet, plan: EstimationPlan): MotionDesign {
  const withFriction = plan.order === 'second' && plan.friction.basis !== null;
  return {
    order: plan.order,
    lag: plan.exposure > 0 || !withFriction ? 2 : 1,
    instruments: withFriction ? 1 + tracks.dimensions : 1,
    reach: plan.order === 'second' ? expectedReach(tracks) : 0,
  };
}

/** Regression of y_k − y_{k−2} on y_{k−2} − y_{k−3}, over all axes. */
function expectedReach(tracks: TrackSet): number {
  const { positions, dimensions: d } = tracks;
  let product = 0;
  let square = 0;
  visitAccelerations(tracks, 2, HISTORY, (row) => {
    for (let at = row * d; at < (row + 1) * d; at++) {
      const earlier = positions[at - 2 * d] - positions[at - 3 * d];
      product += (positions[at] - positions[at - 2 * d]) * earlier;
      square += earlier * earlier;
    }
  });
  return square > 0 ? Math.max(0, Math.min(2, product / square)) : 0;
}

/**
 * Visits the rows of the regression that lie inside the grid.
 *
 * @throws DataError  where no run is long enough for one row
 */
export function visitMotionRows(
  tracks: TrackSet,
  design: MotionDesign,
  grid: KernelGrid,
  visit: MotionVisitor,
): void {
  const { positions, dimensions: d, samplingInterval: dt } = tracks;
  const at = createKnotWeights(grid);
  const seen = createKnotWeights(grid);
  const z = new Float64Array(design.instruments).fill(1);
  const x = new Float64Array(design.instruments).fill(1);
  const place = new Float64Array(d);
  const responses = new Float64Array(d);
  const deal = (row: number): void => {
    if (!isInside(grid, place, 0) || !isInside(grid, positions, row * d)) return;
    at.count = grid.basis.evaluateInto(place, 0, at.indices, at.values);
    seen.count = grid.basis.evaluateInto(positions, row * d, seen.indices, seen.values);
    visit(row, at, seen, z, x, responses);
  };
  if (design.order === 'first') {
    const rows = visitDriftRows(tracks, (row, velocity) => {
      for (let axis = 0; axis < d; axis++) place[axis] = positions[(row - 1) * d + axis];
      responses.set(velocity);
      deal(row);
    });
    if (rows === 0) throw tooShort();
    return;
  }
  const rows = visitAccelerations(tracks, design.lag, HISTORY, (row, velocity, earlier) => {
    for (let axis = 0; axis < d; axis++) {
      const here = row * d + axis;
      const start = positions[here - 2 * d];
      place[axis] = start + design.reach * (start - positions[here - 3 * d]);
      responses[axis] = secondDifference(positions, here, d) / (dt * dt);
      if (design.instruments === 1) continue;
      z[axis + 1] = -earlier[axis];
      x[axis + 1] = -velocity[axis];
    }
    deal(row);
  });
  if (rows === 0) throw tooShortForAccelerations(HISTORY + 2);
}

/** Collects the moments, in folds of blocks. */
export function collectMotionMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  design: MotionDesign,
  grid: KernelGrid,
  folds: number,
): BinnedMoments {
  const collector = new MomentCollector(grid.size, design.instruments, tracks.dimensions, folds);
  const { ofPosition } = plan.blocks;
  visitMotionRows(tracks, design, grid, (row, at, seen, z, x, responses) => {
    collector.add(ofPosition[row] % folds, at, seen, z, x, responses);
  });
  return collector.finish();
}

/**
 * Takes the error of y_{k−1} off moments with velocity instruments of lag 1, where it stands in instrument, velocity and
 * acceleration: s²/(2Δ²) Σ φ_i φ_j on the matrix and s²/Δ³ Σ φ_i on the vector, for each velocity.
 *
 * @param variance  localization variance per axis, length²
 */
export function correctForError(
  moments: BinnedMoments,
  variance: Float64Array,
  interval: number,
): BinnedMoments {
  const folds = moments.folds.map((fold): MomentSums => {
    const matrix = fold.matrix.slice();
    const vector = fold.vector.slice();
    addErrorTerms(moments, fold.matrix, variance, interval, matrix, vector);
    return { matrix, vector };
  });
  return { ...moments, folds, total: addFolds(folds) };
}

function addErrorTerms(
  moments: BinnedMoments,
  source: Float64Array,
  variance: Float64Array,
  interval: number,
  matrix: Float64Array,
  vector: Float64Array,
): void {
  const { rows, instruments: Z, targets: T } = moments;
  for (let pair = 0; pair < rows.length; pair++) {
    const count = source[pair * Z * Z];
    for (let axis = 0; axis < T; axis++) {
      const b = axis + 1;
      matrix[pair * Z * Z + b * Z + b] += (variance[axis] / (2 * interval ** 2)) * count;
      vector[(rows[pair] * Z + b) * T + axis] += (variance[axis] / interval ** 3) * count;
    }
  }
}

/**
 * Derivative of the unexplained moments with respect to each axis' localization variance.
 *
 * @param coefficients  shape (K, Z, T)
 * @returns one vector of shape (K, Z, T) per axis
 */
export function errorDerivatives(
  moments: BinnedMoments,
  coefficients: Float64Array,
  interval: number,
): Float64Array[] {
  const { rows, columns, total, instruments: Z, targets: T } = moments;
  return Array.from({ length: T }, (_, axis) => {
    const out = new Float64Array(coefficients.length);
    const b = axis + 1;
    for (let pair = 0; pair < rows.length; pair++) {
      const count = total.matrix[pair * Z * Z];
      const row = (rows[pair] * Z + b) * T;
      const column = (columns[pair] * Z + b) * T;
      out[row + axis] += count / interval ** 3;
      for (let t = 0; t < T; t++) out[row + t] -= (count * coefficients[column + t]) / (2 * interval ** 2);
    }
    return out;
  });
}

/** What each block leaves unexplained. */
export interface BlockResiduals {
  /** One vector of shape (K, Z, T) per block. */
  readonly residuals: readonly Float64Array[];
  /** Per block, length K: rows that each knot stands for. */
  readonly counts: readonly Float64Array[];
}

/**
 * Unexplained moments of every block.
 *
 * @param coefficients  shape (K, Z, T)
 * @param variance  localization variance per axis that the moments are corrected for, or null where they are not
 */
export function collectBlockResiduals(
  tracks: TrackSet,
  plan: EstimationPlan,
  design: MotionDesign,
  grid: KernelGrid,
  coefficients: Float64Array,
  variance: Float64Array | null,
): BlockResiduals {
  const { instruments: Z } = design;
  const { dimensions: T, samplingInterval: dt } = tracks;
  const { count, ofPosition } = plan.blocks;
  const residuals = Array.from({ length: count }, () => new Float64Array(coefficients.length));
  const counts = Array.from({ length: count }, () => new Float64Array(grid.size));
  const local = new Float64Array(Z * T);
  const rest = new Float64Array(T);
  visitMotionRows(tracks, design, grid, (row, at, seen, z, x, responses) => {
    local.fill(0);
    for (let j = 0; j < seen.count; j++) {
      const base = seen.indices[j] * Z * T;
      for (let i = 0; i < Z * T; i++) local[i] += seen.values[j] * coefficients[base + i];
    }
    for (let t = 0; t < T; t++) {
      rest[t] = responses[t];
      for (let b = 0; b < Z; b++) rest[t] -= x[b] * local[b * T + t];
    }
    const out = residuals[ofPosition[row]];
    for (let i = 0; i < at.count; i++) {
      counts[ofPosition[row]][at.indices[i]] += at.values[i];
      const base = at.indices[i] * Z * T;
      const weight = at.values[i];
      for (let b = 0; b < Z; b++) {
        for (let t = 0; t < T; t++) {
          let moment = z[b] * rest[t];
          if (variance && b > 0) {
            const error = variance[b - 1];
            moment += (b - 1 === t ? error / dt ** 3 : 0) - (error * local[b * T + t]) / (2 * dt * dt);
          }
          out[base + b * T + t] += weight * moment;
        }
      }
    }
  });
  return { residuals, counts };
}

export function createKnotWeights(grid: KernelGrid): KnotWeights {
  const { support } = grid.basis;
  return { indices: new Int32Array(support), values: new Float64Array(support), count: 0 };
}
