import { beforeAll, describe, expect, it } from 'vitest';
import type { StudyInput } from '../../src/documents/Study.js';
import { UsageError } from '../../src/errors.js';
import type { FormulaReader } from '../../src/fields/formula.js';
import { loadFormulaReader } from '../../src/fields/formula.js';
import type { Law } from '../../src/hypotheses/lawStatement.js';
import { testHypothesis, type TestRequest } from '../../src/hypotheses/testHypothesis.js';
import type { TestResult } from '../../src/hypotheses/TestResult.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { bareFit } from '../support/bareFit.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { simulateVaried, type VariedProcess } from '../support/variedProcess.js';

let readFormula: FormulaReader;
beforeAll(async () => {
  readFormula = await loadFormulaReader();
});

const law = (text: string, more: Partial<Law> = {}): Law => ({
  name: text,
  formula: readFormula(text, { coordinates: ['x'], parameters: 'free' }),
  start: {},
  fixed: {},
  ...more,
});

/** Particles in a trap, in units of the relaxation time; friction × interval 0.2, error/displacement 0.1. */
const trapped: Omit<VariedProcess, 'friction' | 'noise' | 'seed'> = {
  dimensions: 1,
  tracks: 10,
  frames: 600,
  interval: 0.2,
  substeps: 8,
  force: (place, out) => void (out[0] = -place[0]),
  localizationError: 0.02,
  startSpread: 1,
  warmUp: 4,
};
const step = (x: number): number => 1 + 0.55 * Math.tanh(x);
const stepped = simulateVaried({
  ...trapped,
  friction: (place, out) => void (out[0] = step(place[0])),
  noise: (place, out) => void (out[0] = 2 * step(place[0])),
  seed: 1,
});

function run(
  tracks: TrackSet,
  request: Partial<TestRequest>,
  order: 'first' | 'second' = 'second',
  study: StudyInput = {},
): TestResult {
  const fit = bareFit(tracks, { order, study, relaxationTime: order === 'second' ? 1 : null });
  return testHypothesis(fit, tracks, { hypothesis: 'law', confidence: 0.95, seed: 1, ...request });
}

describe('friction that is a step', () => {
  it('is not uniform, and the table says where', () => {
    const result = run(stepped, { hypothesis: 'uniform-friction' });
    expect(result.rejected).toBe(true);
    expect(result.p).toBeLessThan(0.001);
    const left = result.places.filter(({ x = 0 }) => x < -0.7);
    const right = result.places.filter(({ x = 0 }) => x > 0.7);
    for (const { column, deviation, value, expected, low, high } of left) {
      expect(column).toBe('friction_xx');
      expect(deviation).toBeLessThan(0);
      expect(low).toBeLessThan(value);
      expect(high).toBeGreaterThan(value);
      expect(value).toBeLessThan(expected);
    }
    expect(Math.max(...right.map(({ deviation }) => deviation))).toBeGreaterThan(3);
  });

  it('follows the law it was made with, whose parameters are found within their intervals', () => {
    const result = run(stepped, { field: 'friction', laws: [law('g0*(1+a*tanh(x))')] });
    expect(result.rejected).toBe(false);
    const { g0, a } = result.parameters;
    // 95 % intervals of one seed; the truth lies within one and a half of their half-widths
    expect(Math.abs(g0.value - 1)).toBeLessThan(0.75 * (g0.high - g0.low));
    expect(Math.abs(a.value - 0.55)).toBeLessThan(0.75 * (a.high - a.low));
    expect(a.low).toBeGreaterThan(0);
    expect(result.law).toBe('g0*(1+a*tanh(x))');
  });

  it('is at one temperature with the noise that belongs to it', () => {
    const result = run(stepped, { hypothesis: 'uniform-temperature' });
    expect(result.rejected).toBe(false);
    const { low, high } = result.parameters.temperature;
    expect(low).toBeLessThan(1.02);
    expect(high).toBeGreaterThan(0.98);
    expect(run(stepped, { hypothesis: 'uniform-noise' }).rejected).toBe(true);
  });

  it('lets laws be compared: the right one first, a richer one a tie, a wrong one worse', () => {
    const laws = [law('g0+0*x'), law('g0*(1+a*tanh(x)+b*x^4)'), law('g0*(1+a*tanh(x))')];
    const { comparison = [] } = run(stepped, { field: 'friction', laws });
    expect(comparison).toHaveLength(3);
    expect(comparison[2].law).toBe('g0+0*x');
    expect(comparison[2].tie).toBe(false);
    expect(comparison[2].difference).toBeLessThan(-2 * comparison[2].differenceError);
    expect(comparison[1].tie).toBe(true);
    expect(comparison[0].difference).toBe(0);
    for (const { scoreError, criterion } of comparison) expect(scoreError * criterion).toBeGreaterThan(0);
  });

  it('leaves open the interval of parameters that the data cannot tell apart', () => {
    const { parameters } = run(stepped, { field: 'friction', laws: [law('a*b*(1+0.55*tanh(x))')] });
    expect(parameters.a.low).toBe(-Infinity);
    expect(parameters.b.high).toBe(Infinity);
    const held = run(stepped, {
      field: 'friction',
      laws: [law('a*b*(1+0.55*tanh(x))', { fixed: { b: 2 } })],
    });
    expect(held.parameters.b).toBeUndefined();
    expect(Math.abs(held.parameters.a.value - 0.5)).toBeLessThan(0.06);
  });
});

