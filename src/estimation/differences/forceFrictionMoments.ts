/**
 * Moment conditions of the force–friction regression: instruments at y_{k−2} against regressors at y_k.
 *
 * Every entry of the matrix is a sum of products of a function at y_{k−2} with one at y_k, weighted by 1, a velocity, a
 * velocity instrument or a product of the two. A row is therefore summed once for all axes, and the sums are dealt to
 * their places when a block is complete.
 */

import { findRuns, orderRuns } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import type { MomentBlocks } from '../penalizedMoments.js';
import {
  secondDifference,
  type SecondOrderLayout,
  tooShortForAccelerations,
  visitAccelerations,
} from './forceFriction.js';
import { addValues, BasisHistory, PairSums, sameBasis } from './pairSums.js';

/** Moments of the force–friction regression, with what localization error adds to them. */
export interface ForceFrictionMoments extends MomentBlocks {
  /** Per block: Σ c_i(y_{k−2}), length k_G; and Σ c_i(y_{k−2}) c_j(y_k), shape (k_G, k_G), of the friction basis. */
  readonly frictionSums: readonly Float64Array[];
  readonly frictionProducts: readonly Float64Array[];
}

/**
 * Collects the moments, block by block.
 *
 * @param lag  2: velocity instruments (y_{k−2} − y_{k−3})/Δ, clean; 1: (y_{k−1} − y_{k−2})/Δ, to be corrected
 * @throws DataError  where no run has the five gap-free positions one row needs
 *
 * Cost  O(n support²) time, O(B p²) memory.
 */
export function collectForceFrictionMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
  lag: 1 | 2,
): ForceFrictionMoments {
  const { positions, dimensions: d, samplingInterval: dt } = tracks;
  const { count, ofPosition } = plan.blocks;
  const p = layout.size;
  const k = layout.friction?.functionCount ?? 0;
  const moments: ForceFrictionMoments = {
    size: p,
    matrices: Array.from({ length: count }, () => new Float64Array(p * p)),
    vectors: Array.from({ length: count }, () => new Float64Array(p)),
    instrumentGram: new Float64Array(p * p),
    frictionSums: Array.from({ length: count }, () => new Float64Array(k)),
    frictionProducts: Array.from({ length: count }, () => new Float64Array(k * k)),
  };
  const sums = new RowSums(layout);
  const acceleration = new Float64Array(d);
  const runs = orderRuns(findRuns(tracks), ofPosition);
  let block = -1;
  const visit = (row: number, velocity: Float64Array, earlier: Float64Array, fresh: boolean): void => {
    if (ofPosition[row] !== block) {
      if (block >= 0) sums.moveInto(moments, block);
      block = ofPosition[row];
    }
    for (let axis = 0; axis < d; axis++) {
      acceleration[axis] = secondDifference(positions, row * d + axis, d) / (dt * dt);
    }
    sums.add(positions, row, velocity, earlier, acceleration, fresh);
  };
  const rows = visitAccelerations(tracks, lag, lag + 1, visit, runs);
  if (rows === 0) throw tooShortForAccelerations(lag + 3);
  sums.moveInto(moments, block);
  sums.fillGram(moments.instrumentGram);
  return moments;
}

/** A friction component acts along `axis` on the velocity along `other`. */
interface FrictionEntry {
  readonly component: number;
  readonly axis: number;
  readonly other: number;
}

function listEntries({ frictionForm, dimensions: d, friction }: SecondOrderLayout): FrictionEntry[] {
  if (friction === null) return [];
  const axes = Array.from({ length: d }, (_, axis) => axis);
  if (frictionForm === 'matrix') {
    return axes.flatMap((axis) => axes.map((other) => ({ component: axis * d + other, axis, other })));
  }
  return axes.map((axis) => ({ component: frictionForm === 'axes' ? axis : 0, axis, other: axis }));
}

/** One product of velocity instrument and velocity, with the components whose entry of the matrix it makes. */
interface VelocityPair {
  readonly rowComponent: number;
  readonly columnComponent: number;
  /** The products along these pairs of axes are added up. */
  readonly axes: readonly (readonly [number, number])[];
}

/** Pairs of entries along the same axis; those of the same two components make one sum. */
function listPairs(entries: readonly FrictionEntry[]): VelocityPair[] {
  const pairs = new Map<string, VelocityPair & { axes: [number, number][] }>();
  for (const row of entries) {
    for (const column of entries) {
      if (row.axis !== column.axis) continue;
      const key = `${row.component} ${column.component}`;
      const pair = pairs.get(key) ?? {
        rowComponent: row.component,
        columnComponent: column.component,
        axes: [],
      };
      pair.axes.push([row.other, column.other]);
      pairs.set(key, pair);
    }
  }
  return [...pairs.values()];
}

