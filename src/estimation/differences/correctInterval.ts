/**
 * From effective to true coefficients: what the finite interval does to a linear system is undone exactly, place by
 * place, with the coefficients frozen there; what is left for varying coefficients is O(Δ²).
 *
 * Second order. For dv = (−k q − Γ v) dt + … sampled at Δ, the regression of D/Δ² on (q, v̂) has the coefficients
 *   GΔ/2 = tanh(ΓΔ/2),     1 − KΔ²/2 = cos(ωΔ)/cosh(ΓΔ/2),  ω² = k − Γ²/4,
 * and both force and noise amplitude shrink by K/k (by G/Γ where the force does not vary). So
 *   Γ = (2/Δ) artanh(GΔ/2),   F = F_e k/K,   N = (L − K² s² Δ) (k/K)².
 *
 * First order. For dq = −k q dt + … with ρ = 1 + μ_e′Δ = exp(−kΔ):
 *   μ = μ_e (−ln ρ)/(1 − ρ),   D = (D_e − s²(1 − ρ)²/(2Δ)) (−2 ln ρ)/(1 − ρ²).
 *
 * Source  worked out from the transition of the Brownian oscillator (Uhlenbeck & Ornstein, Phys. Rev. 36 (1930) 823;
 *         Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, ch. II).
 */

import { artanhMatrix, invertMatrix, multiplyMatrices } from '../../numerics/linear/smallMatrix.js';

/** Largest |GΔ/2| that is inverted; beyond it velocities are forgotten within a fraction of the interval. */
const LARGEST_TANH = 0.999;

/** Effective or true coefficients at one place. Matrices d × d row-major. */
export interface LocalCoefficients {
  readonly force: Float64Array;
  readonly friction: Float64Array;
  readonly noise: Float64Array;
}

/**
 * Replaces effective by true coefficients at second order, in place.
 *
 * @param local  effective force, friction, noise; overwritten
 * @param slopes  length d: derivative of each effective force component along its own axis, 1/time²
 * @param errorVariance  length d: localization variance, length²
 * @param dt  sampling interval
 */
export function correctSecondOrderInto(
  local: LocalCoefficients,
  slopes: ArrayLike<number>,
  errorVariance: ArrayLike<number>,
  dt: number,
): void {
  const { force, friction, noise } = local;
  const d = force.length;
  if (isDiagonal(friction, d)) {
    correctDiagonalInto(local, slopes, errorVariance, dt);
    return;
  }
  const half = friction.map((value) => (value * dt) / 2);
  limitNorm(half, d);
  const turned = Float64Array.from(artanhMatrix(half, d));
  const gain = matrixGain(half, turned, d);
  for (let axis = 0; axis < d; axis++) {
    const own = axis * d + axis;
    const bare = half[own] === 0 ? 1 : Math.atanh(half[own]) / half[own];
    const stiff = stiffnessGain(half[own], -slopes[axis] * dt * dt);
    // Where the force varies, its own gain replaces that of a uniform force.
    for (let other = 0; other < d; other++) gain[axis * d + other] *= stiff / bare;
    noise[own] -= slopes[axis] ** 2 * errorVariance[axis] * dt;
  }
  for (let i = 0; i < friction.length; i++) friction[i] = (2 / dt) * turned[i];
  const moved = new Float64Array(d);
  for (let axis = 0; axis < d; axis++) {
    for (let other = 0; other < d; other++) moved[axis] += gain[axis * d + other] * force[other];
  }
  force.set(moved);
  const left = multiplyMatrices(gain, noise, d);
  for (let i = 0; i < d; i++) {
    for (let j = 0; j < d; j++) {
      let sum = 0;
      for (let l = 0; l < d; l++) sum += left[i * d + l] * gain[j * d + l];
      noise[i * d + j] = sum;
    }
  }
}

/** The same where no axis drags another: thousands of places are corrected for each replicate, so nothing is allocated. */
function correctDiagonalInto(
  { force, friction, noise }: LocalCoefficients,
  slopes: ArrayLike<number>,
  errorVariance: ArrayLike<number>,
  dt: number,
): void {
  const d = force.length;
  let half = NaN;
  let turned = NaN;
  for (let axis = 0; axis < d; axis++) {
    const own = axis * d + axis;
    const next = Math.max(-LARGEST_TANH, Math.min(LARGEST_TANH, (friction[own] * dt) / 2));
    if (next !== half) turned = Math.atanh(next); // scalar friction: once for all axes
    half = next;
    const gain = turnedGain(turned, -slopes[axis] * dt * dt);
    noise[own] -= slopes[axis] ** 2 * errorVariance[axis] * dt;
    friction[own] = (2 / dt) * turned;
    force[axis] *= gain;
    for (let other = 0; other < d; other++) {
      noise[axis * d + other] *= gain;
      noise[other * d + axis] *= gain;
    }
  }
}

