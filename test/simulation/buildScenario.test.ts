import { describe, expect, it } from 'vitest';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { parseScenario } from '../../src/simulation/parseScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import { constantField, exampleFit, trapField } from '../support/fitFixtures.js';

describe('the scenario of a fit', () => {
  it.each([
    ['first', 1],
    ['first', 2],
    ['second', 1],
    ['second', 2],
    ['second', 3],
  ] as const)('of %s order in %i dimensions can be written, read back and run', async (order, dimensions) => {
    const fit = exampleFit({ order, dimensions, localizationError: 0.05 });
    const scenario = buildScenario(fit);
    const read = parseScenario(JSON.parse(JSON.stringify(scenario)));
    expect(read).toEqual(scenario);
    expect(read.observation).toMatchObject({ tracks: 10, frames: 100, interval: 0.1, lostFrames: 0 });
    expect(read.integration.step).toBeGreaterThan(0);
    expect(read.ensemble?.draws.length).toBe(40);
    const { tracks } = await simulateScenario(read, { seed: 1, tracks: 2, frames: 5, ensemble: true });
    expect(tracks.times.length).toBe(10);
    expect(tracks.dimensions).toBe(dimensions);
  });

  it('confines where the fitted force does, with its stiffness, and holds where it does not', () => {
    expect(buildScenario(exampleFit({ stiffness: 0.7 })).continuation).toMatchObject({
      kind: 'confine',
      stiffness: 0.7,
    });
    expect(buildScenario(exampleFit({ stiffness: 0 })).continuation.kind).toBe('hold');
    expect(buildScenario(exampleFit({ stiffness: -1 })).continuation.kind).toBe('hold');
    expect(buildScenario(exampleFit({ periods: [2, 2] })).continuation.kind).toBe('hold');
    expect(buildScenario(exampleFit({ periods: [2, 0] })).axes[0]).toEqual({
      kind: 'periodic',
      low: 0,
      high: 2,
    });
  });

  it('carries over exposure, missing frames, warnings and where it came from', () => {
    const fit = exampleFit({});
    const scenario = buildScenario({
      ...fit,
      study: { ...fit.study, exposure: 0.5 },
      survey: { missingFrames: 250 },
      warnings: [{ code: 'few-visits', message: 'some places were hardly visited' }],
    });
    expect(scenario.observation).toMatchObject({ exposure: 0.5, lostFrames: 0.2, frames: 125 });
    expect(scenario.warnings[0].code).toBe('few-visits');
    expect(scenario.provenance).toMatchObject({ program: fit.program, sources: fit.sources });
  });

  it('warns where the fitted noise is negative', () => {
    const fit = exampleFit({
      model: {
        order: 'second',
        dimensions: 1,
        periods: [0],
        force: trapField('force', 1, [0]),
        friction: constantField('friction', 'scalar', [1]),
        noise: {
          ...constantField('noise', 'scalar', [1]),
          basis: { kind: 'polynomial', degree: 1, centre: [0], scale: [1] },
          coefficients: [[1, 0.5]],
        },
      },
    });
    const warning = buildScenario(fit).warnings.find(({ code }) => code === 'negative-noise');
    expect(warning?.message).toMatch(/about \d+ % of the visited box/);
  });
});
