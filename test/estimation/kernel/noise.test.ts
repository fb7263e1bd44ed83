import { describe, expect, it } from 'vitest';
import { estimateDifferences } from '../../../src/estimation/differences/estimateDifferences.js';
import { layOutSecondOrder } from '../../../src/estimation/differences/forceFriction.js';
import { estimateMotion } from '../../../src/estimation/kernel/estimateMotion.js';
import { createKernelGrid } from '../../../src/estimation/kernel/grid.js';
import { collectNoiseMoments, secondOrderRows } from '../../../src/estimation/kernel/noiseMoments.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { deviationOf, meanOf } from '../../support/estimateStudy.js';
import { simulateFirstOrder, simulateSecondOrder } from '../../support/exactProcesses.js';
import { estimateWith, kernelColumns } from './kernelStudy.js';

describe('the noise', () => {
  it('moves with the friction as its effects say', () => {
    const tracks = simulateSecondOrder({
      tracks: 30,
      frames: 400,
      friction: 0.3,
      stiffness: 0.02,
      localizationError: 0.2,
      seed: 1,
    });
    const { plan } = estimateWith(estimateDifferences, tracks, {}, 'second');
    const grid = createKernelGrid(tracks, describeVisited(tracks));
    const varying = { basis: grid.spec, form: 'scalar' as const };
    const local = { ...plan, force: { ...plan.force, basis: grid.spec }, friction: varying, noise: varying };
    const motion = estimateMotion(tracks, local, grid);
    const rows = (parameters: Float64Array) =>
      secondOrderRows(tracks, 'scalar', layOutSecondOrder(local, 1), parameters);
    const at = (parameters: Float64Array) =>
      collectNoiseMoments(tracks, local, grid, rows(parameters), parameters.length, 1);
    const here = at(motion.parameters);
    // A bump of friction about as wide as particles move in a frame; half the difference of both signs leaves no square.
    const change = motion.parameters.map((_, i) =>
      i < grid.size ? 0 : 1e-3 * Math.exp(-0.5 * grid.knots[i - grid.size] ** 2),
    );
    const moved = (sign: number) =>
      at(motion.parameters.map((value, i) => value + sign * change[i])).moments.total.vector;
    const [up, down] = [moved(1), moved(-1)];
    const p = change.length;
    let largest = 0;
    let worst = 0;
    for (let knot = 0; knot < grid.size; knot++) {
      let predicted = 0;
      for (let j = 0; j < p; j++) predicted += here.sensitivity[knot * p + j] * change[j];
      largest = Math.max(largest, Math.abs(predicted));
      worst = Math.max(worst, Math.abs((up[knot] - down[knot]) / 2 - predicted));
    }
    expect(largest).toBeGreaterThan(0);
    expect(worst).toBeLessThan(1e-9 * largest);
  });

  it('is not lowered where the density of positions falls', () => {
    // Uniform noise, a steep density: far out, who is recorded far out tends to have an error outwards.
    const ratios = Array.from({ length: 12 }, (_, i) => {
      const tracks = simulateFirstOrder({
        tracks: 60,
        frames: 400,
        relaxation: 0.1,
        diffusion: 0.5,
        localizationError: 0.5,
        seed: i + 1,
      });
      // The standard deviation of places is √5; at two of them E[error | place] is 0.25 · 2/√5 = 0.22.
      const { diffusion_xx: found } = kernelColumns(tracks, {}, 'first', Float64Array.of(-4.5, 4.5));
      return meanOf(Array.from(found)) / 0.5;
    });
    // Residuals behind the row would lower it by s² μ μ Δ/(2 D²) = 20 %.
    expect(Math.abs(meanOf(ratios) - 1)).toBeLessThan((3.5 * deviationOf(ratios)) / Math.sqrt(12) + 0.01);
  });
});
