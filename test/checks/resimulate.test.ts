import { describe, expect, it } from 'vitest';
import { resimulate } from '../../src/checks/resimulate.js';
import type { Scenario } from '../../src/documents/Scenario.js';
import { DataError, UsageError } from '../../src/errors.js';
import type { MapTasks } from '../../src/numerics/MapTasks.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { parseScenario } from '../../src/simulation/parseScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { type ExampleFitOptions, exampleFit } from '../support/fitFixtures.js';

const SECOND: ExampleFitOptions = {
  order: 'second',
  dimensions: 2,
  interval: 0.2,
  friction: 1,
  noise: 2,
  localizationError: 0.02,
  tracks: 10,
  positions: 2000,
  scatter: 0.005,
};
const FIRST: ExampleFitOptions = { ...SECOND, order: 'first', noise: 0.5 };

async function record(scenario: Scenario, seed: number): Promise<TrackSet> {
  return (await simulateScenario(scenario, { seed })).tracks;
}

/** The scenario of a fit with some coefficients written anew. */
function change(
  scenario: Scenario,
  coefficients: Record<string, unknown>,
  more: Record<string, unknown> = {},
): Scenario {
  return parseScenario({
    ...scenario,
    ensemble: null,
    integration: { step: null },
    coefficients: { ...scenario.coefficients, ...coefficients },
    ...more,
  });
}

describe('a right model', () => {
  it('is called inconsistent no more often than the level allows', async () => {
    let refused = 0;
    const studies = 24;
    for (let seed = 0; seed < studies; seed++) {
      const fit = exampleFit({ ...(seed % 2 === 0 ? SECOND : FIRST), positions: 800, seed });
      const tracks = await record(buildScenario(fit), 500 + seed);
      const result = await resimulate(fit, tracks, { seed, replicates: 39 });
      if (!result.consistent) refused++;
    }
    expect(refused).toBeLessThanOrEqual(5); // binomial (24, 0.05): 6 or more in 0.1 % of runs
  });

  it('passes with gaps, localization error, exposure, uneven starts and a periodic axis', async () => {
    const fit = exampleFit({ ...SECOND, periods: [0, 3], localizationError: 0.1, positions: 3000 });
    const exposed = { ...fit, study: { ...fit.study, exposure: 0.5 }, survey: { missingFrames: 500 } };
    const tracks = await record(buildScenario(exposed), 77);
    expect(tracks.times.length).toBeLessThan(3400);
    const result = await resimulate(exposed, tracks, { seed: 5, replicates: 39 });
    expect(result.p).toBeGreaterThan(0.05);
    expect(result.consistent).toBe(true);
  });

  it('gives statistics, bands and series that are complete and finite', async () => {
    const fit = exampleFit(SECOND);
    const tracks = await record(buildScenario(fit), 3);
    const calls: [number, number][] = [];
    const result = await resimulate(fit, tracks, {
      seed: 2,
      replicates: 19,
      onProgress: (done, total) => calls.push([done, total]),
    });
    expect(result.statistics.map(({ name }) => name)).toEqual([
      'occupancy',
      'velocity-distribution',
      'displacement-distribution',
      'mean-squared-displacement',
      'velocity-autocorrelation',
      'kinetic-temperature',
      'velocity-persistence',
      'current',
      'circulation',
    ]);
    for (const { recorded, low, high, p, adjusted } of result.statistics) {
      expect(low).toBeLessThanOrEqual(high);
      expect(recorded).toBeGreaterThanOrEqual(0);
      expect(p).toBeGreaterThan(0);
      expect(adjusted).toBeLessThanOrEqual(1);
    }
    for (const series of result.series) {
      for (const key of ['recorded', 'low', 'median', 'high'] as const) {
        expect(series[key]).toHaveLength(series.x.length);
        for (const value of series[key]) expect(value === null || Number.isFinite(value)).toBe(true);
      }
    }
    const square = result.series.find(({ name }) => name === 'msd-x');
    expect(square?.x[0]).toBeCloseTo(0.2, 12);
    // density of the occupancy adds to one
    const occupancy = result.series.find(({ name }) => name === 'occupancy-x');
    const width = (occupancy?.x[1] ?? 0) - (occupancy?.x[0] ?? 0);
    expect(occupancy?.recorded.reduce<number>((sum, value) => sum + (value ?? 0) * width, 0)).toBeCloseTo(
      1,
      10,
    );
    expect(calls.at(-1)).toEqual([19, 19]);
    expect(JSON.parse(JSON.stringify(result))).toEqual(result);
  });

  it('gives the same result however the replicates are split', async () => {
    const fit = exampleFit({ ...FIRST, positions: 400 });
    const tracks = await record(buildScenario(fit), 3);
    const backwards: MapTasks = async (task, shared, inputs) => {
      const results = [];
      for (let i = inputs.length - 1; i >= 0; i--)
        results[i] = await task.run(structuredClone(shared), inputs[i]);
      return results;
    };
    const plain = await resimulate(fit, tracks, { seed: 9, replicates: 19 });
    expect(await resimulate(fit, tracks, { seed: 9, replicates: 19, mapTasks: backwards })).toEqual(plain);
    expect((await resimulate(fit, tracks, { seed: 10, replicates: 19 })).series).not.toEqual(plain.series);
  });
});

