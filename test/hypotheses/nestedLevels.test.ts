import { describe, expect, it } from 'vitest';
import { correctForLevels, judgeHotelling } from '../../src/hypotheses/nestedLevels.js';
import { chiSquareTail } from '../../src/numerics/special/chiSquareTail.js';
import { studentTail } from '../../src/numerics/special/student.js';

describe('nested levels', () => {
  it("are Student's test where one number should vanish", () => {
    const { p, within } = judgeHotelling(2.5 ** 2, 1, 20);
    expect(within).toBe(20);
    expect(p).toBeCloseTo(studentTail(2.5, 20), 12);
  });

  it('are the chi-square test where the covariance is known well', () => {
    // F(4, ν) differs from χ²₄/4 by O(1/ν)
    expect(judgeHotelling(9.5, 4, 1e6).p).toBeCloseTo(chiSquareTail(9.5, 4), 5);
  });

  it('reproduce a worked example of Hotelling’s T²', () => {
    // Sweat data: 20 women, 3 variables, T² = 9.74, critical value 8.18 at 10 % from F(3, 17) = 2.44 (Johnson & Wichern,
    // Applied Multivariate Statistical Analysis, example 5.2; from memory)
    const { f, within, p } = judgeHotelling(9.74, 3, 19);
    expect(within).toBe(17);
    expect(f).toBeCloseTo((17 / 57) * 9.74, 12);
    expect(judgeHotelling(8.18, 3, 19).p).toBeCloseTo(0.1, 2);
    expect(p).toBeLessThan(0.1);
  });

  it('leave a single level as it is', () => {
    expect(correctForLevels([3], 50, 0.031, 1)).toBe(0.031);
  });

  it('raise the smallest p-value by less than the number of levels', () => {
    for (const smallest of [1e-6, 0.001, 0.02, 0.2]) {
      const corrected = correctForLevels([1, 2, 3, 5], 100, smallest, 1);
      expect(corrected).toBeGreaterThan(smallest);
      expect(corrected).toBeLessThan(4 * smallest);
    }
  });

  it('are independent of the covariance, so that the correction is uniform under the statement', () => {
    // The corrected value of a quantile of the simulated law is that quantile, apart from the scatter of 4000 draws of
    // another seed: √(0.05 · 0.95/4000) = 0.0034 twice over.
    let low = 0;
    let high = 1;
    for (let i = 0; i < 30; i++) {
      const middle = (low + high) / 2;
      if (correctForLevels([1, 3], 30, middle, 1) < 0.05) low = middle;
      else high = middle;
    }
    expect(Math.abs(correctForLevels([1, 3], 30, high, 2) - 0.05)).toBeLessThan(4 * 0.0034 * Math.SQRT2);
  });
});
