import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { CoefficientField, Model } from '../../src/fields/CoefficientField.js';
import { modelParameters } from '../../src/fields/modelParameters.js';
import { evaluateColumns, evaluateReplicate, planColumns } from '../../src/uncertainty/columns.js';
import { evaluateFit } from '../../src/uncertainty/evaluateFit.js';
import { warnOfSigns } from '../../src/uncertainty/signs.js';
import { measureSpread, pointwiseMultiplier, simultaneousMultiplier } from '../../src/uncertainty/spread.js';
import { constantField, exampleFit, trapField } from '../support/fitFixtures.js';

const PLANE: Model = {
  order: 'second',
  dimensions: 2,
  periods: [0, 0],
  force: trapField('force', 1, [0, 0]),
  friction: constantField('friction', 'matrix', [1, 0.2, -0.2, 1.5]),
  noise: constantField('noise', 'matrix', [2, 0.3, 4]),
};

function namesOf(model: Model): string[] {
  return planColumns(model).map(({ name }) => name);
}

describe('columns', () => {
  it('are named as the table of evaluate prints them', () => {
    const scalar = exampleFit({ dimensions: 2 }).model as Model;
    expect(namesOf(scalar)).toEqual([
      ...['force_x', 'force_y', 'friction_xx', 'friction_yy', 'noise_xx', 'noise_yy'],
      ...['temperature_xx', 'temperature_yy'],
    ]);
    expect(namesOf(exampleFit({ dimensions: 3, order: 'first' }).model as Model)).toEqual([
      ...['drift_x', 'drift_y', 'drift_z', 'diffusion_xx', 'diffusion_yy', 'diffusion_zz'],
    ]);
    expect(namesOf(PLANE)).toEqual([
      ...['force_x', 'force_y', 'friction_xx', 'friction_yy', 'friction_xy', 'friction_yx'],
      ...['noise_xx', 'noise_yy', 'noise_xy', 'temperature_xx', 'temperature_yy'],
    ]);
  });

  it('hold the coefficients at each place, temperature being noise over twice the friction', () => {
    const columns = evaluateColumns(PLANE, Float64Array.of(0.5, -1, 2, 0));
    const byName = Object.fromEntries(namesOf(PLANE).map((name, i) => [name, Array.from(columns[i])]));
    expect(byName).toEqual({
      force_x: [-0.5, -2],
      force_y: [1, expect.closeTo(0, 15)],
      friction_xx: [1, 1],
      friction_yy: [1.5, 1.5],
      friction_xy: [0.2, 0.2],
      friction_yx: [-0.2, -0.2],
      noise_xx: [2, 2],
      noise_yy: [4, 4],
      noise_xy: [0.3, 0.3],
      temperature_xx: [1, 1],
      temperature_yy: [4 / 3, 4 / 3],
    });
  });

  it('of a replicate are those of the model with other coefficients', () => {
    const doubled = modelParameters(PLANE).map((value) => 2 * value);
    const places = Float64Array.of(0.5, -1);
    const columns = evaluateReplicate(PLANE, doubled, places);
    expect(columns[0][0]).toBe(-1);
    expect(columns[namesOf(PLANE).indexOf('temperature_xx')][0]).toBe(1);
  });

  it('that are positive by construction are spread on a logarithmic scale', () => {
    const positive: Model = {
      ...PLANE,
      friction: { ...constantField('friction', 'scalar', [0.3]), link: 'log' },
    };
    const scales = Object.fromEntries(planColumns(positive).map(({ name, scale }) => [name, scale]));
    expect(scales).toMatchObject({
      force_x: 'linear',
      friction_xx: 'logarithmic',
      noise_xx: 'linear',
      temperature_xx: 'logarithmic',
    });
  });

  it('of a friction that is estimated as it stands make temperatures that are spread as reciprocals', () => {
    const scales = Object.fromEntries(planColumns(PLANE).map(({ name, scale }) => [name, scale]));
    expect(scales).toMatchObject({ friction_xx: 'linear', temperature_xx: 'reciprocal' });
  });
});

