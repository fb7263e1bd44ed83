/** A statement tested, or the model challenged: independent of one another, so that threads can share them. */

import { createRecorder } from '../checks/createRecorder.js';
import type { FitResult } from '../documents/FitDocument.js';
import type { ChallengeResult } from '../hypotheses/challenge/ChallengeResult.js';
import { challengeModel } from '../hypotheses/challenge/challengeModel.js';
import { testHypothesis } from '../hypotheses/testHypothesis.js';
import type { HypothesisName, TestResult } from '../hypotheses/TestResult.js';
import type { Task } from '../numerics/MapTasks.js';
import type { TrackSet } from '../tracks/TrackSet.js';

interface SharedWork {
  readonly fit: FitResult;
  /** The recording the fit was made from. */
  readonly tracks: TrackSet;
}

/** The name of a statement, or a challenge of all assumptions. */
export type Question = Exclude<HypothesisName, 'law'> | 'challenge';

/** What came of a question; the other is null. */
export interface Judgement {
  readonly test: TestResult | null;
  readonly challenge: ChallengeResult | null;
}

/** Judges at the confidence and with the seed of the fit's study. */
export const judgeFitTask: Task<SharedWork, Question, Judgement> = {
  name: 'judge-fit',
  run({ fit, tracks }, question) {
    const { confidence, seed } = fit.study;
    if (question === 'challenge') return { test: null, challenge: challengeModel(fit, tracks, confidence) };
    const simulate = createRecorder(fit, tracks);
    return {
      test: testHypothesis(fit, tracks, { hypothesis: question, confidence, seed, simulate }),
      challenge: null,
    };
  },
};