/** Sums of one kind of pair of bases, and where among their weights each kind of product begins. */
interface Family {
  readonly left: 'force' | 'friction';
  readonly right: 'force' | 'friction';
  readonly sums: PairSums;
  readonly gram: PairSums;
  readonly weights: Float64Array;
  readonly gramWeights: Float64Array;
}

/** Sums over the rows of one block; the Gram matrix of the instruments runs over all of them. */
class RowSums {
  readonly #layout: SecondOrderLayout;
  readonly #entries: readonly FrictionEntry[];
  readonly #pairs: readonly VelocityPair[];
  readonly #families: readonly Family[];
  readonly #force: BasisHistory | null;
  readonly #friction: BasisHistory | null;
  /** Whether force and friction stand on the same functions, so that one family of sums serves all. */
  readonly #shared: boolean;
  /** Shape (k_F, d): sums of function × acceleration. */
  readonly #forceResponses: Float64Array;
  /** Shape (k_G, components + 1): sums of function × −instrument × acceleration, and of the function. */
  readonly #frictionResponses: Float64Array;
  readonly #frictionValues: Float64Array;

  constructor(layout: SecondOrderLayout) {
    const { force, friction, dimensions: d } = layout;
    this.#layout = layout;
    this.#entries = listEntries(layout);
    this.#pairs = listPairs(this.#entries);
    this.#shared = force !== null && friction !== null && sameBasis(force, friction);
    this.#force = force && new BasisHistory(force);
    this.#friction = this.#shared ? this.#force : friction && new BasisHistory(friction);
    this.#forceResponses = new Float64Array((force?.functionCount ?? 0) * d);
    this.#frictionValues = new Float64Array(layout.frictionComponents + 1);
    this.#frictionResponses = new Float64Array((friction?.functionCount ?? 0) * this.#frictionValues.length);
    const pairCount = this.#pairs.length;
    const family = (
      left: Family['left'],
      right: Family['right'],
      count: number,
      gramCount = count,
    ): Family | null => {
      const [rows, columns] = [layout[left], layout[right]];
      if (rows === null || columns === null) return null;
      const symmetric = this.#shared || left === right;
      return {
        left,
        right,
        sums: new PairSums(rows.functionCount, columns.functionCount, count),
        gram: new PairSums(rows.functionCount, columns.functionCount, gramCount, symmetric),
        weights: new Float64Array(count),
        gramWeights: new Float64Array(gramCount),
      };
    };
    const families = this.#shared
      ? [family('force', 'force', 1 + 2 * d + pairCount, 1 + d + pairCount)]
      : [
          family('force', 'force', 1),
          family('force', 'friction', d),
          family('friction', 'force', d),
          family('friction', 'friction', pairCount + 1, pairCount),
        ];
    this.#families = families.filter((found) => found !== null);
  }

