/**
 * How fast a scenario forgets where it started: its slowest relaxation time, from a simulation of its own.
 *
 * Functions φ of the state relax by a linear map, E φ(t + τ) ≈ K φ(t) with K = C(0)⁻¹ C(τ) and C their covariances. An
 * eigenvalue λ of K relaxes with the time −τ/ln|λ|, and the largest |λ| is the slowest. With finitely many functions
 * the time comes out too short rather than too long, by less the longer τ is; τ is taken where |λ| falls below a half.
 *
 * Source  Williams, Kevrekidis & Rowley, J. Nonlinear Sci. 25 (2015) 1307 (the estimate for processes that need not be
 *         reversible); Noé & Nüske, Multiscale Model. Simul. 11 (2013) 635 (that it errs to one side).
 */

import { spectralRadius } from '../numerics/linear/spectralRadius.js';
import type { ReportShare } from '../numerics/ReportShare.js';
import { type RandomStream, randomStream } from '../numerics/random/RandomStream.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';
import type { Integrator } from './Integrator.js';
import { evaluateSlowFunctions } from './slowFunctions.js';

export interface RelaxationTime {
  /** Slowest relaxation time; null where the simulation was too short to see it. */
  readonly time: number | null;
  readonly low: number;
  /** Null where not bounded from above. */
  readonly high: number | null;
}

export interface RelaxationOptions {
  readonly seed: number;
  /** Largest time step. */
  readonly step: number;
  /** Time between samples to begin with. */
  readonly interval: number;
  /** Length d; period of each axis, 0 where it is open or has walls. */
  readonly periods: readonly number[];
  /** Puts a particle where tracks start: position, velocity. */
  readonly drawStart: (position: Float64Array, velocity: Float64Array, stream: RandomStream) => void;
  /** Is told how much of the longest simulation there may be is done. */
  readonly onProgress?: ReportShare;
}

export const RELAXATION_CONFIDENCE = 0.95;

const PARTICLES = 64;
const SAMPLES = 400; // per particle
const TIMES_PER_WINDOW = 40; // relaxation times that a window must hold: some 1300 independent samples in all
const FEWEST_TIMES = 8; // with fewer in the longest window only a lower bound is given
const MAX_STEPS = 12_000_000; // some two seconds
const LAGS = [1, 2, 4, 8, 16, 32, 64, 128];
const LAG_CORRELATION = 0.5;
const RESAMPLES = 100;
const NORMAL_QUANTILE = 1.96;
/** Relative error of the time beyond the resampled one, as met on oscillators and a double well (see the tests). */
const FUNCTION_ERROR = 0.03;

/** Measures the slowest relaxation time of the process an integrator moves. */
export function measureRelaxation(integrator: Integrator, options: RelaxationOptions): RelaxationTime {
  const { seed, step, periods, drawStart } = options;
  const d = periods.length;
  const isSecond = integrator.evaluator.order === 'second';
  const coordinates = isSecond ? 2 * d : d;
  const particles = Array.from({ length: PARTICLES }, (_, index) => {
    const particle = {
      q: new Float64Array(d),
      v: new Float64Array(d),
      stream: randomStream(seed, 'relaxation', index),
    };
    drawStart(particle.q, particle.v, particle.stream);
    return particle;
  });
  const samples = new Float64Array(PARTICLES * SAMPLES * coordinates);
  let interval = options.interval;
  let spent = 0;
  for (;;) {
    const steps = Math.max(1, Math.ceil(interval / step));
    let row = 0;
    for (const { q, v, stream } of particles) {
      for (let sample = 0; sample < SAMPLES; sample++, row++) {
        integrator.advance(q, v, steps, interval / steps, stream);
        samples.set(q, row * coordinates);
        if (isSecond) samples.set(v, row * coordinates + d);
      }
      options.onProgress?.(Math.min(1, (spent + steps * row) / MAX_STEPS));
    }
    spent += steps * PARTICLES * SAMPLES;
    const found = estimateTime(evaluateSlowFunctions(samples, coordinates, periods), interval, seed);
    const window = SAMPLES * interval;
    const wanted = (TIMES_PER_WINDOW * Math.min(found.time, window)) / SAMPLES;
    if (found.lag === 1 && found.time < interval && interval > step) interval = Math.max(step, interval / 8);
    else if (window >= TIMES_PER_WINDOW * found.time)
      return { time: found.time, low: found.low, high: found.high };
    else {
      const affordable = Math.floor((MAX_STEPS - spent) / (PARTICLES * SAMPLES)) * step;
      const next = Math.min(affordable, Math.max(1.5 * interval, wanted));
      if (next < 1.2 * interval) {
        const isSeen = window >= FEWEST_TIMES * found.time;
        // Too few changes were seen to trust an interval: all that is known is that the window holds few of them.
        if (!isSeen) return { time: null, low: window / FEWEST_TIMES, high: null };
        return { time: found.time, low: found.low, high: found.high };
      }
      interval = next;
    }
  }
}

