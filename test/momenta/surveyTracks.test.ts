import { describe, expect, it } from 'vitest';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';
import type { Survey } from '../../src/momenta/Survey.js';
import { surveyTracks } from '../../src/momenta/surveyTracks.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { deviationOf, meanOf } from '../support/estimateStudy.js';
import { makeTrack, makeTracks, movePositions } from '../support/makeTracks.js';

const DESIGN = { tracks: 40, frames: 200 };
const SEEDS = 15;

/** Recordings at a tenth of the interval, to be averaged over an exposure. */
const SUBFRAMES = 10;
const FINE = { tracks: 40, frames: 200 * SUBFRAMES, interval: 1 / SUBFRAMES };

/** One axis as a camera records it that is open for `open` of the ten subframes before each frame; with localization error. */
function blur({ positions, trackOffsets }: TrackSet, open: number, error = 0, seed = 1): TrackSet {
  const stream = randomStream(seed, 'localization', 0);
  return makeTracks(
    Array.from({ length: FINE.tracks }, (_, track) =>
      makeTrack(
        Array.from({ length: FINE.frames / SUBFRAMES }, (__, frame) => {
          const end = trackOffsets[track] + (frame + 1) * SUBFRAMES;
          return meanOf(Array.from(positions.subarray(end - open, end))) + error * stream.normal();
        }),
      ),
    ),
  );
}

const repeat = (survey: (seed: number) => Survey): Survey[] =>
  Array.from({ length: SEEDS }, (_, i) => survey(i + 1));

describe('the survey of a second-order motion', () => {
  describe.each([
    ['free', 0],
    ['trapped', 0.09],
  ])('%s', (_, stiffness) => {
    it.each([
      [0.05, 0.1],
      [0.1, 1],
      [0.3, 0.3],
      [1, 0.1],
    ])('finds friction × interval %s beside an error of %s displacements', (friction, localizationError) => {
      const surveys = repeat((seed) =>
        surveyTracks(simulateSecondOrder({ ...DESIGN, friction, stiffness, localizationError, seed })),
      );
      expect(surveys.filter((survey) => survey.recommendedOrder !== 'second')).toEqual([]);
      const logs = surveys.map((survey) => Math.log((survey.relaxationTime ?? NaN) * friction));
      const bound = frictionPrecisionBound({
        frictionTimesInterval: friction,
        errorOverDisplacement: localizationError,
        positions: 8000,
      }).friction;
      // The scatter is within 1.4 of the bound, and known to 1/√28 = 19 % from 15 seeds, of which three; the mean is
      // within three standard errors and a bias of second order in the scatter or 2 %.
      expect(deviationOf(logs)).toBeLessThan(1.4 * bound * 1.57);
      expect(Math.abs(meanOf(logs))).toBeLessThan((3 * 1.4 * bound) / Math.sqrt(SEEDS) + 0.02);
      const errors = surveys.map((survey) => survey.localizationError[0]);
      const standardError = meanOf(surveys.map((survey) => survey.localizationErrorStandardError[0] ?? NaN));
      expect(Math.abs(meanOf(errors) - localizationError)).toBeLessThan(
        (4 * standardError) / Math.sqrt(SEEDS),
      );
      expect(deviationOf(errors)).toBeLessThan(1.6 * standardError);
      const covered = surveys.filter(({ relaxationTimeInterval: interval }) => {
        if (interval === null) return false;
        return interval.low <= 1 / friction && 1 / friction <= interval.high;
      });
      expect(covered.length).toBeGreaterThanOrEqual(11); // of 15 at 95 %: fewer in one series out of 1600
      for (const survey of surveys.slice(0, 5)) expect(survey.trapped).toEqual([stiffness > 0]);
    });
  });

  it.each([
    [10, 0],
    [10, 0.2],
    [5, 0.1],
  ])('finds relaxation time and error under motion blur (%s of 10 subframes, error %s)', (open, error) => {
    const friction = 0.3;
    const recordings = Array.from({ length: SEEDS }, (_, i) =>
      blur(simulateSecondOrder({ ...FINE, friction, seed: i + 1 }), open, error, i + 1),
    );
    // The mean of ten instants stands for an exposure of √(m² − 1)/10.
    const exposure = Math.sqrt(open ** 2 - 1) / SUBFRAMES;
    const surveys = recordings.map((tracks) => surveyTracks(tracks, { exposure }));
    const logs = surveys.map((survey) => Math.log((survey.relaxationTime ?? NaN) * friction));
    // Three standard errors, and a bias of second order in the scatter or 2 %.
    const allowed = (3 * deviationOf(logs)) / Math.sqrt(SEEDS) + 0.02;
    expect(Math.abs(meanOf(logs))).toBeLessThan(allowed);
    const errors = surveys.map((survey) => survey.localizationError[0]);
    // At zero the root of what is cut off at 0 leaves the fourth root of a standard error of some 1e-4 of its square.
    expect(Math.abs(meanOf(errors) - error)).toBeLessThan(
      error === 0 ? 0.1 : (4 * deviationOf(errors)) / Math.sqrt(SEEDS),
    );
    // Untold, blur is taken for a longer memory.
    const untold = recordings.map((tracks) =>
      Math.log((surveyTracks(tracks).relaxationTime ?? NaN) * friction),
    );
    if (open === SUBFRAMES) expect(meanOf(untold)).toBeGreaterThan(allowed);
  });

  it('measures velocity variance and thermal speed per axis', () => {
    const surveys = repeat((seed) =>
      surveyTracks(
        simulateSecondOrder({
          ...DESIGN,
          dimensions: 2,
          friction: 0.4,
          temperature: [1, 4],
          interval: 0.5,
          seed,
        }),
      ),
    );
    for (const axis of [0, 1]) {
      const scores = surveys.map(
        ({ velocityVariance, velocityVarianceStandardError }) =>
          ((velocityVariance[axis] ?? NaN) - [1, 4][axis]) / (velocityVarianceStandardError[axis] ?? NaN),
      );
      expect(Math.abs(meanOf(scores))).toBeLessThan(3.5 / Math.sqrt(SEEDS));
      expect(deviationOf(scores)).toBeLessThan(1.6);
    }
    expect(surveys[0].thermalSpeed[1]).toBeCloseTo(Math.sqrt(surveys[0].velocityVariance[1] ?? NaN), 14);
  });
});