describe('forces', () => {
  const spin = 0.5; // 1/time²: curl 2 · spin
  const turning = simulateVaried({
    ...trapped,
    dimensions: 2,
    frames: 400,
    force: (place, out) => {
      out[0] = -place[0] - spin * place[1];
      out[1] = -place[1] + spin * place[0];
    },
    friction: (_place, out) => void out.fill(1),
    noise: (_place, out) => void out.fill(2),
    seed: 2,
  });

  it('with a known circulation are not conservative, and its interval holds it', () => {
    const result = run(turning, { hypothesis: 'conservative-force' });
    expect(result.rejected).toBe(true);
    const { curl, circulation } = result.parameters;
    expect(curl.low).toBeLessThan(2 * spin);
    expect(curl.high).toBeGreaterThan(2 * spin);
    // Stokes: circulation = curl × area, the area being that of the core of the visited region
    const ratio = circulation.value / curl.value;
    expect(ratio).toBeGreaterThan(0.5);
    expect(circulation.low / ratio).toBeLessThan(2 * spin);
    expect(circulation.high / ratio).toBeGreaterThan(2 * spin);
  });

  it('of a trap are conservative but not zero', () => {
    const tracks = simulateSecondOrder({
      dimensions: 2,
      tracks: 10,
      frames: 400,
      interval: 0.2,
      friction: 1,
      stiffness: 1,
      localizationError: 0.02,
      seed: 3,
    });
    expect(run(tracks, { hypothesis: 'conservative-force' }).rejected).toBe(false);
    const zero = run(tracks, { hypothesis: 'zero-force' });
    expect(zero.rejected).toBe(true);
    expect(Object.keys(zero.parameters)).toEqual(['force_x', 'force_y']);
  });

  it('round a periodic box without curl are told by the mean force round the loop', () => {
    const pushed = simulateVaried({
      ...trapped,
      periods: [6],
      force: (place, out) => void (out[0] = 0.4 + 0.5 * Math.sin((2 * Math.PI * place[0]) / 6)),
      friction: (_place, out) => void out.fill(1),
      noise: (_place, out) => void out.fill(2),
      startSpread: 3,
      seed: 4,
    });
    const result = run(pushed, { hypothesis: 'conservative-force' });
    expect(result.rejected).toBe(true);
    expect(result.parameters.loop_force_x.low).toBeLessThan(0.4);
    expect(result.parameters.loop_force_x.high).toBeGreaterThan(0.4);
    expect(result.places).toEqual([]);
  });

  it('at first order leave out the drift that gradients of diffusion bring about', () => {
    // D = 0.5 + 0.3 sin x on a circle: without a force the Itô drift is D′; without a drift the force is −D′ in units of kT
    const circle = (drift: (x: number) => number): TrackSet =>
      simulateVaried({
        ...trapped,
        tracks: 15,
        periods: [2 * Math.PI],
        force: (place, out) => void (out[0] = drift(place[0])),
        friction: undefined,
        noise: (place, out) => void (out[0] = 0.5 + 0.3 * Math.sin(place[0])),
        startSpread: 3,
        seed: 5,
      });
    const free = circle((x) => 0.3 * Math.cos(x));
    expect(run(free, { hypothesis: 'zero-force' }, 'first').rejected).toBe(false);
    expect(run(free, { hypothesis: 'uniform-noise' }, 'first').rejected).toBe(true);
    expect(
      run(
        circle(() => 0),
        { hypothesis: 'zero-force' },
        'first',
      ).rejected,
    ).toBe(true);
  });
});

