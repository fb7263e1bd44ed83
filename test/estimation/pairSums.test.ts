import { describe, expect, it } from 'vitest';
import { createBasis } from '../../src/fields/createBasis.js';
import { addValues, BasisRow, PairSums } from '../../src/estimation/differences/pairSums.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

const LEFT = createBasis({ kind: 'spline', counts: [5, 6], low: [0, 0], high: [1, 1], periods: [0, 1] }, 2);
const RIGHT = createBasis({ kind: 'polynomial', degree: 2, centre: [0, 0], scale: [1, 1] }, 2);

/** Function values of a row, zeros included. */
function spread(row: BasisRow, count: number): Float64Array {
  const out = new Float64Array(count);
  for (let i = 0; i < row.count; i++) out[row.indices[i]] += row.values[i];
  return out;
}

describe('sums over pairs of functions', () => {
  it.each([1, 2, 3, 4, 5, 6, 7, 8, 11])('are those of the full rows, for %i weights', (weightCount) => {
    const stream = randomStream(2, 'pair sums', weightCount);
    const sums = new PairSums(LEFT.functionCount, RIGHT.functionCount, weightCount);
    const own = new PairSums(LEFT.functionCount, LEFT.functionCount, weightCount, true);
    const [left, right] = [new BasisRow(LEFT), new BasisRow(RIGHT)];
    const [k, m] = [LEFT.functionCount, RIGHT.functionCount];
    const expected = Array.from({ length: weightCount }, () => new Float64Array(k * m));
    const expectedOwn = Array.from({ length: weightCount }, () => new Float64Array(k * k));
    for (let row = 0; row < 20; row++) {
      const weights = Float64Array.from({ length: weightCount }, () => stream.normal());
      const places = Float64Array.from({ length: 4 }, () => stream.uniform());
      left.evaluate(places, 0);
      right.evaluate(places, 1);
      sums.add(left, right, weights);
      own.add(left, left, weights);
      const [l, r] = [spread(left, k), spread(right, m)];
      weights.forEach((weight, w) => {
        for (let i = 0; i < k; i++) {
          for (let j = 0; j < m; j++) expected[w][i * m + j] += weight * l[i] * r[j];
          for (let j = 0; j < k; j++) expectedOwn[w][i * k + j] += weight * l[i] * l[j];
        }
      });
    }
    for (let w = 0; w < weightCount; w++) {
      const found = new Float64Array(k * (m + 3));
      sums.addTo(found, m + 3, 0, 2, w, -2);
      const foundOwn = new Float64Array(k * k);
      own.addTo(foundOwn, k, 0, 0, w);
      for (let i = 0; i < k; i++) {
        for (let j = 0; j < m; j++) {
          expect(found[i * (m + 3) + j + 2]).toBeCloseTo(-2 * expected[w][i * m + j], 12);
        }
        for (let j = 0; j < k; j++) expect(foundOwn[i * k + j]).toBeCloseTo(expectedOwn[w][i * k + j], 12);
      }
    }
    sums.clear();
    const nothing = new Float64Array(k * m);
    sums.addTo(nothing, m, 0, 0, 0);
    expect(nothing.every((value) => value === 0)).toBe(true);
  });

  it('add values to the functions of a row', () => {
    const row = new BasisRow(LEFT);
    row.evaluate(Float64Array.of(0.3, 0.95), 0);
    const sums = new Float64Array(2 * LEFT.functionCount);
    addValues(sums, row, Float64Array.of(3, -1));
    const values = spread(row, LEFT.functionCount);
    values.forEach((value, i) => {
      expect(sums[2 * i]).toBeCloseTo(3 * value, 14);
      expect(sums[2 * i + 1]).toBeCloseTo(-value, 14);
    });
  });
});
