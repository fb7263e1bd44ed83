/** Scenarios against physics known from elsewhere: escape over a barrier, hot spots, stirring, a bead in water. */

import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import { RandomStream, randomStream } from '../../src/numerics/random/RandomStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import type { Integrator } from '../../src/simulation/Integrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';

const TURN = 2 * Math.PI;

function describeScenario(
  dimensions: number,
  more: Partial<ScenarioInput> & Pick<ScenarioInput, 'coefficients' | 'order'>,
) {
  return createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions,
    axes: Array.from({ length: dimensions }, () => ({ kind: 'open' as const })),
    start: { kind: 'normal', mean: new Array(dimensions).fill(0), spread: new Array(dimensions).fill(1) },
    observation: { tracks: 1, frames: 2, interval: 1, localizationError: new Array(dimensions).fill(0) },
    ...more,
  });
}

async function prepare(scenario: ReturnType<typeof createScenario>): Promise<Integrator> {
  return createIntegrator(scenario, await createScenarioEvaluator(scenario));
}

describe('escape over a barrier', () => {
  it('takes the mean first-passage time of Pontryagin, Andronov & Vitt at first order', async () => {
    // dq = −U′ dt + √(2D) dW from a to b, reflecting far to the left: τ = (1/D) ∫ₐᵇ dy e^{U(y)/D} ∫₋∞ʸ dz e^{−U(z)/D}
    // (Pontryagin, Andronov & Vitt 1933; Gardiner, Handbook of Stochastic Methods, section 5.2), by the midpoint rule.
    const [a, b, diffusion] = [-1, 1, 0.35];
    const u = (x: number): number => (x * x - 1) ** 2;
    const h = 1e-3;
    let inner = 0;
    let exact = 0;
    for (let y = -3 + h / 2; y < b; y += h) {
      inner += h * Math.exp(-u(y) / diffusion);
      if (y > a) exact += (h * Math.exp(u(y) / diffusion) * inner) / diffusion;
    }
    const integrator = await prepare(
      describeScenario(1, {
        order: 'first',
        coefficients: {
          drift: { form: 'vector', formulas: ['4*x-4*x^3'] },
          diffusion: { form: 'scalar', values: [diffusion] },
        },
      }),
    );
    // Looked at only between steps, a boundary is passed late: it acts as if 0.5826 σ√h further out (Broadie,
    // Glasserman & Kou, Math. Finance 7 (1997) 325).
    const step = 0.005;
    const seen = b - 0.5826 * Math.sqrt(2 * diffusion * step);
    const n = 700;
    const q = new Float64Array(1);
    const none = new Float64Array(1);
    let sum = 0;
    for (let i = 0; i < n; i++) {
      const stream = randomStream(1, 'first passage', i);
      q[0] = a;
      let steps = 0;
      while (q[0] < seen) {
        integrator.advance(q, none, 1, step, stream);
        steps++;
      }
      sum += (steps * step) / n;
    }
    // nearly exponential: relative standard error 1/√n
    expect(Math.abs(sum / exact - 1)).toBeLessThan(4 / Math.sqrt(n));
  });

  it('has the rate of Kramers in the spatial-diffusion regime', async () => {
    // Kramers, Physica 7 (1940) 284, eq. (25): k = (ω_a/2πω_b) [√(γ²/4 + ω_b²) − γ/2] e^{−ΔU/T}
    const [barrier, temperature, friction] = [4, 1, 8];
    const [wellRate, barrierRate] = [Math.sqrt(8 * barrier), Math.sqrt(4 * barrier)];
    const transmission = Math.sqrt(friction ** 2 / 4 + barrierRate ** 2) - friction / 2;
    const rate = (wellRate / (TURN * barrierRate)) * transmission * Math.exp(-barrier / temperature);
    const integrator = await prepare(
      describeScenario(1, {
        order: 'second',
        coefficients: {
          force: { form: 'vector', formulas: [`${4 * barrier}*(x-x^3)`] },
          friction: { form: 'scalar', values: [friction] },
          noise: { form: 'scalar', values: [2 * friction * temperature] },
        },
      }),
    );
    const q = new Float64Array([1]);
    const v = new Float64Array(1);
    const stream = randomStream(2, 'kramers');
    const [step, steps] = [0.02, 2_500_000];
    let side = 1;
    let crossings = 0;
    for (let i = 0; i < steps; i++) {
      integrator.advance(q, v, 1, step, stream);
      if (q[0] * side < -0.7) {
        side = -side; // a passage counts once it has reached the other well
        crossings++;
      }
    }
    expect(crossings).toBeGreaterThan(250);
    // The formula holds for high barriers; at a barrier of 4 T the quartic well escapes slower by some 3 T/8ΔU ≈ 10 %
    // (Edholm & Leimar, Physica A 98 (1979) 313, overdamped; from memory). `npm run study:integrators` has the table.
    const found = crossings / (steps * step) / rate;
    expect(found).toBeGreaterThan(0.9 - 4 / Math.sqrt(crossings));
    expect(found).toBeLessThan(1 + 4 / Math.sqrt(crossings));
  });
});