describe('friction by direction', () => {
  const uneven = (friction: [number, number], seed: number): TrackSet =>
    simulateSecondOrder({
      dimensions: 2,
      tracks: 10,
      frames: 300,
      interval: 0.2,
      friction,
      stiffness: 1,
      localizationError: 0.02,
      seed,
    });

  it('is found isotropic where it is, and not where it is not', () => {
    const study: StudyInput = { force: 'linear', noise: 'constant', noiseForm: 'axes' };
    const test = (tracks: TrackSet): TestResult =>
      run(tracks, { hypothesis: 'isotropic-friction' }, 'second', study);
    expect(test(uneven([1, 1], 1)).rejected).toBe(false);
    const result = test(uneven([0.7, 1.6], 1));
    expect(result.rejected).toBe(true);
    expect(result.parameters.friction_yy.low).toBeGreaterThan(result.parameters.friction_xx.high);
  });
});

describe('small recordings', () => {
  it('are judged by recordings simulated under the statement', () => {
    const small = simulateSecondOrder({
      tracks: 3,
      frames: 200,
      interval: 0.2,
      friction: 1,
      stiffness: 1,
      localizationError: 0.02,
      seed: 7,
    });
    let asked = 0;
    const request: Partial<TestRequest> = {
      hypothesis: 'uniform-friction',
      simulations: 19,
      simulate: (model, errors, index) => {
        if (model.order !== 'second') throw new Error('second order was asked for');
        // the friction handed over is uniform: all of its spline coefficients agree
        const [coefficients] = model.friction.coefficients;
        expect(Math.max(...coefficients) - Math.min(...coefficients)).toBeLessThan(1e-6);
        expect(errors).toHaveLength(1);
        asked++;
        return simulateSecondOrder({
          tracks: 3,
          frames: 200,
          interval: 0.2,
          friction: Math.exp(coefficients[0]),
          stiffness: 1,
          localizationError: errors[0],
          seed: 100 + (index % 3),
        });
      },
    };
    const result = run(small, request, 'second', { force: 'linear', noise: 'constant' });
    expect(asked).toBe(19);
    expect(result.method).toBe('simulation');
    expect(result.p * 20).toBeCloseTo(Math.round(result.p * 20), 9);
  });
});

describe('hypotheses without meaning', () => {
  const flat = simulateSecondOrder({ tracks: 4, frames: 100, friction: 0.2, seed: 1 });
  it.each([
    ['uniform-friction', 'first', /second-order fit/],
    ['uniform-temperature', 'first', /second-order fit/],
    ['isotropic-friction', 'second', /two dimensions/],
    ['conservative-force', 'second', /one open dimension/],
  ] as const)('%s at %s order in one dimension is refused', (hypothesis, order, words) => {
    expect(() => run(flat, { hypothesis }, order)).toThrow(words);
    expect(() => run(flat, { hypothesis }, order)).toThrow(UsageError);
  });

  it('a law on friction at first order is refused, and says what to use', () => {
    expect(() => run(flat, { field: 'friction', laws: [law('g0')] }, 'first')).toThrow(/drift, diffusion/);
  });

  it('a law with more parameters than the data resolve is refused', () => {
    const many = Array.from({ length: 20 }, (_, i) => `c${i}*x^${i}`).join('+');
    expect(() => run(flat, { field: 'friction', laws: [law(many)] })).toThrow(/20 parameters/);
  });
});
