/** The fine stepping behind the data sets, against closed forms. */

import { describe, expect, test } from 'vitest';
import { advanceFirstOrder, advanceSecondOrder, type MovingState } from '../../datasets/stepping.js';
import { SETTLING_BEADS, type FirstOrderTruth, type SecondOrderTruth } from '../../datasets/truth.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

/** Accepted distance in standard errors: one in 15 000 for a right value. */
const STANDARD_ERRORS = 4;

interface Sample {
  readonly mean: number;
  readonly variance: number;
  readonly meanError: number;
  readonly varianceError: number;
}

/** Mean and variance of a normal sample with their standard errors. */
function summarize(values: readonly number[]): Sample {
  const n = values.length;
  const mean = values.reduce((sum, value) => sum + value, 0) / n;
  const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (n - 1);
  return {
    mean,
    variance,
    meanError: Math.sqrt(variance / n),
    varianceError: variance * Math.sqrt(2 / (n - 1)),
  };
}

describe('second order', () => {
  const free: SecondOrderTruth = {
    order: 'second',
    dimensions: 1,
    parameters: {},
    coefficients: {},
    force: () => [0.5],
    friction: () => 2,
    noise: () => 0.8,
  };

  // Uhlenbeck & Ornstein, Phys. Rev. 36 (1930) 823; Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1: a particle started at
  // rest under a constant force. Friction g = 2, noise N = 0.8, force F = 0.5, time t = 0.6.
  test('a free particle started at rest has the mean and the variances of the Brownian particle', () => {
    const [g, noise, force, t] = [2, 0.8, 0.5, 0.6];
    const decay = Math.exp(-g * t);
    const places: number[] = [];
    const velocities: number[] = [];
    for (let i = 0; i < 20_000; i++) {
      const state: MovingState = { place: [0], velocity: [0] };
      advanceSecondOrder(free, state, t, 60, randomStream(7, 'stepping test', i));
      places.push(state.place[0]);
      velocities.push(state.velocity[0]);
    }
    const place = summarize(places);
    const velocity = summarize(velocities);
    const temperature = noise / (2 * g);
    const meanVelocity = (force / g) * (1 - decay);
    const meanPlace = (force / g) * (t - (1 - decay) / g);
    const velocityVariance = temperature * (1 - decay * decay);
    const placeVariance = (temperature / g ** 2) * (2 * g * t - 3 + 4 * decay - decay * decay);
    expect(Math.abs(velocity.mean - meanVelocity)).toBeLessThan(STANDARD_ERRORS * velocity.meanError);
    expect(Math.abs(place.mean - meanPlace)).toBeLessThan(STANDARD_ERRORS * place.meanError);
    expect(Math.abs(velocity.variance - velocityVariance)).toBeLessThan(
      STANDARD_ERRORS * velocity.varianceError,
    );
    expect(Math.abs(place.variance - placeVariance)).toBeLessThan(STANDARD_ERRORS * place.varianceError);
  });
});

describe('first order', () => {
  // dx = x dt/2 + x dW is dx = x ∘ dW: x(t) = exp(W(t)), hence log x normal with mean 0 and variance t (Itô 1944).
  test('noise proportional to the place gives a log-normal place in the Itô reading', () => {
    const geometric: FirstOrderTruth = {
      order: 'first',
      dimensions: 1,
      parameters: {},
      coefficients: {},
      drift: (place) => [place[0] / 2],
      diffusion: (place) => (place[0] * place[0]) / 2,
      diffusionSlope: (place) => place[0],
      potential: () => 0,
    };
    const logs: number[] = [];
    for (let i = 0; i < 10_000; i++) {
      logs.push(Math.log(advanceFirstOrder(geometric, 1, 0.25, 200, randomStream(8, 'stepping test', i))));
    }
    const sample = summarize(logs);
    expect(Math.abs(sample.mean)).toBeLessThan(STANDARD_ERRORS * sample.meanError);
    expect(Math.abs(sample.variance - 0.25)).toBeLessThan(STANDARD_ERRORS * sample.varianceError);
  });

  test('halving the substep moves the end of a bead path by far less than it diffuses in a frame', () => {
    // The same Brownian path, once with 200 increments and once with 100 sums of two of them.
    let worst = 0;
    for (let i = 0; i < 50; i++) {
      const stream = randomStream(9, 'stepping test', i);
      const kicks = Array.from({ length: 200 }, () => stream.normal());
      const pairs = kicks
        .filter((_, k) => k % 2 === 0)
        .map((kick, k) => (kick + kicks[2 * k + 1]) / Math.SQRT2);
      const replay = (values: number[]): number => {
        let next = 0;
        return advanceFirstOrder(SETTLING_BEADS, 3e-7, 0.05, values.length, { normal: () => values[next++] });
      };
      worst = Math.max(worst, Math.abs(replay(kicks) - replay(pairs)));
    }
    const perFrame = Math.sqrt(2 * SETTLING_BEADS.diffusion([3e-7]) * 0.05);
    expect(worst).toBeLessThan(0.02 * perFrame);
  });
});
