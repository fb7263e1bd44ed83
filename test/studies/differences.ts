/**
 * Bias, scatter and coverage of the differences estimator on simulated studies with exact transitions.
 * Run with `npm run study:differences [seeds]`.
 */

import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { estimateDifferences } from '../../src/estimation/differences/estimateDifferences.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { drawReplicates } from '../../src/uncertainty/bootstrap.js';
import { measureSpread, pointwiseMultiplier } from '../../src/uncertainty/spread.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { deviation, mean, percent, printTable } from './table.js';

const TRACKS = 40;
const FRAMES = 1000;
const CONSTANT: StudyInput = { friction: 'constant', noise: 'constant', diffusion: 'constant' };

function estimate(tracks: TrackSet, input: StudyInput, order: 'first' | 'second') {
  const study = studySchema.parse(input);
  const plan = planEstimation(tracks, study, order, null, describeVisited(tracks));
  return { estimate: estimateDifferences(tracks, plan), plan };
}

const seeds = Number(process.argv[2] ?? 100);
const only = process.argv[3] ?? '';

function secondOrderTable(title: string, stiffnessOf: (friction: number) => number, force: string): void {
  const rows: string[][] = [];
  for (const x of [0.05, 0.1, 0.2, 0.5, 1]) {
    for (const ratio of [0, 0.1, 0.3]) {
      const frictions: number[] = [];
      const noises: number[] = [];
      const errors: number[] = [];
      for (let seed = 1; seed <= seeds; seed++) {
        const tracks = simulateSecondOrder({
          tracks: TRACKS,
          frames: FRAMES,
          friction: x,
          stiffness: stiffnessOf(x),
          localizationError: ratio,
          seed,
        });
        const { model, localizationError } = estimate(tracks, { ...CONSTANT, force }, 'second').estimate;
        if (model.order !== 'second') throw new Error('wrong order');
        frictions.push(model.friction.coefficients[0][0] / x - 1);
        noises.push(model.noise.coefficients[0][0] / (2 * x) - 1);
        errors.push(localizationError[0].value);
      }
      const bound = frictionPrecisionBound({
        frictionTimesInterval: x,
        errorOverDisplacement: ratio,
        positions: TRACKS * FRAMES,
      });
      rows.push([
        String(x),
        String(ratio),
        `${percent(mean(frictions))} ± ${percent(deviation(frictions) / Math.sqrt(seeds))}`,
        percent(deviation(frictions)),
        (deviation(frictions) / bound.friction).toFixed(2),
        `${percent(mean(noises))} ± ${percent(deviation(noises) / Math.sqrt(seeds))}`,
        percent(deviation(noises)),
        (deviation(noises) / bound.noise).toFixed(2),
        mean(errors).toFixed(3),
      ]);
    }
  }
  printTable(
    `${title}; ${TRACKS} tracks × ${FRAMES} frames, ${seeds} seeds`,
    [
      'Γ·Δ',
      's/(v·Δ)',
      'friction bias',
      'scatter',
      '÷ bound',
      'noise bias',
      'scatter',
      '÷ bound',
      's recovered',
    ],
    rows,
  );
}

function firstOrderTable(): void {
  const rows: string[][] = [];
  for (const relaxation of [0, 0.05, 0.2, 0.5]) {
    for (const ratio of [0, 0.1, 0.5, 1]) {
      const diffusions: number[] = [];
      for (let seed = 1; seed <= seeds; seed++) {
        const tracks = simulateFirstOrder({
          tracks: TRACKS,
          frames: FRAMES,
          diffusion: 0.5,
          relaxation,
          localizationError: Math.sqrt(ratio),
          seed,
        });
        const { model } = estimate(
          tracks,
          { ...CONSTANT, drift: relaxation > 0 ? 'linear' : 'constant' },
          'first',
        ).estimate;
        if (model.order !== 'first') throw new Error('wrong order');
        diffusions.push(model.diffusion.coefficients[0][0] / 0.5 - 1);
      }
      rows.push([
        String(relaxation),
        String(ratio),
        `${percent(mean(diffusions), 2)} ± ${percent(deviation(diffusions) / Math.sqrt(seeds), 2)}`,
        percent(deviation(diffusions)),
      ]);
    }
  }
  printTable(
    `First order, free and trapped; ${TRACKS} tracks × ${FRAMES} frames, ${seeds} seeds`,
    ['κ·Δ', 's²/(2DΔ)', 'diffusion bias', 'scatter'],
    rows,
  );
}

function coverageTable(): void {
  const studies = Math.max(200, seeds);
  const rows: string[][] = [];
  const cases: [string, 'first' | 'second', (seed: number) => TrackSet][] = [
    [
      'second order, Γ·Δ 0.2, s/(v·Δ) 0.1',
      'second',
      (seed) => simulateSecondOrder({ tracks: 40, frames: 500, friction: 0.2, localizationError: 0.1, seed }),
    ],
    [
      'second order, Γ·Δ 0.1, s/(v·Δ) 0.3',
      'second',
      (seed) => simulateSecondOrder({ tracks: 40, frames: 500, friction: 0.1, localizationError: 0.3, seed }),
    ],
    [
      'second order, 5 long tracks',
      'second',
      (seed) => simulateSecondOrder({ tracks: 5, frames: 4000, friction: 0.2, localizationError: 0.1, seed }),
    ],
    [
      'first order, s²/(2DΔ) 0.25',
      'first',
      (seed) => simulateFirstOrder({ tracks: 40, frames: 500, diffusion: 0.5, localizationError: 0.5, seed }),
    ],
  ];
  for (const [title, order, simulate] of cases) {
    const covered = new Map<string, number>();
    for (let seed = 1; seed <= studies; seed++) {
      const fitted = estimate(simulate(seed), { ...CONSTANT, force: 'constant', drift: 'constant' }, order);
      const replicates = drawReplicates(fitted.estimate, 200, seed);
      const multiplier = pointwiseMultiplier(0.95, fitted.plan.blocks.count, 200);
      const friction = title.includes('0.1,') ? 0.1 : 0.2;
      const truth: Record<string, number> = {
        force_x: 0,
        friction_xx: friction,
        noise_xx: 2 * friction,
        temperature_xx: 1,
        drift_x: 0,
        diffusion_xx: 0.5,
      };
      for (const { name, scale, values, deviations } of measureSpread(
        fitted.estimate.model,
        replicates,
        Float64Array.of(0),
      )) {
        const distance =
          scale === 'logarithmic' ? Math.log(values[0] / truth[name]) : values[0] - truth[name];
        covered.set(
          name,
          (covered.get(name) ?? 0) + (Math.abs(distance) <= multiplier * deviations[0] ? 1 : 0),
        );
      }
    }
    rows.push([title, [...covered].map(([name, hits]) => `${name} ${percent(hits / studies)}`).join(', ')]);
  }
  printTable(`Coverage of 95 % intervals over ${studies} studies`, ['case', 'covered'], rows);
}

if (only === '' || only === 'free') secondOrderTable('Second order, free', () => 0, 'constant');
if (only === '' || only === 'trapped')
  secondOrderTable('Second order, trapped (k = (0.3/Δ)²)', () => 0.09, 'linear');
if (only === '' || only === 'first') firstOrderTable();
if (only === '' || only === 'coverage') coverageTable();
