/** What a careful colleague would say on seeing the survey: one sentence each, with the number and the remedy. */

import type { Warning } from '../errors.js';
import { studentTail } from '../numerics/special/student.js';
import type { Survey } from './Survey.js';

const COARSE = 1; // friction × interval at which only e⁻¹ of a velocity reaches the next frame
const DROWNED = 0.7; // error over displacement: 6 s² then exceeds the second difference of the motion for ΓΔ ≤ 1
const IMPRECISE = 0.25; // relative standard deviation of friction under which a field cannot be resolved
const FAINT_MEMORY = 1; // log-likelihood, after the cost of parameters: chance exceeds it in half a per cent of recordings
const FEW_RELAXATIONS = 3; // of the velocity, per track
const FEW_POSITIONS = 10; // per track
const RARE_SHARE = 0.15; // of the positions
const GAPPY = 0.05; // share of frames missing
const UNEVEN = 0.01; // share of steps
const CHANCE = 1e-4; // probability at which a common drift stops being chance
const DRIFT_CORRELATION = 0.01; // smaller correlations between tracks bias nothing that matters

/** Every warning that applies, most serious first. */
export function warnOfRecording(survey: Omit<Survey, 'warnings'>): Warning[] {
  return [
    ...warnOfMotion(survey),
    ...warnOfSampling(survey),
    ...warnOfLengths(survey),
    ...warnOfJumps(survey),
    ...warnOfCommonDrift(survey),
  ];
}

function warnOfMotion(survey: Omit<Survey, 'warnings'>): Warning[] {
  if (survey.displacementPerFrame.every((step) => step === 0)) {
    return [
      {
        code: 'no-motion',
        message:
          'no position ever changes, so there is no motion to describe; check the columns and the tracking',
      },
    ];
  }
  if (survey.immobileTracks === 0) return [];
  return [
    {
      code: 'immobile-tracks',
      message: `${survey.immobileTracks} of ${survey.tracks} tracks hardly move compared with the others; leave them out if they are stuck`,
    },
  ];
}

function warnOfSampling(survey: Omit<Survey, 'warnings'>): Warning[] {
  const warnings: Warning[] = [];
  const { frictionTimesInterval: x } = survey;
  if (x !== null && x > COARSE) {
    warnings.push({
      code: 'sampling-too-coarse',
      message: `friction × interval is ${show(x)}, so little of a velocity is left after one frame; record ${show(Math.ceil(x / 0.3))} times as fast, or take --order first`,
    });
  }
  const evidence = survey.memoryEvidence;
  if (x === null && evidence.gain > FAINT_MEMORY) {
    warnings.push({
      code: 'velocity-memory-unclear',
      message:
        'velocities may be remembered from frame to frame, but too faintly to measure for how long; record faster or longer to fit at second order',
    });
  }
  const ratios = survey.errorOverDisplacement.filter((value) => value !== null);
  const worst = Math.max(0, ...ratios);
  if (worst > DROWNED) {
    warnings.push({
      code: 'localization-error-drowns-motion',
      message:
        x === null
          ? `the localization error is ${show(worst)} times the displacement per frame; record more slowly or locate more precisely`
          : `the localization error is ${show(worst)} times the displacement per frame, so second differences are mostly error; take --estimator likelihood, record more slowly, or locate more precisely`,
    });
  }
  const expected = survey.expectedPrecision;
  if (expected !== null && expected.friction > IMPRECISE) {
    warnings.push({
      code: 'low-precision',
      message: `even a constant friction cannot be known better than to ${percent(expected.friction)} (standard deviation) from this recording; record more, or fit --friction constant`,
    });
  }
  const frames = survey.steps + survey.missingFrames;
  if (survey.missingFrames > GAPPY * frames) {
    warnings.push({
      code: 'missing-frames',
      message: `${percent(survey.missingFrames / frames)} of the frames inside tracks are missing (longest gap ${survey.longestGap})`,
    });
  }
  if (survey.unevenSteps > UNEVEN * survey.steps) {
    warnings.push({
      code: 'uneven-intervals',
      message: `${percent(survey.unevenSteps / survey.steps)} of the steps are no whole number of intervals long; finite differences leave them out`,
    });
  }
  return warnings;
}

function warnOfLengths(survey: Omit<Survey, 'warnings'>): Warning[] {
  const warnings: Warning[] = [];
  const positions = survey.trackLengths.median;
  const relaxations =
    survey.relaxationTime === null ? Infinity : survey.trackDurations.median / survey.relaxationTime;
  if (positions < FEW_POSITIONS || relaxations < FEW_RELAXATIONS) {
    const reason =
      positions < FEW_POSITIONS
        ? `has ${show(positions)} positions`
        : `lasts ${show(relaxations)} relaxation times of the velocity`;
    warnings.push({
      code: 'short-tracks',
      message: `the typical track ${reason}; friction is hard to tell from chance in tracks so short`,
    });
  }
  if (survey.visited.rareShare > RARE_SHARE) {
    warnings.push({
      code: 'few-visits',
      message: `${percent(survey.visited.rareShare)} of the positions lie in places entered fewer than five times; trust the bands there, and prefer simple shapes`,
    });
  }
  return warnings;
}

function warnOfJumps({ suspectJumps, steps }: Omit<Survey, 'warnings'>): Warning[] {
  if (suspectJumps === 0) return [];
  return [
    {
      code: 'suspect-jumps',
      message: `${suspectJumps} of ${steps} steps ${suspectJumps === 1 ? 'looks' : 'look'} like wrong links between particles; split the tracks there`,
    },
  ];
}

function warnOfCommonDrift(survey: Omit<Survey, 'warnings'>): Warning[] {
  const { commonDriftCorrelation: correlation, commonDriftChance: chance } = survey;
  if (correlation !== null && chance !== null && correlation > DRIFT_CORRELATION && chance < CHANCE) {
    return [
      {
        code: 'common-drift',
        message: `tracks move together (correlation ${show(correlation)} between tracks at the same time); subtract the drift of stage or sample first`,
      },
    ];
  }
  const spread = survey.meanVelocityStandardError;
  if (spread === null || survey.tracks < 3) return [];
  const drifting = survey.coordinates.filter(
    (_, axis) =>
      spread[axis] > 0 && studentTail(survey.meanVelocity[axis] / spread[axis], survey.tracks - 1) < CHANCE,
  );
  if (drifting.length === 0) return [];
  return [
    {
      code: 'common-drift',
      message: `all tracks drift the same way on average along ${drifting.join(', ')}; if stage or sample moved, subtract that first, for it would be taken for a force`,
    },
  ];
}

const show = (value: number): string => String(Number(value.toPrecision(2)));

const percent = (share: number): string => `${show(100 * share)} %`;
