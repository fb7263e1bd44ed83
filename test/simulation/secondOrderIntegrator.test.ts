import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { RandomStream, randomStream } from '../../src/numerics/random/RandomStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import type { Integrator } from '../../src/simulation/Integrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { recommendedStep } from '../../src/simulation/recommendedStep.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';

type Coefficients = ScenarioInput['coefficients'];

async function prepare(
  dimensions: number,
  coefficients: Coefficients,
  more: Partial<ScenarioInput> = {},
): Promise<{ integrator: Integrator; step: number }> {
  const scenario = createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions,
    order: 'second',
    axes: Array.from({ length: dimensions }, () => ({ kind: 'open' as const })),
    coefficients,
    start: { kind: 'normal', mean: new Array(dimensions).fill(0), spread: new Array(dimensions).fill(1) },
    observation: {
      tracks: 1,
      frames: 2,
      interval: 1,
      localizationError: new Array(dimensions).fill(0),
    },
    ...more,
  });
  const evaluator = await createScenarioEvaluator(scenario);
  return {
    integrator: createIntegrator(scenario, evaluator),
    step: recommendedStep(evaluator, scenario).step,
  };
}

function harmonic(stiffness: number, friction: number, temperature: number): Coefficients {
  return {
    force: { form: 'vector', formulas: [`-${stiffness}*x`] },
    friction: { form: 'scalar', values: [friction] },
    noise: { form: 'scalar', values: [2 * friction * temperature] },
  };
}

/** A stream whose normals are all the same given number: it makes a step of a linear problem visible as a map. */
class GivenNormals extends RandomStream {
  value = 0;

  override normal(): number {
    return this.value;
  }
}

/** The step of a linear one-dimensional problem as (q, v, ξ) → M (q, v) + g ξ. */
function readLinearMap(integrator: Integrator, step: number): { m: number[]; g: number[] } {
  const stream = new GivenNormals([1, 2, 3, 4]);
  const apply = (q: number, v: number, xi: number): number[] => {
    stream.value = xi;
    const position = new Float64Array([q]);
    const velocity = new Float64Array([v]);
    integrator.advance(position, velocity, 1, step, stream);
    return [position[0], velocity[0]];
  };
  const [a, c] = apply(1, 0, 0);
  const [b, e] = apply(0, 1, 0);
  return { m: [a, b, c, e], g: apply(0, 0, 1) };
}

/** Covariance (qq, qv, vv) after n steps from a fixed start: C ← M C Mᵀ + g gᵀ. */
function propagate({ m, g }: { m: number[]; g: number[] }, steps: number): [number, number, number] {
  const [a, b, c, e] = m;
  let [qq, qv, vv] = [0, 0, 0];
  for (let i = 0; i < steps; i++) {
    [qq, qv, vv] = [
      a * a * qq + 2 * a * b * qv + b * b * vv + g[0] * g[0],
      a * c * qq + (a * e + b * c) * qv + b * e * vv + g[0] * g[1],
      c * c * qq + 2 * c * e * qv + e * e * vv + g[1] * g[1],
    ];
  }
  return [qq, qv, vv];
}

/**
 * Brownian oscillator at time t from a fixed start, underdamped.
 * Uhlenbeck & Ornstein, Phys. Rev. 36 (1930) 823, section 5; Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, eqs.
 * (213)–(217); written from memory and confirmed by the convergence below.
 */
function oscillator(omega: number, beta: number, temperature: number, t: number) {
  const w = Math.sqrt(omega ** 2 - beta ** 2 / 4);
  const e = Math.exp(-beta * t);
  const half = Math.exp((-beta * t) / 2);
  const wave = (beta / (2 * w)) * Math.sin(2 * w * t);
  const square = (beta ** 2 / (2 * w ** 2)) * Math.sin(w * t) ** 2;
  return {
    mean: [half * (Math.cos(w * t) + (beta / (2 * w)) * Math.sin(w * t)), (half * Math.sin(w * t)) / w],
    qq: (temperature / omega ** 2) * (1 - e * (1 + wave + square)),
    vv: temperature * (1 - e * (1 - wave + square)),
    qv: ((temperature * beta) / w ** 2) * e * Math.sin(w * t) ** 2,
  };
}

