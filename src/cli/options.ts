/**
 * The option table. Each option is described where it is declared: its meaning, its unit, its default, and what its
 * extremes do. `--help` is printed from here.
 *
 * Nothing heavy is imported, so that help appears at once.
 */

import { HYPOTHESES } from '../hypotheses/TestResult.js';
import {
  choiceValue,
  columnsValue,
  lengthOrAutoValue,
  numberValue,
  parametersValue,
  periodsValue,
  shapeValue,
  unitsValue,
  type ParseValue,
} from './optionValues.js';
import { regionValue } from './regionValue.js';

export interface OptionSpec {
  /** As typed, with a placeholder where a value follows: `-o, --output <FILE>`. */
  readonly flags: string;
  readonly meaning: string;
  readonly unit?: string;
  /** What holds without the option, in words. */
  readonly default?: string;
  /** What small, large or special values do. */
  readonly extremes?: string;
  /** Reads the text; without it the text itself is the value. */
  readonly parse?: ParseValue;
  /** Given more than once, the values add up to a list. */
  readonly repeatable?: boolean;
  /** Key of the study that the option sets, where it sets one. */
  readonly study?: string;
}

const shapes =
  'SHAPE is zero, constant, linear, polynomial:N (total degree), spline (size from the data), spline:N (N functions per axis) or waves:N (periodic axes)';

const FORMS = ['scalar', 'axes', 'matrix'];