describe('the survey of a first-order motion', () => {
  it.each([
    [0, 0.1],
    [0.05, 0.3],
    [0.5, 1],
  ])('recommends first order and finds the error (κΔ = %s, s = %s)', (relaxation, localizationError) => {
    const surveys = repeat((seed) =>
      surveyTracks(simulateFirstOrder({ ...DESIGN, diffusion: 0.5, relaxation, localizationError, seed })),
    );
    for (const survey of surveys) {
      expect(survey).toMatchObject({
        recommendedOrder: 'first',
        relaxationTime: null,
        frictionTimesInterval: null,
      });
    }
    // The error is reported as a root, 0 where its square came out negative; squares are free of that.
    const standardErrors = surveys.map(({ localizationErrorStandardError: [error] }) => error ?? NaN);
    const errors = surveys.map((survey) => survey.localizationError[0]);
    expect(Math.abs(meanOf(errors) - localizationError)).toBeLessThan(
      (4 * meanOf(standardErrors)) / Math.sqrt(SEEDS) + (localizationError < 0.2 ? 0.03 : 0),
    );
    const diffusions = surveys.map((survey) => survey.diffusion[0] ?? NaN);
    expect(Math.abs(meanOf(diffusions) / 0.5 - 1)).toBeLessThan(
      (3.5 * deviationOf(diffusions)) / 0.5 / Math.sqrt(SEEDS),
    );
  });

  it('does not take motion blur for memory', () => {
    for (let seed = 1; seed <= 5; seed++) {
      const blurred = blur(simulateFirstOrder({ ...FINE, seed }), SUBFRAMES);
      expect(surveyTracks(blurred)).toMatchObject({ recommendedOrder: 'first', localizationError: [0] });
    }
  });

  it('finds diffusion and localization error under motion blur that it is told', () => {
    const surveys = repeat((seed) => {
      const fine = simulateFirstOrder({ ...FINE, diffusion: 0.5, seed });
      return surveyTracks(blur(fine, SUBFRAMES, 0.3, seed), { exposure: 1 });
    });
    for (const { recommendedOrder } of surveys) expect(recommendedOrder).toBe('first');
    const diffusions = surveys.map((survey) => survey.diffusion[0] ?? NaN);
    expect(Math.abs(meanOf(diffusions) / 0.5 - 1)).toBeLessThan(
      (3.5 * deviationOf(diffusions)) / 0.5 / Math.sqrt(SEEDS),
    );
    const errors = surveys.map((survey) => survey.localizationError[0] ** 2);
    expect(Math.abs(meanOf(errors) - 0.09)).toBeLessThan((3.5 * deviationOf(errors)) / Math.sqrt(SEEDS));
  });

  it('recommends first order where velocities are all but gone after a frame', () => {
    for (let seed = 1; seed <= 5; seed++) {
      const tracks = simulateSecondOrder({
        ...DESIGN,
        dimensions: 2,
        friction: 5,
        localizationError: 0.1,
        seed,
      });
      expect(surveyTracks(tracks).recommendedOrder).toBe('first');
    }
  });

  it('spreads with exponent 1 when free, and with a smaller one in a trap', () => {
    const free = surveyTracks(
      simulateFirstOrder({ ...DESIGN, frames: 1000, localizationError: 0.5, seed: 1 }),
    );
    const trapped = surveyTracks(simulateFirstOrder({ ...DESIGN, frames: 1000, relaxation: 0.1, seed: 1 }));
    // Over lags 6 … 40 of 40 000 displacements the slope scatters by about 0.02.
    expect(Math.abs((free.spreadingExponent?.value ?? NaN) - 1)).toBeLessThan(0.08);
    expect(trapped.spreadingExponent?.value).toBeLessThan(0.5);
  });
});

