import { describe, expect, it } from 'vitest';
import { refineFit } from '../../src/checks/refineFit.js';
import { studySchema } from '../../src/documents/Study.js';
import { fitTracks } from '../../src/fit.js';
import { modelParameters } from '../../src/fields/modelParameters.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { CONSTANT } from '../support/estimateStudy.js';

const TRACKS = simulateSecondOrder({
  tracks: 12,
  frames: 150,
  friction: 0.4,
  localizationError: 0.2,
  seed: 2,
});

describe('a refined fit', async () => {
  const fit = await fitTracks(TRACKS, studySchema.parse({ ...CONSTANT, order: 'second', replicates: 40 }));

  it('removes hardly anything where the estimator has no bias', async () => {
    const before = modelParameters(fit.model);
    const refined = await refineFit(fit, TRACKS, { seed: 5, replicates: 6 });
    const moved = modelParameters(refined.model);
    const spread = (index: number) =>
      Math.sqrt(
        fit.uncertainty.replicates.reduce((sum, row) => sum + (row[index] - before[index]) ** 2, 0) / 40,
      );
    // The mean of six refits scatters by 0.41 of the fit's error; four times that, for up to three rounds in one direction.
    for (let i = 0; i < 3; i++) expect(Math.abs(moved[i] - before[i])).toBeLessThan(1.65 * spread(i));
    expect(refined.diagnostics.refinement).toMatchObject({ replicates: 6 });
    expect(Object.keys((refined.diagnostics.refinement as { removed: object }).removed)).toContain(
      'friction_xx',
    );
  });

  it('is the same for the same seed, and its replicates are wider', async () => {
    const [a, b] = [
      await refineFit(fit, TRACKS, { seed: 5, replicates: 4 }),
      await refineFit(fit, TRACKS, { seed: 5, replicates: 4 }),
    ];
    expect(a.uncertainty.replicates).toEqual(b.uncertainty.replicates);
    const width = (rows: readonly (readonly number[])[]) =>
      Math.max(...rows.map((row) => row[1])) - Math.min(...rows.map((row) => row[1]));
    expect(width(a.uncertainty.replicates) / width(fit.uncertainty.replicates)).toBeCloseTo(
      Math.sqrt(1.25),
      6,
    );
  });
});
