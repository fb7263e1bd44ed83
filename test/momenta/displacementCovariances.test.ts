import { describe, expect, it } from 'vitest';
import { estimateDisplacementCovariances } from '../../src/momenta/displacementCovariances.js';
import { displacementCovariancesInto } from '../../src/momenta/displacementModels.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { makeTrack, makeTracks } from '../support/makeTracks.js';

/** Products of every pair of displacements of one frame, gathered the slow way. */
function multiplyAll(
  tracks: readonly (readonly (number | null)[])[],
  lags: number,
): { sums: number[]; pairs: number[] } {
  const displacements = tracks.map((track) =>
    track.slice(1).map((value, k) => {
      const before = track[k];
      return value === null || before === null ? null : value - before;
    }),
  );
  const all = displacements.flat().filter((value) => value !== null);
  const mean = all.reduce((sum, value) => sum + value, 0) / all.length;
  const sums = new Array<number>(lags + 1).fill(0);
  const pairs = new Array<number>(lags + 1).fill(0);
  for (const track of displacements) {
    for (let lag = 0; lag <= lags; lag++) {
      for (let k = 0; k + lag < track.length; k++) {
        const [a, b] = [track[k], track[k + lag]];
        if (a === null || b === null) continue;
        sums[lag] += (a - mean) * (b - mean);
        pairs[lag]++;
      }
    }
  }
  return { sums, pairs };
}

describe('displacement covariances of a recording', () => {
  const table = [
    [0, 1, 3, 2, null, 4, 4.5, 3, 1, 0, 2, 1.5, 1],
    [5, 4, 4, null, null, 3, 2, 2.5, 2, 3, 1, 0, 0.5],
    [1, 1.5, 0, 2, 3, 2.2, 1, 0, 0.3, 2, 1, 1, 3],
  ];
  const lags = 4;

  it('pair displacements across gaps, as brute force does', () => {
    const found = estimateDisplacementCovariances(makeTracks(table.map((track) => makeTrack(track))), {
      lags,
    });
    const { sums, pairs } = multiplyAll(table, lags);
    expect(found.lags).toBe(lags);
    expect([...found.totalPairs]).toEqual(pairs);
    found.covariances[0].forEach((value, lag) => expect(value).toBeCloseTo(sums[lag] / pairs[lag], 13));
  });

  it('drop the lags that too few pairs support', () => {
    const tracks = makeTracks(Array.from({ length: 30 }, (_, i) => makeTrack([0, 1, 0.5, (i % 3) + 1])));
    expect(estimateDisplacementCovariances(tracks).lags).toBe(2);
    expect(estimateDisplacementCovariances(makeTracks([makeTrack([0, 1, 0, 1])])).lags).toBe(0);
  });

  it('take no step that is not one frame long', () => {
    const uneven = makeTracks([
      [
        [0, 0],
        [1, 1],
        [2.3, 5],
        [3.3, 6],
      ],
    ]);
    expect([...estimateDisplacementCovariances(uneven).totalPairs]).toEqual([2]);
    expect(estimateDisplacementCovariances(uneven).meanDisplacement[0]).toBeCloseTo(1, 14);
  });

  it('use tracks as blocks where there are many, and stretches where there are few', () => {
    const process = { friction: 0.2, seed: 1 };
    expect(
      estimateDisplacementCovariances(simulateSecondOrder({ ...process, tracks: 40, frames: 50 })).blocks,
    ).toBe(40);
    // 2 × 3000 displacements in stretches of 100
    expect(
      estimateDisplacementCovariances(simulateSecondOrder({ ...process, tracks: 2, frames: 3001 })).blocks,
    ).toBe(60);
  });

  it('average to those of the process, lost frames or not', () => {
    const [friction, error] = [0.2, 0.4];
    const expected = new Float64Array(6);
    displacementCovariancesInto({ kind: 'second-free', velocityVariance: 1, friction }, error ** 2, expected);
    for (const lostFrames of [0, 0.3]) {
      const found = estimateDisplacementCovariances(
        simulateSecondOrder({
          tracks: 200,
          frames: 300,
          friction,
          localizationError: error,
          lostFrames,
          seed: 3,
        }),
        { lags: 5 },
      );
      // 60 000 displacements (half of them with lost frames), about 1/Γ = 5 of them making an independent one:
      // standard error √(2 · 5/30 000) ≈ 0.018 of the variance 1.25
      found.covariances[0].forEach((value, lag) =>
        expect(Math.abs(value - expected[lag])).toBeLessThan(4 * 0.023),
      );
    }
  });
});
