/**
 * Second order by differences: lagged instruments for force and friction, the long-run variance of the residuals for
 * the noise. Free of localization error and motion blur, and of the friction × interval bias, by construction.
 *
 * With interval Δ, second difference D_k, central velocity v_k = (y_{k+1} − y_{k−1})/(2Δ):
 *
 *   D_k/Δ² = F_e(q_k) − G(q_k) v_k + e_k
 *
 * where e_k holds process noise from t_{k−1} on and the localization errors of y_{k−1}, y_k, y_{k+1} only. Instruments
 * built from y_{k−2} and earlier are clean of both; the more telling velocity (y_{k−1} − y_{k−2})/Δ meets e_k only
 * through the error of y_{k−1}, by s²(1/Δ³ − G/(2Δ²)), which is taken off once s² is known. The e_k are correlated up
 * to lag 2, so their long-run variance is L = Σ_{|j|≤2} E[e_k e_{k+j}]. `correctInterval` turns the effective F_e, G, L
 * into force, friction and noise.
 *
 * Source  instruments: Söderström & Stoica, Instrumental variable methods for system identification (1983); variances
 *         of second differences: Gloter, Parameter estimation for a discretely observed integrated diffusion process,
 *         Scand. J. Stat. 33 (2006) 83; Samson & Thieullen, Stoch. Process. Appl. 122 (2012) 2521.
 */

import { DataError } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import { createBasis } from '../../fields/createBasis.js';
import { findRuns, type Runs } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import { RecentBasis, SparseRow } from './sparseRows.js';

/** Where each coefficient's parameters stand in the vector of the force–friction regression. */
export interface SecondOrderLayout {
  readonly dimensions: number;
  readonly force: Basis | null;
  readonly friction: Basis | null;
  readonly frictionForm: 'scalar' | 'axes' | 'matrix';
  readonly frictionComponents: number;
  readonly frictionOffset: number;
  readonly size: number;
}

/** Lays out the parameters: force per axis, then friction per component. */
export function layOutSecondOrder(plan: EstimationPlan, dimensions: number): SecondOrderLayout {
  const force = plan.force.basis && createBasis(plan.force.basis, dimensions);
  const friction = plan.friction.basis && createBasis(plan.friction.basis, dimensions);
  const frictionForm = plan.friction.form === 'vector' ? 'scalar' : plan.friction.form;
  const frictionComponents = { scalar: 1, axes: dimensions, matrix: dimensions ** 2 }[frictionForm];
  const frictionOffset = dimensions * (force?.functionCount ?? 0);
  return {
    dimensions,
    force,
    friction,
    frictionForm,
    frictionComponents,
    frictionOffset,
    size: frictionOffset + frictionComponents * (friction?.functionCount ?? 0),
  };
}

/** Builds the regressors of one axis at one row. */
export class RowBuilder {
  readonly regressors: SparseRow;
  readonly #force: RecentBasis;
  readonly #friction: RecentBasis;
  readonly #layout: SecondOrderLayout;

  constructor(layout: SecondOrderLayout) {
    this.#layout = layout;
    this.#force = new RecentBasis(layout.force);
    this.#friction = new RecentBasis(layout.friction);
    const capacity = (layout.force?.support ?? 0) + layout.dimensions * (layout.friction?.support ?? 0);
    this.regressors = new SparseRow(capacity);
  }

  evaluate(positions: Float64Array, row: number): void {
    this.#force.evaluate(positions, row, this.#layout.dimensions);
    this.#friction.evaluate(positions, row, this.#layout.dimensions);
  }

  /** Fills `target` with the force functions and the friction functions times `sign` × velocity at `row`. */
  fill(target: SparseRow, axis: number, row: number, velocity: Float64Array, sign: number): void {
    const { force, friction, frictionForm, frictionOffset, dimensions } = this.#layout;
    target.clear();
    if (force) target.append(axis * force.functionCount, this.#force, row, 1);
    if (!friction) return;
    if (frictionForm === 'matrix') {
      for (let other = 0; other < dimensions; other++) {
        const component = axis * dimensions + other;
        const offset = frictionOffset + component * friction.functionCount;
        target.append(offset, this.#friction, row, sign * velocity[other]);
      }
    } else {
      const component = frictionForm === 'axes' ? axis : 0;
      target.append(
        frictionOffset + component * friction.functionCount,
        this.#friction,
        row,
        sign * velocity[axis],
      );
    }
  }
}

/**
 * What is done with one row of the force–friction regression.
 *
 * @param velocity  length d; central velocity at the row, length/time
 * @param earlier  length d; velocity instrument, length/time
 * @param fresh  whether the row is the first of its run
 */
export type AccelerationVisitor = (
  row: number,
  velocity: Float64Array,
  earlier: Float64Array,
  fresh: boolean,
) => void;

/**
 * Visits the rows of the force–friction regression, run after run.
 *
 * @param lag  of the velocity instrument: (y_{k−lag} − y_{k−lag−1})/Δ
 * @param history  gap-free positions wanted before a row, at least lag + 1
 * @param runs  of the tracks, in the order in which they are to be visited
 * @returns how many rows there were
 */
export function visitAccelerations(
  tracks: TrackSet,
  lag: 1 | 2,
  history: number,
  visit: AccelerationVisitor,
  runs: Runs = findRuns(tracks),
): number {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const velocity = new Float64Array(dimensions);
  const earlier = new Float64Array(dimensions);
  let rows = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    const first = runs.starts[run] + history;
    for (let row = first; row < runs.ends[run] - 1; row++) {
      fillVelocity(velocity, positions, row, dimensions, dt);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = (row - lag) * dimensions + axis;
        earlier[axis] = (positions[at] - positions[at - dimensions]) / dt;
      }
      visit(row, velocity, earlier, row === first);
      rows++;
    }
  }
  return rows;
}

/** @param needed  gap-free positions one row needs */
export function tooShortForAccelerations(needed: number): DataError {
  return new DataError(
    `no stretch of ${needed} gap-free positions at one interval was found, which regression on differences needs at second order; record longer tracks or take --estimator likelihood`,
    { needed },
  );
}

/** Central velocity at a row, length/time. */
export function fillVelocity(
  velocity: Float64Array,
  positions: Float64Array,
  row: number,
  d: number,
  dt: number,
): void {
  for (let axis = 0; axis < d; axis++) {
    const at = row * d + axis;
    velocity[axis] = (positions[at + d] - positions[at - d]) / (2 * dt);
  }
}

/** y_{k+1} − 2y_k + y_{k−1} of the coordinate at flat index `at`. */
export function secondDifference(positions: Float64Array, at: number, d: number): number {
  return positions[at + d] - 2 * positions[at] + positions[at - d];
}
