/**
 * Anderson acceleration of a fixed-point iteration x ← G(x): the next point is the combination of the latest ones whose
 * combined step G(x) − x is smallest. For a linear G this is the method of minimal residuals on (I − G) x = G(0) under
 * another name, and converges where the plain iteration does not.
 *
 * Source  Anderson, Iterative procedures for nonlinear integral equations, J. ACM 12 (1965) 547; as minimal residuals:
 *         Walker & Ni, Anderson acceleration for fixed-point iterations, SIAM J. Numer. Anal. 49 (2011) 1715.
 */

import { invertMatrix } from '../../numerics/linear/smallMatrix.js';

const DEPTH = 12; // points remembered; several times the number of modes that two fields can swing in against each other
const RIDGE = 1e-12; // relative: steps that are combinations of others

/** Parts of a vector, each measured in units of its own largest step. */
type Parts = readonly Float64Array[];

export class FixedPointAccelerator {
  #scales: Float64Array | null = null;
  #lastPoint: Float64Array | null = null;
  #lastStep: Float64Array | null = null;
  readonly #pointChanges: Float64Array[] = [];
  readonly #stepChanges: Float64Array[] = [];

  /**
   * Replaces G(x) by the point to go on from.
   *
   * @param before  x
   * @param values  G(x), overwritten
   */
  advance(before: Parts, values: Parts): void {
    this.#scales ??= Float64Array.from(values, (part, i) => largestChange(part, before[i]) || 1);
    const scales = this.#scales;
    const point = join(values, scales);
    const old = join(before, scales);
    const step = point.map((value, i) => value - old[i]);
    if (this.#lastPoint && this.#lastStep) {
      const [lastPoint, lastStep] = [this.#lastPoint, this.#lastStep];
      this.#pointChanges.push(point.map((value, i) => value - lastPoint[i]));
      this.#stepChanges.push(step.map((value, i) => value - lastStep[i]));
      if (this.#stepChanges.length > DEPTH) {
        this.#pointChanges.shift();
        this.#stepChanges.shift();
      }
    }
    this.#lastPoint = point;
    this.#lastStep = step;
    const shares = this.#combine(step);
    let at = 0;
    values.forEach((part, i) => {
      for (let j = 0; j < part.length; j++, at++) {
        for (let k = 0; k < shares.length; k++) part[j] -= scales[i] * shares[k] * this.#pointChanges[k][at];
      }
    });
  }

  /** Shares of the changes of the step that leave the least of it, by least squares. */
  #combine(step: Float64Array): Float64Array {
    const changes = this.#stepChanges;
    const m = changes.length;
    const gram = new Float64Array(m * m);
    const sizes = changes.map((change) => Math.sqrt(product(change, change)) || 1);
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < m; j++) gram[i * m + j] = product(changes[i], changes[j]) / (sizes[i] * sizes[j]);
      gram[i * m + i] += RIDGE;
    }
    const inverse = invertMatrix(gram, m);
    const right = changes.map((change, i) => product(change, step) / sizes[i]);
    return Float64Array.from(sizes, (size, i) => {
      let sum = 0;
      for (let j = 0; j < m; j++) sum += inverse[i * m + j] * right[j];
      return sum / size;
    });
  }
}

function join(parts: Parts, scales: Float64Array): Float64Array {
  return Float64Array.from(parts.flatMap((part, i) => Array.from(part, (value) => value / scales[i])));
}

function largestChange(left: Float64Array, right: Float64Array): number {
  let most = 0;
  for (let i = 0; i < left.length; i++) most = Math.max(most, Math.abs(left[i] - right[i]));
  return most;
}

function product(left: Float64Array, right: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < left.length; i++) sum += left[i] * right[i];
  return sum;
}
