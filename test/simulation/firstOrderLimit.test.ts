import { describe, expect, it } from 'vitest';
import type { Scenario } from '../../src/documents/Scenario.js';
import { UsageError } from '../../src/errors.js';
import type { CoefficientField, FieldForm, FieldName, Model } from '../../src/fields/CoefficientField.js';
import { buildFirstOrderScenario } from '../../src/simulation/buildFirstOrderScenario.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { createFirstOrderLimit, solveVelocityCovariance } from '../../src/simulation/firstOrderLimit.js';
import { parseScenario } from '../../src/simulation/parseScenario.js';
import { createBasisEvaluator, createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import { constantField, exampleFit, trapField } from '../support/fitFixtures.js';

/** A field of 1, x, x² along one axis. */
function quadratic(name: FieldName, form: FieldForm, rows: readonly (readonly number[])[]): CoefficientField {
  return {
    name,
    form,
    link: 'identity',
    basis: { kind: 'polynomial', degree: 2, centre: [0], scale: [1] },
    coefficients: rows.map((row) => [...row]),
  };
}

/** Stiffness and friction proportional to `scale`, noise uniform, so that the limit does not depend on it. */
function bowl(scale: number, reach = 3): Scenario {
  const model: Model = {
    order: 'second',
    dimensions: 1,
    periods: [0],
    force: trapField('force', scale, [0]),
    friction: quadratic('friction', 'scalar', [[scale, 0, 0.5 * scale]]),
    noise: constantField('noise', 'scalar', [2 * scale ** 2]),
  };
  return buildScenario(exampleFit({ model, reach, replicates: 20 }));
}

/** Γ = g (1 + x²/2), N = 2g²: μ = −x/(1 + x²/2) − x/(1 + x²/2)³ / g⁰ …, D = 1/(1 + x²/2)². */
const shape = (x: number): number => 1 + (x * x) / 2;
const diffusion = (x: number): number => 1 / shape(x) ** 2;
const inducedDrift = (x: number): number => -x / shape(x) ** 3; // −Γ′N/(2Γ³)
const drift = (x: number): number => -x / shape(x) + inducedDrift(x);

it('has the drift F/Γ − Γ′N/(2Γ³) and the diffusion N/(2Γ²) in one dimension', () => {
  const { scenario } = buildFirstOrderScenario(bowl(40));
  const evaluator = createBasisEvaluator(scenario);
  const found = [new Float64Array(1), new Float64Array(1)];
  for (const x of [-2.6, -1, -0.3, 0, 0.7, 2]) {
    evaluator.evaluateInto(Float64Array.of(x), found[0], new Float64Array(1), found[1]);
    // error of the splines (40 over a width of 6): (6/37)⁴ of a fourth derivative of some units
    expect(Math.abs(found[0][0] - drift(x))).toBeLessThan(1e-3);
    expect(Math.abs(found[1][0] / diffusion(x) - 1)).toBeLessThan(1e-3);
  }
  expect(scenario).toMatchObject({ order: 'first', reading: 'ito', standing: null });
  expect(parseScenario(JSON.parse(JSON.stringify(scenario)))).toEqual(scenario);
});

describe('for matrices', () => {
  it('the velocity covariance solves Γ J + J Γᵀ = N', () => {
    const gamma = Float64Array.of(2, -1, 0.3, 1, 3, 0.2, -0.5, 0.4, 1.5);
    const noise = Float64Array.of(2, 0.3, 0.1, 0.3, 1, -0.2, 0.1, -0.2, 3);
    const j = solveVelocityCovariance(gamma, noise, 3);
    for (let a = 0; a < 3; a++) {
      for (let b = 0; b < 3; b++) {
        let sum = 0;
        for (let k = 0; k < 3; k++) sum += gamma[a * 3 + k] * j[k * 3 + b] + j[a * 3 + k] * gamma[b * 3 + k];
        expect(sum).toBeCloseTo(noise[a * 3 + b], 12);
      }
    }
  });

  it('a magnetic field leaves D = T g/(g² + w²) and, at one temperature, the drift of thermal equilibrium', async () => {
    // Friction g(x)·1 plus a rotation, N = 2 T g: equilibrium whatever g is, so μ = ∇·(T Γ⁻¹)ᵀ without force:
    // μ_i = T Σ_j ∂_j (Γ⁻¹)_ij, for which the isothermal law is flat (Hottovy et al. 2015, section 4).
    const [w, temperature] = [2, 0.7];
    const scenario = parseScenario({
      format: 'wanderlaw-scenario',
      version: 1,
      dimensions: 2,
      order: 'second',
      axes: [{ kind: 'open' }, { kind: 'open' }],
      parameters: { w, t: temperature },
      coefficients: {
        force: { form: 'vector', values: [0, 0] },
        friction: { form: 'matrix', formulas: ['3+sin(x)', '-w', 'w', '3+sin(x)'] },
        noise: { form: 'scalar', formulas: ['2*t*(3+sin(x))'] },
      },
      start: { kind: 'normal', mean: [0, 0], spread: [1, 1] },
      observation: { tracks: 1, frames: 2, interval: 1, localizationError: [0, 0] },
    });
    const limit = createFirstOrderLimit(await createScenarioEvaluator(scenario), {
      shift: 1e-4,
      leastFriction: 1e-3,
      leastNoise: 1e-3,
    });
    const found = [new Float64Array(2), new Float64Array(4)];
    for (const x of [-1, 0.2, 2]) {
      limit.evaluateInto(Float64Array.of(x, 0.4), found[0], found[1]);
      const g = 3 + Math.sin(x);
      const d = (temperature * g) / (g * g + w * w);
      [d, 0, 0, d].forEach((value, i) => expect(found[1][i]).toBeCloseTo(value, 12));
      // Γ⁻¹ = [[g, w], [−w, g]]/(g² + w²); its derivative along x gives both components of the drift
      const slope = Math.cos(x) / (g * g + w * w) ** 2;
      expect(found[0][0]).toBeCloseTo(temperature * slope * (w * w - g * g), 6);
      expect(found[0][1]).toBeCloseTo(temperature * slope * 2 * g * w, 6);
    }
  });
});

describe('the second-order scenario and its limit', () => {
  /** ⟨x²⟩ of the stationary law ∝ exp(∫ μ/D)/D, by quadrature. */
  function meanSquare(mu: (x: number) => number): number {
    let exponent = 0;
    let [top, bottom] = [0, 0];
    const h = 1e-3;
    for (let x = h / 2; x < 6; x += h) {
      exponent += (h * mu(x)) / diffusion(x);
      const weight = Math.exp(exponent) / diffusion(x);
      top += x * x * weight;
      bottom += weight;
    }
    return top / bottom;
  }

  async function measure(scenario: Scenario, seed: number): Promise<{ mean: number; standardError: number }> {
    const n = 1500;
    const long: Scenario = {
      ...scenario,
      ensemble: null,
      integration: { step: scenario.order === 'second' ? 0.0015 : 0.02, integrator: null }, // Γh ≈ 0.05 where they are
      start: { kind: 'normal', points: [], velocities: [], mean: [0], spread: [0.7], warmUp: 0 },
      observation: { ...scenario.observation, tracks: n, frames: 2, interval: 3, localizationError: [0] },
    };
    const { tracks } = await simulateScenario(long, { seed });
    let [sum, square] = [0, 0];
    for (let track = 0; track < n; track++) {
      const x = tracks.positions[tracks.trackOffsets[track] + 1];
      sum += (x * x) / n;
      square += x ** 4 / n;
    }
    return { mean: sum, standardError: Math.sqrt((square - sum * sum) / n) };
  }

  it('agree where friction is high, and need the noise-induced drift for it', async () => {
    const exact = meanSquare(drift);
    const without = meanSquare((x) => drift(x) - inducedDrift(x));
    const second = bowl(30, 4);
    const { scenario: first, neglected } = buildFirstOrderScenario(second);
    expect(neglected.high).toBeLessThan(0.05);
    const slow = await measure(first, 1);
    const fast = await measure(second, 2);
    expect(Math.abs(slow.mean - exact)).toBeLessThan(4 * slow.standardError);
    expect(Math.abs(fast.mean - exact)).toBeLessThan(4 * fast.standardError + neglected.high * exact);
    expect(Math.abs(fast.mean - without)).toBeGreaterThan(6 * fast.standardError);
  });

  it('differ where it is not, which the neglected terms say', () => {
    const { scenario, neglected } = buildFirstOrderScenario(bowl(2));
    // |∂F|/Γ² = 2/4 at the middle
    expect(neglected.high).toBeGreaterThan(0.3);
    expect(scenario.warnings.map(({ code }) => code)).toContain('coarse-limit');
    expect(buildFirstOrderScenario(bowl(40)).scenario.warnings).toEqual([]);
  });
});

it('keeps the force’s own functions where friction and noise are uniform', () => {
  const { scenario } = buildFirstOrderScenario(
    buildScenario(exampleFit({ friction: 10, noise: 20, stiffness: 3 })),
  );
  const { drift: mu, diffusion: d } = scenario.coefficients;
  if (!mu || !('basis' in mu) || !d || !('basis' in d)) throw new Error('bases were expected');
  expect(mu.basis.kind).toBe('polynomial');
  expect(d.basis.kind).toBe('constant');
  expect(Math.exp(d.coefficients[0][0])).toBeCloseTo(0.1, 9); // the ridge of the projection is 1e-10
  expect(scenario.continuation).toMatchObject({ kind: 'confine', stiffness: 0.3 });
  expect(scenario.ensemble?.draws.length).toBeGreaterThan(20);
});

it('is refused for first-order fits and for scenarios that are not made of bases', () => {
  const first = buildScenario(exampleFit({ order: 'first' }));
  expect(() => buildFirstOrderScenario(first)).toThrow(UsageError);
  expect(() => buildFirstOrderScenario(first)).toThrow('--first-order');
  expect(() => buildFirstOrderScenario({ ...bowl(10), visited: null })).toThrow('made from a fit');
});
