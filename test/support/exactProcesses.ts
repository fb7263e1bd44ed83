/**
 * Test processes with exactly known transitions: constant friction and noise, free or in a harmonic trap, at second
 * order (position and velocity) and at first order (position alone), observed with localization error.
 *
 * Second order, per axis   dq = v dt,  dv = (f − k q − Γ v) dt + √(2ΓT) dW     (T: stationary velocity variance)
 * First order, per axis    dq = (μ − κ q) dt + √(2D) dW
 *
 * Both are linear, so the step over any interval is Gaussian with closed-form mean and covariance and there is no
 * integration error. Velocities (and trapped positions) start in the stationary law.
 *
 * Source  Uhlenbeck & Ornstein, On the theory of the Brownian motion, Phys. Rev. 36 (1930) 823;
 *         Chandrasekhar, Stochastic problems in physics and astronomy, Rev. Mod. Phys. 15 (1943) 1, ch. II.
 */

import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { COORDINATE_NAMES, type TrackSet } from '../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../src/units.js';

/** One number for every axis, or one number per axis. */
export type PerAxis = number | readonly number[];

/** The recording: what both orders share. */
export interface RecordingDesign {
  readonly tracks: number;
  readonly frames: number;
  /** Time between frames; default 1. */
  readonly interval?: number;
  /** Default 1. */
  readonly dimensions?: number;
  /** Standard deviation of the localization error, length; default 0. */
  readonly localizationError?: PerAxis;
  /** Fraction of frames lost at random (never the first of a track); default 0. */
  readonly lostFrames?: number;
  /** Standard deviation of the starting places along free axes, length; default 0 (all start at the origin). */
  readonly startSpread?: number;
  readonly seed: number;
}

export interface SecondOrderProcess extends RecordingDesign {
  /** Friction Γ, 1/time, > 0. */
  readonly friction: PerAxis;
  /** Stationary velocity variance T (kinetic temperature per mass), length²/time²; the noise is 2ΓT. Default 1. */
  readonly temperature?: PerAxis;
  /** Trap stiffness per mass k, 1/time²; default 0 (free). */
  readonly stiffness?: PerAxis;
  /** Constant force per mass f, length/time²; default 0. */
  readonly force?: PerAxis;
}

export interface FirstOrderProcess extends RecordingDesign {
  /** Diffusion D, length²/time; default 1. */
  readonly diffusion?: PerAxis;
  /** Relaxation rate of the trap κ, 1/time; default 0 (free). */
  readonly relaxation?: PerAxis;
  /** Constant drift μ, length/time; default 0. */
  readonly drift?: PerAxis;
}

/** Tracks as recorded, with the truth behind every row. */
export interface SimulatedPaths {
  readonly tracks: TrackSet;
  /** Shape (n, d): places without localization error. */
  readonly places: Float64Array;
  /** Shape (n, d): true velocities at second order; zeros at first order. */
  readonly velocities: Float64Array;
}

/** The linear step of one axis: x' = A (x − centre) + centre + L·(two standard normals), x = (q, v). */
export interface ExactStep {
  /** A, row-major: qq, qv, vq, vv. */
  readonly propagator: readonly [number, number, number, number];
  /** Covariance of the step: qq, qv, vv. */
  readonly covariance: readonly [number, number, number];
}

/** The exact second-order step over a time `interval` (free where stiffness is 0). */
export function exactSecondOrderStep(
  friction: number,
  temperature: number,
  stiffness: number,
  interval: number,
): ExactStep {
  if (stiffness === 0) {
    const x = friction * interval;
    const a = -Math.expm1(-x) / friction;
    const scale = temperature / (friction * friction);
    return {
      propagator: [1, a, 0, Math.exp(-x)],
      covariance: [
        scale * positionVarianceFactor(x),
        scale * friction * Math.expm1(-x) ** 2,
        -temperature * Math.expm1(-2 * x),
      ],
    };
  }
  const discriminant = stiffness - (friction * friction) / 4;
  const w = Math.sqrt(Math.abs(discriminant));
  let cosine = 1;
  let sine = interval; // sin(wt)/w at critical damping
  if (w * interval > 1e-6) {
    cosine = discriminant > 0 ? Math.cos(w * interval) : Math.cosh(w * interval);
    sine = (discriminant > 0 ? Math.sin(w * interval) : Math.sinh(w * interval)) / w;
  }
  const decay = Math.exp((-friction * interval) / 2);
  const qq = decay * (cosine + (friction / 2) * sine);
  const qv = decay * sine;
  const vq = -stiffness * qv;
  const vv = decay * (cosine - (friction / 2) * sine);
  // The stationary covariance S = diag(T/k, T) is kept by the step: covariance = S − A S Aᵀ.
  const s = temperature / stiffness;
  return {
    propagator: [qq, qv, vq, vv],
    covariance: [
      s - qq * qq * s - qv * qv * temperature,
      -qq * vq * s - qv * vv * temperature,
      temperature - vq * vq * s - vv * vv * temperature,
    ],
  };
}

/** 2x − 3 + 4e⁻ˣ − e⁻²ˣ without cancellation. */
function positionVarianceFactor(x: number): number {
  if (x > 0.05) return 2 * x - 3 + 4 * Math.exp(-x) - Math.exp(-2 * x);
  let sum = 0;
  let term = (-x * x * x) / 6; // (−x)ⁿ/n! at n = 3
  for (let n = 3; n < 15; n++) {
    sum += term * (4 - 2 ** n);
    term *= -x / (n + 1);
  }
  return sum;
}