describe('a Brownian oscillator (Uhlenbeck & Ornstein 1930; Chandrasekhar 1943)', () => {
  const [omega, beta, temperature] = [1.3, 0.8, 1.7];

  it('has the exact means and covariances at a finite time, with an error that falls as the square of the step', async () => {
    const { integrator } = await prepare(1, harmonic(omega ** 2, beta, temperature));
    const t = 2.1;
    const exact = oscillator(omega, beta, temperature, t);
    const errors = [256, 512].map((steps) => {
      const map = readLinearMap(integrator, t / steps);
      const [qq, qv, vv] = propagate(map, steps);
      const mean = [1, 0];
      for (let i = 0; i < steps; i++) {
        const [q, v] = mean;
        mean[0] = map.m[0] * q + map.m[1] * v;
        mean[1] = map.m[2] * q + map.m[3] * v;
      }
      return [qq - exact.qq, qv - exact.qv, vv - exact.vv, mean[0] - exact.mean[0]];
    });
    errors[0].forEach((error, i) => {
      expect(Math.abs(errors[1][i])).toBeLessThan(2e-4);
      expect(error / errors[1][i]).toBeCloseTo(4, 1);
    });
  });

  it('scatters over 20 000 particles as the closed form says, within 4 standard errors', async () => {
    const { integrator } = await prepare(1, harmonic(omega ** 2, beta, temperature));
    const t = 1.5;
    const exact = oscillator(omega, beta, temperature, t);
    const n = 20_000;
    const stream = randomStream(11, 'oscillator');
    const [x0, v0] = [0.5, -1];
    const q = new Float64Array(1);
    const v = new Float64Array(1);
    const sums = new Float64Array(5);
    const centre = x0 * exact.mean[0] + v0 * exact.mean[1];
    for (let i = 0; i < n; i++) {
      q[0] = x0;
      v[0] = v0;
      integrator.advance(q, v, 50, t / 50, stream);
      sums[0] += q[0] / n;
      sums[1] += v[0] / n;
      sums[2] += (q[0] * q[0]) / n;
      sums[3] += (q[0] * v[0]) / n;
      sums[4] += (v[0] * v[0]) / n;
    }
    expect(Math.abs(sums[0] - centre)).toBeLessThan(4 * Math.sqrt(exact.qq / n));
    expect(Math.abs(sums[2] - sums[0] ** 2 - exact.qq)).toBeLessThan(4 * exact.qq * Math.sqrt(2 / n));
    expect(Math.abs(sums[4] - sums[1] ** 2 - exact.vv)).toBeLessThan(4 * exact.vv * Math.sqrt(2 / n));
    const scatter = Math.sqrt((exact.qq * exact.vv + exact.qv ** 2) / n);
    expect(Math.abs(sums[3] - sums[0] * sums[1] - exact.qv)).toBeLessThan(4 * scatter);
  });

  it('keeps temperature and configurational average to 0.1 % at the recommended step', async () => {
    for (const friction of [0.05, 1, 20]) {
      const { integrator, step } = await prepare(1, harmonic(omega ** 2, friction, temperature));
      const [qq, , vv] = propagate(readLinearMap(integrator, step), 400_000);
      expect(Math.abs(qq / (temperature / omega ** 2) - 1)).toBeLessThan(1e-3);
      expect(Math.abs(vv / temperature - 1)).toBeLessThan(1e-3);
    }
  });

  it('has the exact configurational average at any stable step, and the temperature T/(1 − (ωh)²/4)', async () => {
    const { integrator } = await prepare(1, harmonic(omega ** 2, beta, temperature));
    for (const step of [0.8, 0.4, 0.2]) {
      const [qq, , vv] = propagate(readLinearMap(integrator, step), 20_000);
      expect((qq * omega ** 2) / temperature).toBeCloseTo(1, 9);
      expect((vv / temperature) * (1 - (omega * step) ** 2 / 4)).toBeCloseTo(1, 9);
    }
  });
});

describe('a pendulum', () => {
  it('converges to the Boltzmann average with the square of the step', async () => {
    // U = −cos x, T = 1: ⟨cos x⟩ = I₁(1)/I₀(1) (Abramowitz & Stegun 9.6.19; series summed to rounding).
    const exact = 0.44638996589653457;
    const { integrator } = await prepare(1, {
      force: { form: 'vector', formulas: ['-sin(x)'] },
      friction: { form: 'scalar', values: [1] },
      noise: { form: 'scalar', values: [2] },
    });
    const measure = (step: number, steps: number): { error: number; standardError: number } => {
      const stream = randomStream(5, 'pendulum', Math.round(step * 1000));
      const q = new Float64Array(1);
      const v = new Float64Array(1);
      const batches = 50;
      let sum = 0;
      let square = 0;
      for (let batch = 0; batch < batches; batch++) {
        let mean = 0;
        for (let i = 0; i < steps / batches; i++) {
          integrator.advance(q, v, 1, step, stream);
          mean += (Math.cos(q[0]) * batches) / steps;
        }
        sum += mean / batches;
        square += (mean * mean) / batches;
      }
      return { error: sum - exact, standardError: Math.sqrt((square - sum * sum) / (batches - 1)) };
    };
    const coarse = measure(0.8, 3_000_000);
    const middle = measure(0.4, 5_000_000);
    const fine = measure(0.06, 2_000_000);
    expect(Math.abs(coarse.error)).toBeGreaterThan(20 * coarse.standardError);
    // four times the error at twice the step, within 4 standard errors and a tenth for the fourth power of the step
    const slack =
      4 * Math.hypot(coarse.standardError, 4 * middle.standardError) + 0.1 * Math.abs(coarse.error);
    expect(Math.abs(coarse.error - 4 * middle.error)).toBeLessThan(slack);
    expect(Math.abs(fine.error)).toBeLessThan(4 * fine.standardError);
  });
});