describe('a wrong model is called inconsistent:', () => {
  it('constant friction where there is a bump', async () => {
    const fit = exampleFit({ ...SECOND, positions: 10_000 });
    const bump = '0.6+1.6*exp(-(x^2+y^2)/0.8)';
    const truth = change(buildScenario(fit), {
      friction: { form: 'scalar', formulas: [bump] },
      noise: { form: 'scalar', formulas: [`2*(${bump})`] },
    });
    const result = await resimulate(fit, await record(truth, 1), { seed: 1, replicates: 39 });
    expect(result.consistent).toBe(false);
    const persistence = result.statistics.find(({ name }) => name === 'velocity-persistence');
    expect(persistence?.adjusted).toBeLessThanOrEqual(0.05);
  });

  it('first order where velocities are remembered', async () => {
    const truth = buildScenario(exampleFit(SECOND));
    // the first-order model with the same trap and the same long-time diffusion
    const fit = exampleFit({ ...FIRST, noise: 1 });
    const result = await resimulate(fit, await record(truth, 2), { seed: 1, replicates: 39 });
    expect(result.consistent).toBe(false);
  });

  it('no stirring where there is some', async () => {
    const fit = exampleFit({ ...SECOND, positions: 10_000 });
    const truth = change(buildScenario(fit), {
      force: { form: 'vector', formulas: ['-x-0.3*y', '-y+0.3*x'] },
    });
    const result = await resimulate(fit, await record(truth, 3), { seed: 1, replicates: 39 });
    expect(result.consistent).toBe(false);
    expect(result.statistics.find(({ name }) => name === 'circulation')?.adjusted).toBeLessThanOrEqual(0.05);
  });
});

describe('refitting', () => {
  it('reports what was put in and what the given estimator got back', async () => {
    const fit = exampleFit({ ...FIRST, dimensions: 1, positions: 4000, noise: 0.5, localizationError: 0 });
    const tracks = await record(buildScenario(fit), 6);
    // an estimator of the diffusion alone, from squared displacements; the drift is passed through
    const refit = async (set: TrackSet): Promise<number[]> => {
      let [sum, count] = [0, 0];
      for (let track = 0; track < set.trackNames.length; track++) {
        for (let row = set.trackOffsets[track]; row + 1 < set.trackOffsets[track + 1]; row++) {
          sum += (set.positions[row + 1] - set.positions[row]) ** 2;
          count++;
        }
      }
      // Var Δy of the trapped process (Uhlenbeck & Ornstein 1930): 2 (D/k)(1 − e^{−kΔ}), k = 1
      return [0, -1, sum / count / (2 * -Math.expm1(-0.2))];
    };
    const result = await resimulate(fit, tracks, { seed: 4, replicates: 19, refit, refits: 6 });
    expect(result.refit.map(({ name }) => name)).toEqual(['drift_x[0]', 'drift_x[1]', 'diffusion_xx[0]']);
    const { putIn, refitted, standardError } = result.refit[2];
    expect(putIn).toBe(0.5);
    expect(standardError).not.toBeNull();
    expect(Math.abs(refitted - putIn)).toBeLessThan(4 * 0.5 * Math.sqrt(2 / (6 * 3990)) * 1.1);
  });

  it('that fails is reported, not fatal', async () => {
    const fit = exampleFit({ ...FIRST, positions: 200 });
    const tracks = await record(buildScenario(fit), 6);
    const result = await resimulate(fit, tracks, {
      seed: 4,
      replicates: 19,
      refit: async () => null,
      refits: 2,
    });
    expect(result.refit).toEqual([]);
    expect(result.warnings.map(({ code }) => code)).toContain('refit-failed');
  });
});

it('refuses too few replicates and tracks that do not belong to the fit', async () => {
  const fit = exampleFit(SECOND);
  const tracks = await record(buildScenario(exampleFit({ ...SECOND, dimensions: 1, positions: 100 })), 1);
  await expect(resimulate(fit, tracks, { seed: 1, replicates: 5 })).rejects.toThrow(UsageError);
  await expect(resimulate(fit, tracks, { seed: 1 })).rejects.toThrow(DataError);
});
