/**
 * First order: dq = μ(q) dt + √(2 D(q)) dW, with the drift in the reading the scenario names.
 *
 * The drift is first brought to the Itô reading,
 *
 *   μ_Itô = μ + a ∇·D   with a = ½ (Stratonovich) or 1 (isothermal), (∇·D)_i = Σ_j ∂_j D_ij,
 *
 * then moved by the explicit scheme of weak order 2 of Kloeden & Platen (Numerical Solution of Stochastic Differential
 * Equations, 1992, eq. 15.1.3), which needs no derivatives. Where D is the same everywhere it reduces to one drift
 * predictor and corrector. For full matrices σ is the lower Cholesky factor of 2 D, and Stratonovich is taken to mean
 * ½ ∇·D, which for scalar and per-axis forms is what every definition gives.
 *
 * Reflecting walls fold each step back; near them the weak order falls to 1.
 */

import type { Integrator } from './Integrator.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';
import { reflect, type Walls } from './walls.js';
import { choleskyInto } from './smallMatrices.js';

const DERIVATIVE_STEP = 1e-5; // of the diffusion's length scale; central differences err by its square

export type Reading = 'ito' | 'stratonovich' | 'isothermal';

const DIVERGENCE_SHARE: Readonly<Record<Reading, number>> = { ito: 0, stratonovich: 0.5, isothermal: 1 };

export interface ItoCoefficients {
  /** Drift in the Itô reading and the matrix σ with σσᵀ = 2 D (row-major, full) at a place. */
  evaluateInto(place: Float64Array, drift: Float64Array, sigma: Float64Array): void;
  /** σ alone. */
  sigmaInto(place: Float64Array, sigma: Float64Array): void;
}

/** The Itô form of a first-order scenario's coefficients. */
export function createItoCoefficients(
  evaluator: ScenarioEvaluator,
  reading: Reading,
  lengthScale: number,
): ItoCoefficients {
  const { dimensions: d, bathForm, bathSize, uniformBath } = evaluator;
  const share = uniformBath ? 0 : DIVERGENCE_SHARE[reading];
  const unused = new Float64Array(bathSize);
  const diffusion = new Float64Array(bathSize);
  const full = new Float64Array(d * d);
  const shifted = new Float64Array(d);
  const above = new Float64Array(bathSize);
  const below = new Float64Array(bathSize);
  const delta = DERIVATIVE_STEP * lengthScale;
  const readSigma = (sigma: Float64Array): void => {
    if (bathForm === 'matrix') {
      for (let i = 0; i < full.length; i++) full[i] = 2 * diffusion[i];
      choleskyInto(full, d, sigma);
    } else {
      for (let axis = 0; axis < d; axis++)
        sigma[axis * (d + 1)] = Math.sqrt(2 * diffusion[bathSize === 1 ? 0 : axis]);
    }
  };
  const addDivergence = (place: Float64Array, drift: Float64Array): void => {
    shifted.set(place);
    for (let j = 0; j < d; j++) {
      shifted[j] = place[j] + delta;
      evaluator.noiseInto(shifted, above);
      shifted[j] = place[j] - delta;
      evaluator.noiseInto(shifted, below);
      shifted[j] = place[j];
      const factor = share / (2 * delta);
      if (bathForm === 'matrix') {
        for (let i = 0; i < d; i++) drift[i] += factor * (above[i * d + j] - below[i * d + j]);
      } else {
        const i = bathSize === 1 ? 0 : j;
        drift[j] += factor * (above[i] - below[i]);
      }
    }
  };
  return {
    evaluateInto(place, drift, sigma) {
      evaluator.evaluateInto(place, drift, unused, diffusion);
      readSigma(sigma);
      if (share !== 0) addDivergence(place, drift);
    },
    sigmaInto(place, sigma) {
      evaluator.noiseInto(place, diffusion);
      readSigma(sigma);
    },
  };
}

export function createFirstOrderIntegrator(
  evaluator: ScenarioEvaluator,
  walls: Walls | null,
  reading: Reading,
  lengthScale: number,
): Integrator {
  const coefficients = createItoCoefficients(evaluator, reading, lengthScale);
  return {
    evaluator,
    weakOrder: 2,
    advance: evaluator.uniformBath
      ? advanceUniform(evaluator, coefficients, walls)
      : advancePlaten(evaluator, coefficients, walls),
  };
}

