import { describe, expect, it } from 'vitest';
import { studySchema } from '../../src/documents/Study.js';
import { UsageError } from '../../src/errors.js';
import { fitTracks } from '../../src/fit.js';
import { tabulateSmoothedMomenta } from '../../src/uncertainty/tabulateSmoothedMomenta.js';
import { simulateSecondOrderPaths } from '../support/exactProcesses.js';
import { CONSTANT } from '../support/estimateStudy.js';

const MASS = 2;
const PATHS = simulateSecondOrderPaths({
  tracks: 30,
  frames: 150,
  friction: 0.3,
  localizationError: 0.3,
  seed: 4,
});

describe('smoothed momenta', async () => {
  const fit = await fitTracks(PATHS.tracks, studySchema.parse({ ...CONSTANT, order: 'second' }));
  const table = tabulateSmoothedMomenta(PATHS.tracks, fit, MASS);
  const column = (name: string): Float64Array =>
    table.columns.find((one) => one.name === name)?.values as Float64Array;
  const n = PATHS.tracks.times.length;

  it('err by what they say', () => {
    let squares = 0;
    for (let row = 0; row < n; row++)
      squares +=
        ((column('momentum_x')[row] - MASS * PATHS.velocities[row]) / column('momentum_x_error')[row]) ** 2;
    // about n/5 independent squares of standard normals; the coefficients' own error adds little
    expect(Math.abs(squares / n - 1)).toBeLessThan(5 * Math.sqrt(2 / (n / 5)));
  });

  it('hold the kinetic energy that equipartition gives on average', () => {
    // Common practice: the mean of m v²/2 is m T/2 per axis; T = 1. Velocities are remembered for 1/0.3 frames.
    const mean = column('kinetic_energy').reduce((sum, value) => sum + value, 0) / n;
    expect(Math.abs(mean - MASS / 2)).toBeLessThan(4 * (MASS / 2) * Math.sqrt(2 / (n * 0.3)));
    expect(column('temperature_xx')[0]).toBeGreaterThan(column('temperature_xx_low')[0]);
    expect(column('temperature_xx')[0]).toBeLessThan(column('temperature_xx_high')[0]);
  });

  it('are refused from a fit that knows no velocities', async () => {
    const first = await fitTracks(PATHS.tracks, studySchema.parse({ ...CONSTANT, order: 'first' }));
    expect(() => tabulateSmoothedMomenta(PATHS.tracks, first, 1)).toThrow(UsageError);
    const differences = studySchema.parse({ ...CONSTANT, order: 'second', estimator: 'differences' });
    const other = await fitTracks(PATHS.tracks, differences);
    expect(() => tabulateSmoothedMomenta(PATHS.tracks, other, 1)).toThrow(/likelihood/);
  });
});
