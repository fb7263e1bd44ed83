import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { RandomStream } from '../../src/numerics/random/RandomStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';

const TURN = 2 * Math.PI;

function scenarioOf(dimensions: number, more: Partial<ScenarioInput>) {
  return createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions,
    order: 'first',
    axes: Array.from({ length: dimensions }, () => ({ kind: 'periodic' as const, low: 0, high: TURN })),
    coefficients: {
      drift: { form: 'vector', values: new Array(dimensions).fill(0) },
      diffusion: { form: 'scalar', values: [1] },
    },
    start: { kind: 'uniform', mean: new Array(dimensions).fill(0), spread: new Array(dimensions).fill(TURN) },
    observation: { tracks: 1, frames: 2, interval: 1, localizationError: new Array(dimensions).fill(0) },
    ...more,
  });
}

interface Average {
  readonly mean: number;
  readonly standardError: number;
}

/** Means of functions over the last positions of many tracks, with their standard errors. */
async function averageAtEnd(
  scenario: ReturnType<typeof createScenario>,
  functions: readonly ((place: Float64Array) => number)[],
  seed: number,
): Promise<Average[]> {
  const { tracks } = await simulateScenario(scenario, { seed });
  const d = tracks.dimensions;
  const n = tracks.trackNames.length;
  return functions.map((f) => {
    let sum = 0;
    let square = 0;
    for (let track = 0; track < n; track++) {
      const row = tracks.trackOffsets[track + 1] - 1;
      const value = f(tracks.positions.subarray(row * d, (row + 1) * d));
      sum += value / n;
      square += (value * value) / n;
    }
    return { mean: sum, standardError: Math.sqrt((square - sum * sum) / n) };
  });
}

/** ⟨f⟩ under a density on one turn, by the midpoint rule (exact to rounding for smooth periodic functions). */
function averageOverTurn(f: (x: number) => number, density: (x: number) => number): number {
  let [top, bottom] = [0, 0];
  for (let i = 0; i < 2000; i++) {
    const x = ((i + 0.5) / 2000) * TURN;
    top += f(x) * density(x);
    bottom += density(x);
  }
  return top / bottom;
}

describe('without drift, diffusion that varies over a circle', () => {
  // Stationary density of dx = √(2D) ∘ dW: ∝ 1/D (Itô), D^(−1/2) (Stratonovich), flat (isothermal);
  // from the Fokker–Planck equation, Risken, The Fokker-Planck Equation (1989), section 5.2; Lau & Lubensky,
  // Phys. Rev. E 76 (2007) 011123.
  const diffusion = (x: number): number => 1 + 0.8 * Math.sin(x);

  it.each([
    ['ito', 1],
    ['stratonovich', 0.5],
    ['isothermal', 0],
  ] as const)('settles on the density of the %s reading', async (reading, power) => {
    const scenario = scenarioOf(1, {
      reading,
      coefficients: {
        drift: { form: 'vector', values: [0] },
        diffusion: { form: 'scalar', formulas: ['1+0.8*sin(x)'] },
      },
      observation: { tracks: 4000, frames: 2, interval: 8, localizationError: [0] },
      integration: { step: 0.04 },
    });
    const functions = [Math.sin, (x: number): number => Math.cos(2 * x)];
    const found = await averageAtEnd(
      scenario,
      functions.map(
        (f) =>
          ([x]) =>
            f(x),
      ),
      1,
    );
    found.forEach(({ mean, standardError }, i) => {
      const exact = averageOverTurn(functions[i], (x) => diffusion(x) ** -power);
      expect(Math.abs(mean - exact)).toBeLessThan(4 * standardError);
    });
  });

  it('with a drift, follows exp(∫ μ/D)/D at the Itô reading', async () => {
    const scenario = scenarioOf(1, {
      axes: [{ kind: 'open' }],
      coefficients: {
        drift: { form: 'vector', formulas: ['-x'] },
        diffusion: { form: 'scalar', formulas: ['0.5*(1+x^2/4)'] },
      },
      start: { kind: 'normal', mean: [0], spread: [1] },
      observation: { tracks: 8000, frames: 2, interval: 6, localizationError: [0] },
      integration: { step: 0.05 },
    });
    // ∫ μ/D = −4 log(1 + x²/4): density ∝ (1 + x²/4)⁻⁵, of which ⟨x²⟩ = 4/7 (Student's t with 9 degrees of freedom)
    const [{ mean, standardError }] = await averageAtEnd(scenario, [([x]) => x * x], 3);
    expect(Math.abs(mean - 4 / 7)).toBeLessThan(4 * standardError + 1e-3);
  });

  it('in two dimensions settles on 1/D', async () => {
    const scenario = scenarioOf(2, {
      coefficients: {
        drift: { form: 'vector', values: [0, 0] },
        diffusion: { form: 'scalar', formulas: ['1+0.8*sin(x)*sin(y)'] },
      },
      observation: { tracks: 4000, frames: 2, interval: 6, localizationError: [0, 0] },
      integration: { step: 0.04 },
    });
    const f = (x: number, y: number): number => Math.sin(x) * Math.sin(y);
    let [top, bottom] = [0, 0];
    for (let i = 0; i < 200; i++) {
      for (let j = 0; j < 200; j++) {
        const value = f((i * TURN) / 200, (j * TURN) / 200);
        top += value / (1 + 0.8 * value);
        bottom += 1 / (1 + 0.8 * value);
      }
    }
    const [{ mean, standardError }] = await averageAtEnd(scenario, [([x, y]) => f(x, y)], 4);
    expect(Math.abs(mean - top / bottom)).toBeLessThan(4 * standardError);
  });

  it('as a matrix is isothermally flat too', async () => {
    const scenario = scenarioOf(2, {
      reading: 'isothermal',
      coefficients: {
        drift: { form: 'vector', values: [0, 0] },
        diffusion: { form: 'matrix', formulas: ['1+0.6*sin(x)', '0.4*cos(y)', '1+0.3*sin(x+y)'] },
      },
      observation: { tracks: 2000, frames: 2, interval: 5, localizationError: [0, 0] },
      integration: { step: 0.05 },
    });
    const functions = [0, 1].flatMap((axis) =>
      [Math.sin, Math.cos].map((f) => (place: Float64Array) => f(place[axis])),
    );
    for (const { mean, standardError } of await averageAtEnd(scenario, functions, 5)) {
      expect(Math.abs(mean)).toBeLessThan(4 * standardError);
    }
  });
});

