import { describe, expect, it } from 'vitest';
import { surveyTracks } from '../../src/momenta/surveyTracks.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { makeTracks, movePositions } from '../support/makeTracks.js';

const DESIGN = { tracks: 40, frames: 200, dimensions: 2 };
const listCodes = (tracks: TrackSet): string[] => surveyTracks(tracks).warnings.map(({ code }) => code);

const glide = (seed: number, more: Partial<Parameters<typeof simulateSecondOrder>[0]> = {}): TrackSet =>
  simulateSecondOrder({ ...DESIGN, friction: 0.2, stiffness: 0.01, localizationError: 0.1, seed, ...more });
const diffuse = (seed: number): TrackSet =>
  simulateFirstOrder({ ...DESIGN, diffusion: 0.5, relaxation: 0.02, localizationError: 0.3, seed });

describe('clean recordings', () => {
  const cases: readonly [string, (seed: number) => TrackSet][] = [
    ['remembered velocities in a trap', glide],
    ['remembered velocities, free', (seed) => glide(seed, { stiffness: 0 })],
    ['a ringing oscillation', (seed) => glide(seed, { friction: 0.05, stiffness: 0.05 })],
    ['three dimensions', (seed) => glide(seed, { dimensions: 3 })],
    ['diffusion in a trap', diffuse],
  ];
  it.each(cases)('raise no alarm: %s', (_, simulate) => {
    for (let seed = 1; seed <= 8; seed++) expect(listCodes(simulate(seed)), `seed ${seed}`).toEqual([]);
  });
});

describe('a spoiled recording', () => {
  /** What is done to the tracks, and the one warning that it must bring. */
  const cases: readonly [string, string, (seed: number) => TrackSet][] = [
    [
      'suspect-jumps',
      'a wrong link',
      (seed) =>
        movePositions(glide(seed), (position, row) =>
          row >= 3000 && row < 3200 ? position + (row >= 3050 ? 15 : 0) : position,
        ),
    ],
    [
      'common-drift',
      'a stage that shakes',
      (seed) => {
        const stream = randomStream(seed, 'stage');
        const offsets = [0];
        for (let frame = 1; frame < 200; frame++) offsets.push(offsets[frame - 1] + 0.3 * stream.normal());
        return movePositions(glide(seed), (position, row) => position + offsets[row % 200]);
      },
    ],
    [
      'common-drift',
      'a stage that slides',
      (seed) => movePositions(glide(seed), (position, row) => position + 0.2 * (row % 200)),
    ],
    ['missing-frames', 'a tenth of the frames lost', (seed) => glide(seed, { lostFrames: 0.1 })],
    [
      'immobile-tracks',
      'some particles stuck',
      (seed) => {
        const stream = randomStream(seed, 'stuck');
        return movePositions(glide(seed), (position, _row, _axis, track) =>
          track < 4 ? track + 0.1 * stream.normal() : position,
        );
      },
    ],
    [
      'sampling-too-coarse',
      'frames one and a half relaxation times apart',
      (seed) => glide(seed, { friction: 1.5 }),
    ],
    ['short-tracks', 'tracks of two relaxation times', (seed) => glide(seed, { friction: 0.01 })],
    ['short-tracks', 'tracks of six positions', (seed) => glide(seed, { tracks: 800, frames: 6 })],
    [
      'localization-error-drowns-motion',
      'positions worse than the motion',
      (seed) => glide(seed, { localizationError: 1 }),
    ],
    [
      'low-precision',
      'a handful of positions',
      (seed) => glide(seed, { tracks: 3, frames: 40, friction: 0.1 }),
    ],
    [
      'few-visits',
      'one track that never comes back',
      (seed) => glide(seed, { tracks: 1, frames: 300, stiffness: 0 }),
    ],
    [
      'uneven-intervals',
      'a clock that stutters',
      (seed) => {
        const tracks = glide(seed);
        return { ...tracks, times: tracks.times.map((time, row) => time + (row % 10 === 5 ? 0.3 : 0)) };
      },
    ],
  ];
  it.each(cases)('brings %s for %s', (code, _, spoil) => {
    for (let seed = 1; seed <= 4; seed++) expect(listCodes(spoil(seed)), `seed ${seed}`).toContain(code);
  });

  it('of a motion that never moves brings that warning first', () => {
    const still = makeTracks([Array.from({ length: 20 }, (_, frame) => [frame, 1.5, 2.5])]);
    expect(listCodes(still)[0]).toBe('no-motion');
  });

  it('says that a velocity may be remembered where it is too faint to measure', () => {
    const found = Array.from({ length: 20 }, (_, seed) =>
      listCodes(simulateSecondOrder({ ...DESIGN, tracks: 4, friction: 1, localizationError: 0.5, seed })),
    );
    expect(found.filter((codes) => codes.includes('velocity-memory-unclear')).length).toBeGreaterThan(0);
  });
});

it('every warning is one sentence with a number or a remedy in it', () => {
  const bad = movePositions(
    glide(1, { tracks: 6, frames: 40, lostFrames: 0.2, localizationError: 1 }),
    (position, row) => (row > 100 ? position + 40 : position),
  );
  const { warnings } = surveyTracks(bad);
  expect(warnings.length).toBeGreaterThan(2);
  for (const { message } of warnings) {
    expect(message).toMatch(/\d/);
    expect(message).not.toMatch(/NaN|Infinity|undefined|\.$|\n/);
  }
});