describe('every survey', () => {
  const tracks = simulateSecondOrder({
    tracks: 12,
    frames: 120,
    dimensions: 2,
    friction: 0.2,
    stiffness: [0.01, 0],
    localizationError: 0.2,
    lostFrames: 0.1,
    seed: 8,
  });

  it('is plain JSON', () => {
    for (const recording of [tracks, makeTracks([makeTrack([1, 1, 1])]), makeTracks([makeTrack([0])])]) {
      const survey = surveyTracks(recording);
      expect(JSON.parse(JSON.stringify(survey))).toEqual(survey);
    }
  });

  it('changes with the units of length and time as its numbers say', () => {
    const [length, time] = [1e-6, 60];
    const survey = surveyTracks(tracks);
    const scaled = surveyTracks({
      ...tracks,
      times: tracks.times.map((value) => value * time),
      positions: tracks.positions.map((value) => value * length),
      samplingInterval: tracks.samplingInterval * time,
    });
    // Round-off moves the end of the search within its tolerance of 1e-9 in the deviance, √ of that in the variables.
    const close = (a: number | null, b: number | null, factor: number): void => {
      expect(Math.abs((a ?? NaN) / ((b ?? NaN) * factor) - 1)).toBeLessThan(1e-3);
    };
    close(scaled.relaxationTime, survey.relaxationTime, time);
    for (const axis of [0, 1]) {
      close(scaled.localizationError[axis], survey.localizationError[axis], length);
      close(scaled.velocityVariance[axis], survey.velocityVariance[axis], (length / time) ** 2);
      close(scaled.diffusion[axis], survey.diffusion[axis], length ** 2 / time);
    }
    expect(scaled.trapped).toEqual(survey.trapped);
    expect(scaled.warnings.map(({ code }) => code)).toEqual(survey.warnings.map(({ code }) => code));
  });

  it('is the same for tracks in another order, at another origin and another time of day', () => {
    const survey = surveyTracks(tracks);
    const moved = surveyTracks({
      ...movePositions(tracks, (position, _row, axis) => position + 1000 * (axis + 1)),
      times: tracks.times.map((value) => value + 4096),
    });
    expect(moved.relaxationTime).toBeCloseTo(survey.relaxationTime ?? NaN, 3);
    expect(moved.recommendedOrder).toBe(survey.recommendedOrder);
    expect(moved.suspectJumps).toBe(survey.suspectJumps);
  });

  it('takes a localization error that is given, or stands in the table', () => {
    expect(surveyTracks(tracks, { localizationError: 0.25 })).toMatchObject({
      localizationError: [0.25, 0.25],
      localizationErrorStandardError: [null, null],
      localizationErrorSource: 'given',
    });
    const errors = tracks.positions.map((_, i) => (i % 2 === 0 ? 0.2 : 0.1));
    const fromTable = surveyTracks({ ...tracks, localizationErrors: errors });
    expect(fromTable.localizationErrorSource).toBe('table');
    expect(fromTable.localizationError[0]).toBeCloseTo(0.2, 12);
    expect(fromTable.localizationError[1]).toBeCloseTo(0.1, 12);
    expect(surveyTracks(tracks).localizationErrorSource).toBe('estimated');
  });

  it('describes even what cannot be fitted: tracks of one, two, three positions', () => {
    for (const places of [[0], [0, 1], [0, 1, 3]]) {
      const survey = surveyTracks(makeTracks([makeTrack(places), makeTrack(places)]));
      expect(survey).toMatchObject({ tracks: 2, positions: 2 * places.length, recommendedOrder: 'first' });
    }
  });
});
