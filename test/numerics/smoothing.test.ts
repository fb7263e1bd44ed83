import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { directPlugIn } from '../../src/numerics/smoothing/directPlugIn.js';
import {
  binLinearly,
  fitLocalPolynomial,
  smootherDiagonals,
} from '../../src/numerics/smoothing/localPolynomial.js';

interface ReferenceSet {
  readonly name: string;
  readonly x: readonly number[];
  readonly y: readonly number[];
  readonly plugIn: number;
  readonly curves: readonly {
    readonly bandwidth: number;
    readonly degree: number;
    readonly derivative: number;
    readonly low: number;
    readonly high: number;
    readonly values: readonly number[];
  }[];
}

const { sets } = JSON.parse(
  readFileSync(new URL('../reference/kernel/values.json', import.meta.url), 'utf8'),
) as { sets: readonly ReferenceSet[] };

describe.each(sets.map((set) => [set.name, set] as const))(
  'on the data %s',
  (_name, { x, y, plugIn, curves }) => {
    it('local polynomials and their derivatives are those of KernSmooth::locpoly (test/reference/kernel)', () => {
      for (const { bandwidth, degree, derivative, low, high, values } of curves) {
        const data = binLinearly(x, y, low, high, values.length);
        const fit = fitLocalPolynomial(data, bandwidth, degree, derivative);
        const size = Math.max(...values.map(Math.abs));
        values.forEach((value, i) => expect(Math.abs(fit[i] - value) / size).toBeLessThan(1e-10));
      }
    });

    it('the direct plug-in bandwidth is that of KernSmooth::dpill (test/reference/kernel)', () => {
      expect(directPlugIn(x, y) / plugIn).toBeCloseTo(1, 9);
    });
  },
);

describe('local polynomials', () => {
  it('reproduce polynomials of their degree, up to the edges, and no higher ones', () => {
    // Data on the grid points themselves, so that binning moves nothing.
    const x = Float64Array.from({ length: 41 }, (_, i) => i / 10);
    const square = (t: number): number => 1 - 2 * t + 0.5 * t * t;
    const data = binLinearly(x, x.map(square), 0, 4, 41);
    fitLocalPolynomial(data, 0.6, 2).forEach((value, i) => expect(value).toBeCloseTo(square(x[i]), 9));
    fitLocalPolynomial(data, 0.6, 2, 1).forEach((value, i) => expect(value).toBeCloseTo(x[i] - 2, 8));
    // A line misses the parabola by half the second derivative times the variance of the kernel, h²/2 inside.
    expect(fitLocalPolynomial(data, 0.3, 1)[20] - square(2)).toBeCloseTo(0.5 * 0.09, 3);
  });

  it('have the diagonals of their smoother matrix, found by smoothing one datum at a time', () => {
    const counts = [1, 2, 0, 1, 3, 1, 1, 2];
    const unit = (at: number) => ({
      low: 0,
      spacing: 1,
      counts: Float64Array.from(counts),
      sums: Float64Array.from(counts, (_, i) => (i === at ? 1 : 0)),
    });
    const columns = counts.map((_, at) => fitLocalPolynomial(unit(at), 1.3, 1));
    const { own, squared } = smootherDiagonals(unit(0), 1.3, 1);
    counts.forEach((count, i) => {
      if (count === 0) return;
      expect(own[i]).toBeCloseTo(columns[i][i], 12);
      const sum = columns.reduce((total, column, j) => total + counts[j] * column[i] ** 2, 0);
      expect(squared[i]).toBeCloseTo(sum, 12);
    });
  });
});

describe('the direct plug-in bandwidth', () => {
  const stream = randomStream(3, 'plug-in');
  const x = Array.from({ length: 800 }, () => stream.uniform());
  const y = x.map((t) => Math.sin(6 * t) + 0.2 * stream.normal());

  it('carries the unit of x and ignores the unit of y', () => {
    const moved = directPlugIn(
      x.map((t) => 5 + 30 * t),
      y.map((v) => 1e4 * v - 3),
    );
    expect(moved / directPlugIn(x, y)).toBeCloseTo(30, 6);
  });

  it('is near the asymptotic optimum where that is known', () => {
    // σ² = 0.04, m″ = −36 sin 6t: h⁵ = σ²/(2√π n ∫m″²), the integral over [0, 1] being 648 − 54 sin 12
    const optimum = (0.04 / (2 * Math.sqrt(Math.PI) * 800 * (648 - 54 * Math.sin(12)))) ** 0.2;
    // Its relative scatter is of order n^{−1/5}/5 ≈ 5 %; the estimated curvature leaves a bias of the same size.
    expect(Math.abs(directPlugIn(x, y) / optimum - 1)).toBeLessThan(0.2);
  });

  it('is not a number where there is nothing to choose by', () => {
    expect(directPlugIn([1, 2, 3], [1, 2, 3])).toBeNaN();
    expect(
      directPlugIn(
        new Array<number>(100).fill(2),
        Array.from({ length: 100 }, () => stream.normal()),
      ),
    ).toBeNaN();
  });
});
