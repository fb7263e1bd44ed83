import { inverse, Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { studySchema } from '../../../src/documents/Study.js';
import { templateModel } from '../../../src/estimation/differences/estimateDifferences.js';
import { layOutLikelihood } from '../../../src/estimation/likelihood/layout.js';
import { respondTo } from '../../../src/estimation/likelihood/response.js';
import type { ScoringSolution } from '../../../src/estimation/likelihood/scoring.js';
import { measureSensitivity, planSensitivity } from '../../../src/estimation/likelihood/sensitivity.js';
import { planEstimation } from '../../../src/estimation/planEstimation.js';
import { randomStream } from '../../../src/numerics/random/RandomStream.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { simulateSecondOrder } from '../../support/exactProcesses.js';

const REACH = 5; // cells from which two functions no longer feel each other

/** A solution of which only what sensitivity and response read is there. */
function solutionOf(information: Float64Array, p: number): ScoringSolution {
  const system = Matrix.from1DArray(p, p, information).add(Matrix.eye(p, p).mul(0.5)); // penalties: a half
  return {
    parameters: new Float64Array(p).fill(0.1),
    scores: new Float64Array(p),
    inverse: Float64Array.from(inverse(system).to1DArray()),
    information,
    strengths: new Float64Array(0),
    logLikelihood: 0,
    effectiveParameters: p,
    iterations: 1,
    converged: true,
  };
}

describe('the sensitivity of the score', () => {
  const tracks = simulateSecondOrder({ tracks: 2, frames: 200, friction: 0.2, seed: 1 });

  it.each([0, 40])('is found by moving functions that are far apart together: period %d', (period) => {
    const study = studySchema.parse({ force: 'spline:30', friction: 'spline:30', noise: 'spline:30' });
    const boxed = { ...tracks, periods: [period] };
    const plan = planEstimation(boxed, study, 'second', null, describeVisited(boxed));
    const layout = layOutLikelihood(templateModel(boxed, plan), { force: false, friction: false }, true);
    const p = layout.size;
    const map = planSensitivity(layout);
    expect(map.groups.length).toBeLessThan(0.6 * p);
    expect(map.groups.flat().sort((a, b) => a - b)).toEqual(Array.from({ length: p }, (_, i) => i));
    // A linear score whose entries are there for functions that are near, and for the error variance.
    const stream = randomStream(1, 'sensitivity');
    const truth = new Float64Array(p * p);
    for (let i = 0; i < p; i++) {
      for (let j = 0; j <= i; j++) {
        const apart = Math.abs((i % 30) - (j % 30));
        const near = i === p - 1 || Math.min(apart, period > 0 ? 30 - apart : apart) < REACH;
        truth[i * p + j] = truth[j * p + i] = near ? stream.normal() : 0;
      }
    }
    const solution = solutionOf(Float64Array.from(Matrix.eye(p, p).to1DArray()), p);
    const run = (parameters: Float64Array, scores: Float64Array | null): number => {
      for (let i = 0; scores && i < p; i++) {
        scores[i] = 0;
        for (let j = 0; j < p; j++) scores[i] -= truth[i * p + j] * (parameters[j] - 0.1);
      }
      return 0;
    };
    const found = measureSensitivity({ run }, map, solution, 1);
    for (let i = 0; i < p * p; i++) expect(found[i]).toBeCloseTo(truth[i], 9);
  });
});

describe('the response of the estimate', () => {
  const p = 4;
  const information = Float64Array.from(Matrix.diag([4, 3, 2, 1]).to1DArray());
  const solution = solutionOf(information, p);

  it('is the inverse of information and penalties where the score answers as they say', () => {
    const found = respondTo(information, solution);
    for (let i = 0; i < p * p; i++) expect(found[i]).toBeCloseTo(solution.inverse[i], 12);
  });

  it('is (J + S)⁻¹ for a sensitivity of its own', () => {
    const sensitivity = information.map((value, i) => value * 0.6 + (i % (p + 1) === 0 ? 0 : 0.1));
    const system = Matrix.from1DArray(p, p, sensitivity).add(Matrix.eye(p, p).mul(0.5));
    const expected = inverse(system).to1DArray();
    const found = respondTo(sensitivity, solution);
    for (let i = 0; i < p * p; i++) expect(found[i]).toBeCloseTo(expected[i], 10);
  });

  it('stays within ten times that of the information where hardly anything is measured', () => {
    const found = respondTo(new Float64Array(p * p).fill(-50), solution);
    for (let i = 0; i < p; i++) {
      expect(found[i * p + i]).toBeGreaterThan(0);
      expect(found[i * p + i]).toBeLessThan(10.001 * solution.inverse[i * p + i]);
    }
  });
});
