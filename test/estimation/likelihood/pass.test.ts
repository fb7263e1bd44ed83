import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { studySchema, type StudyInput } from '../../../src/documents/Study.js';
import { templateModel } from '../../../src/estimation/differences/estimateDifferences.js';
import { createFirstOrderPass } from '../../../src/estimation/likelihood/firstOrderPass.js';
import { layOutLikelihood, type LikelihoodLayout } from '../../../src/estimation/likelihood/layout.js';
import type { PathPass } from '../../../src/estimation/likelihood/PathPass.js';
import { createSecondOrderPass } from '../../../src/estimation/likelihood/secondOrderPass.js';
import { planEstimation } from '../../../src/estimation/planEstimation.js';
import { countPositions, type TrackSet } from '../../../src/tracks/TrackSet.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { simulateFirstOrder, simulateSecondOrderPaths } from '../../support/exactProcesses.js';
import { CONSTANT } from '../../support/estimateStudy.js';

interface Reference {
  readonly times: number[];
  readonly positions: number[];
  readonly errors: number[];
  readonly second: Record<'friction' | 'noise' | 'force' | 'logLikelihood' | 'logLikelihoodPerPoint', number>;
  readonly first: Record<'diffusion' | 'drift' | 'logLikelihood' | 'logLikelihoodPerPoint', number>;
}

const REFERENCE = JSON.parse(
  readFileSync(new URL('../../reference/likelihood/logLikelihoods.json', import.meta.url), 'utf8'),
) as Reference;

function referenceTracks(perPoint: boolean): TrackSet {
  const { times, positions, errors } = REFERENCE;
  return {
    dimensions: 1,
    coordinates: ['x'],
    trackNames: ['1'],
    trackOffsets: Int32Array.of(0, times.length),
    times: Float64Array.from(times),
    positions: Float64Array.from(positions),
    localizationErrors: perPoint ? Float64Array.from(errors) : null,
    trackTypes: null,
    samplingInterval: 1,
    periods: [0],
    units: { length: null, time: null },
  };
}

function prepare(
  tracks: TrackSet,
  order: 'first' | 'second',
  study: StudyInput,
): { pass: PathPass; layout: LikelihoodLayout } {
  const plan = planEstimation(tracks, studySchema.parse(study), order, null, describeVisited(tracks));
  const layout = layOutLikelihood(
    templateModel(tracks, plan),
    { force: false, friction: false },
    tracks.localizationErrors === null,
  );
  const setting = {
    blockOfPosition: new Int32Array(countPositions(tracks)),
    blocks: 1,
    knownError: null,
  };
  const create = order === 'second' ? createSecondOrderPass : createFirstOrderPass;
  return { pass: create(tracks, layout, setting), layout };
}

const ROUNDING = 1e-8; // relative to log-likelihoods of order ten, with a diffuse start of 1e4

describe('the log-likelihood of noisy positions at uneven times', () => {
  it('is that of the multivariate normal density at second order', () => {
    const { friction, noise, force, logLikelihood, logLikelihoodPerPoint } = REFERENCE.second;
    const shared = prepare(referenceTracks(false), 'second', CONSTANT).pass;
    const parameters = [force, Math.log(friction), Math.log(noise), Math.log(0.3 * 0.3)];
    expect(Math.abs(shared.run(Float64Array.from(parameters), null) - logLikelihood)).toBeLessThan(ROUNDING);
    const perPoint = prepare(referenceTracks(true), 'second', CONSTANT).pass;
    const found = perPoint.run(Float64Array.from(parameters.slice(0, 3)), null);
    expect(Math.abs(found - logLikelihoodPerPoint)).toBeLessThan(ROUNDING);
  });

  it('is that of the multivariate normal density at first order', () => {
    const { diffusion, drift, logLikelihood, logLikelihoodPerPoint } = REFERENCE.first;
    const shared = prepare(referenceTracks(false), 'first', CONSTANT).pass;
    const parameters = [drift, Math.log(diffusion), Math.log(0.3 * 0.3)];
    expect(Math.abs(shared.run(Float64Array.from(parameters), null) - logLikelihood)).toBeLessThan(ROUNDING);
    const perPoint = prepare(referenceTracks(true), 'first', CONSTANT).pass;
    const found = perPoint.run(Float64Array.from(parameters.slice(0, 2)), null);
    expect(Math.abs(found - logLikelihoodPerPoint)).toBeLessThan(ROUNDING);
  });
});

describe('the score', () => {
  it.each(['first', 'second'] as const)('is the derivative of the log-likelihood at %s order', (order) => {
    const design = { tracks: 3, frames: 40, dimensions: 2, localizationError: 0.3, lostFrames: 0.1, seed: 5 };
    const tracks =
      order === 'second'
        ? simulateSecondOrderPaths({ ...design, friction: 0.4 }).tracks
        : simulateFirstOrder({ ...design, diffusion: 0.5 });
    const { pass, layout } = prepare(tracks, order, {
      ...CONSTANT,
      frictionForm: 'axes',
      noiseForm: 'scalar',
    });
    const parameters = Float64Array.from({ length: layout.size }, (_, i) => (i < 2 ? 0.05 : -0.8 + 0.1 * i));
    const scores = new Float64Array(layout.size);
    pass.run(parameters, scores);
    for (let i = 0; i < layout.size; i++) {
      const at = (step: number) =>
        pass.run(
          parameters.map((v, j) => (j === i ? v + step : v)),
          null,
        );
      const slope = (at(1e-5) - at(-1e-5)) / 2e-5;
      expect(Math.abs(scores[i] - slope)).toBeLessThan(1e-5 * Math.max(1, Math.abs(slope)));
    }
  });
});

describe('smoothed velocities', () => {
  it('err by their posterior deviation', () => {
    const process = { tracks: 20, frames: 300, friction: 0.3, localizationError: 0.4, seed: 8 };
    const { tracks, velocities } = simulateSecondOrderPaths(process);
    const { pass } = prepare(tracks, 'second', CONSTANT);
    const n = countPositions(tracks);
    const observer = { velocities: new Float64Array(n), velocityVariances: new Float64Array(n) };
    const truth = Float64Array.of(0, Math.log(0.3), Math.log(0.6), Math.log(0.16));
    pass.run(truth, null, observer);
    let squares = 0;
    for (let row = 0; row < n; row++)
      squares += (observer.velocities[row] - velocities[row]) ** 2 / observer.velocityVariances[row];
    // Mean of about n/5 independent squares of standard normals (errors are correlated over some frames).
    expect(Math.abs(squares / n - 1)).toBeLessThan(4 * Math.sqrt(2 / (n / 5)));
  });
});

describe('a pass', () => {
  it.each(['first', 'second'] as const)('leaves nothing behind from smoothing: order %s', (order) => {
    const tracks = referenceTracks(false);
    const path = { places: new Float64Array(countPositions(tracks)) };
    const scoresOf = (smoothFirst: boolean): Float64Array => {
      const { pass, layout } = prepare(tracks, order, CONSTANT);
      const parameters = new Float64Array(layout.size).fill(-1);
      const scores = new Float64Array(layout.size);
      if (smoothFirst) pass.run(parameters, null, path);
      pass.run(parameters, scores);
      return scores;
    };
    expect(scoresOf(true)).toEqual(scoresOf(false));
  });
});