describe('the stationary law of a gradient force', () => {
  it('is exp(−U/T) in the positions and normal in the velocities, independent of each other', async () => {
    // Also with friction that varies over space, as long as noise = 2 T friction everywhere.
    for (const friction of ['1', '1+0.8*tanh(x)']) {
      const { integrator } = await prepare(2, {
        force: { form: 'vector', formulas: ['-x', '-y^3'] },
        friction: { form: 'scalar', formulas: [friction] },
        noise: { form: 'scalar', formulas: [`2*(${friction})`] },
      });
      const stream = randomStream(3, `gradient ${friction}`);
      const n = 6000;
      const q = new Float64Array(2);
      const v = new Float64Array(2);
      const sums = { xx: 0, y4: 0, vv: 0, xxvv: 0, xv: 0 };
      for (let i = 0; i < n; i++) {
        q[0] = stream.normal();
        q[1] = 0.8 * stream.normal();
        v[0] = stream.normal();
        v[1] = stream.normal();
        integrator.advance(q, v, 120, 0.1, stream);
        sums.xx += q[0] ** 2 / n;
        sums.y4 += q[1] ** 4 / n;
        sums.vv += v[0] ** 2 / n;
        sums.xv += (q[0] * v[0]) / n;
        sums.xxvv += (q[0] ** 2 * v[0] ** 2) / n;
      }
      const bound = 4 / Math.sqrt(n);
      const bias = 0.005; // of the step: (ωh)²/4 and its like
      expect(Math.abs(sums.xx - 1)).toBeLessThan(bound * Math.SQRT2 + bias);
      expect(Math.abs(sums.vv - 1)).toBeLessThan(bound * Math.SQRT2 + bias);
      expect(Math.abs(sums.y4 - 1)).toBeLessThan(bound * 2 + bias); // Var y⁴ = ⟨y⁸⟩ − 1 = 5 − 1
      expect(Math.abs(sums.xv)).toBeLessThan(bound);
      expect(Math.abs(sums.xxvv - 1)).toBeLessThan(bound * Math.sqrt(8) + bias);
    }
  });
});

describe('matrix friction with a rotation', () => {
  it('diffuses as in a magnetic field, D = T g/(g² + w²)', async () => {
    // Kurşunoğlu, Ann. Phys. 17 (1962) 259; Green–Kubo integral of e^{−gt} cos(wt), computed here by hand.
    const [g, w] = [1, 2];
    const { integrator } = await prepare(2, {
      force: { form: 'vector', values: [0, 0] },
      friction: { form: 'matrix', values: [g, -w, w, g] },
      noise: { form: 'scalar', values: [2 * g] },
    });
    const stream = randomStream(8, 'rotation');
    const n = 3000;
    const [step, steps] = [0.05, 600];
    const t = step * steps;
    let square = 0;
    const q = new Float64Array(2);
    const v = new Float64Array(2);
    for (let i = 0; i < n; i++) {
      q.fill(0);
      v[0] = stream.normal();
      v[1] = stream.normal();
      integrator.advance(q, v, steps, step, stream);
      square += (q[0] ** 2 + q[1] ** 2) / n;
    }
    // ⟨|q|²⟩ = 4 ∫₀ᵗ (t − s) e^{−gs} cos(ws) ds = 4 [t g/(g²+w²) − (g²−w²)/(g²+w²)²] for e^{−gt} ≈ 0
    const exact = 4 * ((t * g) / (g * g + w * w) - (g * g - w * w) / (g * g + w * w) ** 2);
    expect(Math.abs(square / exact - 1)).toBeLessThan(4 / Math.sqrt(n) + 0.003);
  });
});

it('conserves energy on average without friction and noise', async () => {
  const { integrator } = await prepare(1, {
    force: { form: 'vector', formulas: ['-x-x^3'] },
    friction: { form: 'scalar', values: [0] },
    noise: { form: 'scalar', values: [0] },
  });
  const q = new Float64Array([1]);
  const v = new Float64Array([0]);
  const energy = (): number => v[0] ** 2 / 2 + q[0] ** 2 / 2 + q[0] ** 4 / 4;
  const before = energy();
  integrator.advance(q, v, 1_000_000, 0.02, randomStream(1, 'energy'));
  expect(Math.abs(energy() / before - 1)).toBeLessThan(2e-3); // of order h², without creep
});
