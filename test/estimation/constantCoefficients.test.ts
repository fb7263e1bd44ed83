import { describe, expect, it } from 'vitest';
import type { StudyInput } from '../../src/documents/Study.js';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { CONSTANT, deviationOf, estimateStudy, meanOf } from '../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

const SEEDS = 12;
const TRACKS = 20;
const FRAMES = 500;

/** Scatter from so few seeds has a relative standard error of 1/√(2 (SEEDS − 1)); three of them are allowed. */
const SLACK = 3 / Math.sqrt(2 * (SEEDS - 1));

/** |Mean| of 12 values in standard errors of their own: Student's t, 11 degrees of freedom, beyond 4 at 0.2 %. */
const BIAS = 4;

interface Estimates {
  readonly motion: number[];
  readonly noise: number[];
  readonly error: number[];
}

function estimateAll(
  simulate: (seed: number) => TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
): Estimates {
  const out: Estimates = { motion: [], noise: [], error: [] };
  for (let seed = 1; seed <= SEEDS; seed++) {
    const { model, localizationError } = estimateStudy(
      simulate(seed),
      { ...CONSTANT, ...input },
      order,
    ).estimate;
    out.motion.push(model.order === 'second' ? model.friction.coefficients[0][0] : NaN);
    out.noise.push((model.order === 'second' ? model.noise : model.diffusion).coefficients[0][0]);
    out.error.push(localizationError[0].value);
  }
  return out;
}

function biasInErrors(values: readonly number[], truth: number): number {
  return Math.abs(meanOf(values) - truth) / (deviationOf(values) / Math.sqrt(values.length));
}

describe('second order, constant coefficients', () => {
  it.each([
    ['free, short intervals', 0.1, 0, 0.1],
    ['free, with strong localization error', 0.2, 0, 0.3],
    ['free, without localization error', 0.5, 0, 0],
    ['free, intervals as long as the memory', 1, 0, 0.1],
    ['trapped, underdamped', 0.2, 0.09, 0.1],
    ['trapped, with localization error', 0.5, 0.09, 0.2],
  ])(
    '%s: friction, noise and localization error without bias, scatter near the bound',
    (_, friction, stiffness, error) => {
      const found = estimateAll(
        (seed) =>
          simulateSecondOrder({
            tracks: TRACKS,
            frames: FRAMES,
            friction,
            stiffness,
            localizationError: error,
            seed,
          }),
        stiffness > 0 ? { force: 'linear' } : {},
        'second',
      );
      expect(biasInErrors(found.motion, friction)).toBeLessThan(BIAS);
      expect(biasInErrors(found.noise, 2 * friction)).toBeLessThan(BIAS);
      if (error > 0) expect(biasInErrors(found.error, error)).toBeLessThan(BIAS);
      // Cramér–Rao for the free process (a trap tells a little less or more): at most doubled, and not to be beaten.
      const bound = frictionPrecisionBound({
        frictionTimesInterval: friction,
        errorOverDisplacement: error,
        positions: TRACKS * FRAMES,
      });
      const frictionRatio = deviationOf(found.motion) / friction / bound.friction;
      const noiseRatio = deviationOf(found.noise) / (2 * friction) / bound.noise;
      expect(frictionRatio).toBeLessThan(2 * (1 + SLACK));
      expect(noiseRatio).toBeLessThan(2 * (1 + SLACK));
      if (stiffness === 0) {
        expect(frictionRatio).toBeGreaterThan(1 - SLACK);
        expect(noiseRatio).toBeGreaterThan(1 - SLACK);
      }
    },
  );

  it('finds a uniform force and the temperature behind friction and noise', () => {
    const forces: number[] = [];
    const temperatures: number[] = [];
    for (let seed = 1; seed <= SEEDS; seed++) {
      const tracks = simulateSecondOrder({
        tracks: 40,
        frames: 250,
        friction: 0.3,
        force: 0.15,
        temperature: 2.5,
        seed,
      });
      const { model } = estimateStudy(tracks, CONSTANT, 'second').estimate;
      if (model.order !== 'second') throw new Error('second order was asked for');
      forces.push(model.force.coefficients[0][0]);
      temperatures.push(model.noise.coefficients[0][0] / (2 * model.friction.coefficients[0][0]));
    }
    expect(biasInErrors(forces, 0.15)).toBeLessThan(BIAS);
    expect(biasInErrors(temperatures, 2.5)).toBeLessThan(BIAS);
  });

  it('recovers friction per axis and noise per axis, from tracks with gaps', () => {
    const found: number[][] = [[], [], [], []];
    for (let seed = 1; seed <= SEEDS; seed++) {
      const tracks = simulateSecondOrder({
        tracks: TRACKS,
        frames: FRAMES,
        dimensions: 2,
        friction: [0.2, 0.6],
        temperature: [1, 3],
        localizationError: [0.1, 0.2],
        lostFrames: 0.03,
        seed,
      });
      const { model } = estimateStudy(
        tracks,
        { ...CONSTANT, frictionForm: 'axes', noiseForm: 'axes' },
        'second',
      ).estimate;
      if (model.order !== 'second') throw new Error('second order was asked for');
      [...model.friction.coefficients, ...model.noise.coefficients].forEach(([value], i) =>
        found[i].push(value),
      );
    }
    [0.2, 0.6, 0.4, 3.6].forEach((truth, i) => expect(biasInErrors(found[i], truth)).toBeLessThan(BIAS));
  });

  it('takes a given localization error as it is', () => {
    const tracks = simulateSecondOrder({
      tracks: 40,
      frames: 200,
      friction: 0.3,
      localizationError: 0.2,
      seed: 3,
    });
    const { localizationError } = estimateStudy(
      tracks,
      { ...CONSTANT, localizationError: 0.2 },
      'second',
    ).estimate;
    expect(localizationError).toEqual([{ value: 0.2, standardError: 0 }]);
  });
});

