import { describe, expect, it } from 'vitest';
import { countImmobileTracks } from '../../src/momenta/immobileTracks.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { movePositions } from '../support/makeTracks.js';

describe('immobile tracks', () => {
  it.each([0, 0.1])('are found where some stick, with localization error %s', (error) => {
    const moving = simulateSecondOrder({ tracks: 30, frames: 100, dimensions: 2, friction: 0.2, seed: 1 });
    const stream = randomStream(1, 'stuck');
    const some = movePositions(moving, (position, _row, axis, track) =>
      track < 4 ? axis + track + error * stream.normal() : position,
    );
    expect(countImmobileTracks(some, 5)).toBe(4);
  });

  it('are not made of tracks too short, or too slow to forget, to tell', () => {
    // In one dimension a velocity below 1/14 of the usual one is no rarity: 6 % of all.
    const ballistic = simulateSecondOrder({ tracks: 3000, frames: 8, friction: 0.05, seed: 2 });
    expect(countImmobileTracks(ballistic, 20)).toBe(0);
    const short = simulateFirstOrder({ tracks: 5000, frames: 5, seed: 2 });
    expect(countImmobileTracks(short, null)).toBe(0);
  });

  it('are all, where nothing moves', () => {
    const still = movePositions(simulateFirstOrder({ tracks: 3, frames: 10, seed: 1 }), () => 4);
    expect(countImmobileTracks(still, null)).toBe(3);
  });
});