/** σ the same everywhere: predictor and corrector of the drift (Kloeden & Platen 1992, eq. 15.1.3 with constant b). */
function advanceUniform(
  { dimensions: d }: ScenarioEvaluator,
  coefficients: ItoCoefficients,
  walls: Walls | null,
): Integrator['advance'] {
  const drift = new Float64Array(d);
  const corrected = new Float64Array(d);
  const sigma = new Float64Array(d * d);
  const kick = new Float64Array(d);
  const ahead = new Float64Array(d);
  return (position, velocity, count, step, stream) => {
    const root = Math.sqrt(step);
    for (let done = 0; done < count; done++) {
      coefficients.evaluateInto(position, drift, sigma);
      kick.fill(0);
      for (let j = 0; j < d; j++) {
        const w = root * stream.normal();
        for (let i = 0; i < d; i++) kick[i] += sigma[i * d + j] * w;
      }
      for (let i = 0; i < d; i++) ahead[i] = position[i] + step * drift[i] + kick[i];
      coefficients.evaluateInto(ahead, corrected, sigma);
      for (let i = 0; i < d; i++) position[i] += 0.5 * step * (drift[i] + corrected[i]) + kick[i];
      if (walls !== null) reflect(position, velocity, walls);
    }
  };
}

/**
 * Notation of Kloeden & Platen, eq. 15.1.3: Υ = Y + aΔ + Σ b^j ΔW^j, R±^j = Y + aΔ ± b^j √Δ, U±^j = Y ± b^j √Δ.
 */
function advancePlaten(
  { dimensions: d }: ScenarioEvaluator,
  coefficients: ItoCoefficients,
  walls: Walls | null,
): Integrator['advance'] {
  const a = new Float64Array(d);
  const aAhead = new Float64Array(d);
  const b = new Float64Array(d * d);
  const bPlus = new Float64Array(d * d);
  const bMinus = new Float64Array(d * d);
  const w = new Float64Array(d);
  const v = new Float64Array(d * d);
  const place = new Float64Array(d);
  const move = new Float64Array(d);
  return (position, velocity, count, step, stream) => {
    const root = Math.sqrt(step);
    for (let done = 0; done < count; done++) {
      coefficients.evaluateInto(position, a, b);
      for (let j = 0; j < d; j++) w[j] = root * stream.normal();
      for (let r = 0; r < d; r++) {
        v[r * d + r] = -step;
        for (let j = r + 1; j < d; j++) {
          v[r * d + j] = stream.bits() < 0 ? step : -step;
          v[j * d + r] = -v[r * d + j];
        }
      }
      for (let i = 0; i < d; i++) {
        let noise = 0;
        for (let j = 0; j < d; j++) noise += b[i * d + j] * w[j];
        place[i] = position[i] + step * a[i] + noise;
      }
      coefficients.evaluateInto(place, aAhead, bPlus);
      for (let i = 0; i < d; i++) move[i] = 0.5 * step * (aAhead[i] + a[i]);
      for (let j = 0; j < d; j++) {
        for (let i = 0; i < d; i++) place[i] = position[i] + step * a[i] + root * b[i * d + j];
        coefficients.sigmaInto(place, bPlus);
        for (let i = 0; i < d; i++) place[i] = position[i] + step * a[i] - root * b[i * d + j];
        coefficients.sigmaInto(place, bMinus);
        const square = (w[j] * w[j] - step) / root;
        for (let i = 0; i < d; i++) {
          const k = i * d + j;
          move[i] += 0.25 * ((bPlus[k] + bMinus[k] + 2 * b[k]) * w[j] + (bPlus[k] - bMinus[k]) * square);
        }
      }
      if (d > 1) {
        for (let r = 0; r < d; r++) {
          for (let i = 0; i < d; i++) place[i] = position[i] + root * b[i * d + r];
          coefficients.sigmaInto(place, bPlus);
          for (let i = 0; i < d; i++) place[i] = position[i] - root * b[i * d + r];
          coefficients.sigmaInto(place, bMinus);
          for (let j = 0; j < d; j++) {
            if (j === r) continue;
            const mixed = (w[j] * w[r] + v[r * d + j]) / root;
            for (let i = 0; i < d; i++) {
              const k = i * d + j;
              move[i] += 0.25 * ((bPlus[k] + bMinus[k] - 2 * b[k]) * w[j] + (bPlus[k] - bMinus[k]) * mixed);
            }
          }
        }
      }
      for (let i = 0; i < d; i++) position[i] += move[i];
      if (walls !== null) reflect(position, velocity, walls);
    }
  };
}
