import { describe, expect, it } from 'vitest';
import { findSuspectJumps } from '../../src/momenta/suspectJumps.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { movePositions } from '../support/makeTracks.js';
import { simulateVaried } from '../support/variedProcess.js';

/** Every track goes on elsewhere from the given row on, as after a wrong link. */
const withJump = (tracks: TrackSet, track: number, at: number, size: number): TrackSet =>
  movePositions(tracks, (position, row, _axis, of) =>
    of === track && row >= tracks.trackOffsets[track] + at ? position + size : position,
  );

const MOTIONS: readonly [string, (seed: number) => TrackSet][] = [
  [
    'diffusion',
    (seed) => simulateFirstOrder({ tracks: 20, frames: 200, diffusion: 0.5, dimensions: 2, seed }),
  ],
  [
    'remembered velocities',
    (seed) =>
      simulateSecondOrder({
        tracks: 20,
        frames: 200,
        friction: 0.2,
        localizationError: 0.1,
        dimensions: 2,
        seed,
      }),
  ],
];

describe('suspect jumps', () => {
  it.each(MOTIONS)('are found at their row: %s', (_, simulate) => {
    const jumped = withJump(withJump(simulate(1), 3, 50, 15), 7, 120, -15);
    expect([...findSuspectJumps(jumped)]).toEqual([3 * 200 + 49, 7 * 200 + 119]);
  });

  it.each(MOTIONS)('are not found in clean recordings: %s', (_, simulate) => {
    for (let seed = 1; seed <= 30; seed++) expect(findSuspectJumps(simulate(seed))).toHaveLength(0);
  });

  it('are not made of places where the noise is forty times as strong', () => {
    for (let seed = 1; seed <= 5; seed++) {
      const tracks = simulateVaried({
        dimensions: 1,
        tracks: 20,
        frames: 200,
        interval: 1,
        substeps: 10,
        force: (place, out) => out.fill(-0.05 * place[0]),
        noise: (place, out) => out.fill(0.05 + 2 / (1 + Math.exp(-2 * place[0]))),
        localizationError: 0.1,
        startSpread: 3,
        warmUp: 50,
        seed,
      });
      expect(findSuspectJumps(tracks).length).toBeLessThanOrEqual(1);
    }
  });

  it('stand out by displacement or by change of displacement: a single position off the track makes both', () => {
    const tracks = simulateSecondOrder({ tracks: 20, frames: 200, friction: 0.05, seed: 4 });
    const spike = movePositions(tracks, (position, row) => (row === 1000 + 37 ? position + 8 : position));
    expect([...findSuspectJumps(spike)]).toEqual([1036, 1037]);
  });

  it('are left alone in recordings too small to know their tail', () => {
    const stream = randomStream(1, 'few');
    const few = movePositions(
      simulateFirstOrder({ tracks: 2, frames: 20, seed: 1 }),
      () => 100 * stream.normal() ** 3,
    );
    expect(findSuspectJumps(few)).toHaveLength(0);
  });
});
