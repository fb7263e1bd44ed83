/**
 * The command table: what each command is for, what it takes, and where its code is. The code is loaded when the
 * command runs, so that help appears at once.
 */

import { SPEECH_OPTIONS, TABLE_OPTIONS, type OptionName } from './options.js';
import type { Terminal } from './Terminal.js';

/** What a command gets to work with. */
export interface Call {
  /** The words after the command that are not options. */
  readonly operands: readonly string[];
  /** Values by option name in camel case; absent where the option was not given. */
  readonly options: Readonly<Record<string, unknown>>;
  readonly terminal: Terminal;
}

export type RunCommand = (call: Call) => Promise<void>;

export interface CommandSpec {
  readonly name: string;
  readonly summary: string;
  /** What it does, reads and writes, for its own help page. */
  readonly description: string;
  /** Operands in commander's notation, each with its meaning and, where it is one of a few words, those. */
  readonly operands: readonly (readonly [name: string, meaning: string, choices?: readonly string[]])[];
  readonly options: readonly OptionName[];
  readonly required?: readonly OptionName[];
  readonly examples: readonly string[];
  readonly load: () => Promise<RunCommand>;
}

const TRACKS = [
  '<tracks...>',
  'track tables (CSV, TSV, gzipped, or Parquet); - reads standard input',
] as const;
const FIT = ['<fit>', 'fit file'] as const;

/** Shipped data sets, the default one first. */
export const DATA_SETS = ['felt-table', 'settling-beads', 'stripe-cells'] as const;

/** Shells that are taught to complete lines. */
export const SHELLS = ['bash', 'zsh', 'fish'] as const;

