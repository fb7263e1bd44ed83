import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import type { Basis, BasisSpec } from '../../src/fields/Basis.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

interface SplineCase {
  readonly periodic: boolean;
  readonly count: number;
  readonly low: number;
  readonly high: number;
  readonly places: number[];
  readonly values: number[][];
  readonly slopes: number[][];
}

const SPLINES = (
  JSON.parse(readFileSync(new URL('../reference/splines/values.json', import.meta.url), 'utf8')) as {
    cases: SplineCase[];
  }
).cases;

/** All k values (or slopes along an axis) at a place. */
function valuesAt(basis: Basis, place: readonly number[], axis: number | null = null): Float64Array {
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const count =
    axis === null
      ? basis.evaluateInto(place, 0, indices, values)
      : basis.differentiateInto(place, 0, axis, indices, values);
  const all = new Float64Array(basis.functionCount);
  for (let i = 0; i < count; i++) {
    if (i > 0) expect(indices[i]).not.toBe(indices[i - 1]);
    all[indices[i]] += values[i];
  }
  return all;
}

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

function spline1(count: number, low: number, high: number, period = 0): SplineSpec {
  return { kind: 'spline', counts: [count], low: [low], high: [high], periods: [period] };
}

const MIXED: SplineSpec = {
  kind: 'spline',
  counts: [6, 5, 4],
  low: [-1, 0, 2],
  high: [3, 4, 7],
  periods: [0, 4, 0],
};

const SPECS: readonly [string, BasisSpec, number][] = [
  ['constant', { kind: 'constant' }, 2],
  ['open spline', spline1(7, -1, 2), 1],
  ['open spline of 3 functions (degree 2)', spline1(3, -1, 2), 1],
  ['open spline of 2 functions (degree 1)', spline1(2, -1, 2), 1],
  ['open spline of degree 1', { ...spline1(7, -1, 2), degree: 1 }, 1],
  ['periodic spline', spline1(6, 0, 3, 3), 1],
  ['periodic spline of degree 1', { ...spline1(6, 0, 3, 3), degree: 1 }, 1],
  ['periodic spline of 3 functions', spline1(3, 0, 3, 3), 1],
  ['periodic spline of 2 functions', spline1(2, 0, 3, 3), 1],
  ['tensor spline with a periodic axis', MIXED, 3],
  ['tensor spline of degree 2', { ...MIXED, degree: 2 }, 3],
  ['polynomial', { kind: 'polynomial', degree: 4, centre: [0.3, -1], scale: [2, 0.7] }, 2],
  [
    'polynomial in three dimensions',
    { kind: 'polynomial', degree: 3, centre: [0, 1, 2], scale: [1, 2, 3] },
    3,
  ],
  ['waves', { kind: 'waves', waves: 3, periods: [2.5] }, 1],
  ['waves along one of two axes', { kind: 'waves', waves: 2, periods: [0, 4] }, 2],
  ['waves along two axes', { kind: 'waves', waves: 2, periods: [3, 4] }, 2],
];

