/** Classes and ticks: round, covering, and written in full. */

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  findRange,
  formatTick,
  roundClasses,
  roundStepUp,
  stepDecimals,
  steppedClasses,
} from '../../src/report/charts/ticks.js';

const number = fc.double({ min: -1e6, max: 1e6, noNaN: true });

describe('classes', () => {
  test('equal ones cover the range, are at most as many as asked for, and have round steps', () => {
    fc.assert(
      fc.property(number, number, fc.integer({ min: 1, max: 9 }), (a, b, count) => {
        const [low, high] = [Math.min(a, b), Math.max(a, b)];
        const edges = roundClasses(low, high, count);
        const size = Math.max(Math.abs(low), Math.abs(high), 1e-300);
        const step = (edges.at(-1) ?? 0) - edges[0];
        expect(edges.length - 1).toBeLessThanOrEqual(count);
        expect(edges.length).toBeGreaterThanOrEqual(2);
        // edges are written to 12 digits
        expect(edges[0]).toBeLessThanOrEqual(low + 1e-9 * Math.max(size, step));
        expect(edges.at(-1)).toBeGreaterThanOrEqual(high - 1e-9 * Math.max(size, step));
      }),
      { seed: 1, numRuns: 300 },
    );
    expect(roundClasses(0.4, 1.01, 7)).toEqual([0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1, 1.1]);
    expect(roundClasses(5200, 5200, 7)).toHaveLength(2);
  });

  test('stepped ones go 1, 2, 5, from zero to the largest count', () => {
    expect(steppedClasses(800, 7)).toEqual([0, 10, 20, 50, 100, 200, 500, 1000]);
    expect(steppedClasses(3, 7)).toEqual([0, 1, 2, 5]);
    expect(steppedClasses(1, 7)).toEqual([0, 1]);
    for (const high of [1, 7, 99, 1001, 123_456]) {
      const edges = steppedClasses(high, 6);
      expect(edges.length).toBeLessThanOrEqual(7);
      expect(edges.at(-1)).toBeGreaterThanOrEqual(high);
      expect(edges.at(-2)).toBeLessThan(high);
    }
  });

  test('a step is rounded up to 1, 2, 2.5 or 5 times a power of ten', () => {
    expect([0.011, 0.2, 2.1, 3, 60, 0, -1, NaN].map(roundStepUp)).toEqual([0.02, 0.2, 2.5, 5, 100, 1, 1, 1]);
  });
});

describe('ticks', () => {
  test('have the decimals that all of an axis need', () => {
    expect([0, 0.25, 0.5].map((tick, i, ticks) => formatTick(tick, i, ticks))).toEqual([
      '0.00',
      '0.25',
      '0.50',
    ]);
    expect([-20, 0, 20].map((tick, i, ticks) => formatTick(tick, i, ticks))).toEqual(['−20', '0', '20']);
    expect([5000, 10000].map((tick, i, ticks) => formatTick(tick, i, ticks))).toEqual([
      '5000',
      '10\u202f000',
    ]);
    expect(formatTick(0.3, 0, [0.3])).toBe('0.3');
  });

  test('of unequal steps follow the finest', () => {
    expect(stepDecimals([0, 10, 20, 50])).toBe(0);
    expect(stepDecimals([0, 0.5, 10])).toBe(1);
    expect(stepDecimals([3])).toBe(0);
  });

  test('a range leaves out what is not finite', () => {
    expect(findRange([NaN, 3, -1, Infinity])).toEqual({ low: -1, high: 3 });
    expect(findRange([NaN])).toBeNull();
  });
});
