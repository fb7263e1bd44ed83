import { describe, expect, it } from 'vitest';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import type { MapTasks } from '../../src/numerics/MapTasks.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';

const FREE: ScenarioInput = {
  format: 'wanderlaw-scenario',
  version: 1,
  dimensions: 1,
  order: 'second',
  axes: [{ kind: 'open' }],
  coefficients: {
    force: { form: 'vector', values: [0] },
    friction: { form: 'scalar', values: [1.5] },
    noise: { form: 'scalar', values: [6] },
  },
  start: { kind: 'points', points: [[0]] },
  observation: { tracks: 4000, frames: 6, interval: 0.4, localizationError: [0] },
};

/** Mean of the square of a position relative to the first, over tracks. */
function meanSquare(tracks: { positions: Float64Array; trackOffsets: Int32Array }, frame: number): number {
  const n = tracks.trackOffsets.length - 1;
  let sum = 0;
  for (let i = 0; i < n; i++) sum += tracks.positions[tracks.trackOffsets[i] + frame] ** 2;
  return sum / n;
}

it('gives the mean squared displacement of the free process with velocities from the kinetic temperature', async () => {
  // 2 (T/Γ²)(Γt − 1 + e^{−Γt}): Uhlenbeck & Ornstein 1930; Fürth 1920
  const { tracks } = await simulateScenario(createScenario(FREE), { seed: 3 });
  const [gamma, temperature] = [1.5, 2];
  for (let frame = 1; frame < 6; frame++) {
    const x = gamma * 0.4 * frame;
    const exact = ((2 * temperature) / gamma ** 2) * (x - 1 + Math.exp(-x));
    expect(Math.abs(meanSquare(tracks, frame) / exact - 1)).toBeLessThan(4 * Math.sqrt(2 / 4000) + 1e-3);
  }
});

it('adds localization error once per position', async () => {
  const scenario = createScenario({
    ...FREE,
    coefficients: { ...FREE.coefficients, noise: { form: 'scalar', values: [0] } },
    observation: { ...FREE.observation, localizationError: [0.3] },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 3 });
  for (let frame = 0; frame < 6; frame++) {
    expect(Math.abs(meanSquare(tracks, frame) / 0.09 - 1)).toBeLessThan(4 * Math.sqrt(2 / 4000));
  }
});

it('averages over the exposure: blur takes a third of the exposure from the variance of free diffusion', async () => {
  // Var Δy = 2DΔ (1 − E/3) with E the exposed fraction; Savin & Doyle, Biophys. J. 88 (2005) 623; Berglund 2010
  const scenario = createScenario({
    ...FREE,
    order: 'first',
    coefficients: { drift: { form: 'vector', values: [0] }, diffusion: { form: 'scalar', values: [0.5] } },
    observation: { tracks: 2000, frames: 6, interval: 1, localizationError: [0], exposure: 0.9 },
    integration: { step: 0.05 },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 4 });
  let sum = 0;
  let count = 0;
  for (let track = 0; track < 2000; track++) {
    for (let row = tracks.trackOffsets[track]; row + 1 < tracks.trackOffsets[track + 1]; row++) {
      sum += (tracks.positions[row + 1] - tracks.positions[row]) ** 2;
      count++;
    }
  }
  // neighbouring displacements correlate by 0.21; 4 standard errors of the mean square with that much dependence
  expect(Math.abs(sum / count / (1 - 0.9 / 3) - 1)).toBeLessThan(4 * Math.sqrt((2 * 1.1) / count) + 1e-3);
});

it('loses the given share of frames and keeps their times', async () => {
  const scenario = createScenario({
    ...FREE,
    observation: { ...FREE.observation, tracks: 200, frames: 101, lostFrames: 0.2 },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 5 });
  const lost = 1 - (tracks.times.length - 200) / 20_000;
  expect(Math.abs(lost - 0.2)).toBeLessThan(4 * Math.sqrt((0.2 * 0.8) / 20_000));
  for (let row = 0; row < tracks.times.length; row++) {
    const frames = tracks.times[row] / 0.4;
    expect(Math.abs(frames - Math.round(frames))).toBeLessThan(1e-9);
  }
});

