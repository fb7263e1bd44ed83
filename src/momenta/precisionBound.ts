/**
 * How precisely friction and noise can be known at best from noisy positions: the Cramér–Rao bound for constant
 * coefficients.
 *
 * The displacements of a free second-order process with localization error are a stationary Gaussian series with
 * autocovariance R₀ + 2s², R₁ − s², R_j (see `secondOrderCovariances`), hence with the spectrum
 *
 *     S(ω) = R₀ + 2(T/Γ²)(1−e)² (cos ω − e)/(1 − 2e cos ω + e²) + 2s²(1 − cos ω),    e = exp(−ΓΔ)
 *
 * and the information about its parameters is (n/4π) ∫ ∂log S ∂log S dω over one turn.
 *
 * Source  Whittle, Estimation and information in stationary time series, Ark. Mat. 2 (1953) 423.
 */

import { Matrix, inverse } from 'ml-matrix';
import { UsageError } from '../errors.js';

export interface PrecisionBoundInput {
  /** ΓΔ, dimensionless, > 0. */
  readonly frictionTimesInterval: number;
  /** s/(v_th Δ): localization error over the thermal displacement per frame √T·Δ, ≥ 0. */
  readonly errorOverDisplacement: number;
  /** Number of recorded positions (per axis), > 0. */
  readonly positions: number;
  /** Axes that share the same friction and noise; each brings its own information. Default 1. */
  readonly axes?: number;
  /** Whether the localization error is known beforehand; default: only where it is 0. */
  readonly errorKnown?: boolean;
}

/** Smallest relative standard deviations an unbiased estimate can have. */
export interface PrecisionBound {
  readonly friction: number;
  readonly noise: number;
}

const FREQUENCIES = 4000; // midpoints over half a turn; the integrand is smooth and periodic, so this converges fast
const STEP = 1e-4; // of the logarithms, for central differences: error ~1e-8 relative

/**
 * Lower bound of the relative standard deviation of constant friction and noise.
 *
 * @throws UsageError  friction × interval or positions not positive, localization error negative
 */
export function frictionPrecisionBound(input: PrecisionBoundInput): PrecisionBound {
  const { frictionTimesInterval, errorOverDisplacement, positions, axes = 1 } = input;
  if (!(frictionTimesInterval > 0) || !(positions > 0) || !(errorOverDisplacement >= 0)) {
    throw new UsageError(
      `the precision bound needs friction × interval and positions above 0 and a localization error of at least 0, got ${frictionTimesInterval}, ${positions} and ${errorOverDisplacement}`,
      { frictionTimesInterval, positions, errorOverDisplacement },
    );
  }
  const errorKnown = input.errorKnown ?? errorOverDisplacement === 0;
  const size = errorKnown ? 2 : 3;
  const perPosition = informationPerPosition(frictionTimesInterval, errorOverDisplacement);
  const information = Matrix.zeros(size, size);
  for (let row = 0; row < size; row++) {
    for (let column = 0; column < size; column++)
      information.set(row, column, positions * axes * perPosition[row * 3 + column]);
  }
  const covariance = inverse(information);
  return { friction: Math.sqrt(covariance.get(0, 0)), noise: Math.sqrt(covariance.get(1, 1)) };
}

/**
 * Fisher information that one position (per axis) brings about log friction, log noise and the localization error
 * variance, the latter in units of the squared thermal displacement per frame.
 *
 * @param frequencies  midpoints over half a turn
 * @returns shape (3, 3)
 */
export function informationPerPosition(
  frictionTimesInterval: number,
  errorOverDisplacement: number,
  frequencies = FREQUENCIES,
): Float64Array {
  // Lengths in √T·Δ and times in Δ, so T = 1.
  const friction = Math.log(frictionTimesInterval);
  const noise = Math.log(2 * frictionTimesInterval);
  const variance = errorOverDisplacement ** 2;
  const information = new Float64Array(9);
  const slopes = [0, 0, 0];
  for (let i = 0; i < frequencies; i++) {
    const cosine = Math.cos((Math.PI * (i + 0.5)) / frequencies);
    const level = spectrum(friction, noise, variance, cosine);
    slopes[0] =
      (spectrum(friction + STEP, noise, variance, cosine) -
        spectrum(friction - STEP, noise, variance, cosine)) /
      (2 * STEP * level);
    slopes[1] = (level - 2 * variance * (1 - cosine)) / level; // the process part is proportional to the noise
    slopes[2] = (2 * (1 - cosine)) / level;
    for (let row = 0; row < 3; row++) {
      for (let column = 0; column < 3; column++)
        information[row * 3 + column] += slopes[row] * slopes[column];
    }
  }
  // (1/4π) ∫ over one turn = (1/2) × mean over half a turn
  return information.map((value) => value / (2 * frequencies));
}

function spectrum(logFriction: number, logNoise: number, variance: number, cosine: number): number {
  const x = Math.exp(logFriction);
  const scale = Math.exp(logNoise) / (2 * x * x * x); // T/Γ²
  const e = Math.exp(-x);
  const lost = -Math.expm1(-x);
  const process = 2 * (x - lost) + (2 * lost * lost * (cosine - e)) / (1 - 2 * e * cosine + e * e);
  return scale * process + 2 * variance * (1 - cosine);
}
