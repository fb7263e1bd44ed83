import { describe, expect, it } from 'vitest';
import {
  type DisplacementCovariances,
  estimateDisplacementCovariances,
} from '../../src/momenta/displacementCovariances.js';
import { type DisplacementModel, displacementCovariancesInto } from '../../src/momenta/displacementModels.js';
import { fitDisplacementModel } from '../../src/momenta/fitDisplacementModel.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { deviationOf, meanOf } from '../support/estimateStudy.js';

const LAGS = 40;

/** The covariances of a model as if measured without scatter, in two blocks. */
function asMeasured(model: DisplacementModel, errorVariance: number): DisplacementCovariances {
  const c = new Float64Array(LAGS + 1);
  displacementCovariancesInto(model, errorVariance, c);
  const pairs = Float64Array.from({ length: 2 * (LAGS + 1) }, (_, i) => 500 - (i % (LAGS + 1)));
  return {
    dimensions: 1,
    lags: LAGS,
    blocks: 2,
    pairs,
    sums: [pairs.map((count, i) => count * c[i % (LAGS + 1)])],
    totalPairs: pairs.slice(0, LAGS + 1).map((count) => 2 * count),
    covariances: [c],
    meanDisplacement: Float64Array.of(0),
  };
}

const MODELS: readonly [DisplacementModel, number][] = [
  [{ kind: 'first-free', diffusion: 0.5 }, 0.2],
  [{ kind: 'first-free', diffusion: 0.5 }, 0],
  [{ kind: 'first-trapped', diffusion: 0.5, relaxation: 0.3 }, 0.1],
  [{ kind: 'second-free', velocityVariance: 1, friction: 0.03 }, 0.01],
  [{ kind: 'second-free', velocityVariance: 1, friction: 0.3 }, 1],
  [{ kind: 'second-free', velocityVariance: 1e-12, friction: 1 }, 1e-13],
  [{ kind: 'second-trapped', velocityVariance: 1, friction: 0.1, stiffness: 0.09 }, 0.04],
  [{ kind: 'second-trapped', velocityVariance: 1, friction: 1, stiffness: 0.05 }, 0.3],
];

describe('a fit to displacement covariances', () => {
  it.each(MODELS)('returns the motion that made them: %j, error variance %s', (model, errorVariance) => {
    const fit = fitDisplacementModel(asMeasured(model, errorVariance), 0, model.kind);
    // The search stops at changes of 1e-9 of the deviance, quadratic about the optimum.
    const scale = 'diffusion' in model ? model.diffusion : model.velocityVariance;
    expect(Math.abs((fit?.errorVariance ?? NaN) - errorVariance)).toBeLessThan(1e-3 * scale);
    for (const [name, value] of Object.entries(model)) {
      if (typeof value !== 'number') continue;
      const found = (fit?.model as unknown as Record<string, number> | undefined)?.[name] ?? NaN;
      expect(Math.abs(found / value - 1), name).toBeLessThan(2e-3);
    }
  });

  it('needs no error variance where it is known, and prefers the right motion', () => {
    const truth: DisplacementModel = { kind: 'second-free', velocityVariance: 1, friction: 0.3 };
    const measured = asMeasured(truth, 0.25);
    const known = fitDisplacementModel(measured, 0, 'second-free', 0.25);
    expect(known?.errorVariance).toBe(0.25);
    expect(known?.parameters.map(({ name }) => name)).toEqual(['logVelocityVariance', 'logFriction']);
    expect(known?.model).toMatchObject({ friction: expect.closeTo(0.3, 3) as number });
    const first = fitDisplacementModel(measured, 0, 'first-trapped');
    expect(known?.logLikelihood).toBeGreaterThan((first?.logLikelihood ?? NaN) + 20);
  });

  it('says nothing of an axis along which nothing moves', () => {
    const still = asMeasured({ kind: 'first-free', diffusion: 0 }, 0);
    expect(fitDisplacementModel(still, 0, 'first-free')).toBeNull();
  });

  it('takes motion blur for blur, with a negative error variance, and no further', () => {
    // Full exposure: c₀ = 2D(1 − 1/3), c₁ = D/3 (Vestergaard, Blainey & Flyvbjerg 2014, R = 1/6)
    const blurred = asMeasured({ kind: 'first-free', diffusion: 1 }, -1 / 3);
    const fit = fitDisplacementModel(blurred, 0, 'first-free', 0);
    expect(fit?.errorVariance).toBeCloseTo(-1 / 3, 3);
    expect(fit?.model).toMatchObject({ diffusion: expect.closeTo(1, 3) as number });
  });

  it('gives standard errors that match the scatter over recordings', () => {
    const SEEDS = 60;
    const values: Record<string, number[]> = {};
    const errors: Record<string, number[]> = {};
    for (let seed = 1; seed <= SEEDS; seed++) {
      const recordings = {
        'second-free': simulateSecondOrder({
          tracks: 40,
          frames: 100,
          friction: 0.3,
          localizationError: 0.3,
          seed,
        }),
        'first-free': simulateFirstOrder({
          tracks: 40,
          frames: 100,
          diffusion: 0.5,
          localizationError: 0.5,
          seed,
        }),
      } as const;
      for (const kind of ['second-free', 'first-free'] as const) {
        const fit = fitDisplacementModel(estimateDisplacementCovariances(recordings[kind]), 0, kind);
        fit?.parameters.forEach(({ name, value }, i) => {
          (values[`${kind} ${name}`] ??= []).push(value);
          (errors[`${kind} ${name}`] ??= []).push(Math.sqrt(fit.covariance.get(i, i)));
        });
      }
    }
    expect(Object.keys(values)).toHaveLength(5);
    for (const [name, found] of Object.entries(values)) {
      // A standard deviation from 60 values scatters by 1/√118 = 9 %; three of those, and the errors' own few per cent.
      const ratio = meanOf(errors[name]) / deviationOf(found);
      expect(Math.abs(Math.log(ratio)), name).toBeLessThan(0.32);
    }
    // and without bias beyond three standard errors of the mean
    const truth: Record<string, number> = {
      'second-free logVelocityVariance': 0,
      'second-free logFriction': Math.log(0.3),
      'second-free errorVariance': 0.09,
      'first-free diffusion': 0.5,
      'first-free errorVariance': 0.25,
    };
    for (const [name, found] of Object.entries(values)) {
      expect(Math.abs(meanOf(found) - truth[name]), name).toBeLessThan(
        (3 * deviationOf(found)) / Math.sqrt(SEEDS),
      );
    }
  });
});
