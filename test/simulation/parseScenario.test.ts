import { describe, expect, it } from 'vitest';
import { UsageError } from '../../src/errors.js';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { parseScenario } from '../../src/simulation/parseScenario.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';

const GOOD: ScenarioInput = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 2,
  order: 'second',
  axes: [{ kind: 'open' }, { kind: 'periodic', low: 0, high: 4 }],
  parameters: { k: 1, g0: 2 },
  coefficients: {
    force: { form: 'vector', formulas: ['-k*x', '0'] },
    friction: { form: 'scalar', formulas: ['g0*(1+0.5*tanh(x))'] },
    noise: { form: 'axes', values: [1, 2] },
  },
  start: { kind: 'normal', mean: [0, 2], spread: [1, 1] },
  observation: { tracks: 3, frames: 5, interval: 0.1, localizationError: [0, 0] },
};

function refusal(change: Record<string, unknown>): UsageError {
  try {
    parseScenario({ ...GOOD, ...change }, 'mine.json');
  } catch (error) {
    expect(error).toBeInstanceOf(UsageError);
    const usage = error as UsageError;
    expect(usage.message).toContain('mine.json');
    return usage;
  }
  throw new Error('the scenario was accepted');
}

describe('a scenario written by hand', () => {
  it('is read with its defaults filled in', () => {
    const scenario = parseScenario(JSON.parse(JSON.stringify(GOOD)));
    expect(scenario.continuation).toEqual({ kind: 'hold', width: null, towards: {}, stiffness: null });
    expect(scenario.observation.exposure).toBe(0);
    expect(scenario.reading).toBe('ito');
  });

  it.each<[string, Record<string, unknown>, string[]]>([
    ['another format', { format: 'wanderlaw-fit' }, ['wanderlaw-fit', 'wanderlaw-scenario']],
    ['a missing observation', { observation: undefined }, ['observation']],
    ['a missing start', { start: undefined }, ['start']],
    ['a misspelt key', { frictoin: 1 }, ['frictoin']],
    ['a wrong number of axes', { axes: [{ kind: 'open' }] }, ['axes', '1', '2']],
    ['walls without edges', { axes: [{ kind: 'walls' }, { kind: 'open' }] }, ['axes[0]', 'low and high']],
    [
      'edges in the wrong order',
      { axes: [{ kind: 'walls', low: 1, high: 0 }, { kind: 'open' }] },
      ['axes[0]', 'below'],
    ],
    [
      'a missing coefficient',
      { coefficients: { force: GOOD.coefficients.force } },
      ['coefficients.friction', 'missing'],
    ],
    [
      'a coefficient of the other order',
      { coefficients: { ...GOOD.coefficients, drift: { form: 'vector', values: [0, 0] } } },
      ['coefficients.drift', 'second'],
    ],
    [
      'too few formulas',
      { coefficients: { ...GOOD.coefficients, force: { form: 'vector', formulas: ['0'] } } },
      ['coefficients.force.formulas', '1', '2'],
    ],
    [
      'a vector as friction',
      { coefficients: { ...GOOD.coefficients, friction: { form: 'vector', values: [1, 1] } } },
      ['coefficients.friction.form', 'scalar'],
    ],
    [
      'negative noise',
      { coefficients: { ...GOOD.coefficients, noise: { form: 'scalar', values: [-1] } } },
      ['coefficients.noise.values[0]', '-1'],
    ],
    [
      'a noise matrix that is not positive',
      { coefficients: { ...GOOD.coefficients, noise: { form: 'matrix', values: [1, 2, 1] } } },
      ['coefficients.noise.values', 'eigenvalue', '-1'],
    ],
    [
      'text in place of numbers',
      { coefficients: { ...GOOD.coefficients, noise: { form: 'scalar', values: ['1'] } } },
      ['coefficients.noise.values[0]', 'number'],
    ],
    ['a coordinate as parameter', { parameters: { x: 1 } }, ['parameters', 'x']],
    ['fading without a width', { continuation: { kind: 'fade' } }, ['continuation.width']],
    ['confining without a stiffness', { continuation: { kind: 'confine' } }, ['continuation.stiffness']],
    ['confining without a box', { continuation: { kind: 'confine', stiffness: 1 } }, ['visited']],
    ['starting nowhere', { start: { kind: 'points' } }, ['start.points']],
    [
      'starting points of the wrong length',
      { start: { kind: 'points', points: [[1]] } },
      ['start.points[0]'],
    ],
    [
      'a negative spread',
      { start: { kind: 'normal', mean: [0, 0], spread: [1, -1] } },
      ['start.spread[1]', '-1'],
    ],
    ['a negative interval', { observation: { ...GOOD.observation, interval: -1 } }, ['observation.interval']],
    [
      'one localization error for two axes',
      { observation: { ...GOOD.observation, localizationError: [0] } },
      ['observation.localizationError'],
    ],
    ['a draw of the wrong length', { ensemble: { draws: [[1, 2]] } }, ['ensemble.draws[0]', '2']],
  ])('with %s is refused, naming the field', (_title, change, words) => {
    const { message } = refusal(change);
    for (const word of words) expect(message).toContain(word);
  });

  it.each([
    ['process.exit(1)', 'formula'],
    ['-k*(x', 'cannot be read'],
    ['-kk*x', 'did you mean k?'],
    ['w*x', 'is not known'],
  ])('with the formula %s is refused when it is made to run, naming the field', async (formula, word) => {
    const scenario = parseScenario({
      ...GOOD,
      coefficients: { ...GOOD.coefficients, force: { form: 'vector', formulas: ['0', formula] } },
    });
    await expect(createScenarioEvaluator(scenario)).rejects.toThrow(UsageError);
    await expect(createScenarioEvaluator(scenario)).rejects.toThrow(word);
    await expect(createScenarioEvaluator(scenario)).rejects.toThrow('coefficients.force.formulas[1]');
  });

  it('with a step too large to be stable is refused, and with a coarse one warned about', async () => {
    const stiff = { ...GOOD, parameters: { k: 10_000, g0: 2 } };
    await expect(
      simulateScenario(parseScenario({ ...stiff, integration: { step: 0.05 } }), { seed: 1 }),
    ).rejects.toThrow(/integration.step.*unstable/);
    const coarse = await simulateScenario(parseScenario({ ...stiff, integration: { step: 0.005 } }), {
      seed: 1,
    });
    expect(coarse.warnings.map(({ code }) => code)).toContain('coarse-step');
  });

  it('with a formula that turns negative is run with zero in its place and a counted warning', async () => {
    const scenario = parseScenario({
      ...GOOD,
      coefficients: { ...GOOD.coefficients, noise: { form: 'scalar', formulas: ['x'] } },
    });
    const { warnings } = await simulateScenario(scenario, { seed: 1, frames: 50 });
    const warning = warnings.find(({ code }) => code === 'negative-noise');
    expect(warning?.message).toMatch(/negative in \d+ steps/);
  });
});

it('refuses options that make no sense', async () => {
  const scenario = parseScenario(GOOD);
  await expect(simulateScenario(scenario, { seed: 1, tracks: 0 })).rejects.toThrow('--tracks');
  await expect(simulateScenario(scenario, { seed: 1, frames: 1.5 })).rejects.toThrow('--frames');
  await expect(simulateScenario(scenario, { seed: 1, interval: 0 })).rejects.toThrow('--interval');
  await expect(simulateScenario(scenario, { seed: 1, ensemble: true })).rejects.toThrow('ensemble');
});