export const OPTIONS = {
  // the model and its estimate
  order: {
    flags: '--order <ORDER>',
    meaning:
      'order of the model: first (velocity forgotten between frames), second (velocity remembered) or auto (as the survey recommends)',
    default: 'auto',
    parse: choiceValue(['auto', 'first', 'second']),
    study: 'order',
  },
  estimator: {
    flags: '--estimator <NAME>',
    meaning:
      'how the coefficients are estimated: likelihood (closest to what the data can tell), differences (fast) or kernel (no basis presumed)',
    default: 'likelihood',
    parse: choiceValue(['likelihood', 'differences', 'kernel']),
    study: 'estimator',
  },
  force: {
    flags: '--force <SHAPE>',
    meaning: `functions of place that may make up the force per mass, second order; ${shapes}`,
    unit: 'length/time²',
    default: 'spline',
    parse: shapeValue,
    study: 'force',
  },
  friction: {
    flags: '--friction <SHAPE>',
    meaning: 'the same for the friction, second order',
    unit: '1/time',
    default: 'spline',
    parse: shapeValue,
    study: 'friction',
  },
  noise: {
    flags: '--noise <SHAPE>',
    meaning: 'the same for the noise σσᵀ, second order',
    unit: 'length²/time³',
    default: 'spline',
    parse: shapeValue,
    study: 'noise',
  },
  drift: {
    flags: '--drift <SHAPE>',
    meaning: 'the same for the drift (Itô), first order',
    unit: 'length/time',
    default: 'spline',
    parse: shapeValue,
    study: 'drift',
  },
  diffusion: {
    flags: '--diffusion <SHAPE>',
    meaning: 'the same for the diffusion, first order',
    unit: 'length²/time',
    default: 'spline',
    parse: shapeValue,
    study: 'diffusion',
  },
  frictionForm: {
    flags: '--friction-form <FORM>',
    meaning: 'friction as one number (scalar), one per axis (axes) or a full matrix (matrix)',
    default: 'scalar',
    extremes: 'a matrix needs several times the data of a scalar',
    parse: choiceValue(FORMS),
    study: 'frictionForm',
  },
  noiseForm: {
    flags: '--noise-form <FORM>',
    meaning: 'the same for the noise (second order) or the diffusion (first order)',
    default: 'scalar',
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

  // how the table is read
  columns: {
    flags: '--columns <ROLES>',
    meaning:
      'which column plays which role, for example track=ID,time=t,x=PosX; roles: track, time, frame, x, y, z, type, error_x, error_y, error_z',
    default: 'columns named like their roles',
    parse: columnsValue,
    study: 'columns',
  },
  interval: {
    flags: '--interval <T>',
    meaning: 'time between frames, where the table counts frames',
    unit: 'time',
    default: '1 with a frame column',
    parse: numberValue({ above: 0 }),
    study: 'interval',
  },
  lengthScale: {
    flags: '--length-scale <FACTOR>',
    meaning: 'factor from lengths in the table to lengths in the results',
    default: '1',
    parse: numberValue({ above: 0 }),
    study: 'lengthScale',
  },
  timeScale: {
    flags: '--time-scale <FACTOR>',
    meaning: 'factor from times in the table to times in the results',
    default: '1',
    parse: numberValue({ above: 0 }),
    study: 'timeScale',
  },
  units: {
    flags: '--units <LENGTH,TIME>',
    meaning: 'labels of the units of length and time, after scaling, for example um,s',
    default: 'none',
    parse: unitsValue,
    study: 'units',
  },
  period: {
    flags: '--period <LENGTHS>',
    meaning: 'period of each axis, 0 where it is open, for example 4,0; wrapped tracks are unwrapped',
    unit: 'length (after scaling)',
    default: 'all axes open',
    parse: periodsValue,
    study: 'period',
  },
  mass: {
    flags: '--mass <M>',
    meaning: 'mass of the particle, where momenta and forces should carry it',
    unit: 'mass',
    default: 'everything per unit mass',
    parse: numberValue({ above: 0 }),
    study: 'mass',
  },
  skipInvalid: {
    flags: '--skip-invalid',
    meaning: 'leave out and count positions that are not finite numbers',
    default: 'they are refused',
    study: 'skipInvalid',
  },

  // results and how the program speaks
  output: {
    flags: '-o, --output <FILE>',
    meaning: 'file the result is written to, whole or not at all; a name ending in .json asks for JSON',
    default: 'standard output',
  },
  json: {
    flags: '--json',
    meaning: 'print one JSON document instead of the table for people',
  },
  quiet: {
    flags: '-q, --quiet',
    meaning: 'no progress, notes or warnings on standard error; errors are still shown',
  },
  trace: {
    flags: '--trace',
    meaning: 'show where in the program an error arose',
  },
  workers: {
    flags: '--workers <N>',
    meaning: 'threads to work with; the result does not depend on it',
    default: 'all cores',
    parse: numberValue({ whole: true, from: 1, to: 256 }),
  },

  // single commands
  momenta: {
    flags: '--momenta <FILE>',
    meaning:
      'also write momentum and kinetic energy at each position, with errors, as CSV (mass 1 unless given)',
  },
  fit: {
    flags: '--fit <FIT>',
    meaning:
      'fit file (second order, by likelihood): momenta come from its smoother, with their posterior errors and the kinetic temperature by place',
  },
  at: {
    flags: '--at <POINTS>',
    meaning:
      'table with the columns x, y, z as far as the fit has them; other columns are ignored; - reads standard input',
    unit: 'length',
  },
  simultaneous: {
    flags: '--simultaneous',
    meaning:
      'bands that hold everywhere in the visited region at once, instead of intervals for each place alone',
  },
  title: {
    flags: '--title <TEXT>',
    meaning: 'one line for people, kept in the scenario',
  },
  trackCount: {
    flags: '--tracks <N>',
    meaning: 'number of tracks to simulate',
    default: 'as the scenario says',
    parse: numberValue({ whole: true, from: 1, to: 10_000_000 }),
  },
  frames: {
    flags: '--frames <N>',
    meaning: 'positions per track',
    default: 'as the scenario says',
    parse: numberValue({ whole: true, from: 1, to: 100_000_000 }),
  },
  frameInterval: {
    flags: '--interval <T>',
    meaning: 'time between frames',
    unit: 'time',
    default: 'as the scenario says',
    extremes: 'the integration step is chosen apart from it, so long intervals stay accurate',
    parse: numberValue({ above: 0 }),
  },
  ensemble: {
    flags: '--ensemble',
    meaning: "draw each track's coefficients from the uncertainty of the fit",
    default: 'every track has the best coefficients',
  },
  runSeed: {
    flags: '--seed <N>',
    meaning: 'seed of every random draw; the same seed gives the same result',
    default: '1',
    parse: numberValue({ whole: true, from: 0 }),
  },
  firstOrder: {
    flags: '--first-order',
    meaning:
      'write the first-order limit of a second-order fit, for high friction, with its noise-induced drift; says how large the neglected terms are',
    default: 'the order of the fit',
  },
  tolerance: {
    flags: '--tolerance <SHARE>',
    meaning:
      'halve the time step until averages err by less than this share of their size, and tell the observed order of convergence',
    default: 'the recommended step, with errors of about a thousandth',
    extremes: 'each factor of 4 costs twice the time; below 0.0003 scatter hides the error',
    parse: numberValue({ above: 0, below: 1 }),
  },
  region: {
    flags: '--region <NAME=BOX>',
    meaning:
      'box whose residence times, and the first-passage times to other boxes, are compared too, for example left=-3:0,-2:2; give it once per box',
    unit: 'length',
    default: 'none',
    extremes: 'an end left out is open: right=0:,:',
    parse: regionValue,
    repeatable: true,
  },
  trackFiles: {
    flags: '--tracks <FILE>',
    meaning: 'where the tracks of the fit are now; give it once per file, in the order of the fit',
    default: 'the places recorded in the fit file',
    repeatable: true,
  },
  recordings: {
    flags: '--replicates <N>',
    meaning: 'simulated recordings to compare with',
    default: '99',
    extremes: 'from 19 (p-values in steps of 0.05) to 9999',
    parse: numberValue({ whole: true, from: 19, to: 9999 }),
  },
  noRefit: {
    flags: '--no-refit',
    meaning: 'leave out fitting the simulated recordings again',
  },
  hypothesis: {
    flags: '--hypothesis <NAME>',
    meaning:
      'what is tested: uniform-friction, uniform-noise (at first order, of the diffusion), uniform-temperature (one temperature everywhere), conservative-force (the force has a potential), zero-force, isotropic-friction, or law (a formula, with --field and --law)',
    default: 'law where --law is given',
    parse: choiceValue(HYPOTHESES),
  },
  field: {
    flags: '--field <COEFFICIENT>',
    meaning:
      'what a law is about: friction, noise, temperature, force_x, … at second order; diffusion, drift_x, … at first',
  },
  law: {
    flags: '--law <LAW>',
    meaning:
      'a formula in x, y, z and parameters of your own naming, such as "g0*(1+a*tanh(x/w))", or a law by name (see --laws); given more than once, the laws are compared',
    repeatable: true,
  },
  start: {
    flags: '--start <VALUES>',
    meaning: 'where the search for the parameters of laws begins, for example g0=1,a=0.1',
    default: 'sizes met in the data',
    parse: parametersValue,
  },
  fix: {
    flags: '--fix <VALUES>',
    meaning: 'parameters of laws that are known and not to be fitted, for example radius=0.5,wall=0',
    parse: parametersValue,
  },
  laws: {
    flags: '--laws',
    meaning: 'list the laws known by name, with source and range of validity, instead of testing',
  },
  ownLaws: {
    flags: '--study <FILE>',
    meaning:
      'study file whose "laws" may be called by name, as in {"laws": {"ramp": {"formula": "g0+g1*x"}}}',
    default: 'those of the fit',
  },
  resimulation: {
    flags: '--resimulation <FILE>',
    meaning: 'result of `resimulate --json`, to be drawn too',
  },
  testResults: {
    flags: '--tests <FILE>',
    meaning: 'result of `test --json`, to be told too; give it once per file',
    repeatable: true,
  },
  challenges: {
    flags: '--challenges <FILE>',
    meaning: 'result of `challenge --json`, to be told too',
  },
  figures: {
    flags: '--figures <DIRECTORY>',
    meaning:
      'directory for each picture as SVG and PNG, with its data as CSV beside it; without -o only these are written',
  },
  scenario: {
    flags: '--scenario <FILE>',
    meaning: 'scenario to be described too',
  },
  directory: {
    flags: '-o, --output <DIRECTORY>',
    meaning: 'directory the results are written to',
    default: 'out/NAME',
  },
} as const satisfies Record<string, OptionSpec>;

export type OptionName = keyof typeof OPTIONS;

/** Options that say how a track table is read. */
export const TABLE_OPTIONS = [
  'study',
  'columns',
  'interval',
  'lengthScale',
  'timeScale',
  'units',
  'period',
  'mass',
  'skipInvalid',
] as const satisfies readonly OptionName[];

/** Options of every command. */
export const SPEECH_OPTIONS = ['json', 'quiet', 'trace'] as const satisfies readonly OptionName[];

/** What `--help` says of an option, from all that is declared. */
export function describeOption(spec: OptionSpec): string {
  const parts = [spec.meaning];
  if (spec.unit !== undefined) parts.push(`unit: ${spec.unit}`);
  if (spec.extremes !== undefined) parts.push(spec.extremes);
  if (spec.default !== undefined) parts.push(`default: ${spec.default}`);
  return parts.join('; ');
}
