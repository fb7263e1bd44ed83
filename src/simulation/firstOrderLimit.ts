/**
 * The first-order equation that a second-order one becomes where friction is high. For dv = [F − Γ v] dt + σ dW, with
 * J the velocity covariance that solves Γ J + J Γᵀ = N,
 *
 *   μ_i = (Γ⁻¹ F)_i + Σ_jl ∂_l (Γ⁻¹)_ij J_jl   (Itô),     D = ½ Γ⁻¹ N Γ⁻ᵀ ;
 *
 * in one dimension μ = F/Γ − Γ′ N/(2Γ³) and D = N/(2Γ²). The second term of μ is the noise-induced drift.
 *
 * Source  Hottovy, McDaniel, Volpe & Wehr, Commun. Math. Phys. 336 (2015) 1259, theorem 1; one dimension: Pavliotis,
 *         Stochastic Processes and Applications (2014), ch. 6.
 */

import { invertMatrix } from '../numerics/linear/smallMatrix.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';
import { smallestSymmetricEigenvalue } from './smallMatrices.js';

export interface LimitOptions {
  /** Step of the central differences, length. */
  readonly shift: number;
  /** Friction below this is taken to be this, 1/time, > 0. */
  readonly leastFriction: number;
  /** Likewise for the noise. */
  readonly leastNoise: number;
}

export interface FirstOrderLimit {
  /**
   * Drift (Itô) and diffusion matrix at a place.
   *
   * @param drift  length d
   * @param diffusion  d × d, row-major
   * @returns whether friction or noise had to be lifted to their least values
   */
  evaluateInto(place: Float64Array, drift: Float64Array, diffusion: Float64Array): boolean;
  /**
   * Size of what the limit leaves out at a place, as a share of what it keeps: the larger of |∂F|/Γ², by which the
   * relaxation of a trap is faster than the limit says, and ℓ²|∂ ln Γ|² with ℓ = √T/Γ, the distance over which a
   * velocity is remembered.
   */
  neglectedAt(place: Float64Array): number;
}

/** The limit of a second-order evaluator; scratch space is its own, so keep one per thread of control. */
export function createFirstOrderLimit(evaluator: ScenarioEvaluator, options: LimitOptions): FirstOrderLimit {
  const { dimensions: d, bathSize, bathForm } = evaluator;
  const { shift, leastFriction, leastNoise } = options;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  const shifted = new Float64Array(d);
  let lifted = false;

  const spread = (values: Float64Array, least: number): Float64Array => {
    const out = new Float64Array(d * d);
    for (let i = 0; i < d * d; i++) {
      if (bathForm === 'matrix') out[i] = values[i];
      else if (i % (d + 1) === 0) out[i] = values[bathForm === 'scalar' ? 0 : i / (d + 1)];
    }
    const below = least - smallestSymmetricEigenvalue(out, d);
    if (below > 0) {
      lifted = true;
      for (let axis = 0; axis < d; axis++) out[axis * (d + 1)] += below;
    }
    return out;
  };
  const read = (
    place: Float64Array,
  ): { inverse: Float64Array; gamma: Float64Array; strength: Float64Array } => {
    evaluator.evaluateInto(place, force, friction, noise);
    const gamma = spread(friction, leastFriction);
    return { gamma, inverse: invertMatrix(gamma, d), strength: spread(noise, leastNoise) };
  };
  /** Γ⁻¹ and F on both sides of a place along an axis. */
  const readSides = (place: Float64Array, axis: number) =>
    [-1, 1].map((side) => {
      shifted.set(place);
      shifted[axis] += side * shift;
      return { ...read(shifted), force: Float64Array.from(force) };
    });

  const evaluateInto: FirstOrderLimit['evaluateInto'] = (place, drift, diffusion) => {
    lifted = false;
    const { inverse, gamma, strength } = read(place);
    for (let i = 0; i < d; i++) {
      drift[i] = 0;
      for (let j = 0; j < d; j++) drift[i] += inverse[i * d + j] * force[j];
    }
    for (let i = 0; i < d; i++) {
      for (let j = 0; j < d; j++) {
        let sum = 0;
        for (let k = 0; k < d; k++)
          for (let l = 0; l < d; l++) sum += inverse[i * d + k] * strength[k * d + l] * inverse[j * d + l];
        diffusion[i * d + j] = 0.5 * sum;
      }
    }
    if (!evaluator.uniformBath) {
      const covariance = solveVelocityCovariance(gamma, strength, d);
      for (let l = 0; l < d; l++) {
        const [below, above] = readSides(place, l);
        for (let i = 0; i < d; i++) {
          for (let j = 0; j < d; j++) {
            const slope = (above.inverse[i * d + j] - below.inverse[i * d + j]) / (2 * shift);
            drift[i] += slope * covariance[j * d + l];
          }
        }
      }
    }
    return lifted;
  };

  const neglectedAt: FirstOrderLimit['neglectedAt'] = (place) => {
    const { inverse, gamma, strength } = read(place);
    const covariance = solveVelocityCovariance(gamma, strength, d);
    const slowest = 1 / largestEntry(inverse);
    let temperature = 0;
    for (let axis = 0; axis < d; axis++) temperature = Math.max(temperature, covariance[axis * (d + 1)]);
    let most = 0;
    for (let l = 0; l < d; l++) {
      const [below, above] = readSides(place, l);
      let gradient = 0;
      for (let i = 0; i < d; i++) gradient = Math.max(gradient, Math.abs(above.force[i] - below.force[i]));
      let change = 0;
      for (let i = 0; i < d * d; i++) change = Math.max(change, Math.abs(above.gamma[i] - below.gamma[i]));
      const curvature = gradient / (2 * shift) / slowest ** 2;
      const bend = (temperature / slowest ** 2) * (change / (2 * shift) / slowest) ** 2;
      most = Math.max(most, curvature, bend);
    }
    return most;
  };
  return { evaluateInto, neglectedAt };
}

function largestEntry(values: Float64Array): number {
  return values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

/** J with Γ J + J Γᵀ = N: a linear system in the d² entries of J. */
export function solveVelocityCovariance(gamma: Float64Array, noise: Float64Array, d: number): Float64Array {
  let isDiagonal = true;
  for (let i = 0; i < d * d; i++) if (i % (d + 1) !== 0 && gamma[i] !== 0) isDiagonal = false;
  const out = new Float64Array(d * d);
  if (isDiagonal) {
    for (let i = 0; i < d; i++)
      for (let j = 0; j < d; j++)
        out[i * d + j] = noise[i * d + j] / (gamma[i * (d + 1)] + gamma[j * (d + 1)]);
    return out;
  }
  const n = d * d;
  const system = new Float64Array(n * n);
  for (let i = 0; i < d; i++) {
    for (let j = 0; j < d; j++) {
      for (let k = 0; k < d; k++) {
        const row = (i * d + j) * n;
        system[row + k * d + j] += gamma[i * d + k];
        system[row + i * d + k] += gamma[j * d + k];
      }
    }
  }
  const inverse = invertMatrix(system, n);
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) out[i] += inverse[i * n + j] * noise[j];
  return out;
}