/** A stream that gives one chosen normal. */
class GivenNormal extends RandomStream {
  value = 0;

  override normal(): number {
    return this.value;
  }
}

it('moves the moments of geometric Brownian motion with weak order 2', async () => {
  // dq = a q dt + b q dW: E q(t) = e^{at}, E q(t)² = e^{(2a+b²)t} (Kloeden & Platen 1992, section 4.4).
  const [a, b] = [-0.5, 0.7];
  const scenario = scenarioOf(1, {
    axes: [{ kind: 'open' }],
    coefficients: {
      drift: { form: 'vector', formulas: [`${a}*x`] },
      diffusion: { form: 'scalar', formulas: [`${(b * b) / 2}*x^2`] },
    },
  });
  const integrator = createIntegrator(scenario, await createScenarioEvaluator(scenario));
  const stream = new GivenNormal([1, 2, 3, 4]);
  const q = new Float64Array(1);
  const none = new Float64Array(1);
  // Expectation over one normal by Gauss–Hermite with 3 nodes (exact to degree 5; q² is of degree 4 in it).
  const momentError = (steps: number, power: number, exact: number): number => {
    let factor = 0;
    for (const [node, weight] of [
      [-Math.sqrt(3), 1 / 6],
      [0, 2 / 3],
      [Math.sqrt(3), 1 / 6],
    ]) {
      q[0] = 1;
      stream.value = node;
      integrator.advance(q, none, 1, 1 / steps, stream);
      factor += weight * q[0] ** power;
    }
    return factor ** steps - exact;
  };
  for (const [power, exact] of [
    [1, Math.exp(a)],
    [2, Math.exp(2 * a + b * b)],
  ]) {
    const ratio = momentError(16, power, exact) / momentError(32, power, exact);
    expect(Math.log2(ratio)).toBeGreaterThan(1.8);
    expect(Math.log2(ratio)).toBeLessThan(2.2);
  }
});

it('gives the displacements of Einstein’s grain', async () => {
  // Einstein, Ann. Phys. 17 (1905) 549, end of section 5: grain of diameter 0.001 mm in water at 17 °C with viscosity
  // 1.35e-2 (cgs) and N = 6e23: λ = 0.8 µm in one second, about 6 µm in a minute. Numbers from memory.
  const gas = 8.31e7; // erg/(mol K)
  const kelvin = 273.15 + 17;
  const perSecond = (gas * kelvin) / 6e23 / (6 * Math.PI * 1.35e-2 * 0.5e-4); // cm²/s
  const scenario = scenarioOf(1, {
    axes: [{ kind: 'open' }],
    units: { length: 'µm', time: 's' },
    coefficients: {
      drift: { form: 'vector', values: [0] },
      diffusion: { form: 'scalar', values: [perSecond * 1e8] },
    },
    start: { kind: 'points', points: [[0]] },
    observation: { tracks: 2000, frames: 61, interval: 1, localizationError: [0] },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 1905 });
  const rootMeanSquare = (frame: number): number => {
    let sum = 0;
    for (let track = 0; track < 2000; track++)
      sum += tracks.positions[tracks.trackOffsets[track] + frame] ** 2;
    return Math.sqrt(sum / 2000);
  };
  const second = rootMeanSquare(1);
  const minute = rootMeanSquare(60);
  // a root mean square over n independent normals scatters by 1/√(2n) = 1.6 %: 3 standard errors
  expect(Math.abs(second / Math.sqrt(2 * perSecond * 1e8) - 1)).toBeLessThan(3 / Math.sqrt(4000));
  expect(second.toFixed(1)).toBe('0.8');
  expect(Math.round(minute)).toBe(6);
});