describe('multipliers', () => {
  it('are Student quantiles of scipy.stats (test/reference/distributions)', () => {
    const { studentQuantile } = JSON.parse(
      readFileSync(new URL('../reference/distributions/values.json', import.meta.url), 'utf8'),
    ) as { studentQuantile: [number, number, number][] };
    for (const [probability, freedom, expected] of studentQuantile) {
      if (!Number.isInteger(freedom)) continue;
      // replicates without end: the freedom is that of the blocks
      const found = pointwiseMultiplier(2 * probability - 1, freedom + 1, Infinity);
      expect(found).toBeCloseTo(expected, 8);
    }
    // 80 blocks and 79 replicates: 1/(1/79 + 1/79) = 39.5 degrees; scipy.stats.t.ppf(0.975, 39.5) = 2.021888…
    expect(pointwiseMultiplier(0.95, 80, 79)).toBeGreaterThan(2.0211);
    expect(pointwiseMultiplier(0.95, 80, 79)).toBeLessThan(2.0227);
    expect(pointwiseMultiplier(0.95, 10, 200)).toBeGreaterThan(pointwiseMultiplier(0.95, 100, 200));
    expect(pointwiseMultiplier(0.99, 50, 200)).toBeGreaterThan(pointwiseMultiplier(0.95, 50, 200));
  });

  it('of simultaneous bands are at least pointwise, and grow with the places that vary on their own', () => {
    const spline: CoefficientField = {
      name: 'drift',
      form: 'vector',
      link: 'identity',
      basis: { kind: 'spline', counts: [16], low: [-3], high: [3], periods: [0] },
      coefficients: [new Array<number>(16).fill(0.5)],
    };
    const fit = exampleFit({
      scatter: 0.1,
      replicates: 2000,
      model: {
        order: 'first',
        reading: 'ito',
        dimensions: 1,
        periods: [0],
        drift: spline,
        diffusion: constantField('diffusion', 'scalar', [1]),
      },
    });
    const places = Float64Array.from({ length: 60 }, (_, i) => -2.95 + i * 0.1);
    const spreads = measureSpread(fit.model as Model, fit.uncertainty.replicates, places);
    const pointwise = pointwiseMultiplier(0.95, 1000, 1e9);
    const [drift, diffusion] = spreads.map((spread) => simultaneousMultiplier(spread, 0.95, pointwise));
    // a constant varies everywhere at once, so its band is its interval; two independent values would need 2.24 and
    // sixteen 2.95 (Šidák 1967)
    expect(diffusion).toBeGreaterThanOrEqual(pointwise);
    expect(diffusion).toBeLessThan(pointwise * 1.06); // quantile of 2000 draws: standard error 2.6 %
    expect(drift).toBeGreaterThan(2.5);
    expect(drift).toBeLessThan(3.1);
  });
});

describe('a fit at places', () => {
  const fit = exampleFit({
    dimensions: 1,
    stiffness: 2,
    friction: 0.5,
    noise: 3,
    scatter: 0.05,
    replicates: 400,
    reach: 2,
  });

  it('has intervals of the multiplier times the spread of the replicates', () => {
    const { columns } = evaluateFit(fit, Float64Array.of(0.5));
    expect(columns.map(({ name }) => name)).toEqual(['force_x', 'friction_xx', 'noise_xx', 'temperature_xx']);
    const [force, friction, noise, temperature] = columns;
    expect([force.values[0], friction.values[0], noise.values[0], temperature.values[0]]).toEqual([
      -1, 0.5, 3, 3,
    ]);
    const draws = fit.uncertainty.replicates.map((row) => row[row.length - 2]);
    const deviation = Math.sqrt(draws.reduce((sum, value) => sum + (value - 0.5) ** 2, 0) / draws.length);
    expect(friction.high[0] - 0.5).toBeCloseTo(1.96 * deviation, 12);
    expect(0.5 - friction.low[0]).toBeCloseTo(1.96 * deviation, 12);
    // relative scatter of a ratio of two independent values of 5 % each: 7.1 %, from 400 draws to 1/√800 = 3.5 %
    const ratio = (1 - 3 / temperature.high[0]) / 1.96;
    expect(Math.abs(ratio / (0.05 * Math.SQRT2) - 1)).toBeLessThan(4 * 0.035);
    expect(1 / temperature.high[0] + 1 / temperature.low[0]).toBeCloseTo(2 / 3, 10);
  });

  it('says where the tracks have been', () => {
    const { visited, columns } = evaluateFit(fit, Float64Array.of(-3, -1.9, 0, 1.9, 2.1));
    expect(Array.from(visited)).toEqual([0, 1, 1, 1, 0]);
    for (const column of columns) expect(column.low).toHaveLength(5);
  });

  it('takes the simultaneous multiplier where the fit has one, the pointwise one elsewhere', () => {
    const wider = { ...fit, uncertainty: { ...fit.uncertainty, simultaneous: { friction_xx: 3.92 } } };
    const { columns } = evaluateFit(wider, Float64Array.of(0));
    const friction = columns[1];
    expect(friction.bandHigh[0] - 0.5).toBeCloseTo(2 * (friction.high[0] - 0.5), 12);
    expect(columns[2].bandLow[0]).toBe(columns[2].low[0]);
  });
});

describe('signs', () => {
  const model: Model = {
    order: 'second',
    dimensions: 1,
    periods: [0],
    force: constantField('force', 'vector', [-1]),
    friction: {
      name: 'friction',
      form: 'scalar',
      link: 'identity',
      basis: { kind: 'polynomial', degree: 1, centre: [0], scale: [1] },
      coefficients: [[1, 1]],
    },
    noise: constantField('noise', 'scalar', [2]),
  };

  it('that are not positive are reported with the worst place, once per column', () => {
    const centres = Float64Array.of(-3, -2, 0, 1);
    const parameters = modelParameters(model);
    const warnings = warnOfSigns(measureSpread(model, [parameters, parameters], centres), centres, ['x']);
    expect(warnings).toHaveLength(1);
    expect(warnings[0].code).toBe('not-positive');
    expect(warnings[0].message).toMatch(
      /^friction_xx comes out as -2\.00 at x = -3\.00 and is not positive in 2 of 4 visited cells/,
    );
  });

  it('that are positive everywhere are not', () => {
    const centres = Float64Array.of(0, 1);
    const parameters = modelParameters(model);
    expect(warnOfSigns(measureSpread(model, [parameters], centres), centres, ['x'])).toEqual([]);
  });
});
