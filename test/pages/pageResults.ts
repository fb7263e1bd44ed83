/** Results of other commands for the tests of pages: a re-simulation, tests, challenges and scenarios. */

import type { ResimulationResult, ResimulationSeries } from '../../src/checks/ResimulationResult.js';
import { type Scenario, scenarioSchema } from '../../src/documents/Scenario.js';
import type { ReportedChallenge, ReportedTest } from '../../src/report/ReportInput.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { bump } from './pageFits.js';

function makeSeries(
  kind: ResimulationSeries['kind'],
  name: string,
  title: string,
  xLabel: string,
  yLabel: string,
  x: number[],
  curve: (x: number) => number,
  spread: number,
): ResimulationSeries {
  const stream = randomStream(11, name);
  return {
    kind,
    name,
    title,
    axis: null,
    xLabel,
    yLabel,
    x,
    recorded: x.map((value) => curve(value) * (1 + 0.5 * spread * stream.normal())),
    low: x.map((value) => curve(value) * (1 - 2 * spread)),
    median: x.map(curve),
    high: x.map((value) => curve(value) * (1 + 2 * spread)),
  };
}

/** A re-simulation with one picture of each kind; `consistent` decides the verdict and one statistic. */
export function exampleResimulation(consistent = true): ResimulationResult {
  const range = (count: number, from: number, step: number) =>
    Array.from({ length: count }, (_, i) => from + i * step);
  const statistic = (name: string, title: string, recorded: number, p: number) => ({
    name,
    title,
    recorded,
    low: 0.2,
    high: 1.4,
    p,
    adjusted: Math.min(1, 5 * p),
  });
  return {
    replicates: 99,
    seed: 1,
    statistics: [
      statistic('occupancy', 'Where positions are', 0.81, 0.42),
      statistic('velocity-distribution', 'Distribution of the speed over one interval', 0.64, 0.33),
      statistic(
        'mean-squared-displacement',
        'Mean squared displacement over 1 to 64 intervals',
        consistent ? 0.91 : 2.9,
        consistent ? 0.21 : 0.01,
      ),
      statistic('velocity-autocorrelation', 'Memory of the velocity', 0.55, 0.71),
      statistic('kinetic-temperature', 'Kinetic temperature from place to place', 0.47, 0.88),
    ],
    times: [],
    refit: [0.42, 0.77, 1.21, 0.66].map((putIn, i) => ({
      name: `friction_xx[${i}]`,
      putIn,
      refitted: putIn * 1.012,
      standardError: 0.006,
    })),
    p: consistent ? 0.37 : 0.01,
    level: 0.05,
    consistent,
    series: [
      makeSeries(
        'occupancy',
        'occupancy-x',
        'Where positions are along x',
        'x (m)',
        'share of positions',
        range(24, -1.2, 0.1),
        (x) => 0.05 * (bump(x + 0.7, 0.35) + bump(x - 0.7, 0.35)),
        0.08,
      ),
      makeSeries(
        'speed',
        'speed',
        'Speed over one interval',
        'speed (m s⁻¹)',
        'density',
        range(24, 0.05, 0.08),
        (x) => x * Math.exp(-x * x),
        0.05,
      ),
      makeSeries(
        'displacement',
        'displacement-4',
        'Displacement over 4 intervals',
        'displacement (m)',
        'density',
        range(25, -0.6, 0.05),
        (x) => bump(x, 0.2),
        0.07,
      ),
      makeSeries(
        'mean-squared-displacement',
        'msd',
        'Mean squared displacement',
        'lag (s)',
        'mean squared displacement (m²)',
        range(20, 0.05, 0.16),
        (t) => 0.6 * (t - 0.8 * (1 - Math.exp(-t / 0.8))),
        0.05,
      ),
      makeSeries(
        'velocity-autocorrelation',
        'vacf',
        'Memory of the velocity',
        'lag (s)',
        'correlation',
        range(20, 0, 0.1),
        (t) => Math.exp(-t / 0.6),
        0.06,
      ),
      makeSeries(
        'kinetic-temperature',
        'kinetic',
        'Variance of the velocity along x',
        'x (m)',
        'variance (m² s⁻²)',
        range(20, -1.1, 0.11),
        (x) => 0.3 + 0.1 * Math.tanh(x),
        0.07,
      ),
    ],
    warnings: [],
  };
}

