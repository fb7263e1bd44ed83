/**
 * Closed-form autocovariances of displacements per frame, c_j = Cov(Δy_k, Δy_{k+j}), for the four constant-coefficient
 * motions the survey tells apart. Times are counted in sampling intervals, so a friction here is friction × interval;
 * lengths are whatever the variances are in. Localization error of variance s² adds 2s² at lag 0 and −s² at lag 1.
 * Positions are snapshots unless an exposure is given (`motionBlur`).
 *
 * Source  Uhlenbeck & Ornstein, On the theory of the Brownian motion, Phys. Rev. 36 (1930) 823 (velocity correlation
 *         exp(−Γτ); correlation of the bound particle); displacement covariances by integrating them over two frames.
 */

import { blurredCovariancesInto } from './motionBlur.js';

/** Free first-order motion: independent displacements. */
export interface FreeFirstOrder {
  readonly kind: 'first-free';
  /** D, length² per interval. */
  readonly diffusion: number;
}

/** First-order motion in a harmonic trap (Ornstein–Uhlenbeck position). */
export interface TrappedFirstOrder {
  readonly kind: 'first-trapped';
  readonly diffusion: number;
  /** Relaxation rate κ, 1/interval. */
  readonly relaxation: number;
}

/** Free second-order motion: the velocity is remembered. */
export interface FreeSecondOrder {
  readonly kind: 'second-free';
  /** Velocity variance T, length² per interval². */
  readonly velocityVariance: number;
  /** Γ, 1/interval. */
  readonly friction: number;
}

/** Second-order motion in a harmonic trap (Brownian oscillator). */
export interface TrappedSecondOrder {
  readonly kind: 'second-trapped';
  readonly velocityVariance: number;
  readonly friction: number;
  /** Stiffness per mass k, 1/interval². */
  readonly stiffness: number;
}

export type DisplacementModel = FreeFirstOrder | TrappedFirstOrder | FreeSecondOrder | TrappedSecondOrder;

/**
 * Writes c_0 … c_L of the model, localization error included.
 *
 * @param errorVariance  s², length²
 * @param out  length L + 1
 * @param exposure  fraction of the interval a position is averaged over, 0 to 1
 */
export function displacementCovariancesInto(
  model: DisplacementModel,
  errorVariance: number,
  out: Float64Array,
  exposure = 0,
): void {
  if (exposure > 0) blurredCovariancesInto((time) => meanSquaredDisplacement(model, time), exposure, out);
  else snapshotCovariancesInto(model, out);
  out[0] += 2 * errorVariance;
  if (out.length > 1) out[1] -= errorVariance;
}

/**
 * Mean squared displacement over a time.
 *
 * @param time  in intervals, 0 or above
 */
export function meanSquaredDisplacement(model: DisplacementModel, time: number): number {
  switch (model.kind) {
    case 'first-free':
      return 2 * model.diffusion * time;
    case 'first-trapped':
      return -2 * (model.diffusion / model.relaxation) * Math.expm1(-model.relaxation * time);
    case 'second-free':
      return (2 * model.velocityVariance * forgottenTime(model.friction * time)) / model.friction ** 2;
    case 'second-trapped': {
      const { velocityVariance, friction, stiffness } = model;
      return 2 * (velocityVariance / stiffness) * (1 - oscillatorCorrelation(friction, stiffness, time));
    }
  }
}

/** x − 1 + e⁻ˣ; the series below 1e-3 is exact to 1e-13 where the difference would cancel. */
function forgottenTime(x: number): number {
  return x > 1e-3 ? x + Math.expm1(-x) : (x * x * (1 - (x / 3) * (1 - x / 4))) / 2;
}

function snapshotCovariancesInto(model: DisplacementModel, out: Float64Array): void {
  switch (model.kind) {
    case 'first-free':
      out.fill(0);
      out[0] = 2 * model.diffusion;
      break;
    case 'first-trapped': {
      const lost = -Math.expm1(-model.relaxation);
      const variance = model.diffusion / model.relaxation;
      out[0] = 2 * variance * lost;
      geometricTailInto(-variance * lost * lost, 1 - lost, out);
      break;
    }
    case 'second-free': {
      const x = model.friction;
      const lost = -Math.expm1(-x);
      const scale = model.velocityVariance / (x * x);
      out[0] = 2 * scale * forgottenTime(x);
      geometricTailInto(scale * lost * lost, 1 - lost, out);
      break;
    }
    case 'second-trapped': {
      const variance = model.velocityVariance / model.stiffness;
      let before = oscillatorCorrelation(model.friction, model.stiffness, 1);
      let here = 1;
      for (let lag = 0; lag < out.length; lag++) {
        const after = oscillatorCorrelation(model.friction, model.stiffness, lag + 1);
        out[lag] = variance * (2 * here - before - after);
        before = here;
        here = after;
      }
      break;
    }
  }
}

/** c_j = first · ratio^(j−1) for j ≥ 1. */
function geometricTailInto(first: number, ratio: number, out: Float64Array): void {
  let value = first;
  for (let lag = 1; lag < out.length; lag++) {
    out[lag] = value;
    value *= ratio;
  }
}

/**
 * Position autocorrelation of the Brownian oscillator after a time τ:
 * exp(−Γτ/2) [cos wτ + (Γ/2w) sin wτ] with w² = k − Γ²/4, hyperbolic where overdamped.
 *
 * Source  Uhlenbeck & Ornstein 1930, part III.
 */
export function oscillatorCorrelation(friction: number, stiffness: number, time: number): number {
  const discriminant = stiffness - (friction * friction) / 4;
  const w = Math.sqrt(Math.abs(discriminant));
  const half = friction / 2;
  if (w * time < 1e-6) return Math.exp(-half * time) * (1 + half * time); // critical damping
  if (discriminant > 0)
    return Math.exp(-half * time) * (Math.cos(w * time) + (half / w) * Math.sin(w * time));
  // Two decaying exponentials; written so that nothing overflows when far overdamped.
  const slow = stiffness / (half + w);
  const fast = half + w;
  return (fast * Math.exp(-slow * time) - slow * Math.exp(-fast * time)) / (fast - slow);
}