describe('the naive regression at the same instant', () => {
  /** Central acceleration on central velocity, per unit velocity. */
  function naiveFriction(tracks: TrackSet): number {
    const { positions: y, trackOffsets, samplingInterval: dt } = tracks;
    let product = 0;
    let square = 0;
    for (let track = 0; track + 1 < trackOffsets.length; track++) {
      for (let k = trackOffsets[track] + 1; k < trackOffsets[track + 1] - 1; k++) {
        const velocity = (y[k + 1] - y[k - 1]) / (2 * dt);
        product += ((y[k + 1] - 2 * y[k] + y[k - 1]) / dt ** 2) * velocity;
        square += velocity ** 2;
      }
    }
    return -product / square;
  }

  it('gives zero friction for a reversible process, whatever the friction, and ours does not', () => {
    // D_k v̂_k is the difference of squares of neighbouring displacements over 2Δ³: its sum over a track is what is
    // left at the two ends. Reversal of time turns v̂_k over and leaves D_k as it is (parity).
    for (const friction of [0.1, 0.5, 1]) {
      const tracks = simulateSecondOrder({ tracks: 40, frames: 500, friction, seed: 5 });
      expect(Math.abs(naiveFriction(tracks))).toBeLessThan(0.02 * friction);
      const { model } = estimateStudy(tracks, CONSTANT, 'second').estimate;
      if (model.order !== 'second') throw new Error('second order was asked for');
      expect(Math.abs(model.friction.coefficients[0][0] / friction - 1)).toBeLessThan(0.15);
    }
  });

  it('and secant velocities understate their own variance by the factor 2/3 (Gloter 2006)', () => {
    // Var D_k → (2/3) N Δ³ as friction × interval → 0, so a sum of squared secant increments gives 2/3 of the noise
    const tracks = simulateSecondOrder({ tracks: 200, frames: 500, friction: 0.01, seed: 8 });
    const y = tracks.positions;
    let sum = 0;
    let count = 0;
    for (let track = 0; track < 200; track++) {
      for (let k = track * 500 + 1; k < track * 500 + 499; k++) {
        sum += (y[k + 1] - 2 * y[k] + y[k - 1]) ** 2;
        count++;
      }
    }
    // correlated at lag one by 1/4: relative standard error √(2 (1 + 2/16)/count) = 0.5 %; friction adds −0.5 %
    expect(Math.abs(sum / count / 0.02 / (2 / 3) - 1)).toBeLessThan(0.005 + 4 * 0.005);
    const { model } = estimateStudy(tracks, CONSTANT, 'second').estimate;
    if (model.order !== 'second') throw new Error('second order was asked for');
    expect(Math.abs(model.noise.coefficients[0][0] / 0.02 - 1)).toBeLessThan(0.04);
  });
});

describe('first order, constant coefficients', () => {
  it.each([
    ['free', 0, 0],
    ['free, localization variance as large as that of the displacements', 0, 1],
    ['trapped', 0.2, 0.3],
    ['strongly trapped', 0.5, 0.3],
  ])('%s: diffusion without bias', (_, relaxation, errorVariance) => {
    const found = estimateAll(
      (seed) =>
        simulateFirstOrder({
          tracks: TRACKS,
          frames: FRAMES,
          diffusion: 0.5,
          relaxation,
          localizationError: Math.sqrt(errorVariance),
          seed,
        }),
      { drift: relaxation > 0 ? 'linear' : 'constant' },
      'first',
    );
    expect(biasInErrors(found.noise, 0.5)).toBeLessThan(BIAS);
    if (errorVariance > 0) expect(biasInErrors(found.error, Math.sqrt(errorVariance))).toBeLessThan(BIAS);
  });
});