describe('B-splines', () => {
  it('have the values and slopes of scipy.interpolate.BSpline (test/reference/splines)', () => {
    for (const { periodic, count, low, high, places, values, slopes } of SPLINES) {
      const basis = createBasis(spline1(count, low, high, periodic ? high - low : 0), 1);
      places.forEach((place, row) => {
        valuesAt(basis, [place]).forEach((value, i) => expect(value).toBeCloseTo(values[row][i], 11));
        valuesAt(basis, [place], 0).forEach((slope, i) => expect(slope).toBeCloseTo(slopes[row][i], 9));
      });
    }
  });

  it('sum to one everywhere, inside, at the edges and outside', () => {
    for (const [, spec, d] of SPECS.filter(([, candidate]) => candidate.kind === 'spline')) {
      const basis = createBasis(spec, d);
      const stream = randomStream(1, 'places');
      for (let trial = 0; trial < 200; trial++) {
        const place = Array.from({ length: d }, () => 4 * stream.normal());
        expect(valuesAt(basis, place).reduce((sum, value) => sum + value, 0)).toBeCloseTo(1, 13);
        for (let axis = 0; axis < d; axis++) {
          expect(valuesAt(basis, place, axis).reduce((sum, value) => sum + value, 0)).toBeCloseTo(0, 12);
        }
      }
    }
    const open = createBasis(spline1(7, -1, 2), 1);
    for (const edge of [-1, 2, -1e12, 1e12]) {
      expect(valuesAt(open, [edge]).reduce((sum, value) => sum + value, 0)).toBeCloseTo(1, 14);
    }
  });

  it('of degree 1 interpolate linearly between one value per knot, also across the end of a period', () => {
    const knotValues = [2, -1, 0.5, 4, 3, -2];
    for (const [period, knots] of [
      [0, [0, 0.2, 0.4, 0.6, 0.8, 1]],
      [1.2, [0, 0.2, 0.4, 0.6, 0.8, 1, 1.2]],
    ] as const) {
      const basis = createBasis({ ...spline1(6, 0, period || 1, period), degree: 1 }, 1);
      const valueAt = (place: number) =>
        valuesAt(basis, [place]).reduce((sum, value, i) => sum + value * knotValues[i], 0);
      for (let cell = 0; cell + 1 < knots.length; cell++) {
        const [left, right] = [knotValues[cell], knotValues[(cell + 1) % 6]];
        for (const t of [0, 0.3, 0.9])
          expect(valueAt(knots[cell] + 0.2 * t)).toBeCloseTo(left + t * (right - left), 12);
      }
    }
  });

  it('wrap on a periodic axis, however few the functions', () => {
    for (const count of [1, 2, 3, 4, 9]) {
      const basis = createBasis(spline1(count, 0, 3, 3), 1);
      for (const place of [0, 0.4, 1.7, 2.999]) {
        for (const turns of [-7, -1, 1, 12]) {
          const there = valuesAt(basis, [place + 3 * turns]);
          valuesAt(basis, [place]).forEach((value, i) => expect(there[i]).toBeCloseTo(value, 11));
        }
      }
      const left = valuesAt(basis, [3 - 1e-9]);
      valuesAt(basis, [1e-9]).forEach((value, i) => expect(left[i]).toBeCloseTo(value, 7));
    }
  });

  it('are held at the edge outside an open box, with no slope', () => {
    const basis = createBasis(MIXED, 3);
    const edge = valuesAt(basis, [3, 1.1, 5]);
    expect(Array.from(valuesAt(basis, [11, 1.1, 5]))).toEqual(Array.from(edge));
    expect(valuesAt(basis, [11, 1.1, 5], 0).every((slope) => slope === 0)).toBe(true);
    expect(valuesAt(basis, [11, 1.1, 5], 1).some((slope) => slope !== 0)).toBe(true);
    expect(valuesAt(basis, [2.9, 1.1, 5], 0).some((slope) => slope !== 0)).toBe(true);
  });

  it('reproduce straight lines along open axes from coefficients on a straight line', () => {
    const basis = createBasis(spline1(9, 2, 5), 1);
    const step = 3 / 6; // 9 functions stand on 6 cells
    for (const place of [2, 2.31, 3.9, 5]) {
      const line = valuesAt(basis, [place]).reduce((sum, value, i) => sum + value * (2 + (i - 1) * step), 0);
      expect(line).toBeCloseTo(place, 12);
    }
  });
});

