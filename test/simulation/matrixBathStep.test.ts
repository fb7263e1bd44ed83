import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { createMatrixBathStep } from '../../src/simulation/matrixBathStep.js';

describe('the friction–noise step of full matrices', () => {
  it('turns and damps as the closed form of friction with a rotation', () => {
    const [g, w, temperature] = [0.7, 3, 1.4];
    const bath = createMatrixBathStep(2);
    for (const t of [1e-6, 0.05, 1, 40]) {
      bath.prepare(
        Float64Array.of(g, -w, w, g),
        Float64Array.of(2 * g * temperature, 0, 0, 2 * g * temperature),
        t,
      );
      const e = Math.exp(-g * t);
      const expected = [e * Math.cos(w * t), e * Math.sin(w * t), -e * Math.sin(w * t), e * Math.cos(w * t)];
      expected.forEach((value, i) => expect(bath.decay[i]).toBeCloseTo(value, 11));
      const variance = temperature * -Math.expm1(-2 * g * t);
      expect(bath.covariance[0] / variance).toBeCloseTo(1, 10);
      expect(bath.covariance[1] / variance).toBeCloseTo(0, 10);
    }
  });

  it('agrees with the scalar Ornstein–Uhlenbeck formulas in one dimension and on diagonals', () => {
    const bath = createMatrixBathStep(3);
    const friction = [0.3, 2, 11];
    const noise = [1, 5, 0.2];
    const diagonal = (values: number[]): Float64Array =>
      Float64Array.from({ length: 9 }, (_, i) => (i % 4 === 0 ? values[i / 4] : 0));
    bath.prepare(diagonal(friction), diagonal(noise), 0.8);
    friction.forEach((g, axis) => {
      expect(bath.decay[axis * 4]).toBeCloseTo(Math.exp(-g * 0.8), 12);
      expect(bath.covariance[axis * 4]).toBeCloseTo((noise[axis] * -Math.expm1(-2 * g * 0.8)) / (2 * g), 12);
    });
  });

  it('settles on the covariance that solves Γ C + C Γᵀ = N', () => {
    const stream = randomStream(4, 'lyapunov');
    for (let trial = 0; trial < 20; trial++) {
      const d = 2 + (trial % 2);
      const friction = Float64Array.from({ length: d * d }, (_, i) =>
        i % (d + 1) === 0 ? 3 : stream.normal() * 0.8,
      );
      const root = Float64Array.from({ length: d * d }, () => stream.normal());
      const noise = new Float64Array(d * d);
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++)
          for (let k = 0; k < d; k++) noise[i * d + j] += root[i * d + k] * root[j * d + k];
      }
      const bath = createMatrixBathStep(d);
      bath.prepare(friction, noise, 60);
      const c = bath.covariance;
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          let sum = 0;
          for (let k = 0; k < d; k++)
            sum += friction[i * d + k] * c[k * d + j] + c[i * d + k] * friction[j * d + k];
          expect(sum).toBeCloseTo(noise[i * d + j], 9);
        }
      }
    }
  });

  it('draws velocities with the covariance it names, within 4 standard errors', () => {
    const bath = createMatrixBathStep(2);
    bath.prepare(Float64Array.of(1, -0.5, 0.5, 2), Float64Array.of(2, 0.8, 0.8, 1), 0.5);
    const stream = randomStream(9, 'covariance');
    const n = 40_000;
    const sums = [0, 0, 0];
    const v = new Float64Array(2);
    for (let i = 0; i < n; i++) {
      v.fill(0);
      bath.apply(v, stream);
      sums[0] += v[0] ** 2 / n;
      sums[1] += (v[0] * v[1]) / n;
      sums[2] += v[1] ** 2 / n;
    }
    const [a, b, , c] = bath.covariance;
    expect(Math.abs(sums[0] / a - 1)).toBeLessThan(4 * Math.sqrt(2 / n));
    expect(Math.abs(sums[1] - b)).toBeLessThan(4 * Math.sqrt((a * c + b * b) / n));
    expect(Math.abs(sums[2] / c - 1)).toBeLessThan(4 * Math.sqrt(2 / n));
  });
});
