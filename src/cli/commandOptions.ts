/** Options that belong to single commands. */

import { HYPOTHESES } from '../hypotheses/TestResult.js';
import type { OptionSpec } from './OptionSpec.js';
import { choiceValue, numberValue, parametersValue } from './optionValues.js';
import { regionValue } from './regionValue.js';

/** Options of single commands. */
export const COMMAND_OPTIONS = {
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
    choices: HYPOTHESES,
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
