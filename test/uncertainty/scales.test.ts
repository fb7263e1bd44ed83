import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { type ColumnScale, measureDistance, valueAt } from '../../src/uncertainty/scales.js';

describe('the scales of columns', () => {
  it.each<ColumnScale>(['linear', 'logarithmic', 'reciprocal'])('turn back and forth: %s', (scale) => {
    for (const other of [0.2, 1, 1.7, 3, 40]) {
      expect(valueAt(scale, 3, measureDistance(scale, 3, other))).toBeCloseTo(other, 12);
    }
    expect(measureDistance(scale, 3, 3)).toBe(0);
    expect(measureDistance(scale, 3, 4)).toBeGreaterThan(0);
  });

  it('a ratio has an open end where its denominator may be zero', () => {
    expect(valueAt('reciprocal', 3, 1)).toBe(300);
    expect(valueAt('reciprocal', 3, 2.5)).toBe(300);
    expect(valueAt('reciprocal', 3, -1)).toBe(1.5);
  });

  it('intervals of a ratio with an uncertain denominator hold as often as they say; ratios of errors do not', () => {
    const stream = randomStream(1, 'scales', 0);
    const STUDIES = 20_000;
    const DEVIATION = 0.25; // of the denominator; the numerator is known to 5 %
    const inside = { reciprocal: 0, logarithmic: 0 };
    for (let study = 0; study < STUDIES; study++) {
      const denominator = 1 + DEVIATION * stream.normal();
      const estimate = (1 + 0.05 * stream.normal()) / denominator;
      const deviation = Math.hypot(DEVIATION / denominator, 0.05);
      for (const scale of ['reciprocal', 'logarithmic'] as const) {
        // A denominator that is not positive has no logarithm: not covered.
        if (Math.abs(measureDistance(scale, estimate, 1)) <= 3.2 * deviation) inside[scale]++;
      }
    }
    // 3.2 standard deviations as in a band: 0.14 % outside, counted to ±0.03 %; errors of numerator and denominator are
    // added at the estimate and not at the truth, which is worth another 0.1 %.
    expect(inside.reciprocal / STUDIES).toBeGreaterThan(0.9975);
    expect(inside.logarithmic / STUDIES).toBeLessThan(0.9965); // 0.5 % outside, thrice as often
  });
});
