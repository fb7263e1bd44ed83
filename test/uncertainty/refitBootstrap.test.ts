import { describe, expect, it } from 'vitest';
import { studySchema } from '../../src/documents/Study.js';
import { fitTracks } from '../../src/fit.js';
import { measureSpread } from '../../src/uncertainty/spread.js';
import { createWorkerPool } from '../../src/workers/WorkerPool.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';

const REPLICATES = 60; // standard deviations from so few scatter by 9 %, ratios of two by 13 %

const second = simulateSecondOrder({
  tracks: 40,
  frames: 80,
  friction: 0.2,
  stiffness: 0.02,
  localizationError: 0.1,
  seed: 3,
});
const first = simulateFirstOrder({
  tracks: 40,
  frames: 80,
  diffusion: 0.5,
  relaxation: 0.1,
  localizationError: 0.2,
  seed: 3,
});

function study(order: 'first' | 'second', estimator: string, bootstrap: string) {
  return studySchema.parse({
    order,
    estimator,
    bootstrap,
    replicates: REPLICATES,
    force: 'linear',
    friction: 'constant',
    noise: 'constant',
    drift: 'linear',
    diffusion: 'constant',
  });
}

describe('the bootstrap by full refits', () => {
  it.each([
    ['second', 'likelihood'],
    ['second', 'differences'],
    ['first', 'likelihood'],
    ['first', 'differences'],
  ] as const)(
    'agrees with the one-step bootstrap where shapes are fixed: order %s, %s',
    async (order, estimator) => {
      const tracks = order === 'second' ? second : first;
      const place = Float64Array.of(0.5);
      const spreadOf = async (bootstrap: string) => {
        const fit = await fitTracks(tracks, study(order, estimator, bootstrap));
        expect(fit.uncertainty.replicates.length).toBe(REPLICATES);
        return measureSpread(fit.model, fit.uncertainty.replicates, place);
      };
      const quick = await spreadOf('one-step');
      const full = await spreadOf('refit');
      quick.forEach((spread, column) => {
        const ratio = full[column].deviations[0] / spread.deviations[0];
        expect(Math.abs(Math.log(ratio)), spread.name).toBeLessThan(0.4); // three standard errors
      });
    },
  );

  it('gives the same bytes with one worker and with two', async () => {
    const pool = createWorkerPool(2);
    try {
      const settings = study('first', 'differences', 'refit');
      const alone = await fitTracks(first, settings);
      const shared = await fitTracks(first, settings, { mapTasks: pool.mapTasks });
      expect(shared.uncertainty).toEqual(alone.uncertainty);
    } finally {
      await pool.close();
    }
  });
});
