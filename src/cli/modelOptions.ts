/** Options of the model and its estimate. */

import type { OptionSpec } from './OptionSpec.js';
import { choiceValue, lengthOrAutoValue, numberValue, shapeValue } from './optionValues.js';

const shapes =
  'SHAPE is zero, constant, linear, polynomial:N (total degree), spline (size from the data), spline:N (N functions per axis) or waves:N (periodic axes)';

const ORDERS = ['auto', 'first', 'second'];
const ESTIMATORS = ['likelihood', 'differences', 'kernel'];
const SHAPES = ['zero', 'constant', 'linear', 'polynomial:', 'spline', 'spline:', 'waves:'];
const FORMS = ['scalar', 'axes', 'matrix'];
const BOOTSTRAPS = ['one-step', 'refit'];

/** The model and its estimate. */
export const MODEL_OPTIONS = {
  order: {
    flags: '--order <ORDER>',
    meaning:
      'order of the model: first (velocity forgotten between frames), second (velocity remembered) or auto (as the survey recommends)',
    default: 'auto',
    choices: ORDERS,
    parse: choiceValue(ORDERS),
    study: 'order',
  },
  estimator: {
    flags: '--estimator <NAME>',
    meaning:
      'how the coefficients are estimated: likelihood (closest to what the data can tell), differences (fast) or kernel (no basis presumed)',
    default: 'likelihood',
    choices: ESTIMATORS,
    parse: choiceValue(ESTIMATORS),
    study: 'estimator',
  },
  force: {
    flags: '--force <SHAPE>',
    meaning: `functions of place that may make up the force per mass, second order; ${shapes}`,
    unit: 'length/time²',
    default: 'spline',
    choices: SHAPES,
    parse: shapeValue,
    study: 'force',
  },
  friction: {
    flags: '--friction <SHAPE>',
    meaning: 'the same for the friction, second order',
    unit: '1/time',
    default: 'spline',
    choices: SHAPES,
    parse: shapeValue,
    study: 'friction',
  },
  noise: {
    flags: '--noise <SHAPE>',
    meaning: 'the same for the noise σσᵀ, second order',
    unit: 'length²/time³',
    default: 'spline',
    choices: SHAPES,
    parse: shapeValue,
    study: 'noise',
  },
  drift: {
    flags: '--drift <SHAPE>',
    meaning: 'the same for the drift (Itô), first order',
    unit: 'length/time',
    default: 'spline',
    choices: SHAPES,
    parse: shapeValue,
    study: 'drift',
  },
  diffusion: {
    flags: '--diffusion <SHAPE>',
    meaning: 'the same for the diffusion, first order',
    unit: 'length²/time',
    default: 'spline',
    choices: SHAPES,
    parse: shapeValue,
    study: 'diffusion',
  },
  frictionForm: {
    flags: '--friction-form <FORM>',
    meaning: 'friction as one number (scalar), one per axis (axes) or a full matrix (matrix)',
    default: 'scalar',
    extremes: 'a matrix needs several times the data of a scalar',
    choices: FORMS,
    parse: choiceValue(FORMS),
    study: 'frictionForm',
  },
  noiseForm: {
    flags: '--noise-form <FORM>',
    meaning: 'the same for the noise (second order) or the diffusion (first order)',
    default: 'scalar',
    choices: FORMS,
    parse: choiceValue(FORMS),
    study: 'noiseForm',
  },
  replicates: {
    flags: '--replicates <N>',
    meaning: 'bootstrap replicates behind the error bars',
    default: '200',
    extremes: 'from 20 (rough intervals) to 100000 (a large fit file)',
    parse: numberValue({ whole: true, from: 20, to: 100_000 }),
    study: 'replicates',
  },
  bootstrap: {
    flags: '--bootstrap <WAY>',
    meaning:
      'replicates from first-order effects of blocks (one-step), or by fitting each drawn recording anew (refit)',
    default: 'one-step',
    extremes: 'refit takes as many fits as replicates',
    choices: BOOTSTRAPS,
    parse: choiceValue(BOOTSTRAPS),
    study: 'bootstrap',
  },
  confidence: {
    flags: '--confidence <LEVEL>',
    meaning: 'confidence level of every interval',
    default: '0.95',
    extremes: 'above 0.5 and below 1; the closer to 1, the more replicates it takes',
    parse: numberValue({ above: 0.5, below: 1 }),
    study: 'confidence',
  },
  localizationError: {
    flags: '--localization-error <S>',
    meaning: 'standard deviation of the error of a position, per axis, or auto: estimated from the tracks',
    unit: 'length',
    default: 'auto',
    extremes: '0 says that positions are exact',
    choices: ['auto'],
    parse: lengthOrAutoValue,
    study: 'localizationError',
  },
  exposure: {
    flags: '--exposure <FRACTION>',
    meaning: 'fraction of the sampling interval over which a position is averaged (motion blur)',
    default: '0',
    extremes: '0 is a snapshot, 1 a shutter that never closes',
    parse: numberValue({ from: 0, to: 1 }),
    study: 'exposure',
  },
  refine: {
    flags: '--refine',
    meaning:
      'remove the bias that finite sampling leaves: simulate the fit at the recorded design, fit again, correct (takes some dozen times as long)',
    default: 'off',
    study: 'refine',
  },
  seed: {
    flags: '--seed <N>',
    meaning: 'seed of every random draw; the same seed gives the same result',
    default: '1',
    parse: numberValue({ whole: true, from: 0 }),
    study: 'seed',
  },
  study: {
    flags: '--study <FILE>',
    meaning:
      'options as JSON, under the names of the options in camel case (lengthScale); options on the line win; its JSON Schema is wanderlaw/schemas/study.schema.json',
  },

  writeStudy: {
    flags: '--write-study <FILE>',
    meaning:
      'also write every choice behind the fit, defaults included, as a study file that --study reads; without tracks it writes that file alone',
  },
} as const satisfies Record<string, OptionSpec>;