/** Tests of three statements, as `test --json` prints them. */
export function exampleTests(): ReportedTest[] {
  return [
    {
      hypothesis: 'uniform-friction',
      statistic: 183.4,
      p: 1e-12,
      rejected: true,
      parameters: {},
      note: 'Friction varies by a factor of 2.5 (2.2 to 2.9) over the visited region, most along x.',
    },
    {
      hypothesis: 'conservative-force',
      statistic: 41.2,
      p: 0.0004,
      rejected: true,
      parameters: {},
      note: 'The curl of the force is 1.4 s⁻² on average, 11 times its standard error.',
    },
    {
      hypothesis: 'law',
      statistic: 7.7,
      p: 0.36,
      rejected: false,
      parameters: {
        g0: { value: 0.41, low: 0.37, high: 0.45 },
        a: { value: 0.88, low: 0.71, high: 1.05 },
      },
      note: 'The law fits as well as the spline.',
      field: 'friction',
      law: 'g0 + a*exp(-((x - 0.35)/0.22)^2/2)',
      comparison: [
        {
          law: 'g0 + a*exp(-((x - 0.35)/0.22)^2/2)',
          parameters: {
            g0: { value: 0.41, low: 0.37, high: 0.45 },
            a: { value: 0.88, low: 0.71, high: 1.05 },
          },
          p: 0.36,
          rejected: false,
          difference: 0,
          differenceError: 0,
          tie: true,
        },
        {
          law: 'g0*(1 + a*tanh(x/w))',
          parameters: { w: { value: 3, low: 0.4, high: Number.POSITIVE_INFINITY } },
          p: 1e-7,
          rejected: true,
          difference: -812.4,
          differenceError: 31,
          tie: false,
        },
      ],
    },
  ];
}

/** The four challenges, as `challenge --json` prints them. */
export function exampleChallenges(): ReportedChallenge[] {
  return [
    { name: 'memory', p: 0.44, holds: true, note: 'Residuals are not correlated beyond two frames.' },
    {
      name: 'speed-dependent-friction',
      p: 0.002,
      holds: false,
      note: 'Friction falls by 18 % from slow to fast quarters of the steps.',
    },
    {
      name: 'gaussian-noise',
      p: 0.61,
      holds: true,
      note: 'Excess kurtosis of the residuals is 0.03 ± 0.06.',
    },
    { name: 'stationarity', p: 0.27, holds: true, note: 'First and second half give the same coefficients.' },
  ];
}

/** A scenario in two dimensions. */
export function exampleScenario(): Scenario {
  return scenarioSchema.parse({
    format: 'wanderlaw-scenario',
    version: 1,
    title: 'Pucks on the table, half the felt',
    dimensions: 2,
    order: 'second',
    axes: [{ kind: 'open' }, { kind: 'walls', low: -1, high: 1 }],
    coefficients: {
      force: { form: 'vector', formulas: ['-x', '-y'] },
      friction: { form: 'scalar', values: [1] },
      noise: { form: 'scalar', values: [1] },
    },
    start: { kind: 'normal', mean: [0, 0], spread: [1, 1] },
    observation: { tracks: 40, frames: 500, interval: 0.05, localizationError: [0.002, 0.002] },
    units: { length: 'm', time: 's' },
    standing: {
      conditions: [
        {
          name: 'friction-positive',
          title: 'Friction is positive and bounded away from zero',
          verdict: 'holds',
          value: 0.4,
          place: [0.9, 0.1],
          note: 'The smallest friction is 0.40 1/s, at x = 0.9, y = 0.1.',
        },
        {
          name: 'confinement',
          title: 'The force confines at large distance',
          verdict: 'unknown',
          value: null,
          place: null,
          note: 'Outside the visited box the force is a continuation; x is open.',
        },
      ],
      relaxation: {
        time: 2.4,
        low: 2.1,
        high: 2.8,
        samples: { value: 410, low: 350, high: 480 },
        confidence: 0.95,
        note: 'Measured on simulated positions.',
      },
    },
    warnings: [{ code: 'open-axis', message: 'x is open: a long run may leave the visited region.' }],
  });
}