  /** @param fresh  whether the row is the first of its run */
  add(
    positions: Float64Array,
    row: number,
    velocity: Float64Array,
    earlier: Float64Array,
    acceleration: Float64Array,
    fresh: boolean,
  ): void {
    for (let other = fresh ? row - 2 : row; other <= row; other++) {
      this.#force?.evaluate(positions, other);
      if (!this.#shared) this.#friction?.evaluate(positions, other);
    }
    this.#fillWeights(velocity, earlier);
    for (const { left, right, sums, gram, weights, gramWeights } of this.#families) {
      const before = left === 'force' ? this.#force : this.#friction;
      const now = right === 'force' ? this.#force : this.#friction;
      if (before === null || now === null) continue;
      sums.add(before.at(row - 2), now.at(row), weights);
      // The Gram matrix is symmetric: its friction–force part is the mirror image of the force–friction part.
      if (!(left === 'friction' && right === 'force')) {
        gram.add(before.at(row - 2), now.at(row - 2), gramWeights);
      }
    }
    if (this.#force) addValues(this.#forceResponses, this.#force.at(row - 2), acceleration);
    if (this.#friction) {
      const values = this.#frictionValues.fill(0);
      for (const { component, axis, other } of this.#entries) {
        values[component] -= earlier[other] * acceleration[axis];
      }
      values[values.length - 1] = 1;
      addValues(this.#frictionResponses, this.#friction.at(row - 2), values);
    }
  }

  /**
   * Weights of this row: 1; −velocities; −instruments; products of instruments and velocities; 1. Those of the Gram
   * matrix have the instruments for velocities and do without their mirror image.
   */
  #fillWeights(velocity: Float64Array, earlier: Float64Array): void {
    const { dimensions: d } = this.#layout;
    for (const { left, right, weights, gramWeights } of this.#families) {
      let at = 0;
      let gramAt = 0;
      if (left === 'force' && right === 'force') {
        weights[at++] = 1;
        gramWeights[gramAt++] = 1;
      }
      if (this.#shared || (left === 'force' && right === 'friction')) {
        for (let axis = 0; axis < d; axis++) {
          weights[at++] = -velocity[axis];
          gramWeights[gramAt++] = -earlier[axis];
        }
      }
      if (this.#shared || (left === 'friction' && right === 'force')) {
        for (let axis = 0; axis < d; axis++) weights[at++] = -earlier[axis];
      }
      if (!this.#shared && !(left === 'friction' && right === 'friction')) continue;
      for (const { axes } of this.#pairs) {
        let product = 0;
        let square = 0;
        for (const [a, b] of axes) {
          product += earlier[a] * velocity[b];
          square += earlier[a] * earlier[b];
        }
        weights[at++] = product;
        gramWeights[gramAt++] = square;
      }
      if (!this.#shared) weights[at] = 1;
    }
  }

  /** Hands the sums of a block over and begins anew. */
  moveInto(moments: ForceFrictionMoments, block: number): void {
    const { frictionOffset, dimensions: d } = this.#layout;
    const kF = this.#layout.force?.functionCount ?? 0;
    const k = this.#layout.friction?.functionCount ?? 0;
    this.#deal(moments.matrices[block], 'sums');
    if (k > 0) {
      const plain = this.#shared ? this.#familyOf('force', 'force') : this.#familyOf('friction', 'friction');
      const weight = this.#shared ? 0 : this.#pairs.length;
      plain?.sums.addTo(moments.frictionProducts[block], k, 0, 0, weight);
    }
    const vector = moments.vectors[block];
    for (let i = 0; i < kF; i++) {
      for (let axis = 0; axis < d; axis++) vector[axis * kF + i] += this.#forceResponses[i * d + axis];
    }
    const columns = this.#frictionValues.length;
    for (let i = 0; i < k; i++) {
      for (let component = 0; component + 1 < columns; component++) {
        vector[frictionOffset + component * k + i] += this.#frictionResponses[i * columns + component];
      }
      moments.frictionSums[block][i] += this.#frictionResponses[i * columns + columns - 1];
    }
    for (const { sums } of this.#families) sums.clear();
    this.#forceResponses.fill(0);
    this.#frictionResponses.fill(0);
  }

  /** The Gram matrix of the instruments over all rows so far. */
  fillGram(gram: Float64Array): void {
    const p = this.#layout.size;
    this.#deal(gram, 'gram');
    for (let i = 0; i < p; i++) for (let j = 0; j < i; j++) gram[i * p + j] = gram[j * p + i];
  }

  #familyOf(left: Family['left'], right: Family['right']): Family | undefined {
    if (this.#shared) return this.#families[0];
    return this.#families.find((family) => family.left === left && family.right === right);
  }

  /** Adds the sums to the entries of a matrix over all parameters. */
  #deal(matrix: Float64Array, kind: 'sums' | 'gram'): void {
    const { size: p, dimensions: d, frictionOffset } = this.#layout;
    const kF = this.#layout.force?.functionCount ?? 0;
    const k = this.#layout.friction?.functionCount ?? 0;
    const start = this.#shared ? 1 : 0; // behind the plain products
    const cross = this.#shared ? d : 0;
    const ownForce = this.#familyOf('force', 'force');
    for (let axis = 0; kF > 0 && axis < d; axis++) {
      ownForce?.[kind].addTo(matrix, p, axis * kF, axis * kF, 0);
    }
    for (const { component, axis, other } of this.#entries) {
      const column = frictionOffset + component * k;
      this.#familyOf('force', 'friction')?.[kind].addTo(matrix, p, axis * kF, column, start + other);
      if (kind === 'gram') continue;
      this.#familyOf('friction', 'force')?.sums.addTo(matrix, p, column, axis * kF, start + cross + other);
    }
    const first = this.#shared ? 1 + d + (kind === 'sums' ? d : 0) : 0;
    this.#pairs.forEach(({ rowComponent, columnComponent }, pair) => {
      const row = frictionOffset + rowComponent * k;
      const column = frictionOffset + columnComponent * k;
      this.#familyOf('friction', 'friction')?.[kind].addTo(matrix, p, row, column, first + pair);
    });
  }
}
