import { describe, expect, it } from 'vitest';
import { scenarioSchema, type Scenario, type ScenarioInput } from '../../src/documents/Scenario.js';
import type { BasisSpec } from '../../src/fields/Basis.js';
import type {
  CoefficientField,
  FieldForm,
  FieldLink,
  FieldName,
  Model,
} from '../../src/fields/CoefficientField.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { createModelEvaluator } from '../../src/fields/evaluateModel.js';
import { modelParameters } from '../../src/fields/modelParameters.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { createBasisEvaluator, createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';

const stream = randomStream(12, 'evaluator-test');

function randomField(
  name: FieldName,
  form: FieldForm,
  link: FieldLink,
  basis: BasisSpec,
  d: number,
  offset: number,
): CoefficientField {
  const k = createBasis(basis, d).functionCount;
  const count =
    form === 'scalar' ? 1 : form === 'matrix' ? (name === 'friction' ? d * d : (d * (d + 1)) / 2) : d;
  const isDiagonal = (component: number): boolean =>
    form !== 'matrix' ||
    (name === 'friction' ? component % (d + 1) === 0 : [0, d, 2 * d - 1].includes(component));
  const coefficients = Array.from({ length: count }, (_, component) =>
    Array.from({ length: k }, () => 0.2 * stream.normal() + (isDiagonal(component) ? offset : 0)),
  );
  return { name, form, link, basis, coefficients };
}

function toScenario(model: Model, more: Partial<ScenarioInput> = {}): Scenario {
  const d = model.dimensions;
  return scenarioSchema.parse({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions: d,
    order: model.order,
    axes: model.periods.map((period) =>
      period > 0 ? { kind: 'periodic', low: 0, high: period } : { kind: 'open' },
    ),
    coefficients:
      model.order === 'second'
        ? { force: model.force, friction: model.friction, noise: model.noise }
        : { drift: model.drift, diffusion: model.diffusion },
    start: { kind: 'normal', mean: new Array(d).fill(0), spread: new Array(d).fill(1) },
    observation: { tracks: 1, frames: 1, interval: 1, localizationError: new Array(d).fill(0) },
    ...more,
  });
}

function spread(values: Float64Array, d: number): number[] {
  if (values.length === d * d) return [...values];
  return Array.from({ length: d * d }, (_, i) =>
    i % (d + 1) === 0 ? values[values.length === 1 ? 0 : i / (d + 1)] : 0,
  );
}

describe('a scenario made of fitted bases', () => {
  it.each([1, 2, 3] as const)('has the values of the model itself, in %i dimensions', (d) => {
    const periods = d === 3 ? [0, 2.5, 0] : d === 2 ? [0, 2.5] : [0];
    const spline: BasisSpec = {
      kind: 'spline',
      counts: new Array(d).fill(6),
      low: periods.map((period) => (period > 0 ? 0 : -1)),
      high: periods.map((period) => (period > 0 ? period : 1.5)),
      periods,
    };
    const forms: [FieldForm, FieldLink, FieldForm, FieldLink][] = [
      ['scalar', 'identity', 'scalar', 'identity'],
      ['scalar', 'log', 'axes', 'identity'],
      ['axes', 'identity', 'axes', 'log'],
      ['matrix', 'identity', 'matrix', 'identity'],
      ['matrix', 'log-matrix', 'matrix', 'log-matrix'],
      ['scalar', 'identity', 'matrix', 'identity'],
    ];
    for (const [frictionForm, frictionLink, noiseForm, noiseLink] of forms) {
      const model: Model = {
        order: 'second',
        dimensions: d,
        periods,
        force: randomField('force', 'vector', 'identity', spline, d, 0),
        friction: randomField('friction', frictionForm, frictionLink, spline, d, 3),
        noise: randomField('noise', noiseForm, noiseLink, { ...spline, counts: new Array(d).fill(5) }, d, 3),
      };
      const direct = createModelEvaluator(model);
      const evaluator = createBasisEvaluator(toScenario(model));
      const place = new Float64Array(d);
      const force = new Float64Array(d);
      const friction = new Float64Array(evaluator.bathSize);
      const noise = new Float64Array(evaluator.bathSize);
      const expected = new Float64Array(d * d);
      for (let trial = 0; trial < 60; trial++) {
        for (let axis = 0; axis < d; axis++) place[axis] = 4 * stream.uniform() - 1.5;
        evaluator.evaluateInto(place, force, friction, noise);
        direct.forceInto(place, 0, expected);
        for (let axis = 0; axis < d; axis++) expect(force[axis]).toBeCloseTo(expected[axis], 11);
        direct.frictionInto(place, 0, expected);
        spread(friction, d).forEach((value, i) => expect(value / 20).toBeCloseTo(expected[i] / 20, 10));
        direct.noiseInto(place, 0, expected);
        spread(noise, d).forEach((value, i) => expect(value / 20).toBeCloseTo(expected[i] / 20, 10));
      }
    }
  });

  it('takes a draw of the ensemble in model order', () => {
    const basis: BasisSpec = { kind: 'polynomial', degree: 1, centre: [0, 0], scale: [1, 1] };
    const model: Model = {
      order: 'first',
      reading: 'ito',
      dimensions: 2,
      periods: [0, 0],
      drift: randomField('drift', 'vector', 'identity', basis, 2, 0),
      diffusion: randomField('diffusion', 'axes', 'identity', { kind: 'constant' }, 2, 2),
    };
    const scenario = toScenario(model);
    const place = Float64Array.of(0.3, -0.2);
    const read = (draw: number[] | null): number[] => {
      const drift = new Float64Array(2);
      const diffusion = new Float64Array(2);
      createBasisEvaluator(scenario, draw).evaluateInto(place, drift, new Float64Array(2), diffusion);
      return [...drift, ...diffusion];
    };
    const own = [...modelParameters(model)];
    expect(read(own)).toEqual(read(null));
    const doubled = own.map((value) => 2 * value);
    read(null).forEach((value, i) => expect(read(doubled)[i]).toBeCloseTo(2 * value, 12));
  });
});