describe('every basis', () => {
  it.each(SPECS)('%s: slopes agree with central differences', (_name, spec, d) => {
    const basis = createBasis(spec, d);
    const stream = randomStream(2, 'slopes');
    const step = 1e-5;
    for (let trial = 0; trial < 40; trial++) {
      const place =
        spec.kind === 'spline'
          ? spec.low.map((low, axis) => low + (0.01 + 0.98 * stream.uniform()) * (spec.high[axis] - low))
          : Array.from({ length: d }, () => stream.normal());
      for (let axis = 0; axis < d; axis++) {
        const shifted = (by: number) =>
          valuesAt(
            basis,
            place.map((x, other) => (other === axis ? x + by : x)),
          );
        const above = shifted(step);
        const below = shifted(-step);
        const slopes = valuesAt(basis, place, axis);
        const size = Math.max(1, ...slopes.map(Math.abs));
        // a second derivative that jumps within the step costs step · jump/4 at most
        slopes.forEach((slope, i) =>
          expect(Math.abs(slope - (above[i] - below[i]) / (2 * step)) / size).toBeLessThan(2e-5),
        );
      }
    }
  });

  it.each(SPECS)('%s: reports its sizes', (_name, spec, d) => {
    const basis = createBasis(spec, d);
    expect(basis.spec).toEqual(spec);
    expect(basis.dimensions).toBe(d);
    expect(basis.support).toBeLessThanOrEqual(basis.functionCount);
    expect(valuesAt(basis, new Array<number>(d).fill(0.3))).toHaveLength(basis.functionCount);
  });

  it.each(SPECS)('%s: function numbers come in increasing order (open axes)', (_name, spec, d) => {
    if (spec.kind === 'spline' && spec.periods.some((period) => period > 0)) return;
    const basis = createBasis(spec, d);
    const indices = new Int32Array(basis.support);
    const values = new Float64Array(basis.support);
    const count = basis.evaluateInto(new Array<number>(d).fill(0.3), 0, indices, values);
    for (let i = 1; i < count; i++) expect(indices[i]).toBeGreaterThan(indices[i - 1]);
  });
});

describe('polynomials', () => {
  it('are the monomials of the scaled coordinates, constant first', () => {
    const basis = createBasis({ kind: 'polynomial', degree: 2, centre: [1, -2], scale: [2, 4] }, 2);
    const [u, v] = [(3 - 1) / 2, (6 + 2) / 4];
    expect(basis.functionCount).toBe(6);
    const values = Array.from(valuesAt(basis, [3, 6]));
    expect(values[0]).toBe(1);
    expect(values.slice(1, 3).sort()).toEqual([u, v].sort());
    expect(values.slice(3).sort()).toEqual([u * u, u * v, v * v].sort());
  });

  it('number (degree + d)! / (degree! d!)', () => {
    const count = (degree: number, d: number) =>
      createBasis(
        {
          kind: 'polynomial',
          degree,
          centre: new Array<number>(d).fill(0),
          scale: new Array<number>(d).fill(1),
        },
        d,
      ).functionCount;
    expect([count(0, 3), count(3, 1), count(4, 2), count(3, 3)]).toEqual([1, 4, 15, 20]);
  });
});

describe('waves', () => {
  it('are 1, cos, sin, cos 2, sin 2 of the phase and constant along open axes', () => {
    const basis = createBasis({ kind: 'waves', waves: 2, periods: [0, 4] }, 2);
    const phase = (2 * Math.PI * 1.3) / 4;
    const expected = [1, Math.cos(phase), Math.sin(phase), Math.cos(2 * phase), Math.sin(2 * phase)];
    valuesAt(basis, [77, 1.3]).forEach((value, i) => expect(value).toBeCloseTo(expected[i], 13));
    valuesAt(basis, [-5, 1.3 - 12]).forEach((value, i) => expect(value).toBeCloseTo(expected[i], 12));
  });
});

