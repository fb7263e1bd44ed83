import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  median,
  medianInPlace,
  quantileInPlace,
  quantileSorted,
  selectInPlace,
} from '../../src/numerics/statistics/quantile.js';

/** Numbers of which many may be equal, as frames and rounded positions are. */
const LISTS = fc.array(fc.oneof(fc.integer({ min: -3, max: 3 }), fc.double({ noNaN: true })), {
  minLength: 1,
  maxLength: 200,
});

describe('selection', () => {
  it('finds what sorting finds, and keeps the values', () => {
    fc.assert(
      fc.property(LISTS, fc.double({ min: 0, max: 1, noNaN: true }), (list, share) => {
        const sorted = Float64Array.from(list).sort();
        const values = Float64Array.from(list);
        const rank = Math.floor(share * (list.length - 1));
        expect(selectInPlace(values, rank)).toEqual(sorted[rank]);
        expect(values.slice(0, rank).every((value) => value <= sorted[rank])).toBe(true);
        expect(values.sort()).toEqual(sorted);
        expect(quantileInPlace(Float64Array.from(list), share)).toEqual(quantileSorted(sorted, share));
        expect(medianInPlace(Float64Array.from(list))).toEqual(quantileSorted(sorted, 0.5));
      }),
      { seed: 4, numRuns: 300 },
    );
  });

  it('has no median of nothing', () => {
    expect(median([])).toBeNaN();
  });
});