interface TimeEstimate {
  readonly time: number;
  readonly low: number;
  readonly high: number;
  /** In samples. */
  readonly lag: number;
}

/** Time and bootstrap interval over particles, at the first lag where the correlation is down to a half. */
function estimateTime(functions: readonly Float64Array[], interval: number, seed: number): TimeEstimate {
  const k = functions.length;
  const weights = new Float64Array(PARTICLES).fill(1);
  for (const lag of LAGS) {
    const covariances = sumCovariances(functions, lag);
    const correlation = solveWeighted(covariances, weights, k);
    if (correlation > LAG_CORRELATION && lag < LAGS[LAGS.length - 1]) continue;
    const toTime = (value: number): number => (value < 1 ? (-lag * interval) / Math.log(value) : Infinity);
    const stream = randomStream(seed, 'relaxation-resamples');
    const times = Float64Array.from({ length: RESAMPLES }, () => {
      weights.fill(0);
      for (let i = 0; i < PARTICLES; i++) weights[stream.integer(PARTICLES)]++;
      return toTime(solveWeighted(covariances, weights, k));
    }).sort();
    const tail = (1 - RELAXATION_CONFIDENCE) / 2;
    const time = toTime(correlation);
    const [lowest, middle, highest] = [tail, 0.5, 1 - tail].map((share) => quantileSorted(times, share));
    if (!Number.isFinite(time) || !Number.isFinite(highest))
      return { time, low: lowest, high: Infinity, lag };
    // The width of the resampled times, on the logarithm, with what the finite set of functions leaves.
    const reach = (ratio: number): number => Math.hypot(Math.log(ratio), NORMAL_QUANTILE * FUNCTION_ERROR);
    return {
      time,
      low: time * Math.exp(-reach(middle / lowest)),
      high: time * Math.exp(reach(highest / middle)),
      lag,
    };
  }
  throw new Error('the last lag always ends the search');
}

/** Per particle C(0) and C(lag) of all functions, shape (particles, 2, k, k). */
function sumCovariances(functions: readonly Float64Array[], lag: number): Float64Array {
  const k = functions.length;
  const out = new Float64Array(PARTICLES * 2 * k * k);
  for (let particle = 0; particle < PARTICLES; particle++) {
    const start = particle * SAMPLES;
    const end = start + SAMPLES - lag;
    for (let i = 0; i < k; i++) {
      const f = functions[i];
      for (let j = 0; j < k; j++) {
        const g = functions[j];
        let now = 0;
        let later = 0;
        for (let row = start; row < end; row++) {
          now += 0.5 * (f[row] * g[row] + f[row + lag] * g[row + lag]);
          later += f[row] * g[row + lag];
        }
        const at = particle * 2 * k * k + i * k + j;
        out[at] = now;
        out[at + k * k] = later;
      }
    }
  }
  return out;
}

function solveWeighted(covariances: Float64Array, weights: Float64Array, k: number): number {
  const now = new Float64Array(k * k);
  const later = new Float64Array(k * k);
  for (let particle = 0; particle < PARTICLES; particle++) {
    const weight = weights[particle];
    if (weight === 0) continue;
    const at = particle * 2 * k * k;
    for (let i = 0; i < k * k; i++) {
      now[i] += weight * covariances[at + i];
      later[i] += weight * covariances[at + k * k + i];
    }
  }
  return spectralRadius(now, later, k);
}
