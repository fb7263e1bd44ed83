import { describe, expect, it } from 'vitest';
import { collectPassages, planPassages } from '../../src/checks/passages.js';
import { checkRegions, type Region } from '../../src/checks/Region.js';
import { resimulate } from '../../src/checks/resimulate.js';
import { UsageError } from '../../src/errors.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { constantField, exampleFit } from '../support/fitFixtures.js';

/** Tracks of one coordinate, one list of positions each, a time unit apart unless times are given. */
function tracksOf(rows: readonly (readonly number[])[], times?: readonly number[], period = 0): TrackSet {
  const trackOffsets = Int32Array.from([0, ...rows.map((_, i) => rows.slice(0, i + 1).flat().length)]);
  return {
    dimensions: 1,
    coordinates: ['x'],
    trackNames: rows.map((_, i) => String(i + 1)),
    trackOffsets,
    times: Float64Array.from(times ?? rows.flatMap((row) => row.map((_, i) => i))),
    positions: Float64Array.from(rows.flat()),
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: 1,
    periods: [period],
    units: { length: null, time: null },
  };
}

const LEFT: Region = { name: 'left', low: [-Infinity], high: [0] };
const RIGHT: Region = { name: 'right', low: [1], high: [Infinity] };

describe('stays and passages counted by hand', () => {
  const tracks = tracksOf([
    [-1, -1, 0.5, -1, 2, 2, 2, -1],
    [0.5, 2, -2],
  ]);
  const plan = planPassages(tracks, [LEFT, RIGHT]);
  const found = collectPassages(plan, tracks.positions);

  it('are named and ordered by region', () => {
    expect(plan.kinds.map(({ name }) => name)).toEqual([
      'residence-time:left',
      'residence-time:right',
      'first-passage-time:left-right',
      'first-passage-time:right-left',
    ]);
  });

  it('last from the first frame inside to the first outside; what the end of a track cuts off is time at risk', () => {
    // left: frames 0–2 and 3–4 in the first track; the last frame of each track begins a stay of no length
    expect(found[0]).toEqual({ lengths: [2, 1], ended: 2, atRisk: 3 });
    expect(found[1]).toEqual({ lengths: [3, 1], ended: 2, atRisk: 4 });
  });

  it('run from the first frame in one region to the first in the other', () => {
    // left 0 → right 4; right 4 → left 7; right 1 → left 2 in the second track
    expect(found[2]).toEqual({ lengths: [4], ended: 1, atRisk: 4 });
    expect(found[3]).toEqual({ lengths: [3, 1], ended: 2, atRisk: 4 });
  });

  it('go by the times of the rows, gaps included, and by the wrapped place on periodic axes', () => {
    const uneven = tracksOf([[-1, -1, 2]], [0, 0.5, 4]);
    expect(collectPassages(planPassages(uneven, [LEFT]), uneven.positions)[0]).toMatchObject({
      atRisk: 4,
      ended: 1,
    });
    const ring = tracksOf([[3.2, 7.1, 4.5, 9.3]], undefined, 3); // wrapped: 0.2, 1.1, 1.5, 0.3
    const near: Region = { name: 'near', low: [0], high: [0.5] };
    expect(collectPassages(planPassages(ring, [near]), ring.positions)[0]).toMatchObject({
      ended: 1,
      atRisk: 1,
    });
  });
});

it('the mean time to leave a stretch by diffusion is L²/(2D)', async () => {
  // Diffusion out of [0, L] with a wall at 0, L = 1, D = 0.5:
  // mean exit time from 0 is L²/(2D) = 1 (Gardiner, section 5.2); here all particles start at 0.
  const scenario = createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions: 1,
    order: 'first',
    axes: [{ kind: 'walls', low: 0, high: 50 }],
    coefficients: { drift: { form: 'vector', values: [0] }, diffusion: { form: 'scalar', values: [0.5] } },
    start: { kind: 'points', points: [[0]] },
    observation: { tracks: 1500, frames: 900, interval: 0.01, localizationError: [0] },
  });
  const { tracks } = await simulateScenario(scenario, { seed: 2 });
  const near: Region = { name: 'near', low: [-1], high: [1] };
  const far: Region = { name: 'far', low: [1], high: [Infinity] };
  const passages = collectPassages(planPassages(tracks, [near, far]), tracks.positions)[2];
  const first = passages.lengths.slice();
  expect(passages.ended).toBeGreaterThan(1500);
  // of each track the first passage from near to far: the clock started at the first frame
  let sum = 0;
  let count = 0;
  for (let track = 0; track < 1500; track++) {
    for (let row = tracks.trackOffsets[track]; row < tracks.trackOffsets[track + 1]; row++) {
      if (tracks.positions[row] < 1) continue;
      sum += tracks.times[row];
      count++;
      break;
    }
  }
  expect(first.length).toBeGreaterThan(count);
  // a boundary looked at every 0.01 seems 0.5826 σ√Δ further out (Broadie, Glasserman & Kou 1997): (1 + 0.058)²
  const exact = (1 + 0.5826 * Math.sqrt(2 * 0.5 * 0.01)) ** 2;
  // relative standard deviation of the exit time √(2/3); the few tracks that never leave within 9 are below 1e-4
  expect(Math.abs(sum / count / exact - 1)).toBeLessThan(4 * Math.sqrt(2 / 3 / count) + 0.003);
});

