import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  artanhMatrix,
  exponentiateMatrix,
  identityMatrix,
  invertMatrix,
  logarithmMatrix,
  multiplyMatrices,
  rootMatrix,
  symmetricEigenInto,
} from '../../src/numerics/linear/smallMatrix.js';

interface Entry {
  readonly d: number;
  readonly matrix: number[];
  readonly exponential: number[];
  readonly logarithm: number[];
  readonly root: number[];
  readonly eigenvalues: number[];
}

const REFERENCE = JSON.parse(
  readFileSync(new URL('../reference/matrices/values.json', import.meta.url), 'utf8'),
) as Record<'exponentials' | 'principals' | 'symmetric', Entry[]>;

/** Largest difference over the largest entry. */
function distance(found: ArrayLike<number>, expected: ArrayLike<number>): number {
  let most = 0;
  let size = 1e-300;
  for (let i = 0; i < expected.length; i++) {
    const difference = Math.abs(found[i] - expected[i]);
    most = Number.isNaN(difference) ? Infinity : Math.max(most, difference);
    size = Math.max(size, Math.abs(expected[i]));
  }
  return most / size;
}

describe('functions of small matrices', () => {
  it('exponentials agree with scipy.linalg.expm (test/reference/matrices)', () => {
    for (const { d, matrix, exponential } of [...REFERENCE.exponentials, ...REFERENCE.symmetric]) {
      expect(distance(exponentiateMatrix(matrix, d), exponential)).toBeLessThan(1e-12);
    }
  });

  it('principal logarithms and square roots agree with scipy.linalg', () => {
    for (const { d, matrix, logarithm, root } of REFERENCE.principals) {
      expect(distance(logarithmMatrix(matrix, d), logarithm)).toBeLessThan(1e-11);
      expect(distance(rootMatrix(matrix, d), root)).toBeLessThan(1e-11);
    }
  });

  it('inverses times the matrix are the identity, with rows exchanged where a pivot is zero', () => {
    for (const { d, matrix } of REFERENCE.exponentials) {
      expect(distance(multiplyMatrices(invertMatrix(matrix, d), matrix, d), identityMatrix(d))).toBeLessThan(
        1e-12,
      );
    }
    expect(Array.from(invertMatrix([0, 2, 4, 0], 2))).toEqual([0, 0.25, 0.5, 0]);
    expect(invertMatrix([1, 2, 2, 4], 2).some((value) => !Number.isFinite(value))).toBe(true);
  });

  it('the inverse hyperbolic tangent undoes the tangent (E² − 1)(E² + 1)⁻¹ with E = exp', () => {
    for (const { d, matrix } of REFERENCE.exponentials) {
      const size = Math.max(...matrix.map(Math.abs));
      for (const scale of [1e-3, 0.1, 0.5]) {
        const argument = matrix.map((value) => (value * scale) / size);
        const square = exponentiateMatrix(
          argument.map((value) => 2 * value),
          d,
        );
        const one = identityMatrix(d);
        const tangent = multiplyMatrices(
          square.map((value, i) => value - one[i]),
          invertMatrix(
            square.map((value, i) => value + one[i]),
            d,
          ),
          d,
        );
        expect(distance(artanhMatrix(tangent, d), argument)).toBeLessThan(1e-11);
      }
    }
  });

  it('a root on the negative axis is refused with NaN, not given a wrong value', () => {
    expect(rootMatrix([-4, 0, 0, 1], 2).every(Number.isNaN)).toBe(true);
  });

  it('eigenvalues agree with numpy and rebuild the symmetric matrix', () => {
    for (const { d, matrix, eigenvalues } of REFERENCE.symmetric) {
      const values = new Float64Array(d);
      const vectors = new Float64Array(d * d);
      symmetricEigenInto(matrix, d, values, vectors, new Float64Array(d * d));
      expect(distance(values.slice().sort(), eigenvalues)).toBeLessThan(1e-13);
      const turned = Float64Array.from({ length: d * d }, (_, i) => vectors[i] * values[i % d]);
      const transposed = Float64Array.from(
        { length: d * d },
        (_, i) => vectors[(i % d) * d + Math.floor(i / d)],
      );
      expect(distance(multiplyMatrices(turned, transposed, d), matrix)).toBeLessThan(1e-13);
      expect(distance(multiplyMatrices(transposed, vectors, d), identityMatrix(d))).toBeLessThan(1e-14);
    }
  });
});
