import { describe, expect, it } from 'vitest';
import { fitSchema } from '../src/documents/FitDocument.js';
import { studySchema, type StudyInput } from '../src/documents/Study.js';
import { DataError, UsageError } from '../src/errors.js';
import { type FitResult, fitTracks } from '../src/fit.js';
import { countPositions, type TrackSet } from '../src/tracks/TrackSet.js';
import { evaluateFit } from '../src/uncertainty/evaluateFit.js';
import { CONSTANT } from './support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from './support/exactProcesses.js';

const REMEMBERED = simulateSecondOrder({
  tracks: 40,
  frames: 150,
  dimensions: 2,
  friction: 0.4,
  stiffness: 0.05,
  localizationError: 0.1,
  seed: 1,
});
const FORGOTTEN = simulateFirstOrder({
  tracks: 40,
  frames: 150,
  diffusion: 0.5,
  localizationError: 0.3,
  seed: 1,
});

function studyOf(input: StudyInput) {
  return studySchema.parse({ ...CONSTANT, force: 'linear', replicates: 50, ...input });
}

/** What the caller adds to make a file of a fit. */
function documentOf(fit: FitResult) {
  return fitSchema.parse({
    format: 'wanderlaw-fit',
    version: 1,
    program: 'wanderlaw test',
    created: '2025-01-01T00:00:00.000Z',
    timing: {},
    sources: [],
    ...fit,
  });
}

/** One more track, too short to be used. */
function withShortTrack(tracks: TrackSet): TrackSet {
  const n = countPositions(tracks);
  return {
    ...tracks,
    trackNames: [...tracks.trackNames, 'stub'],
    trackOffsets: Int32Array.from([...tracks.trackOffsets, n + 2]),
    times: Float64Array.from([...tracks.times, 0, 1]),
    positions: Float64Array.from([...tracks.positions, 0, 0.1]),
  };
}

describe('a fit', () => {
  it('is a fit file once the caller has signed it, at both orders', async () => {
    for (const [tracks, order] of [
      [REMEMBERED, 'second'],
      [FORGOTTEN, 'first'],
    ] as const) {
      const document = documentOf(await fitTracks(tracks, studyOf({ order })));
      expect(document.model.order).toBe(order);
      expect(document.study.order).toBe(order);
      expect(document.uncertainty.replicates).toHaveLength(50);
      expect(document.data.positions).toBe(countPositions(tracks));
      // and survives the way through a file
      expect(fitSchema.parse(JSON.parse(JSON.stringify(document)))).toEqual(document);
    }
  });

  it('finds the coefficients of an exact process within its intervals', async () => {
    const document = documentOf(await fitTracks(REMEMBERED, studyOf({ order: 'second', replicates: 200 })));
    const { columns, visited } = evaluateFit(document, Float64Array.of(0, 0, 2, -1));
    expect(Array.from(visited)).toEqual([1, 1]);
    const truth: Record<string, number[]> = {
      force_x: [0, -0.1],
      force_y: [0, 0.05],
      friction_xx: [0.4, 0.4],
      noise_xx: [0.8, 0.8],
      temperature_yy: [1, 1],
    };
    // intervals of 95 % widened to four standard deviations: a miss of this seed would mean a bias
    for (const { name, values, low, high } of columns) {
      truth[name]?.forEach((value, place) => {
        const half = (2 * (high[place] - low[place])) / 2;
        expect(Math.abs(values[place] - value), name).toBeLessThan(half);
      });
    }
    expect(document.localizationError[0].low).toBeLessThan(0.1);
    expect(document.localizationError[0].high).toBeGreaterThan(0.1);
  });

  it('is the same, byte for byte, with the same seed, and not with another', async () => {
    const fit = async (seed: number) =>
      JSON.stringify(await fitTracks(REMEMBERED, studyOf({ order: 'second', seed })));
    const first = await fit(5);
    expect(await fit(5)).toBe(first);
    expect(await fit(6)).not.toBe(first);
  });

  it('chooses the order by whether velocities are remembered between frames', async () => {
    const remembered = await fitTracks(REMEMBERED, studyOf({ order: 'auto' }));
    expect(remembered.model.order).toBe('second');
    expect(remembered.study.order).toBe('second');
    const forgotten = await fitTracks(FORGOTTEN, studyOf({ order: 'auto' }));
    expect(forgotten.model.order).toBe('first');
  });

  it('warns of tracks it leaves out and does not count them', async () => {
    const fit = await fitTracks(withShortTrack(FORGOTTEN), studyOf({ order: 'first' }));
    const warning = fit.warnings.find(({ code }) => code === 'tracks-too-short');
    expect(warning?.message).toMatch(/^1 of 41 tracks has fewer than 3 positions/);
    expect(fit.data.tracks).toBe(40);
    expect(fit.data.positions).toBe(countPositions(FORGOTTEN));
  });

  it('tells how far it has come', async () => {
    const shares: number[] = [];
    const stages = new Set<string>();
    await fitTracks(FORGOTTEN, studyOf({ order: 'first' }), {
      onProgress: (done, total, stage) => {
        shares.push(done / total);
        stages.add(stage);
      },
    });
    expect([shares[0], shares.at(-1)]).toEqual([0, 1]);
    expect([...shares].sort((a, b) => a - b)).toEqual(shares);
    expect([...stages]).toEqual(['surveying', 'estimating', 'resampling', 'drawing bands', 'done']);
    expect(shares.length).toBeGreaterThan(5); // the iterations of the estimator among them
  });

  it('refuses what cannot be fitted', async () => {
    const short = simulateFirstOrder({ tracks: 30, frames: 2, seed: 1 });
    await expect(fitTracks(short, studyOf({ order: 'first' }))).rejects.toThrow(DataError);
    await expect(fitTracks(FORGOTTEN, studyOf({ order: 'first', diffusion: 'zero' }))).rejects.toThrow(
      UsageError,
    );
  });
});
