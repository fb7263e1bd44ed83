import { describe, expect, it } from 'vitest';
import { fitSchema } from '../../src/documents/FitDocument.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { describeVisited, isVisited, measureVisitedShare } from '../../src/tracks/visitedRegion.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

const trapped = simulateFirstOrder({
  tracks: 10,
  frames: 1000,
  dimensions: 2,
  relaxation: 0.5,
  diffusion: 0.5,
  seed: 3,
});

describe('the visited region', () => {
  it('has the shape that fit files ask for', () => {
    const visited = describeVisited(trapped);
    expect(fitSchema.shape.visited.parse(visited)).toEqual(visited);
    expect(visited.counts).toHaveLength(visited.cells[0] * visited.cells[1]);
  });

  it('counts every position of a well-behaved recording once', () => {
    const visited = describeVisited(trapped);
    expect(visited.counts.reduce((sum, count) => sum + count, 0)).toBe(trapped.times.length);
  });

  it('uses 64, 24 and 12 cells per axis in one, two and three dimensions when positions abound', () => {
    const cells = [1, 2, 3].map((dimensions) => {
      const tracks = simulateFirstOrder({ tracks: 40, frames: 1000, dimensions, relaxation: 0.3, seed: 4 });
      return describeVisited(tracks).cells[0];
    });
    expect(cells).toEqual([64, 24, 12]);
  });

  it('calls the middle of a trap visited and far places not', () => {
    const visited = describeVisited(trapped);
    expect(isVisited(visited, trapped.periods, [0, 0])).toBe(true);
    expect(isVisited(visited, trapped.periods, [99, 0, 0], 1)).toBe(true);
    expect(isVisited(visited, trapped.periods, [0, 50])).toBe(false);
    expect(isVisited(visited, trapped.periods, [Number.NaN, 0])).toBe(false);
    expect(measureVisitedShare(visited)).toBeGreaterThan(0.2);
  });

  it('wraps a periodic axis to one period', () => {
    const free = simulateSecondOrder({ tracks: 5, frames: 2000, dimensions: 2, friction: 1, seed: 5 });
    const periodic: TrackSet = { ...free, periods: [3, 0] };
    const visited = describeVisited(periodic);
    expect([visited.low[0], visited.high[0]]).toEqual([0, 3]);
    expect(visited.counts.reduce((sum, count) => sum + count, 0)).toBe(free.times.length);
    const y = free.positions[1];
    expect(isVisited(visited, periodic.periods, [0.1, y])).toBe(
      isVisited(visited, periodic.periods, [-2.9, y]),
    );
    expect(isVisited(visited, periodic.periods, [-1e-18, y])).toBe(
      isVisited(visited, periodic.periods, [2.99, y]),
    );
  });

  it('is not blown up by a stray position', () => {
    const positions = trapped.positions.slice();
    positions[200] = 1e6;
    const visited = describeVisited({ ...trapped, positions });
    expect(visited.high[0]).toBeLessThan(20);
  });

  it('gives a box of some width to tracks that never move', () => {
    const positions = new Float64Array(trapped.positions.length).fill(2);
    const visited = describeVisited({ ...trapped, positions });
    expect(visited.high[0]).toBeGreaterThan(visited.low[0]);
    expect(isVisited(visited, trapped.periods, [2, 2])).toBe(true);
  });
});
