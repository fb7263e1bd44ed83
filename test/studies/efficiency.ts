/**
 * How close the estimators come to the Cramér–Rao bound, and how well they recover coefficients that vary over space.
 * Run with `npm run study:efficiency [seeds] [free|varied] [likelihood|differences|kernel]`.
 */

import { studySchema } from '../../src/documents/Study.js';
import { chooseEstimator } from '../../src/estimation/choose.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { fitTracks } from '../../src/fit.js';
import { createModelEvaluator } from '../../src/fields/evaluateModel.js';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { judgeFit } from '../support/judgeFit.js';
import {
  axesCase,
  bumpCase,
  diffusionCase,
  periodicCase,
  simulateCase,
  stirCase,
} from '../support/variedCases.js';
import { mean, percent, printTable } from './table.js';

const seeds = Number(process.argv[2] ?? 100);
const only = process.argv[3] ?? '';
const estimator = process.argv[4] ?? 'likelihood';

function freeTable(): void {
  const rows: string[][] = [];
  for (const friction of [0.05, 0.1, 0.2, 0.5, 1]) {
    for (const ratio of [0, 0.1, 0.3, 1]) {
      const frictions: number[] = [];
      const noises: number[] = [];
      for (let seed = 1; seed <= seeds; seed++) {
        const tracks = simulateSecondOrder({
          tracks: 40,
          frames: 1000,
          friction,
          localizationError: ratio,
          seed,
        });
        const study = studySchema.parse({
          force: 'constant',
          friction: 'constant',
          noise: 'constant',
          localizationError: ratio === 0 ? 0 : 'auto',
        });
        const plan = planEstimation(tracks, study, 'second', 1 / friction, describeVisited(tracks));
        const evaluator = createModelEvaluator(chooseEstimator(estimator)(tracks, plan).model);
        const value = new Float64Array(1);
        evaluator.frictionInto([0], 0, value);
        frictions.push(value[0] / friction - 1);
        evaluator.noiseInto([0], 0, value);
        noises.push(value[0] / (2 * friction) - 1);
      }
      const bound = frictionPrecisionBound({
        frictionTimesInterval: friction,
        errorOverDisplacement: ratio,
        positions: 40_000,
      });
      const size = (values: number[]) => Math.sqrt(mean(values.map((value) => value * value)));
      rows.push([
        String(friction),
        String(ratio),
        percent(bound.friction, 2),
        (mean(frictions) / bound.friction).toFixed(2),
        (size(frictions) / bound.friction).toFixed(2),
        percent(bound.noise, 2),
        (mean(noises) / bound.noise).toFixed(2),
        (size(noises) / bound.noise).toFixed(2),
      ]);
    }
  }
  printTable(
    `Free process, ${estimator}, 40 tracks × 1000 frames, ${seeds} seeds (bias and root mean square error in units of the bound; localization error known where 0)`,
    ['Γ·Δ', 's/(v·Δ)', 'bound, friction', 'bias', 'rms error', 'bound, noise', 'bias', 'rms error'],
    rows,
  );
}

async function variedTable(): Promise<void> {
  const cases = [
    { given: bumpCase(0.1), refine: false },
    { given: bumpCase(0.55), refine: false },
    { given: bumpCase(0.55), refine: true },
    { given: stirCase(0), refine: false },
    { given: stirCase(0.2), refine: false },
    { given: periodicCase(), refine: false },
    { given: axesCase(), refine: false },
    { given: diffusionCase(0.2), refine: false },
    { given: diffusionCase(0.9), refine: false },
  ];
  const rows: string[][] = [];
  for (const { given, refine } of cases) {
    const errors: Record<string, number[]> = {};
    for (let seed = 1; seed <= seeds; seed++) {
      const study = studySchema.parse({ ...given.study, order: given.order, estimator, refine, seed });
      for (const { name, error } of judgeFit(await fitTracks(simulateCase(given, seed), study), given))
        (errors[name.replace(/_.*/, '')] ??= []).push(error);
    }
    const show = (...names: string[]) => percent(mean(names.flatMap((name) => errors[name] ?? [])));
    rows.push([
      `${given.title}${refine ? ', refined' : ''}`,
      given.order === 'second' ? show('friction') : '',
      show('noise', 'diffusion'),
      show('force', 'drift'),
    ]);
    console.error(rows[rows.length - 1].join(' | '));
  }
  printTable(
    `Varying coefficients, ${estimator}: root mean square error over the visited region, mean of ${seeds} seeds`,
    ['case', 'friction', 'noise or diffusion', 'force or drift'],
    rows,
  );
}

if (only === '' || only === 'free') freeTable();
if (only === '' || only === 'varied') await variedTable();
