import { describe, expect, it } from 'vitest';
import { studySchema } from '../../../src/documents/Study.js';
import { fitTracks } from '../../../src/fit.js';
import { frictionPrecisionBound } from '../../../src/momenta/precisionBound.js';
import { simulateFirstOrder, simulateSecondOrder } from '../../support/exactProcesses.js';
import { CONSTANT } from '../../support/estimateStudy.js';
import { judgeFit } from '../../support/judgeFit.js';
import { bumpCase, diffusionCase, simulateCase } from '../../support/variedCases.js';

const SEEDS = 5;
// 99.9 % point of chi-square with 5 degrees of freedom over 5 (from memory: 20.52): how far a mean square may be above 1.
const CHANCE = Math.sqrt(20.52 / SEEDS);

describe('the likelihood estimate of constant coefficients', () => {
  it.each([
    [0.1, 0.3],
    [0.2, 1],
    [1, 0.1],
  ])('comes close to the Cramér–Rao bound at ΓΔ = %f and error/displacement %f', async (friction, ratio) => {
    const design = { tracks: 20, frames: 500, friction, localizationError: ratio };
    const bound = frictionPrecisionBound({
      frictionTimesInterval: friction,
      errorOverDisplacement: ratio,
      positions: 10_000,
    });
    let ofFriction = 0;
    let ofNoise = 0;
    for (let seed = 1; seed <= SEEDS; seed++) {
      const study = studySchema.parse({ ...CONSTANT, order: 'second' });
      const { model, diagnostics } = await fitTracks(simulateSecondOrder({ ...design, seed }), study);
      expect(diagnostics.converged).toBe(true);
      if (model.order !== 'second') throw new Error('wrong order');
      ofFriction += (model.friction.coefficients[0][0] - Math.log(friction)) ** 2 / SEEDS;
      ofNoise += (model.noise.coefficients[0][0] - Math.log(2 * friction)) ** 2 / SEEDS;
    }
    expect(Math.sqrt(ofFriction) / bound.friction).toBeLessThan(1.15 * CHANCE);
    expect(Math.sqrt(ofNoise) / bound.noise).toBeLessThan(1.15 * CHANCE);
  });

  it('finds diffusion within its interval where the error is as large as the displacement', async () => {
    const tracks = simulateFirstOrder({
      tracks: 40,
      frames: 300,
      diffusion: 0.5,
      localizationError: 1,
      seed: 3,
    });
    const fit = await fitTracks(tracks, studySchema.parse({ ...CONSTANT, order: 'first' }));
    if (fit.model.order !== 'first') throw new Error('wrong order');
    const [value] = fit.model.diffusion.coefficients[0];
    const deviations = fit.uncertainty.replicates.map((row) => (row[1] - value) ** 2);
    const error = Math.sqrt(deviations.reduce((sum, value) => sum + value, 0) / deviations.length);
    expect(Math.abs(value - Math.log(0.5))).toBeLessThan(4 * error);
    expect(error).toBeLessThan(0.1);
  });
});

describe('the likelihood estimate of varying coefficients', () => {
  // A third of the recording that the studies take, so that errors may be √3 of what is asked of those.
  it.each([
    [bumpCase(0.1), { friction_xx: 0.12, noise_xx: 0.08, force_x: 0.15 }],
    [bumpCase(0.55), { friction_xx: 0.15, noise_xx: 0.15, force_x: 0.15 }],
    [diffusionCase(0.9), { drift_x: 0.15, diffusion_xx: 0.12 }],
  ])('errs little over the visited region: $title', async (given, limits) => {
    const smaller = { ...given, process: { ...given.process, tracks: 20 } };
    const study = studySchema.parse({ ...given.study, order: given.order });
    const verdicts = judgeFit(await fitTracks(simulateCase(smaller, 2), study), given);
    const errors = Object.fromEntries(verdicts.map(({ name, error }) => [name, error]));
    for (const [name, limit] of Object.entries(limits))
      expect(errors[name]).toBeLessThan(limit * Math.sqrt(3));
  });
});
