import { Matrix, solve } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { computePredictionFilter } from '../../src/momenta/predictionFilter.js';

describe('the prediction filter', () => {
  it('is that of the normal equations solved outright', () => {
    const c = Float64Array.of(3, 1.2, 0.4, -0.3, 0.1);
    const order = c.length - 1;
    const toeplitz = new Matrix(
      Array.from({ length: order }, (_, i) => Array.from({ length: order }, (_, j) => c[Math.abs(i - j)])),
    );
    const weights = solve(toeplitz, Matrix.columnVector(c.subarray(1))).to1DArray();
    const filter = [1, ...weights.map((value) => -value)];
    const { variance, correlation } = computePredictionFilter(c);
    expect(variance).toBeCloseTo(c[0] - weights.reduce((sum, value, i) => sum + value * c[i + 1], 0), 13);
    for (let lag = 0; lag <= order; lag++) {
      let sum = 0;
      for (let i = 0; i + lag <= order; i++) sum += filter[i] * filter[i + lag];
      expect(correlation[lag]).toBeCloseTo(sum, 13);
    }
  });

  it('of an autoregressive series needs one step back', () => {
    const [phi, noise] = [0.8, 0.5];
    const c = Float64Array.from({ length: 6 }, (_, lag) => (noise / (1 - phi * phi)) * phi ** lag);
    const { variance, correlation } = computePredictionFilter(c);
    expect(variance).toBeCloseTo(noise, 14);
    [1 + phi * phi, -phi, 0, 0, 0, 0].forEach((value, lag) =>
      expect(correlation[lag]).toBeCloseTo(value, 13),
    );
  });

  it('does not exist for covariances of no series', () => {
    expect(computePredictionFilter(Float64Array.of(1, 1.1)).variance).toBeNaN();
    expect(computePredictionFilter(Float64Array.of(0, 0)).variance).toBeNaN();
  });
});
