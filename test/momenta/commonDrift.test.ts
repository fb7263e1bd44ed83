import { describe, expect, it } from 'vitest';
import { type CommonDrift, estimateCommonDrift } from '../../src/momenta/commonDrift.js';
import { estimateDisplacementCovariances } from '../../src/momenta/displacementCovariances.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { meanOf } from '../support/estimateStudy.js';
import { movePositions } from '../support/makeTracks.js';

const measure = (tracks: TrackSet): CommonDrift =>
  estimateCommonDrift(tracks, estimateDisplacementCovariances(tracks));

const withStage = (tracks: TrackSet, offsetAt: (frame: number) => number): TrackSet =>
  movePositions(
    tracks,
    (position, row) => position + offsetAt(Math.round(tracks.times[row] / tracks.samplingInterval)),
  );

function randomWalk(size: number, seed: number): (frame: number) => number {
  const stream = randomStream(seed, 'stage');
  const offsets = [0];
  for (let frame = 1; frame < 1000; frame++) offsets.push(offsets[frame - 1] + size * stream.normal());
  return (frame) => offsets[frame];
}

describe('the correlation between tracks', () => {
  it('is d²/(1 + d²) where a stage adds steps of variance d² to steps of variance 1', () => {
    const correlations = Array.from({ length: 10 }, (_, i) => {
      const tracks = simulateFirstOrder({ tracks: 20, frames: 500, diffusion: 0.5, seed: i });
      return measure(withStage(tracks, randomWalk(0.5, i))).correlation ?? NaN;
    });
    // The mean square of 500 steps scatters by √(2/500) = 6 %; ten times repeated 2 %, of which three.
    expect(Math.abs(meanOf(correlations) - 0.2)).toBeLessThan(3 * 0.02 * 0.2);
  });

  it.each([
    ['diffusion', (seed: number) => simulateFirstOrder({ tracks: 20, frames: 100, seed })],
    ['few tracks', (seed: number) => simulateFirstOrder({ tracks: 3, frames: 100, seed })],
    [
      'an oscillation that rings for the whole recording',
      (seed: number) =>
        simulateSecondOrder({ tracks: 20, frames: 100, friction: 0.02, stiffness: 0.05, seed }),
    ],
    [
      'lost frames',
      (seed: number) =>
        simulateSecondOrder({ tracks: 20, frames: 100, friction: 0.2, lostFrames: 0.3, seed }),
    ],
  ])('has its chance right for independent tracks: %s', (_, simulate) => {
    const SEEDS = 150;
    const chances = Array.from({ length: SEEDS }, (_each, seed) => measure(simulate(seed)).chance ?? 0);
    // The smaller of two probabilities: between 5 and 10 % of recordings fall below 0.05. Binomial errors of 2.5 %.
    expect(chances.filter((chance) => chance < 0.05).length / SEEDS).toBeLessThan(0.1 + 3 * 0.025);
    expect(Math.min(...chances)).toBeGreaterThan(1e-4); // 0.015 to 0.03 recordings below expected
  });

  it('sees a stage that shakes by a tenth of a displacement under motion with a long memory', () => {
    const tracks = simulateSecondOrder({ tracks: 40, frames: 200, friction: 0.02, stiffness: 0.05, seed: 3 });
    expect(measure(withStage(tracks, randomWalk(0.1, 3))).chance).toBeLessThan(1e-6);
  });

  it('says nothing of single tracks, or of too few frames', () => {
    expect(measure(simulateFirstOrder({ tracks: 1, frames: 100, seed: 1 }))).toMatchObject({
      correlation: null,
      chance: null,
      meanVelocityError: null,
    });
    expect(measure(simulateFirstOrder({ tracks: 9, frames: 6, seed: 1 })).correlation).toBeNull();
  });
});

describe('the mean velocity', () => {
  it('is found with its error', () => {
    const interval = 0.5;
    const scores = Array.from({ length: 40 }, (_, seed) => {
      const tracks = simulateFirstOrder({
        tracks: 25,
        frames: 80,
        interval,
        drift: 0.3,
        diffusion: 0.5,
        seed,
      });
      const { meanVelocity, meanVelocityError } = measure(tracks);
      return (meanVelocity[0] - 0.3) / (meanVelocityError?.[0] ?? NaN);
    });
    expect(Math.abs(meanOf(scores))).toBeLessThan(3 / Math.sqrt(40));
    // mean square of Student's t with 24 degrees of freedom: 24/22, scattering by √(2/40) and a little
    expect(Math.abs(meanOf(scores.map((score) => score * score)) - 24 / 22)).toBeLessThan(3 * 0.25);
  });
});