export const COMMANDS: readonly CommandSpec[] = [
  {
    name: 'survey',
    summary: 'tell what was recorded, and whether it can carry a fit',
    description:
      'Counts, interval, gaps, visited region, localization error, relaxation time of the velocity, recommended order, and warnings.',
    operands: [TRACKS],
    options: [...TABLE_OPTIONS, 'exposure', 'momenta', 'fit', 'output', ...SPEECH_OPTIONS],
    examples: ['wanderlaw survey tracks.csv', 'wanderlaw survey tracks.csv --momenta momenta.csv --mass 2'],
    load: async () => (await import('./commands/survey.js')).runSurvey,
  },
  {
    name: 'fit',
    summary: 'estimate force, friction and noise, or drift and diffusion, with their uncertainty',
    description:
      'Writes a fit file with -o. Without it a summary is printed (with --json the fit itself) and nothing is written.',
    operands: [['[tracks...]', `${TRACKS[1]}; not needed with --write-study alone`]],
    options: [
      'output',
      'order',
      'estimator',
      'force',
      'friction',
      'noise',
      'drift',
      'diffusion',
      'frictionForm',
      'noiseForm',
      'replicates',
      'bootstrap',
      'confidence',
      'localizationError',
      'exposure',
      'refine',
      'seed',
      'workers',
      'writeStudy',
      ...TABLE_OPTIONS,
      ...SPEECH_OPTIONS,
    ],
    examples: [
      'wanderlaw fit tracks.csv -o fit.json',
      'wanderlaw fit tracks.csv --order second --force linear --friction spline:6 --noise constant -o fit.json',
      'wanderlaw fit tracks.csv --units um,s --write-study study.json -o fit.json',
      'wanderlaw fit other.csv --study study.json -o other.json',
    ],
    load: async () => (await import('./commands/fit.js')).runFit,
  },
  {
    name: 'evaluate',
    summary: 'print the coefficients with their intervals at given places',
    description:
      'CSV: the coordinates, each coefficient with _low and _high, and whether the place was visited. Needs the fit file alone.',
    operands: [FIT],
    options: ['at', 'simultaneous', 'output', ...SPEECH_OPTIONS],
    required: ['at'],
    examples: ['wanderlaw evaluate fit.json --at points.csv -o coefficients.csv'],
    load: async () => (await import('./commands/evaluate.js')).runEvaluate,
  },
  {
    name: 'test',
    summary: 'test a statement about the coefficients, or fit and compare laws',
    description:
      'The statement is compared with a flexible fit of the same tracks, from smooth to fine. A small p speaks against it. --json adds a table of where in space it fails.',
    operands: [['[fit]', 'fit file; not needed with --laws']],
    options: [
      'hypothesis',
      'field',
      'law',
      'start',
      'fix',
      'laws',
      'ownLaws',
      'confidence',
      'trackFiles',
      'output',
      ...SPEECH_OPTIONS,
    ],
    examples: [
      'wanderlaw test fit.json --hypothesis uniform-friction',
      'wanderlaw test fit.json --hypothesis law --field friction --law "g0*(1+a*tanh(x/w))" --law constant',
      'wanderlaw test --laws',
    ],
    load: async () => (await import('./commands/test.js')).runTest,
  },
  {
    name: 'challenge',
    summary: "try the model's own assumptions against the data",
    description:
      'Memory, friction that depends on speed, noise that is not Gaussian, change over the recording, tracks that move together, wrong links. p-values are corrected for the number of checks.',
    operands: [FIT],
    options: ['confidence', 'trackFiles', 'output', ...SPEECH_OPTIONS],
    examples: ['wanderlaw challenge fit.json', 'wanderlaw challenge fit.json --json -o challenge.json'],
    load: async () => (await import('./commands/challenge.js')).runChallenge,
  },
  {
    name: 'resimulate',
    summary: 'simulate the fit at the recorded design and compare with the recording',
    description:
      'Statistics that the fit did not use, with simulated p-values, and the coefficients that the same estimator gets back.',
    operands: [FIT],
    options: [
      'trackFiles',
      'recordings',
      'region',
      'runSeed',
      'noRefit',
      'workers',
      'output',
      ...SPEECH_OPTIONS,
    ],
    examples: [
      'wanderlaw resimulate fit.json',
      'wanderlaw resimulate fit.json --json -o resimulation.json',
      'wanderlaw resimulate fit.json --region left=:0,: --region right=0:,:',
    ],
    load: async () => (await import('./commands/resimulate.js')).runResimulate,
  },
  {
    name: 'scenario',
    summary: 'write a calibrated scenario that can be read, changed and run',
    description:
      'A scenario is JSON; its schema is wanderlaw/schemas/scenario.schema.json. Whether it settles on one stationary law is told condition by condition on standard error, and kept in it.',
    operands: [FIT],
    options: ['output', 'title', 'firstOrder', ...SPEECH_OPTIONS],
    examples: [
      'wanderlaw scenario fit.json -o scenario.json',
      'wanderlaw scenario fit.json --first-order -o slow.json',
    ],
    load: async () => (await import('./commands/scenario.js')).runScenario,
  },
  {
    name: 'simulate',
    summary: 'run a scenario; write a track table that survey and fit read',
    description: 'Options stand in for what the scenario says of the observation.',
    operands: [['<scenario>', 'scenario file']],
    options: [
      'output',
      'trackCount',
      'frames',
      'frameInterval',
      'runSeed',
      'ensemble',
      'tolerance',
      'workers',
      ...SPEECH_OPTIONS,
    ],
    examples: ['wanderlaw simulate scenario.json -o simulated.csv --tracks 50 --seed 7'],
    load: async () => (await import('./commands/simulate.js')).runSimulate,
  },
  {
    name: 'report',
    summary: 'write one self-contained page with the pictures',
    description:
      'HTML without outside parts: tracks, visited region, coefficients with bands, and the results of other commands.',
    operands: [FIT],
    options: [
      'output',
      'figures',
      'resimulation',
      'testResults',
      'challenges',
      'scenario',
      ...SPEECH_OPTIONS,
    ],
    examples: [
      'wanderlaw report fit.json --resimulation resimulation.json -o report.html',
      'wanderlaw report fit.json --figures figures',
    ],
    load: async () => (await import('./commands/report.js')).runReport,
  },
  {
    name: 'demo',
    summary: 'do the whole job on a shipped data set',
    description: `Survey, fit, tests, challenges, re-simulation, scenario and report. Data sets: ${DATA_SETS.join(', ').replace(',', ' (default),')}.`,
    operands: [['[name]', 'data set', DATA_SETS]],
    options: ['directory', 'workers', ...SPEECH_OPTIONS],
    examples: ['wanderlaw demo', 'wanderlaw demo settling-beads'],
    load: async () => (await import('./commands/demo.js')).runDemo,
  },
  {
    name: 'completion',
    summary: 'print a script that lets a shell complete commands, options, choices and files',
    description:
      'bash and zsh: eval "$(wanderlaw completion bash)" in ~/.bashrc, the same with zsh in ~/.zshrc after compinit. fish: wanderlaw completion fish | source in config.fish.',
    operands: [['<shell>', SHELLS.join(', '), SHELLS]],
    options: ['quiet', 'trace'],
    examples: ['wanderlaw completion bash', 'wanderlaw completion fish'],
    load: async () => (await import('./commands/completion.js')).runCompletion,
  },
];