/**
 * k/K of the Brownian oscillator as a function of GΔ/2 and KΔ².
 *
 * @param half  GΔ/2 = tanh(ΓΔ/2), |half| < 1
 * @param stiffness  KΔ²; beyond the range a sampled oscillator can show it is limited
 */
export function stiffnessGain(half: number, stiffness: number): number {
  return turnedGain(Math.atanh(half), stiffness);
}

/** The same from ΓΔ/2 itself. */
function turnedGain(turned: number, stiffness: number): number {
  if (Math.abs(stiffness) < WEAK) return weakGain(turned, stiffness);
  const usable = Math.min(stiffness, 2);
  const cosine = (1 - usable / 2) * Math.cosh(turned);
  const angle = cosine <= 1 ? Math.acos(Math.max(-1, cosine)) ** 2 : -(Math.acosh(cosine) ** 2);
  return (turned * turned + angle) / usable;
}

/** Below this KΔ² the closed form of k/K is 0/0 to too many digits; the next term of the series is then below 1e-8. */
const WEAK = 1e-4;

/** k/K to first order in KΔ²: t/tanh t + KΔ² cosh²t (t cosh t − sinh t)/(4 sinh³t) with t = ΓΔ/2. */
function weakGain(turned: number, stiffness: number): number {
  const t = Math.abs(turned);
  if (t < 1e-2) return 1 + (t * t) / 3 + stiffness * (1 / 12 + (t * t) / 20);
  const sinh = Math.sinh(t);
  const cosh = Math.cosh(t);
  return (t * cosh) / sinh + (stiffness * cosh * cosh * (t * cosh - sinh)) / (4 * sinh ** 3);
}

/**
 * Replaces effective by true coefficients at first order, in place (`friction` is not used).
 *
 * @param slopes  length d: derivative of each effective drift component along its own axis, 1/time
 */
export function correctFirstOrderInto(
  local: LocalCoefficients,
  slopes: ArrayLike<number>,
  errorVariance: ArrayLike<number>,
  dt: number,
): void {
  const { force, noise } = local;
  const d = force.length;
  const widths = new Float64Array(d);
  for (let axis = 0; axis < d; axis++) {
    const decay = Math.max(0.05, Math.min(3, 1 + slopes[axis] * dt));
    const drop = 1 - decay;
    const rate = Math.abs(drop) < 1e-6 ? 1 + drop / 2 : -Math.log(decay) / drop;
    force[axis] *= rate;
    noise[axis * d + axis] -= (errorVariance[axis] * drop * drop) / (2 * dt);
    widths[axis] = (2 * rate) / (1 + decay);
  }
  for (let i = 0; i < d; i++) {
    for (let j = 0; j < d; j++) noise[i * d + j] *= Math.sqrt(widths[i] * widths[j]);
  }
}

function limitNorm(half: Float64Array, d: number): void {
  let norm = 0;
  for (let i = 0; i < half.length; i++) norm += half[i] * half[i];
  norm = Math.sqrt(norm);
  if (norm > LARGEST_TANH * Math.sqrt(d)) {
    for (let i = 0; i < half.length; i++) half[i] *= (LARGEST_TANH * Math.sqrt(d)) / norm;
  }
}

function isDiagonal(matrix: Float64Array, d: number): boolean {
  for (let i = 0; i < d; i++)
    for (let j = 0; j < d; j++) if (i !== j && matrix[i * d + j] !== 0) return false;
  return true;
}

function matrixGain(half: Float64Array, turned: Float64Array, d: number): Float64Array {
  const gain = Float64Array.from(multiplyMatrices(turned, invertMatrix(half, d), d));
  if (gain.every(Number.isFinite)) return gain;
  const identity = new Float64Array(d * d);
  for (let axis = 0; axis < d; axis++) identity[axis * d + axis] = 1;
  return identity;
}