describe('outside the visited box', () => {
  const base: ScenarioInput = {
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions: 2,
    order: 'second',
    axes: [{ kind: 'open' }, { kind: 'periodic', low: 0, high: 1 }],
    coefficients: {
      force: { form: 'vector', formulas: ['-2*x', 'y'] },
      friction: { form: 'scalar', formulas: ['2+x'] },
      noise: { form: 'scalar', values: [1] },
    },
    visited: { low: [-1, 0], high: [1, 1] },
    start: { kind: 'normal', mean: [0, 0], spread: [1, 1] },
    observation: { tracks: 1, frames: 1, interval: 1, localizationError: [0, 0] },
  };
  const evaluate = async (
    continuation: ScenarioInput['continuation'],
    x: number,
    y: number,
  ): Promise<number[]> => {
    const evaluator = await createScenarioEvaluator(createScenario({ ...base, continuation }));
    const force = new Float64Array(2);
    const friction = new Float64Array(1);
    const noise = new Float64Array(1);
    evaluator.evaluateInto(Float64Array.of(x, y), force, friction, noise);
    return [...force, ...friction, ...noise];
  };
  const hold = { kind: 'hold' as const };

  it('hold keeps the value at the edge, and periodic axes have no outside', async () => {
    expect(await evaluate(hold, 3, 0.25)).toEqual([-2, 0.25, 3, 1]);
    expect(await evaluate(hold, -3, 7.25)).toEqual([2, 0.25, 1, 1]);
    expect(await evaluate(hold, 0.5, -0.75)).toEqual([-1, 0.25, 2.5, 1]);
  });

  it('confine adds a force back to the box', async () => {
    expect(await evaluate({ kind: 'confine', stiffness: 5 }, 3, 0.25)).toEqual([-12, 0.25, 3, 1]);
    expect(await evaluate({ kind: 'confine', stiffness: 5 }, 0.5, 0.25)).toEqual([-1, 0.25, 2.5, 1]);
  });

  it('fade goes over to the mean within the width, without a jump', async () => {
    const fade = { kind: 'fade' as const, width: 0.5 };
    const far = await evaluate(fade, 3, 0.25);
    [0, 0.5, 2, 1].forEach((value, i) => expect(far[i]).toBeCloseTo(value, 10));
    const edge = await evaluate(fade, 1 + 1e-6, 0.25);
    [-2, 0.25, 3, 1].forEach((value, i) => expect(edge[i]).toBeCloseTo(value, 8));
    const between = await evaluate(fade, 1.25, 0.25);
    expect(between[0]).toBeCloseTo(-1, 10);
  });
});