describe('the same seed', () => {
  const scenario = createScenario({
    ...FREE,
    observation: { ...FREE.observation, tracks: 37, frames: 2000 },
  });

  it('gives the same bytes however the tracks are split and in whatever order they are run', async () => {
    const backwards: MapTasks = async (task, shared, inputs) => {
      const results = [];
      for (let i = inputs.length - 1; i >= 0; i--)
        results[i] = await task.run(structuredClone(shared), inputs[i]);
      return results;
    };
    const plain = await simulateScenario(scenario, { seed: 7 });
    const other = await simulateScenario(scenario, { seed: 7, mapTasks: backwards });
    expect(
      Buffer.from(other.tracks.positions.buffer).equals(Buffer.from(plain.tracks.positions.buffer)),
    ).toBe(true);
    expect(other.tracks.trackOffsets).toEqual(plain.tracks.trackOffsets);
    const first = await simulateScenario(scenario, { seed: 7, tracks: 3 });
    expect(first.tracks.positions).toEqual(plain.tracks.positions.subarray(0, 6000));
  });

  it('and another seed gives others', async () => {
    const one = await simulateScenario(scenario, { seed: 7, tracks: 1, frames: 3 });
    const two = await simulateScenario(scenario, { seed: 8, tracks: 1, frames: 3 });
    expect(one.tracks.positions[2]).not.toBe(two.tracks.positions[2]);
  });
});

describe('the domain', () => {
  it('is filled evenly by free particles, periodic or between walls, and held to', async () => {
    for (const order of ['first', 'second'] as const) {
      for (const kind of ['periodic', 'walls'] as const) {
        const scenario = createScenario({
          ...FREE,
          order,
          axes: [{ kind, low: 0, high: 3 }],
          coefficients:
            order === 'second'
              ? FREE.coefficients
              : { drift: { form: 'vector', values: [0] }, diffusion: { form: 'scalar', values: [1] } },
          start: { kind: 'points', points: [[0.2]] },
          observation: { tracks: 3000, frames: 2, interval: 12, localizationError: [0] },
          integration: { step: 0.05 },
        });
        const { tracks } = await simulateScenario(scenario, { seed: 9 });
        const counts = new Array<number>(6).fill(0);
        for (let track = 0; track < 3000; track++) {
          const x = tracks.positions[tracks.trackOffsets[track] + 1];
          if (kind === 'walls') expect(x).toBeGreaterThanOrEqual(0);
          if (kind === 'walls') expect(x).toBeLessThanOrEqual(3);
          counts[Math.floor(((((x % 3) + 3) % 3) / 3) * 6)]++;
        }
        const chiSquare = counts.reduce((sum, count) => sum + (count - 500) ** 2 / 500, 0);
        expect(chiSquare).toBeLessThan(20.5); // 99.9 % point at 5 degrees of freedom (tables)
        expect(tracks.periods).toEqual([kind === 'periodic' ? 3 : 0]);
      }
    }
  });
});

it('a warm-up gives a stationary start, and starts beyond walls are folded back', async () => {
  const trap = createScenario({
    ...FREE,
    coefficients: { ...FREE.coefficients, force: { form: 'vector', formulas: ['-x'] } },
    start: { kind: 'points', points: [[5]], warmUp: 15 },
    observation: { ...FREE.observation, frames: 1 },
  });
  // ⟨x²⟩ = T/k = 2; what is left of the start is 5 e^{−Γt/2} = 5 e^{−11}
  const { tracks } = await simulateScenario(trap, { seed: 3 });
  expect(Math.abs(meanSquare(tracks, 0) / 2 - 1)).toBeLessThan(4 * Math.sqrt(2 / 4000) + 1e-3);
  const walled = createScenario({
    ...FREE,
    axes: [{ kind: 'walls', low: -1, high: 1 }],
    start: { kind: 'normal', mean: [0], spread: [2] },
    observation: { ...FREE.observation, frames: 1 },
  });
  for (const x of (await simulateScenario(walled, { seed: 3 })).tracks.positions) {
    expect(Math.abs(x)).toBeLessThanOrEqual(1);
  }
});

it('reports progress and ends in words where particles run off', async () => {
  const calls: number[] = [];
  await simulateScenario(createScenario(FREE), { seed: 1, onProgress: (done) => calls.push(done) });
  expect(calls.length).toBeGreaterThan(0);
  const wild = createScenario({
    ...FREE,
    coefficients: { ...FREE.coefficients, force: { form: 'vector', formulas: ['x^3'] } },
    start: { kind: 'points', points: [[2]] },
  });
  await expect(simulateScenario(wild, { seed: 1, frames: 200 })).rejects.toThrow(/stopped being finite/);
});
