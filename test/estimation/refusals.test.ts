import { describe, expect, it } from 'vitest';
import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { DataError, UsageError } from '../../src/errors.js';
import { chooseEstimator } from '../../src/estimation/choose.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import { CONSTANT, estimateStudy } from '../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

describe('tracks too short for differences', () => {
  it.each([
    ['second', 4, /no stretch of 7 gap-free/],
    ['second', 6, /no stretch of 7 gap-free positions .* record longer tracks/],
    ['first', 3, /no stretch of 4 gap-free positions .* record longer tracks/],
  ] as const)('%s order, %i positions each: refused with what is needed', (order, frames, message) => {
    const tracks = simulateSecondOrder({ tracks: 50, frames, friction: 0.5, seed: 1 });
    const estimate = () => estimateStudy(tracks, CONSTANT, order);
    expect(estimate).toThrow(DataError);
    expect(estimate).toThrow(message);
  });

  it.each([
    ['second', 7],
    ['first', 4],
  ] as const)('%s order, %i positions each: enough', (order, frames) => {
    const tracks = simulateSecondOrder({ tracks: 200, frames, friction: 0.5, seed: 1 });
    expect(() => estimateStudy(tracks, CONSTANT, order)).not.toThrow();
  });

  it('long tracks whose gaps leave no stretch are refused too', () => {
    const full = simulateFirstOrder({ tracks: 20, frames: 90, seed: 1 });
    const kept = Array.from({ length: 20 * 90 }, (_, row) => row).filter((row) => row % 3 !== 2);
    const gappy = {
      ...full,
      times: Float64Array.from(kept, (row) => full.times[row]),
      positions: Float64Array.from(kept, (row) => full.positions[row]),
      trackOffsets: Int32Array.from({ length: 21 }, (_, track) => track * 60),
    };
    expect(() => estimateStudy(gappy, CONSTANT, 'first')).toThrow(DataError);
    expect(() => estimateStudy(gappy, CONSTANT, 'second')).toThrow(DataError);
  });
});

describe('studies that ask for the impossible', () => {
  const line = simulateFirstOrder({ tracks: 40, frames: 50, seed: 1 });
  const circle = { ...line, periods: [5] };
  const plan = (tracks: typeof line, input: StudyInput, order: 'first' | 'second') => () =>
    planEstimation(tracks, studySchema.parse(input), order, null, describeVisited(tracks));

  it.each([
    ['first', { diffusion: 'zero' }, '--diffusion zero'],
    ['second', { noise: 'zero' }, '--noise zero'],
    ['second', { force: 'waves:2' }, '--force asks for waves'],
    ['first', { drift: 'spline:2' }, '--drift "spline:2"'],
    ['second', { friction: 'bump' }, '--friction "bump"'],
    ['second', { friction: 'law:g0*x' }, '--friction "law:g0*x"'],
  ] as const)('%s order, %o', (order, input, message) => {
    expect(plan(line, input, order)).toThrow(UsageError);
    expect(plan(line, input, order)).toThrow(message);
  });

  it('polynomials around a circle', () => {
    expect(plan(circle, { force: 'linear' }, 'second')).toThrow(/--force asks for a polynomial/);
    expect(plan(circle, { drift: 'linear' }, 'first')).toThrow(/--drift asks for a polynomial/);
    expect(plan(circle, { force: 'waves:2' }, 'second')).not.toThrow();
  });

  it('shapes of the other order are not looked at', () => {
    expect(plan(line, { drift: 'nonsense' }, 'second')).not.toThrow();
    expect(plan(line, { friction: 'nonsense', force: 'nonsense' }, 'first')).not.toThrow();
  });

  it('an estimator that does not exist, or is the name of something every object has', () => {
    for (const name of ['diferences', 'toString', '']) {
      expect(() => chooseEstimator(name)).toThrow(UsageError);
      expect(() => chooseEstimator(name)).toThrow(`--estimator "${name}"`);
    }
    expect(chooseEstimator('differences')).toBeTypeOf('function');
  });
});

describe('tracks without motion', () => {
  it('end in numbers or in an expected error, never in one that is a bug', () => {
    const moving = simulateFirstOrder({ tracks: 30, frames: 40, seed: 1 });
    const frozen = { ...moving, positions: new Float64Array(moving.positions.length).fill(2) };
    for (const order of ['first', 'second'] as const) {
      const { model } = estimateStudy(frozen, CONSTANT, order).estimate;
      const noise = model.order === 'second' ? model.noise : model.diffusion;
      expect(noise.coefficients[0][0]).toBe(0);
    }
  });
});
