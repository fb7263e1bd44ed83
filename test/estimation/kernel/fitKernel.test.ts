import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { parseFit } from '../../../src/documents/parseFit.js';
import { formatTrackTable } from '../../../src/import/formatTracks.js';
import { buildScenario } from '../../../src/simulation/buildScenario.js';
import { createBasisEvaluator } from '../../../src/simulation/ScenarioEvaluator.js';
import { evaluateFit } from '../../../src/uncertainty/evaluateFit.js';
import { Workplace } from '../../cli/runInProcess.js';
import { simulateSecondOrder } from '../../support/exactProcesses.js';

const place = new Workplace();
afterAll(() => place.remove());

describe('fit --estimator kernel', () => {
  it('writes a fit that evaluate, scenario, simulate and report read like any other', async () => {
    const tracks = simulateSecondOrder({
      tracks: 30,
      frames: 100,
      interval: 0.2,
      friction: 1,
      stiffness: 0.5,
      localizationError: 0.01,
      seed: 5,
    });
    place.write('tracks.csv', [...formatTrackTable(tracks)].join(''));
    place.write('points.csv', 'x\n-1\n0\n0.5\n');
    const run = async (line: string) => {
      const { status, stdout, stderr } = await place.run(line.split(' '));
      expect([status, stderr]).toEqual([0, expect.not.stringContaining('error')]);
      return stdout;
    };
    await run('fit tracks.csv -o fit.json --order second --estimator kernel --replicates 60 --quiet');
    const text = readFileSync(join(place.path, 'fit.json'), 'utf8');
    const fit = parseFit(JSON.parse(text) as unknown, { source: 'fit.json' });
    expect(fit.diagnostics).toMatchObject({ estimator: 'kernel', frictionBandwidth: [expect.any(Number)] });

    const table = await run('evaluate fit.json --at points.csv');
    const places = Float64Array.of(-1, 0, 0.5);
    const { columns } = evaluateFit(fit, places);
    const friction = columns.find(({ name }) => name === 'friction_xx');
    expect(table.split('\n')[0]).toContain('friction_xx,friction_xx_low,friction_xx_high');
    friction?.values.forEach((value, i) => {
      expect(Math.abs(value - 1) / (friction.high[i] - value)).toBeLessThan(2); // four standard errors
    });

    // What the integrators compile from the splines of degree 1 is what the fit says.
    const evaluator = createBasisEvaluator(buildScenario(fit));
    const [force, rate, noise] = [new Float64Array(1), new Float64Array(1), new Float64Array(1)];
    places.forEach((x, i) => {
      evaluator.evaluateInto(Float64Array.of(x), force, rate, noise);
      for (const [name, found] of [
        ['force_x', force],
        ['friction_xx', rate],
        ['noise_xx', noise],
      ] as const) {
        expect(found[0]).toBeCloseTo(columns.find((column) => column.name === name)?.values[i] ?? NaN, 9);
      }
    });

    await run('scenario fit.json -o scenario.json --quiet');
    expect(await run('simulate scenario.json --tracks 2 --frames 20 --seed 3')).toMatch(/^track,/);
    await run('report fit.json -o report.html --quiet');
    expect(/friction ?bandwidth/i.test(readFileSync(join(place.path, 'report.html'), 'utf8'))).toBe(true);
  });
});
