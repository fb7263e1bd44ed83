/** Fit → scenario → simulate → fit, on a process with a bump of friction and noise. */

import { fitSchema, type FitDocument } from '../../src/documents/FitDocument.js';
import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { createModelEvaluator } from '../../src/fields/evaluateModel.js';
import { fitTracks } from '../../src/fit.js';
import { buildScenario } from '../../src/simulation/buildScenario.js';
import { simulateScenario } from '../../src/simulation/simulateScenario.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { visitedCentres } from '../../src/tracks/visitedRegion.js';
import { simulateVaried } from './variedProcess.js';

export interface RoundTrip {
  /** Root mean square of (second fit ÷ first fit − 1) over the visited cells. */
  readonly friction: number;
  readonly noise: number;
  /** The same, each cell counted by its positions. */
  readonly frictionByVisits: number;
  readonly noiseByVisits: number;
  readonly positions: number;
}

/** Friction of the process; its noise is twice that, so that the temperature is 1. */
export function bump(place: ArrayLike<number>): number {
  let square = 0;
  for (let axis = 0; axis < place.length; axis++) square += place[axis] ** 2;
  return 0.6 + 1.6 * Math.exp(-square / 0.8);
}

/** Fits tracks as a file would hold it. */
export async function fitDocument(tracks: TrackSet, study: StudyInput): Promise<FitDocument> {
  const result = await fitTracks(tracks, studySchema.parse(study));
  return fitSchema.parse({
    format: 'wanderlaw-fit',
    version: 1,
    program: 'test',
    created: '',
    timing: {},
    sources: [],
    ...result,
  });
}

/** 40 tracks of 1500 positions in a trap (stirred in two dimensions), with automatic splines. */
export async function measureRoundTrip(dimensions: 1 | 2, study: StudyInput = {}): Promise<RoundTrip> {
  const tracks = simulateVaried({
    dimensions,
    tracks: 40,
    frames: 1500,
    interval: 0.1,
    substeps: 5,
    force: (place, out) => {
      out[0] = -place[0] - (dimensions > 1 ? 0.3 * place[1] : 0);
      if (dimensions > 1) out[1] = -place[1] + 0.3 * place[0];
    },
    friction: (place, out) => void out.fill(bump(place)),
    noise: (place, out) => void out.fill(2 * bump(place)),
    localizationError: 0.01,
    startSpread: 1,
    warmUp: 10,
    seed: 1,
  });
  const choices: StudyInput = { order: 'second', force: 'linear', ...study };
  const first = await fitDocument(tracks, choices);
  const simulated = await simulateScenario(buildScenario(first), { seed: 2 });
  const second = await fitDocument(simulated.tracks, choices);
  const [before, after] = [createModelEvaluator(first.model), createModelEvaluator(second.model)];
  const centres = visitedCentres(first.visited);
  const counts = first.visited.counts.filter((count) => count >= first.visited.threshold);
  const total = counts.reduce((sum, count) => sum + count, 0);
  const [a, b] = [new Float64Array(dimensions ** 2), new Float64Array(dimensions ** 2)];
  const measure = (read: 'frictionInto' | 'noiseInto'): [number, number] => {
    let [plain, visits] = [0, 0];
    counts.forEach((count, cell) => {
      before[read](centres, cell * dimensions, a);
      after[read](centres, cell * dimensions, b);
      const square = (b[0] / a[0] - 1) ** 2;
      plain += square / counts.length;
      visits += (count * square) / total;
    });
    return [Math.sqrt(plain), Math.sqrt(visits)];
  };
  const [friction, frictionByVisits] = measure('frictionInto');
  const [noise, noiseByVisits] = measure('noiseInto');
  return { friction, noise, frictionByVisits, noiseByVisits, positions: tracks.times.length };
}