describe('a ring that is hot on one side', () => {
  const temperature = (x: number): number => 1 + 0.6 * Math.cos(x);

  it('is emptier there: density ∝ 1/T with uniform friction, and velocities of the local temperature', async () => {
    // van Kampen, IBM J. Res. Dev. 32 (1988) 107: μ = 0 and D = T/Γ in the Itô reading
    const scenario = describeScenario(1, {
      order: 'second',
      axes: [{ kind: 'periodic', low: 0, high: TURN }],
      coefficients: {
        force: { form: 'vector', values: [0] },
        friction: { form: 'scalar', values: [6] },
        noise: { form: 'scalar', formulas: ['12*(1+0.6*cos(x))'] },
      },
      start: { kind: 'uniform', mean: [0], spread: [TURN] },
    });
    const integrator = await prepare(scenario);
    const n = 2500;
    const q = new Float64Array(1);
    const v = new Float64Array(1);
    let cosine = 0;
    let square = 0;
    let ratio = 0;
    for (let i = 0; i < n; i++) {
      const stream = randomStream(4, 'hot ring', i);
      q[0] = TURN * stream.uniform();
      v[0] = stream.normal();
      integrator.advance(q, v, 1500, 0.02, stream); // 30 = 5 relaxation times Γ L²/(4π² T)
      cosine += Math.cos(q[0]) / n;
      square += Math.cos(q[0]) ** 2 / n;
      ratio += v[0] ** 2 / temperature(q[0]) / n;
    }
    let [top, bottom] = [0, 0];
    for (let i = 0; i < 400; i++) {
      const x = (i * TURN) / 400;
      top += Math.cos(x) / temperature(x);
      bottom += 1 / temperature(x);
    }
    // ℓ²|∂T/T|² with ℓ² = T/Γ²: terms of some 1 % are left out of the limit, at either place
    const standardError = Math.sqrt((square - cosine ** 2) / n);
    expect(Math.abs(cosine - top / bottom)).toBeLessThan(4 * standardError + 0.01);
    expect(cosine).toBeLessThan(-10 * standardError); // neither flat, as with one temperature, nor crowded where hot
    expect(Math.abs(ratio - 1)).toBeLessThan(4 * Math.sqrt(2 / n) + 0.02);
  });

  it('drives a current through a washboard that is out of step with it (Büttiker, Landauer)', async () => {
    // Büttiker, Z. Phys. B 68 (1987) 161; Landauer, J. Stat. Phys. 53 (1988) 233. Itô, μ = −sin(x − φ), D = T:
    // with Ψ(x) = ∫₀ˣ μ/D the current is J = (1 − e^{−Ψ(L)}) / ∫₀ᴸ dx e^{Ψ(x)}/D ∫ₓ^{x+L} dy e^{−Ψ(y)}
    // (Stratonovich 1958; Risken, The Fokker-Planck Equation, section 11.3), here by the midpoint rule.
    const force = (x: number): number => -Math.sin(x - 1.2);
    const nodes = 800;
    const h = TURN / nodes;
    const psi = new Float64Array(2 * nodes + 1);
    for (let i = 0; i < 2 * nodes; i++)
      psi[i + 1] = psi[i] + (h * force((i + 0.5) * h)) / temperature((i + 0.5) * h);
    let norm = 0;
    for (let i = 0; i < nodes; i++) {
      let inner = 0;
      for (let j = i; j < i + nodes; j++) inner += h * Math.exp(-psi[j]);
      norm += (h * Math.exp(psi[i]) * inner) / temperature(i * h);
    }
    const velocity = (TURN * (1 - Math.exp(-psi[nodes]))) / norm;
    const { tracks } = await simulateScenario(
      describeScenario(1, {
        order: 'first',
        axes: [{ kind: 'periodic', low: 0, high: TURN }],
        coefficients: {
          drift: { form: 'vector', formulas: ['-sin(x-1.2)'] },
          diffusion: { form: 'scalar', formulas: ['1+0.6*cos(x)'] },
        },
        start: { kind: 'uniform', mean: [0], spread: [TURN], warmUp: 4 },
        observation: { tracks: 400, frames: 2, interval: 100, localizationError: [0] },
        integration: { step: 0.05 },
      }),
      { seed: 6 },
    );
    let [sum, square] = [0, 0];
    for (let track = 0; track < 400; track++) {
      const moved = (tracks.positions[2 * track + 1] - tracks.positions[2 * track]) / 100;
      sum += moved / 400;
      square += moved ** 2 / 400;
    }
    const standardError = Math.sqrt((square - sum * sum) / 400);
    expect(Math.abs(velocity)).toBeGreaterThan(8 * standardError);
    expect(Math.abs(sum - velocity)).toBeLessThan(4 * standardError);
  });
});

