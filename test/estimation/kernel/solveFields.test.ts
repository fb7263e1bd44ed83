import { describe, expect, it } from 'vitest';
import { estimateKernel } from '../../../src/estimation/kernel/estimateKernel.js';
import { FixedPointAccelerator } from '../../../src/estimation/kernel/FixedPointAccelerator.js';
import { planEstimation } from '../../../src/estimation/planEstimation.js';
import { studySchema } from '../../../src/documents/Study.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import { describeVisited, visitedCentres } from '../../../src/tracks/visitedRegion.js';
import { bumpCase, simulateCase, truthOf } from '../../support/variedCases.js';
import { columnsOf } from './kernelStudy.js';

describe('fields that are solved in turn', () => {
  it('find fixed points that repel, in parts of any unit', () => {
    // x ← c + R diag(rates) R⁻¹ (x − c) with a shear R, two rates beyond 1 in size, in two parts of scales 1 and 1e6
    const rates = [-3, 1.8, 0.9, 0.5, -0.7, 0.2, 0.1, 0];
    const stream = randomStream(1, 'fixed point', 0);
    const centre = rates.map(() => stream.normal());
    const map = (x: readonly number[]): number[] => {
      const away = x.map((value, i) => value - centre[i]);
      const sheared = away.map((value, i) => value + (i > 0 ? 0.5 * away[i - 1] : 0));
      const scaled = sheared.map((value, i) => rates[i] * value);
      const back: number[] = [];
      scaled.forEach((value, i) => back.push(value - (i > 0 ? 0.5 * back[i - 1] : 0)));
      return back.map((value, i) => value + centre[i]);
    };
    const accelerator = new FixedPointAccelerator();
    const scales = [1, 1e6];
    let parts = [new Float64Array(4), new Float64Array(4)];
    for (let round = 0; round < 12; round++) {
      const x = [...parts[0], ...Array.from(parts[1], (value) => value / scales[1])];
      const next = map(x);
      const values = [
        Float64Array.from(next.slice(0, 4)),
        Float64Array.from(next.slice(4), (v) => v * scales[1]),
      ];
      accelerator.advance(parts, values);
      parts = values;
    }
    // Eight unknowns: nine steps are enough for the linear method, up to round-off.
    const found = [...parts[0], ...Array.from(parts[1], (value) => value / scales[1])];
    found.forEach((value, i) => expect(value).toBeCloseTo(centre[i], 6));
  });

  it('agree where velocities are all but forgotten within a frame, and instruments are weak', () => {
    const given = bumpCase(0.55);
    const tracks = simulateCase(given, 2);
    const visited = describeVisited(tracks);
    const plan = planEstimation(tracks, studySchema.parse({}), 'second', given.relaxationTime, visited);
    const estimate = estimateKernel(tracks, plan);
    expect(estimate.diagnostics.converged).toBe(true);
    // The localization error is 0.2; its standard error is that of 60 000 rows at this friction, some 1e-3.
    const [{ value, standardError }] = estimate.localizationError;
    expect(Math.abs(value - 0.2)).toBeLessThan(3.5 * standardError + 0.002);
    const centres = visitedCentres(visited);
    const friction = columnsOf(estimate, centres).friction_xx;
    let squares = 0;
    friction.forEach((found, i) => {
      squares += (found / truthOf(given, 'friction_xx', centres.subarray(i, i + 1)) - 1) ** 2;
    });
    // Over four studies 16 %; a single one scatters by about a quarter of that.
    expect(Math.sqrt(squares / friction.length)).toBeLessThan(0.16 * (1 + 2 * 0.25));
  });
});