it('reads the noise alone as it reads it with the rest, inside and outside, for draws too', async () => {
  const basis: BasisSpec = { kind: 'spline', counts: [5, 6], low: [-1, -1], high: [1, 1], periods: [0, 0] };
  const model: Model = {
    order: 'second',
    dimensions: 2,
    periods: [0, 0],
    force: randomField('force', 'vector', 'identity', basis, 2, 0),
    friction: randomField('friction', 'scalar', 'log', basis, 2, 0),
    noise: randomField('noise', 'matrix', 'log-matrix', basis, 2, 1),
  };
  const scenario = toScenario(model, {
    visited: { low: [-1, -1], high: [1, 1] },
    continuation: { kind: 'fade', width: 0.7 },
  });
  const draw = [...modelParameters(model)].map((value) => 0.9 * value + 0.05);
  for (const evaluator of [createBasisEvaluator(scenario), createBasisEvaluator(scenario, draw)]) {
    const [together, alone] = [new Float64Array(4), new Float64Array(4)];
    for (let trial = 0; trial < 30; trial++) {
      const place = Float64Array.of(4 * stream.uniform() - 2, 4 * stream.uniform() - 2);
      evaluator.evaluateInto(place, new Float64Array(2), new Float64Array(4), together);
      evaluator.noiseInto(place, alone);
      expect(alone).toEqual(together);
    }
  }
});

describe('fading to given constants', () => {
  const spline: BasisSpec = { kind: 'spline', counts: [5], low: [-1], high: [1], periods: [0] };
  const scenario = (link: FieldLink, towards: number[]): Scenario =>
    createScenario({
      format: 'wanderlaw-scenario',
      version: 1,
      dimensions: 1,
      order: 'first',
      axes: [{ kind: 'open' }],
      coefficients: {
        drift: { form: 'vector', values: [0.5] },
        diffusion: {
          ...randomField('diffusion', link === 'log-matrix' ? 'matrix' : 'scalar', link, spline, 1, 1),
          basis: { kind: 'spline', counts: [5], low: [-1], high: [1], periods: [0] },
          coefficients: [[1, 1.2, 0.9, 1.1, 1]],
        },
      },
      visited: { low: [-1], high: [1] },
      continuation: { kind: 'fade', width: 0.5, stiffness: 2, towards: { diffusion: towards } },
      start: { kind: 'points', points: [[0]] },
      observation: { tracks: 1, frames: 1, interval: 1, localizationError: [0] },
    });

  it.each(['identity', 'log', 'log-matrix'] as const)('reaches them whatever the link (%s)', (link) => {
    const evaluator = createBasisEvaluator(scenario(link, [0.25]));
    const read = (x: number): number[] => {
      const [drift, diffusion] = [new Float64Array(1), new Float64Array(1)];
      evaluator.evaluateInto(Float64Array.of(x), drift, new Float64Array(1), diffusion);
      return [drift[0], diffusion[0]];
    };
    expect(read(4)[1]).toBeCloseTo(0.25, 12);
    expect(read(4)[0]).toBeCloseTo(0.5 - 2 * 3, 12); // the drift fades to its own mean, and the stiffness adds
    expect(read(1 + 1e-7)[1]).toBeCloseTo(read(1)[1], 5);
  });

  it('refuses a constant that a logarithm cannot reach', () => {
    expect(() => scenario('log', [0])).toThrow('continuation.towards.diffusion');
  });
});

it('replaces negative friction and noise by zero and counts the places', async () => {
  const evaluator = await createScenarioEvaluator(
    createScenario({
      format: 'wanderlaw-scenario',
      version: 1,
      dimensions: 2,
      order: 'second',
      axes: [{ kind: 'open' }, { kind: 'open' }],
      coefficients: {
        force: { form: 'vector', values: [0, 0] },
        friction: { form: 'matrix', formulas: ['1', '3', '-3', 'x'] },
        noise: { form: 'matrix', formulas: ['1', '2', '1'] },
      },
      start: { kind: 'normal', mean: [0, 0], spread: [1, 1] },
      observation: { tracks: 1, frames: 1, interval: 1, localizationError: [0, 0] },
    }),
  );
  const friction = new Float64Array(4);
  const noise = new Float64Array(4);
  evaluator.evaluateInto(Float64Array.of(2, 0), new Float64Array(2), friction, noise);
  expect([...friction]).toEqual([1, 3, -3, 2]);
  expect(evaluator.floored).toEqual({ friction: 0, noise: 1 });
  // nearest positive semi-definite matrix to [[1,2],[2,1]] (eigenvalues 3 and −1): 1.5 everywhere
  noise.forEach((value) => expect(value).toBeCloseTo(1.5, 12));
  evaluator.evaluateInto(Float64Array.of(-2, 0), new Float64Array(2), friction, noise);
  [1, 3, -3, 0].forEach((value, i) => expect(friction[i]).toBeCloseTo(value, 12));
  expect(evaluator.floored).toEqual({ friction: 1, noise: 2 });
});