describe('a stirring force added to an uneven trap', () => {
  const [kx, ky, stirring, friction, temperature] = [1, 2.5, 0.8, 1.4, 0.9];

  /** A stream whose normals are handed in one by one. */
  class GivenNormals extends RandomStream {
    values = [0, 0];
    next = 0;

    override normal(): number {
      return this.values[this.next++ % 2];
    }
  }

  it('tilts the density and drives a current round, as the Lyapunov equation says', async () => {
    const integrator = await prepare(
      describeScenario(2, {
        order: 'second',
        coefficients: {
          force: { form: 'vector', formulas: [`-${kx}*x-${stirring}*y`, `-${ky}*y+${stirring}*x`] },
          friction: { form: 'scalar', values: [friction] },
          noise: { form: 'scalar', values: [2 * friction * temperature] },
        },
      }),
    );
    // A step is linear: z ← M z + G ξ, read off from unit vectors, and its covariance is iterated to the end.
    const step = 0.02;
    const stream = new GivenNormals([1, 2, 3, 4]);
    const map = (z: readonly number[], xi: readonly number[]): number[] => {
      stream.values = [...xi];
      stream.next = 0;
      const [q, v] = [Float64Array.of(z[0], z[1]), Float64Array.of(z[2], z[3])];
      integrator.advance(q, v, 1, step, stream);
      return [...q, ...v];
    };
    const unit = (i: number, n: number): number[] => Array.from({ length: n }, (_, k) => (k === i ? 1 : 0));
    const m = [0, 1, 2, 3].map((i) => map(unit(i, 4), [0, 0]));
    const g = [0, 1].map((i) => map([0, 0, 0, 0], unit(i, 2)));
    let c = Array.from({ length: 4 }, () => [0, 0, 0, 0]);
    for (let round = 0; round < 4000; round++) {
      c = c.map((_, i) =>
        c.map((__, j) => {
          let sum = g[0][i] * g[0][j] + g[1][i] * g[1][j];
          for (let k = 0; k < 4; k++) for (let l = 0; l < 4; l++) sum += m[k][i] * c[k][l] * m[l][j];
          return sum;
        }),
      );
    }
    // A C + C Aᵀ + Q = 0 for (x, y, vx, vy) (Risken 1989, section 6.5)
    const a = [
      [0, 0, 1, 0],
      [0, 0, 0, 1],
      [-kx, -stirring, -friction, 0],
      [stirring, -ky, 0, -friction],
    ];
    const strength = 2 * friction * temperature;
    for (let i = 0; i < 4; i++) {
      for (let j = 0; j < 4; j++) {
        let rest = i === j && i > 1 ? strength : 0;
        for (let k = 0; k < 4; k++) rest += a[i][k] * c[k][j] + c[i][k] * a[j][k];
        expect(Math.abs(rest)).toBeLessThan(1e-3 * strength); // (ωh)²/4 and its like
      }
    }
    expect(Math.abs(c[0][1])).toBeGreaterThan(0.05 * temperature); // tilted
    const sweep = c[0][3] - c[1][2]; // ⟨x v_y − y v_x⟩
    expect(sweep).toBeGreaterThan(0.3);
    // power put in by the stirring force, ⟨s (x v_y − y v_x)⟩, is taken out by friction: Γ⟨v²⟩ − N = s·sweep
    expect(
      Math.abs(friction * (c[2][2] + c[3][3]) - 2 * friction * temperature - stirring * sweep),
    ).toBeLessThan(2e-3);
  });
});

describe('a bead of 1 µm in water', () => {
  // Viscosity of water at 0.1 MPa in mPa s: IAPWS Release on the Viscosity of Ordinary Water Substance (2008), table of
  // values at round temperatures as commonly quoted; from memory.
  it.each([
    [20, 1.0016],
    [25, 0.89],
    [40, 0.6527],
  ])('at %i °C diffuses as Stokes and Einstein say', async (celsius, viscosity) => {
    const scenario = describeScenario(2, {
      order: 'first',
      units: { length: 'µm', time: 's' },
      parameters: { kT: 1.380649e-23 * (celsius + 273.15) * 1e18, eta: viscosity * 1e-3, radius: 0.5 },
      coefficients: {
        drift: { form: 'vector', values: [0, 0] },
        // kT/(6π η a): J/(Pa s m) = m²/s; kT in 1e-18 J with a in µm gives µm²/s
        diffusion: { form: 'scalar', formulas: ['kT/(6*pi*eta*radius)'] },
      },
      start: { kind: 'points', points: [[0, 0]] },
      observation: { tracks: 4000, frames: 2, interval: 2, localizationError: [0, 0] },
    });
    const { tracks } = await simulateScenario(scenario, { seed: celsius });
    let sum = 0;
    for (let track = 0; track < 4000; track++)
      sum += (tracks.positions[4 * track + 2] ** 2 + tracks.positions[4 * track + 3] ** 2) / 4000;
    const found = sum / (4 * 2);
    // D in µm²/s by hand: 0.4287 at 20 °C, 0.4907 at 25 °C, 0.7028 at 40 °C
    const expected = { 20: 0.4287, 25: 0.4907, 40: 0.7028 }[celsius] ?? 0;
    expect(Math.abs(found / expected - 1)).toBeLessThan(4 / Math.sqrt(4000) + 2e-4);
  });
});
