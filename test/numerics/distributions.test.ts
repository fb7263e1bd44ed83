import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { chiSquareTail } from '../../src/numerics/special/chiSquareTail.js';
import { fisherTail } from '../../src/numerics/special/fisherTail.js';
import { normalQuantile, normalTail } from '../../src/numerics/special/normal.js';
import { studentQuantile, studentTail } from '../../src/numerics/special/student.js';

const REFERENCE = JSON.parse(
  readFileSync(new URL('../reference/distributions/values.json', import.meta.url), 'utf8'),
) as Record<string, number[][]>;

const CASES: readonly [string, (...values: number[]) => number, number][] = [
  ['chiSquareTail', chiSquareTail as (...values: number[]) => number, 1e-11],
  ['fisherTail', fisherTail as (...values: number[]) => number, 1e-11],
  ['normalTail', normalTail as (...values: number[]) => number, 1e-12],
  ['normalQuantile', normalQuantile as (...values: number[]) => number, 1e-12],
  ['studentQuantile', studentQuantile as (...values: number[]) => number, 1e-11],
  ['studentTail', studentTail as (...values: number[]) => number, 1e-12],
];

describe('tails and quantiles', () => {
  it.each(CASES)('%s agrees with scipy.stats (test/reference/distributions)', (name, evaluate, tolerance) => {
    const wrong = REFERENCE[name].filter((row) => {
      const expected = row[row.length - 1];
      return !(Math.abs(evaluate(...row.slice(0, -1)) - expected) <= tolerance * Math.abs(expected));
    });
    expect(wrong).toEqual([]);
  });

  it('chi-square keeps its digits on both sides of 2000 degrees of freedom', () => {
    const rows = REFERENCE.chiSquareTail.filter(([, freedom]) => freedom > 1000);
    expect(rows.length).toBeGreaterThan(30);
    for (const [statistic, freedom, expected] of rows) {
      expect(Math.abs(chiSquareTail(statistic, freedom) / expected - 1)).toBeLessThan(1e-12);
    }
  });

  it('chi-square with two degrees of freedom is exponential', () => {
    for (const x of [0.001, 0.5, 2, 5, 40, 600]) {
      expect(chiSquareTail(x, 2) / Math.exp(-x / 2)).toBeCloseTo(1, 12);
    }
  });

  it('answers at the ends', () => {
    expect([chiSquareTail(0, 3), chiSquareTail(-1, 3), chiSquareTail(Infinity, 3)]).toEqual([1, 1, 0]);
    expect([chiSquareTail(NaN, 3), chiSquareTail(2, 0)]).toEqual([NaN, NaN]);
    expect([fisherTail(0, 2, 9), fisherTail(-4, 2, 9)]).toEqual([1, 1]);
    expect([normalQuantile(0), normalQuantile(1)]).toEqual([-Infinity, Infinity]);
  });

  it('the normal quantile undoes the tail far out', () => {
    for (const x of [4, 4.3, 7, 12, 25, 37]) expect(normalQuantile(normalTail(x))).toBeCloseTo(-x, 10);
  });
});
