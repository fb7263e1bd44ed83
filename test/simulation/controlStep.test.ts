import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { controlStep, type StepControl } from '../../src/simulation/controlStep.js';
import { CoupledStream } from '../../src/simulation/CoupledStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import { createStartDraw } from '../../src/simulation/startDraw.js';

const BASE: Omit<ScenarioInput, 'coefficients'> = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 1,
  order: 'second',
  axes: [{ kind: 'open' }],
  start: { kind: 'normal', mean: [0], spread: [1] },
  observation: { tracks: 3, frames: 101, interval: 0.5, localizationError: [0] },
};

const oscillator: ScenarioInput['coefficients'] = {
  force: { form: 'vector', formulas: ['-x'] },
  friction: { form: 'scalar', values: [0.8] },
  noise: { form: 'scalar', values: [1.6] },
};

const NOISY_WELL: Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients'> = {
  order: 'first',
  coefficients: {
    drift: { form: 'vector', formulas: ['-x'] },
    diffusion: { form: 'scalar', formulas: ['0.5*(1+x^2/4)'] },
  },
};

async function control(
  input: Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients'>,
  step: number,
  tolerance: number,
): Promise<StepControl> {
  const scenario = createScenario({ ...BASE, ...input });
  const evaluator = await createScenarioEvaluator(scenario);
  return controlStep(createIntegrator(scenario, evaluator), {
    step,
    stable: 2,
    tolerance,
    seed: 3,
    interval: scenario.observation.interval,
    duration: 50,
    drawStart: createStartDraw(scenario, evaluator),
  });
}

describe('a coupled stream', () => {
  it('gives standard normals at every level, which add up to the same path', () => {
    const source = randomStream(1, 'fine');
    const d = 2;
    const fine = Float64Array.from({ length: 4000 * d }, () => source.normal());
    const read = (ratio: number): Float64Array => {
      const stream = new CoupledStream([1, 2, 3, 4]);
      stream.load(fine, ratio, d);
      return Float64Array.from({ length: (4000 / ratio) * d }, () => stream.normal());
    };
    for (const ratio of [1, 2, 4]) {
      const values = read(ratio);
      const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
      const square = values.reduce((sum, value) => sum + value * value, 0) / values.length;
      expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(values.length));
      expect(Math.abs(square - 1)).toBeLessThan(4 * Math.sqrt(2 / values.length));
      // the path of the second axis over 40 fine steps
      let path = 0;
      for (let step = 0; step < 40 / ratio; step++) path += values[step * d + 1] * Math.sqrt(ratio);
      let exact = 0;
      for (let step = 0; step < 40; step++) exact += fine[step * d + 1];
      expect(path).toBeCloseTo(exact, 10);
    }
  });
});

describe('halving the step', () => {
  it('measures order 2 and the error (ωh)²/4 of an oscillator’s temperature', async () => {
    const found = await control({ coefficients: oscillator }, 0.25, 0.5);
    expect(found).toMatchObject({ step: 0.25, halvings: 0, converged: true, average: 'squared velocity x' });
    // T/(1 − (ωh)²/4): see the tests of the integrator
    expect(Math.abs(found.error - 0.25 ** 2 / 4)).toBeLessThan(4 * found.errorDeviation + 5e-4);
    expect(Math.abs((found.order ?? 0) - 2)).toBeLessThan(4 * (found.orderDeviation ?? 0) + 0.1);
  });

  it('goes on until the tolerance is met', async () => {
    const found = await control({ coefficients: oscillator }, 0.5, 0.003);
    expect(found.converged).toBe(true);
    expect(found.halvings).toBeGreaterThanOrEqual(2);
    expect(found.error).toBeLessThan(0.003 + 2 * found.errorDeviation);
    expect(Math.abs((found.order ?? 0) - 2)).toBeLessThan(0.4);
  });

  it('looks at larger steps for the order where the step was good from the start', async () => {
    const found = await control({ coefficients: oscillator }, 0.05, 0.01);
    expect(found).toMatchObject({ step: 0.05, halvings: 0, converged: true });
    expect(Math.abs((found.order ?? 0) - 2)).toBeLessThan(4 * (found.orderDeviation ?? 0) + 0.2);
  });

  it('measures order 2 with noise that depends on place too', async () => {
    const found = await control(NOISY_WELL, 0.125, 0.5);
    expect(found.order).not.toBeNull();
    expect(Math.abs((found.order ?? 0) - 2)).toBeLessThan(4 * (found.orderDeviation ?? 0) + 0.2);
  });
});

describe('simulate with a tolerance', () => {
  const scenario = createScenario({ ...BASE, coefficients: oscillator, integration: { step: 0.5 } });

  it('uses the step that was found, the same for the same seed', async () => {
    const one = await simulateScenario(scenario, { seed: 1, tolerance: 0.02 });
    expect(one.stepControl?.step).toBe(one.step);
    expect(one.step).toBeLessThan(0.5);
    const two = await simulateScenario(scenario, { seed: 1, tolerance: 0.02 });
    expect(two.tracks.positions).toEqual(one.tracks.positions);
    expect((await simulateScenario(scenario, { seed: 1 })).stepControl).toBeNull();
  });

  it.each([0, 1, -0.1, Number.NaN])('refuses %s', async (tolerance) => {
    await expect(simulateScenario(scenario, { seed: 1, tolerance })).rejects.toThrow('--tolerance');
  });
});