describe('roughness penalties', () => {
  const quadratic = (penalty: Float64Array, c: ArrayLike<number>): number => {
    let sum = 0;
    for (let i = 0; i < c.length; i++)
      for (let j = 0; j < c.length; j++) sum += c[i] * penalty[i * c.length + j] * c[j];
    return sum;
  };

  it.each(SPECS)('%s: symmetric, positive semi-definite, trace k', (_name, spec, d) => {
    const basis = createBasis(spec, d);
    const penalty = basis.roughness();
    if (!penalty) return;
    const k = basis.functionCount;
    const stream = randomStream(4, 'vectors');
    let trace = 0;
    for (let i = 0; i < k; i++) {
      trace += penalty[i * k + i];
      for (let j = 0; j < i; j++) expect(penalty[i * k + j]).toBeCloseTo(penalty[j * k + i], 12);
    }
    expect(trace).toBeCloseTo(k, 9);
    for (let trial = 0; trial < 20; trial++) {
      expect(
        quadratic(
          penalty,
          Float64Array.from({ length: k }, () => stream.normal()),
        ),
      ).toBeGreaterThan(-1e-12);
    }
  });

  it('leave constants free, and straight lines along open axes alone', () => {
    const line = (k: number) => Float64Array.from({ length: k }, (_, i) => i);
    const open = createBasis(spline1(8, 0, 1), 1).roughness() as Float64Array;
    expect(quadratic(open, new Float64Array(8).fill(1))).toBeCloseTo(0, 12);
    expect(quadratic(open, line(8))).toBeCloseTo(0, 10);
    expect(
      quadratic(
        open,
        line(8).map((i) => i * i),
      ),
    ).toBeGreaterThan(1);
    const closed = createBasis(spline1(8, 0, 1, 1), 1).roughness() as Float64Array;
    expect(quadratic(closed, new Float64Array(8).fill(1))).toBeCloseTo(0, 12);
    expect(quadratic(closed, line(8))).toBeGreaterThan(1);
    // axes (6 open, 5 periodic, 4 open): bilinear along the open ones, constant along the periodic one
    const tensor = createBasis(MIXED, 3).roughness() as Float64Array;
    const bilinear = Float64Array.from({ length: 120 }, (_, i) => {
      const [a, c] = [Math.floor(i / 20), i % 4];
      return 3 + 2 * a - c + 0.5 * a * c;
    });
    expect(quadratic(tensor, bilinear)).toBeCloseTo(0, 9);
    expect(
      quadratic(
        tensor,
        Float64Array.from({ length: 120 }, (_, i) => Math.floor(i / 4) % 5),
      ),
    ).toBeGreaterThan(1);
  });

  it('of waves and polynomials leave the smoothest functions free', () => {
    const waves = createBasis({ kind: 'waves', waves: 3, periods: [2] }, 1).roughness() as Float64Array;
    expect(waves[0]).toBe(0);
    for (let wave = 1; wave < 3; wave++) {
      const ratio = waves[(2 * wave + 1) * 8] / waves[(2 * wave - 1) * 8];
      expect(ratio).toBeCloseTo(((wave + 1) / wave) ** 4, 10);
    }
    const polynomial = createBasis({ kind: 'polynomial', degree: 3, centre: [0], scale: [1] }, 1);
    expect(Array.from(polynomial.roughness() as Float64Array).slice(0, 2)).toEqual([0, 0]);
    expect(polynomial.roughness()?.[5]).toBe(0);
    expect(createBasis({ kind: 'polynomial', degree: 1, centre: [0], scale: [1] }, 1).roughness()).toBeNull();
    expect(createBasis({ kind: 'constant' }, 3).roughness()).toBeNull();
  });
});

describe('a basis as data', () => {
  it('needs one entry per dimension', () => {
    const wrong: BasisSpec[] = [
      { kind: 'polynomial', degree: 1, centre: [0], scale: [1, 1] },
      { kind: 'polynomial', degree: 1, centre: [0, 0], scale: [1] },
      { kind: 'spline', counts: [4], low: [0, 0], high: [1, 1], periods: [0, 0] },
      { kind: 'spline', counts: [4, 4], low: [0, 0], high: [1, 1], periods: [0] },
      { kind: 'waves', waves: 1, periods: [1] },
    ];
    for (const spec of wrong) {
      expect(() => createBasis(spec, 2)).toThrow(UsageError);
      expect(() => createBasis(spec, 2)).toThrow(/one per dimension, but has 1/);
    }
  });
});
