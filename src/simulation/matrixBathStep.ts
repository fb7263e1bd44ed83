/**
 * The exact friction–noise step for full matrices: dv = −Γ v dt + σ dW over a time h has
 *
 *   v' = e^{−Γh} v + L ξ,   L Lᵀ = C(h) = ∫₀ʰ e^{−Γs} N e^{−Γᵀs} ds,   ξ standard normal.
 *
 * Both are summed as Taylor series over h / 2ᵐ short enough to converge at once, then doubled m times:
 * E(2t) = E(t)², C(2t) = C(t) + E(t) C(t) E(t)ᵀ.
 *
 * Source  scaling and squaring: Moler & Van Loan, SIAM Review 45 (2003) 3; the integral: Van Loan, IEEE Trans.
 *         Automat. Control 23 (1978) 395.
 */

import type { RandomStream } from '../numerics/random/RandomStream.js';
import { choleskyInto } from './smallMatrices.js';

const SERIES_RADIUS = 0.25; // largest ‖Γ‖·t the series are summed for
const TERMS = 12; // (2·0.25)¹³/13! ≈ 2e-14 of the first term

export interface MatrixBathStep {
  /** e^{−Γh}, d × d row-major, after `prepare`. */
  readonly decay: Float64Array;
  /** C(h), d × d row-major, after `prepare`. */
  readonly covariance: Float64Array;
  /** Computes the step for friction and noise matrices (d × d) and a time. */
  prepare(friction: Float64Array, noise: Float64Array, step: number): void;
  /** Moves a velocity by the prepared step. */
  apply(velocity: Float64Array, stream: RandomStream): void;
}

export function createMatrixBathStep(d: number): MatrixBathStep {
  const size = d * d;
  const decay = new Float64Array(size);
  const covariance = new Float64Array(size);
  const lower = new Float64Array(size);
  const term = new Float64Array(size);
  const next = new Float64Array(size);
  const spare = new Float64Array(size);
  const moved = new Float64Array(d);

  /** out = a b */
  const multiply = (a: Float64Array, b: Float64Array, out: Float64Array): void => {
    for (let i = 0; i < d; i++) {
      for (let j = 0; j < d; j++) {
        let sum = 0;
        for (let k = 0; k < d; k++) sum += a[i * d + k] * b[k * d + j];
        out[i * d + j] = sum;
      }
    }
  };

  const prepare: MatrixBathStep['prepare'] = (friction, noise, step) => {
    let norm = 0;
    for (let i = 0; i < d; i++) {
      let row = 0;
      let column = 0;
      for (let j = 0; j < d; j++) {
        row += Math.abs(friction[i * d + j]);
        column += Math.abs(friction[j * d + i]);
      }
      norm = Math.max(norm, row, column);
    }
    let doublings = 0;
    let t = step;
    while (norm * t > SERIES_RADIUS && doublings < 60) {
      t *= 0.5;
      doublings++;
    }
    // e^{−Γt}: term_k = −Γ term_{k−1} t / k
    for (let i = 0; i < size; i++) {
      decay[i] = i % (d + 1) === 0 ? 1 : 0;
      term[i] = decay[i];
    }
    for (let k = 1; k <= TERMS; k++) {
      multiply(friction, term, next);
      for (let i = 0; i < size; i++) {
        term[i] = (-next[i] * t) / k;
        decay[i] += term[i];
      }
    }
    // C(t): term_k = −(Γ term_{k−1} + term_{k−1} Γᵀ) t / (k + 1), starting from N t; every term is symmetric
    for (let i = 0; i < size; i++) {
      term[i] = noise[i] * t;
      covariance[i] = term[i];
    }
    for (let k = 1; k <= TERMS; k++) {
      multiply(friction, term, next);
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          const value = (-(next[i * d + j] + next[j * d + i]) * t) / (k + 1);
          term[i * d + j] = value;
          covariance[i * d + j] += value;
        }
      }
    }
    for (let m = 0; m < doublings; m++) {
      multiply(decay, covariance, next);
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          let sum = 0;
          for (let k = 0; k < d; k++) sum += next[i * d + k] * decay[j * d + k];
          spare[i * d + j] = sum;
        }
      }
      for (let i = 0; i < size; i++) covariance[i] += spare[i];
      multiply(decay, decay, next);
      decay.set(next);
    }
    choleskyInto(covariance, d, lower);
  };

  const apply: MatrixBathStep['apply'] = (velocity, stream) => {
    for (let i = 0; i < d; i++) {
      let sum = 0;
      for (let j = 0; j < d; j++) sum += decay[i * d + j] * velocity[j];
      moved[i] = sum;
    }
    for (let j = 0; j < d; j++) {
      const xi = stream.normal();
      for (let i = j; i < d; i++) moved[i] += lower[i * d + j] * xi;
    }
    for (let i = 0; i < d; i++) velocity[i] = moved[i];
  };

  return { decay, covariance, prepare, apply };
}