/** Recorded tracks of a second-order process. */
export function simulateSecondOrder(process: SecondOrderProcess): TrackSet {
  return simulateSecondOrderPaths(process).tracks;
}

/** Recorded tracks of a second-order process with true places and velocities. */
export function simulateSecondOrderPaths(process: SecondOrderProcess): SimulatedPaths {
  const { interval = 1, dimensions = 1, temperature = 1, stiffness = 0, force = 0 } = process;
  const axes: LinearAxis[] = [];
  for (let axis = 0; axis < dimensions; axis++) {
    const friction = ofAxis(process.friction, axis);
    const variance = ofAxis(temperature, axis);
    const trap = ofAxis(stiffness, axis);
    axes.push({
      step: exactSecondOrderStep(friction, variance, trap, interval),
      centre: trap > 0 ? ofAxis(force, axis) / trap : 0,
      velocity: trap > 0 ? 0 : ofAxis(force, axis) / friction,
      placeDeviation: trap > 0 ? Math.sqrt(variance / trap) : (process.startSpread ?? 0),
      velocityDeviation: Math.sqrt(variance),
    });
  }
  return simulatePaths(process, axes);
}

/** Recorded tracks of a first-order process. */
export function simulateFirstOrder(process: FirstOrderProcess): TrackSet {
  return simulateFirstOrderPaths(process).tracks;
}

/** Recorded tracks of a first-order process with true places. */
export function simulateFirstOrderPaths(process: FirstOrderProcess): SimulatedPaths {
  const { interval = 1, dimensions = 1, diffusion = 1, relaxation = 0, drift = 0 } = process;
  const axes: LinearAxis[] = [];
  for (let axis = 0; axis < dimensions; axis++) {
    const spread = ofAxis(diffusion, axis);
    const rate = ofAxis(relaxation, axis);
    const variance = rate > 0 ? (-spread / rate) * Math.expm1(-2 * rate * interval) : 2 * spread * interval;
    axes.push({
      step: { propagator: [Math.exp(-rate * interval), 0, 0, 0], covariance: [variance, 0, 0] },
      centre: rate > 0 ? ofAxis(drift, axis) / rate : 0,
      velocity: rate > 0 ? 0 : ofAxis(drift, axis),
      placeDeviation: rate > 0 ? Math.sqrt(spread / rate) : (process.startSpread ?? 0),
      velocityDeviation: 0,
    });
  }
  return simulatePaths(process, axes);
}

interface LinearAxis {
  readonly step: ExactStep;
  /** Resting place of the trap. */
  readonly centre: number;
  /** Mean velocity of a free axis. */
  readonly velocity: number;
  readonly placeDeviation: number;
  readonly velocityDeviation: number;
}

function ofAxis(value: PerAxis, axis: number): number {
  return typeof value === 'number' ? value : value[axis];
}

function simulatePaths(design: RecordingDesign, axes: readonly LinearAxis[]): SimulatedPaths {
  const { tracks: trackCount, frames, interval = 1, localizationError = 0, lostFrames = 0, seed } = design;
  const d = axes.length;
  const times: number[] = [];
  const positions: number[] = [];
  const places: number[] = [];
  const velocities: number[] = [];
  const trackOffsets = new Int32Array(trackCount + 1);
  const q = new Float64Array(d);
  const v = new Float64Array(d);
  for (let track = 0; track < trackCount; track++) {
    const motion = randomStream(seed, 'exact process', track);
    const observation = randomStream(seed, 'exact process: observation', track);
    for (let axis = 0; axis < d; axis++) {
      q[axis] = axes[axis].placeDeviation * motion.normal();
      v[axis] = axes[axis].velocityDeviation * motion.normal();
    }
    for (let frame = 0; frame < frames; frame++) {
      if (frame > 0)
        for (let axis = 0; axis < d; axis++)
          stepInto(axes[axis].step, q, v, axis, motion.normal(), motion.normal());
      const lost = observation.uniform() < lostFrames && frame > 0;
      if (!lost) times.push(frame * interval);
      for (let axis = 0; axis < d; axis++) {
        const error = ofAxis(localizationError, axis) * observation.normal();
        if (lost) continue;
        const place = q[axis] + axes[axis].centre + axes[axis].velocity * frame * interval;
        places.push(place);
        velocities.push(v[axis] + axes[axis].velocity);
        positions.push(place + error);
      }
    }
    trackOffsets[track + 1] = times.length;
  }
  const tracks: TrackSet = {
    dimensions: d,
    coordinates: COORDINATE_NAMES.slice(0, d),
    trackNames: Array.from({ length: trackCount }, (_, track) => String(track + 1)),
    trackOffsets,
    times: Float64Array.from(times),
    positions: Float64Array.from(positions),
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: interval,
    periods: new Array<number>(d).fill(0),
    units: NO_UNITS,
  };
  return { tracks, places: Float64Array.from(places), velocities: Float64Array.from(velocities) };
}

/** One step of one axis in place; two standard normals through the Cholesky factor of the covariance. */
function stepInto(
  step: ExactStep,
  q: Float64Array,
  v: Float64Array,
  axis: number,
  first: number,
  second: number,
): void {
  const [aqq, aqv, avq, avv] = step.propagator;
  const [cqq, cqv, cvv] = step.covariance;
  const lq = Math.sqrt(Math.max(cqq, 0));
  const lqv = lq > 0 ? cqv / lq : 0;
  const lv = Math.sqrt(Math.max(cvv - lqv * lqv, 0));
  const place = q[axis];
  const velocity = v[axis];
  q[axis] = aqq * place + aqv * velocity + lq * first;
  v[axis] = avq * place + avv * velocity + lqv * first + lv * second;
}
