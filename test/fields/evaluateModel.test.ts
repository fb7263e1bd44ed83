import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import type {
  CoefficientField,
  FieldForm,
  FieldLink,
  FieldName,
  Model,
} from '../../src/fields/CoefficientField.js';
import { createModelEvaluator } from '../../src/fields/evaluateModel.js';
import { modelFields, modelParameters, withParameters } from '../../src/fields/modelParameters.js';

const LINEAR = (d: number) =>
  ({
    kind: 'polynomial',
    degree: 1,
    centre: new Array<number>(d).fill(0),
    scale: new Array<number>(d).fill(1),
  }) as const;

function field(
  name: FieldName,
  form: FieldForm,
  coefficients: readonly (readonly number[])[],
  link: FieldLink = 'identity',
): CoefficientField {
  const basis =
    coefficients[0].length === 1 ? ({ kind: 'constant' } as const) : LINEAR(coefficients[0].length - 1);
  return { name, form, link, basis, coefficients };
}

function second(d: number, friction: CoefficientField, noise: CoefficientField): Model {
  const force = field(
    'force',
    'vector',
    Array.from({ length: d }, (_, axis) => [axis + 1]),
  );
  return { order: 'second', dimensions: d, periods: new Array<number>(d).fill(0), force, friction, noise };
}

function matricesAt(model: Model, place: readonly number[]) {
  const d = model.dimensions;
  const evaluator = createModelEvaluator(model);
  const force = new Float64Array(d).fill(NaN);
  const friction = new Float64Array(d * d).fill(NaN);
  const noise = new Float64Array(d * d).fill(NaN);
  evaluator.forceInto(place, 0, force);
  evaluator.frictionInto(place, 0, friction);
  evaluator.noiseInto(place, 0, noise);
  return { force: Array.from(force), friction: Array.from(friction), noise: Array.from(noise) };
}

describe('a model at a place', () => {
  it('fills full matrices from every form', () => {
    const scalar = second(2, field('friction', 'scalar', [[3]]), field('noise', 'axes', [[5], [7]]));
    expect(matricesAt(scalar, [0, 0])).toEqual({
      force: [1, 2],
      friction: [3, 0, 0, 3],
      noise: [5, 0, 0, 7],
    });
    const matrix = second(
      2,
      field('friction', 'matrix', [[1], [-2], [3], [4]]),
      field('noise', 'matrix', [[5], [0.5], [7]]),
    );
    expect(matricesAt(matrix, [0, 0])).toEqual({
      force: [1, 2],
      friction: [1, -2, 3, 4],
      noise: [5, 0.5, 0.5, 7],
    });
    const solid = second(
      3,
      field('friction', 'scalar', [[1]]),
      field('noise', 'matrix', [[1], [2], [3], [4], [5], [6]]),
    );
    expect(matricesAt(solid, [0, 0, 0]).noise).toEqual([1, 2, 3, 2, 4, 5, 3, 5, 6]);
  });

  it('sums the basis functions of each component at the place, from any offset', () => {
    const model = second(
      2,
      field('friction', 'axes', [
        [1, 2, 0],
        [4, 0, -1],
      ]),
      field('noise', 'scalar', [[1]]),
    );
    // degree 1 has the functions 1 and the two coordinates, in an order the coefficients above tell apart
    const [a, b] = [matricesAt(model, [1, 0]).friction, matricesAt(model, [0, 1]).friction];
    expect([a[0] + b[0], a[3] + b[3]]).toEqual([1 + 2 + 1, 4 + 4 - 1]);
    const evaluator = createModelEvaluator(model);
    const out = new Float64Array(4);
    evaluator.frictionInto(Float64Array.of(9, 9, 9, 0.25, -0.5), 3, out);
    expect(Array.from(out)).toEqual(matricesAt(model, [0.25, -0.5]).friction);
  });

  it('takes the exponential of the sum through the link log', () => {
    const model = second(
      1,
      field('friction', 'scalar', [[0.5, 2]], 'log'),
      field('noise', 'axes', [[-3]], 'log'),
    );
    const at = matricesAt(model, [0.25]);
    expect(at.friction[0]).toBeCloseTo(Math.exp(1), 12);
    expect(at.noise[0]).toBeCloseTo(Math.exp(-3), 12);
  });

  it('takes the matrix exponential through the link log-matrix, as scipy.linalg.expm (test/reference/matrices)', () => {
    const { symmetric } = JSON.parse(
      readFileSync(new URL('../reference/matrices/values.json', import.meta.url), 'utf8'),
    ) as { symmetric: { d: number; matrix: number[]; exponential: number[] }[] };
    for (const { d, matrix, exponential } of symmetric) {
      const upper: number[][] = [];
      for (let i = 0; i < d; i++) for (let j = i; j < d; j++) upper.push([matrix[i * d + j]]);
      // friction: the same symmetric part and an antisymmetric one, which passes through
      const turned = matrix.map((value, i) => [value + (Math.floor(i / d) - (i % d)) * 0.3]);
      const model = second(
        d,
        field('friction', 'matrix', turned, 'log-matrix'),
        field('noise', 'matrix', upper, 'log-matrix'),
      );
      const { friction, noise } = matricesAt(model, new Array<number>(d).fill(0.1));
      exponential.forEach((value, i) => {
        expect(noise[i]).toBeCloseTo(value, 10);
        expect(friction[i]).toBeCloseTo(value + (Math.floor(i / d) - (i % d)) * 0.3, 10);
      });
    }
  });

  it('has drift and diffusion but no friction at first order', () => {
    const model: Model = {
      order: 'first',
      reading: 'ito',
      dimensions: 2,
      periods: [0, 0],
      drift: field('drift', 'vector', [[1], [2]]),
      diffusion: field('diffusion', 'matrix', [[3], [0.25], [4]]),
    };
    expect(matricesAt(model, [0, 0])).toEqual({
      force: [1, 2],
      friction: [0, 0, 0, 0],
      noise: [3, 0.25, 0.25, 4],
    });
  });
});

describe('the coefficient vector of a model', () => {
  const model = second(
    2,
    field('friction', 'axes', [
      [10, 11, 12],
      [13, 14, 15],
    ]),
    field('noise', 'matrix', [[20], [21], [22]]),
  );

  it('runs through force, friction and noise, component by component', () => {
    expect(modelFields(model).map((entry) => entry.name)).toEqual(['force', 'friction', 'noise']);
    expect(Array.from(modelParameters(model))).toEqual([1, 2, 10, 11, 12, 13, 14, 15, 20, 21, 22]);
  });

  it('goes back into the model it came from', () => {
    expect(withParameters(model, modelParameters(model))).toEqual(model);
    const doubled = withParameters(
      model,
      modelParameters(model).map((value) => 2 * value),
    );
    expect(Array.from(modelParameters(doubled))).toEqual([2, 4, 20, 22, 24, 26, 28, 30, 40, 42, 44]);
    expect(modelFields(doubled).map(({ basis, form, link }) => ({ basis, form, link }))).toEqual(
      modelFields(model).map(({ basis, form, link }) => ({ basis, form, link })),
    );
  });

  it('of another length is refused with both lengths', () => {
    expect(() => withParameters(model, new Float64Array(10))).toThrow(UsageError);
    expect(() => withParameters(model, new Float64Array(12))).toThrow(
      /has 11 coefficients but 12 were given/,
    );
  });
});