describe('regions in a re-simulation', () => {
  const fit = exampleFit({
    order: 'first',
    dimensions: 1,
    noise: 0.5,
    tracks: 10,
    positions: 4000,
    interval: 0.1,
    scatter: 0.01,
  });
  const regions: Region[] = [
    { name: 'left', low: [-Infinity], high: [-0.3] },
    { name: 'right', low: [0.3], high: [Infinity] },
  ];

  it('add statistics, mean times and curves; a right model passes', async () => {
    const { tracks } = await simulateScenario(buildScenario(fit), { seed: 3 });
    const result = await resimulate(fit, tracks, { seed: 1, replicates: 39, regions });
    const names = [
      'residence-time:left',
      'residence-time:right',
      'first-passage-time:left-right',
      'first-passage-time:right-left',
    ];
    expect(result.statistics.slice(-4).map(({ name }) => name)).toEqual(names);
    expect(result.times.map(({ name }) => name)).toEqual(names);
    for (const { recorded, low, median, high, events } of result.times) {
      expect(events).toBeGreaterThan(10);
      expect(low ?? Infinity).toBeLessThan(median ?? 0);
      expect(median ?? Infinity).toBeLessThan(high ?? 0);
      expect((recorded ?? 0) / (median ?? 1)).toBeGreaterThan(0.5);
      expect((recorded ?? 0) / (median ?? 1)).toBeLessThan(2);
    }
    expect(result.series.filter(({ kind }) => kind.endsWith('-time'))).toHaveLength(4);
    expect(result.consistent).toBe(true);
  });

  it('see a barrier that the model does not have', async () => {
    const truth = createScenario({
      ...buildScenario(fit),
      ensemble: null,
      integration: { step: null },
      coefficients: {
        drift: { form: 'vector', formulas: ['-x+0.9*sin(3*x)'] },
        diffusion: { form: 'scalar', values: [0.5] },
      },
    });
    const { tracks } = await simulateScenario(truth, { seed: 3 });
    const result = await resimulate(fit, tracks, { seed: 1, replicates: 39, regions });
    expect(
      result.statistics.find(({ name }) => name === 'first-passage-time:left-right')?.p,
    ).toBeLessThanOrEqual(0.05);
  });

  it('that repeat a name or have other axes are refused', () => {
    expect(() => checkRegions([LEFT, LEFT], 1)).toThrow('given twice');
    expect(() => checkRegions([LEFT], 2)).toThrow(UsageError);
    expect(() => checkRegions([LEFT], 2)).toThrow('--region "left" has 1 axis but the tracks have 2');
  });
});

it('the kinetic temperature is drawn along each axis', async () => {
  const fit = exampleFit({
    model: {
      order: 'second',
      dimensions: 1,
      periods: [4],
      force: constantField('force', 'vector', [0]),
      friction: constantField('friction', 'scalar', [1]),
      noise: constantField('noise', 'scalar', [2]),
    },
    interval: 0.1,
    tracks: 10,
    positions: 2000,
  });
  const { tracks } = await simulateScenario(buildScenario(fit), { seed: 3 });
  const { series } = await resimulate(fit, tracks, { seed: 1, replicates: 19 });
  const curve = series.find(({ name }) => name === 'kinetic-temperature-x');
  expect(curve?.x).toHaveLength(24);
  // mean squared velocity over 0.1 relaxation times at T = 1: 2 (ΓΔ − 1 + e^{−ΓΔ})/(ΓΔ)² = 0.968 (Fürth 1920)
  for (const median of curve?.median ?? []) expect(Math.abs((median ?? 0) - 0.968)).toBeLessThan(0.35);
  const mean = (curve?.median ?? []).reduce<number>((sum, value) => sum + (value ?? 0) / 24, 0);
  expect(Math.abs(mean - 0.968)).toBeLessThan(0.05);
});
