import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { assessStanding, samplesPerTrack } from '../../src/simulation/assessStanding.js';
import { createScenario } from '../../src/simulation/parseScenario.js';

const BASE: Omit<ScenarioInput, 'coefficients'> = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 1,
  order: 'first',
  axes: [{ kind: 'open' }],
  start: { kind: 'normal', mean: [0], spread: [0.6] },
  observation: { tracks: 20, frames: 501, interval: 0.1, localizationError: [0] },
};

function diffusing(drift: string, diffusion: number): ScenarioInput['coefficients'] {
  return {
    drift: { form: 'vector', formulas: [drift] },
    diffusion: { form: 'scalar', values: [diffusion] },
  };
}

function oscillator(
  stiffness: number,
  friction: number,
): Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients'> {
  return {
    order: 'second',
    coefficients: {
      force: { form: 'vector', formulas: [`-${stiffness}*x`] },
      friction: { form: 'scalar', values: [friction] },
      noise: { form: 'scalar', values: [2 * friction] },
    },
  };
}

/**
 * The slowest relaxation time of dq = −U′ dt + √(2D) dW on a fine grid: second eigenvalue of the symmetrised generator
 * with rates D/h² exp(∓ΔU/2D), by inverse iteration on its tridiagonal matrix without the stationary state.
 */
function slowestOnGrid(potential: (x: number) => number, diffusion: number, reach: number): number {
  const n = 1500;
  const h = (2 * reach) / n;
  const u = Float64Array.from({ length: n }, (_, i) => potential(-reach + (i + 0.5) * h) / diffusion);
  const rate = diffusion / h ** 2;
  const diagonal = new Float64Array(n).fill(1e-9); // a shift, so that the matrix can be inverted
  const ground = u.map((value) => Math.exp(-value / 2));
  for (let i = 0; i + 1 < n; i++) {
    diagonal[i] += rate * Math.exp((u[i] - u[i + 1]) / 2);
    diagonal[i + 1] += rate * Math.exp((u[i + 1] - u[i]) / 2);
  }
  let x = Float64Array.from({ length: n }, (_, i) => (i - n / 2) * ground[i]);
  let eigenvalue = 0;
  const square = ground.reduce((sum, value) => sum + value * value, 0);
  for (let round = 0; round < 60; round++) {
    const overlap = x.reduce((sum, value, i) => sum + value * ground[i], 0) / square;
    x = x.map((value, i) => value - overlap * ground[i]);
    const size = Math.sqrt(x.reduce((sum, value) => sum + value * value, 0));
    x = x.map((value) => value / size);
    // Thomas algorithm with off-diagonal −rate
    const c = new Float64Array(n);
    const y = new Float64Array(n);
    let pivot = diagonal[0];
    c[0] = -rate / pivot;
    y[0] = x[0] / pivot;
    for (let i = 1; i < n; i++) {
      pivot = diagonal[i] + rate * c[i - 1];
      c[i] = -rate / pivot;
      y[i] = (x[i] + rate * y[i - 1]) / pivot;
    }
    for (let i = n - 2; i >= 0; i--) y[i] -= c[i] * y[i + 1];
    eigenvalue = 1 / y.reduce((sum, value, i) => sum + value * x[i], 0);
    x = y;
  }
  return 1 / eigenvalue;
}

describe('the relaxation time of the whole process', () => {
  it.each<[string, Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients'>, number]>([
    ['a trap, first order: 1/k', { coefficients: diffusing('-0.05*x', 0.05) }, 20],
    [
      'a free particle on a circle: (L/2π)²/D',
      { axes: [{ kind: 'periodic', low: 0, high: 2 * Math.PI }], coefficients: diffusing('0', 0.5) },
      2,
    ],
    ['an underdamped oscillator: 2/Γ', oscillator(1, 0.4), 5],
    [
      'an overdamped oscillator: 1/(Γ/2 − √(Γ²/4 − k))',
      oscillator(1, 5),
      1 / (2.5 - Math.sqrt(2.5 ** 2 - 1)),
    ],
    [
      'a double well: the second eigenvalue of the generator',
      { coefficients: diffusing('4*(x-x^3)', 0.4), integration: { step: 0.01 } },
      slowestOnGrid((x) => x ** 4 - 2 * x ** 2, 0.4, 2.6),
    ],
  ])('of %s', async (_name, input, exact) => {
    const { relaxation } = await assessStanding(createScenario({ ...BASE, ...input }), 4);
    const { time, low, high } = relaxation ?? { time: null, low: 0, high: null };
    if (time === null || high === null) throw new Error('not resolved');
    expect(high / low).toBeLessThan(1.6); // 95 % within a fourth of the time itself
    // 3.3 standard errors; the interval reaches 1.96 of them on either side
    const deviation = Math.log(high / low) / (2 * 1.96);
    expect(Math.abs(Math.log(time / exact))).toBeLessThan(3.3 * deviation);
  });

  it('is a lower bound where the wells are too deep for the simulation', async () => {
    const { relaxation } = await assessStanding(
      createScenario({
        ...BASE,
        coefficients: diffusing('16*(x-x^3)', 0.3),
        integration: { step: 0.004 },
      }),
      1,
    );
    // Kramers: half of 2π/√(16·32) · exp(4/0.3) = 86 000
    expect(relaxation).toMatchObject({ time: null, high: null, samples: null });
    expect(relaxation?.low).toBeGreaterThan(1);
    expect(relaxation?.low).toBeLessThan(86_000);
  });

  it('is not given where a condition fails', async () => {
    const { relaxation } = await assessStanding(
      createScenario({ ...BASE, coefficients: diffusing('0.1*x', 1) }),
      1,
    );
    expect(relaxation).toBeNull();
  });
});

describe('the effective number of independent samples', () => {
  it('is one for a short track and T/(2τ) for a long one', () => {
    expect(samplesPerTrack(1e-6, 1)).toBeCloseTo(1, 6);
    expect(samplesPerTrack(0, 1)).toBe(1);
    expect(samplesPerTrack(2000, 1)).toBeCloseTo(1000 / (1 - 1 / 2000), 9);
    expect(samplesPerTrack(1.001e-3, 1)).toBeCloseTo(samplesPerTrack(0.999e-3, 1), 5);
  });

  it('follows from the time, track by track', async () => {
    const { relaxation } = await assessStanding(
      createScenario({ ...BASE, coefficients: diffusing('-x', 1) }),
      2,
    );
    const { time, low, high, samples } = relaxation ?? {};
    expect(samples?.value).toBeCloseTo(20 * samplesPerTrack(50, time ?? 0), -1);
    expect(samples?.low).toBeCloseTo(20 * samplesPerTrack(50, high ?? 0), -1);
    expect(samples?.high).toBeCloseTo(20 * samplesPerTrack(50, low ?? 0), -1);
  });
});
