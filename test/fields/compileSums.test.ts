import { describe, expect, it } from 'vitest';
import type { BasisSpec } from '../../src/fields/Basis.js';
import { compileOwnSlopes, compileSums } from '../../src/fields/compileSums.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

const CASES: readonly (readonly [string, BasisSpec, number])[] = [
  ['a constant', { kind: 'constant' }, 2],
  ['polynomials', { kind: 'polynomial', degree: 3, centre: [0.5, 1], scale: [2, 3] }, 2],
  ['a spline along a line', { kind: 'spline', counts: [8], low: [-1], high: [3], periods: [0] }, 1],
  ['a spline', { kind: 'spline', counts: [6, 8], low: [-1, 0], high: [3, 5], periods: [0, 0] }, 2],
  ['a spline that wraps', { kind: 'spline', counts: [6, 5], low: [0, 0], high: [3, 5], periods: [3, 0] }, 2],
  [
    'a spline of degree 1',
    { kind: 'spline', counts: [4, 3], low: [-1, 0], high: [3, 5], periods: [0, 0], degree: 1 },
    2,
  ],
  ['few functions', { kind: 'spline', counts: [3, 2], low: [-1, 0], high: [3, 5], periods: [0, 0] }, 2],
  [
    'a spline in space',
    { kind: 'spline', counts: [4, 5, 4], low: [-1, 0, 0], high: [3, 5, 1], periods: [0, 0, 1] },
    3,
  ],
  ['waves', { kind: 'waves', waves: 2, periods: [3, 4] }, 2],
];

describe.each(CASES)('compiled sums of %s', (_name, spec, d) => {
  const basis = createBasis(spec, d);
  const stream = randomStream(5, 'compiled sums');
  const weights = Array.from({ length: d }, () =>
    Array.from({ length: basis.functionCount }, () => stream.normal()),
  );
  const places = Array.from({ length: 200 }, () =>
    Float64Array.from({ length: d }, () => 9 * stream.uniform() - 3),
  );
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const out = new Float64Array(d + 1);

  it('are the sums of the functions, inside and outside the box', () => {
    const evaluate = compileSums(basis, weights);
    for (const place of places) {
      evaluate(place, out, 1);
      const count = basis.evaluateInto(place, 0, indices, values);
      weights.forEach((row, sum) => {
        let expected = 0;
        for (let i = 0; i < count; i++) expected += row[indices[i]] * values[i];
        expect(out[1 + sum]).toBeCloseTo(expected, 11);
      });
    }
  });

  it('have the slopes of the functions along their own axes', () => {
    const evaluate = compileOwnSlopes(basis, weights);
    for (const place of places) {
      evaluate(place, out, 1);
      weights.forEach((row, axis) => {
        const count = basis.differentiateInto(place, 0, axis, indices, values);
        let expected = 0;
        for (let i = 0; i < count; i++) expected += row[indices[i]] * values[i];
        expect(out[1 + axis]).toBeCloseTo(expected, 10);
      });
    }
  });
});
