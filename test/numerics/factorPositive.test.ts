import { describe, expect, it } from 'vitest';
import { factorPositive } from '../../src/numerics/linear/factorPositive.js';

const invertPositive = (matrix: Float64Array, n: number, order?: Int32Array): Float64Array | null =>
  factorPositive(matrix, n, order)?.inverse() ?? null;

describe('the inverse of a positive definite matrix', () => {
  // Source: the inverse of the Hilbert matrix has whole entries in closed form (Choi, Am. Math. Monthly 90 (1983) 301).
  it('is that of the Hilbert matrix of size 4', () => {
    const n = 4;
    const hilbert = Float64Array.from({ length: n * n }, (_, i) => 1 / (Math.floor(i / n) + (i % n) + 1));
    const exact = [
      16, -120, 240, -140, -120, 1200, -2700, 1680, 240, -2700, 6480, -4200, -140, 1680, -4200, 2800,
    ];
    const found = invertPositive(hilbert, n);
    exact.forEach((value, i) => expect(Math.abs((found?.[i] ?? NaN) / value - 1)).toBeLessThan(1e-11));
  });

  it('times the matrix is one, whatever the units', () => {
    const n = 37;
    const matrix = new Float64Array(n * n);
    for (let i = 0; i < n; i++)
      for (let j = 0; j < n; j++)
        matrix[i * n + j] = Math.exp(-Math.abs(i - j) / 5) * 10 ** ((i % 7) + (j % 7));
    const inverse = invertPositive(matrix, n) ?? new Float64Array(n * n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) {
        let sum = 0;
        for (let k = 0; k < n; k++) sum += matrix[i * n + k] * inverse[k * n + j];
        const scale = 10 ** ((i % 7) - (j % 7));
        expect(Math.abs(sum / scale - (i === j ? 1 : 0))).toBeLessThan(1e-9);
      }
    }
  });

  it('does not depend on the order the rows are taken in', () => {
    const n = 23;
    const matrix = new Float64Array(n * n);
    // Near the diagonal once every other row comes first.
    const order = Int32Array.from({ length: n }, (_, i) => (i * 2) % n);
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++)
        if (Math.abs(i - j) < 3) matrix[order[i] * n + order[j]] = i === j ? 3 : 1 / (1 + Math.abs(i - j));
    }
    const plain = invertPositive(matrix, n) ?? new Float64Array(n * n);
    const ordered = invertPositive(matrix, n, order) ?? new Float64Array(n * n);
    for (let i = 0; i < n * n; i++) expect(Math.abs(ordered[i] - plain[i])).toBeLessThan(1e-14);
    const factor = factorPositive(matrix, n, order);
    const inner = factor?.innerInverse() ?? new Float64Array(n * n);
    const right = Float64Array.from({ length: n }, (_, i) => Math.cos(i));
    const solution = factor?.solve(right) ?? right;
    for (let i = 0; i < n; i++) {
      let sum = 0;
      for (let j = 0; j < n; j++) {
        sum += plain[i * n + j] * right[j];
        if (matrix[i * n + j] !== 0)
          expect(Math.abs(inner[i * n + j] - plain[i * n + j])).toBeLessThan(1e-14);
      }
      expect(Math.abs(solution[i] - sum)).toBeLessThan(1e-13);
    }
    expect(inner[order[0] * n + order[n - 1]]).toBe(0);
  });

  it('does not exist for a matrix that is singular or not positive', () => {
    expect(invertPositive(Float64Array.of(1, 1, 1, 1), 2)).toBeNull();
    expect(invertPositive(Float64Array.of(1, 2, 2, 1), 2)).toBeNull();
    expect(invertPositive(Float64Array.of(0, 0, 0, 1), 2)).toBeNull();
  });
});
