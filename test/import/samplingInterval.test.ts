import { describe, expect, it } from 'vitest';
import { estimateSamplingInterval } from '../../src/import/samplingInterval.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

const estimate = (times: ArrayLike<number>): ReturnType<typeof estimateSamplingInterval> =>
  estimateSamplingInterval(Float64Array.from(times), Int32Array.of(0, times.length));

/** Partial sums, as a clock that adds its interval up would write them. */
function sumUp(steps: readonly number[]): number[] {
  const times = [0];
  for (const step of steps) times.push(times[times.length - 1] + step);
  return times;
}

describe('the sampling interval', () => {
  it('is free of the rounding noise of the times', () => {
    expect(estimate(sumUp(Array<number>(1000).fill(0.1)))).toEqual({
      samplingInterval: 0.1,
      regularFraction: 1,
    });
    expect(estimate(Array.from({ length: 100 }, (_, i) => 1e6 + i * 0.04))?.samplingInterval).toBe(0.04);
    expect(estimate(Array.from({ length: 100 }, (_, i) => i / 3))?.samplingInterval).toBeCloseTo(1 / 3, 12);
  });

  it('is the step of neighbouring frames even where most frames are missing', () => {
    const stream = randomStream(1, 'missing frames');
    const frames = Array.from({ length: 20_000 }, (_, i) => i).filter(() => stream.uniform() < 0.4);
    // The median step is two frames here; single steps still are the commonest.
    expect(estimate(frames.map((frame) => frame * 0.02))).toEqual({
      samplingInterval: 0.02,
      regularFraction: 1,
    });
  });

  it('is the dominant step under jitter of the clock', () => {
    const stream = randomStream(2, 'jitter');
    const times = Array.from({ length: 2000 }, (_, i) => 0.5 * i + 0.001 * (stream.uniform() - 0.5));
    expect(estimate(times)?.samplingInterval).toBeCloseTo(0.5, 3);
    expect(estimate(times)?.regularFraction).toBe(1);
  });

  it('is the median step where times are uneven', () => {
    const stream = randomStream(3, 'uneven');
    const steps = Array.from({ length: 5001 }, () => 0.5 + stream.uniform());
    expect(estimate(sumUp(steps))?.samplingInterval).toBeCloseTo([...steps].sort((a, b) => a - b)[2500], 9);
    expect(estimate(sumUp(steps))?.regularFraction).toBeLessThan(0.1);
  });

  it('is not taken from steps between tracks, and is unknown where no track has two times', () => {
    const times = Float64Array.of(0, 5, 5.5, 6);
    expect(estimateSamplingInterval(times, Int32Array.of(0, 1, 4))?.samplingInterval).toBe(0.5);
    expect(estimateSamplingInterval(times, Int32Array.of(0, 1, 2, 3, 4))).toBeNull();
  });
});
