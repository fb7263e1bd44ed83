/**
 * Bias, scatter and coverage of the differences estimator on simulated studies with exact transitions.
 * Run with `npm run study:differences [seeds] [free|trapped|first|coverage|varied]`; all parts take about half an hour.
 */

import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { estimateDifferences } from '../../src/estimation/differences/estimateDifferences.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { frictionPrecisionBound } from '../../src/momenta/precisionBound.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { drawReplicates } from '../../src/uncertainty/bootstrap.js';
import { measureDistance } from '../../src/uncertainty/scales.js';
import { measureSpread, pointwiseMultiplier } from '../../src/uncertainty/spread.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { simulateVaried } from '../support/variedProcess.js';
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

/** Studies whose coefficients are known at some places. */
interface KnownStudy {
  readonly title: string;
  readonly order: 'first' | 'second';
  readonly simulate: (seed: number) => TrackSet;
  readonly shapes: StudyInput;
  /** Along x. */
  readonly places: readonly number[];
  /** Columns to judge, and their true values at a place. */
  readonly truth: Readonly<Record<string, (x: number) => number>>;
}

const constant = (value: number) => (): number => value;

function constantStudy(
  title: string,
  friction: number,
  design: { tracks: number; frames: number; localizationError: number },
): KnownStudy {
  return {
    title,
    order: 'second',
    simulate: (seed) => simulateSecondOrder({ ...design, friction, seed }),
    shapes: { ...CONSTANT, force: 'constant' },
    places: [0],
    truth: {
      force_x: constant(0),
      friction_xx: constant(friction),
      noise_xx: constant(2 * friction),
      temperature_xx: constant(1),
    },
  };
}

const CONSTANT_STUDIES: readonly KnownStudy[] = [
  constantStudy('second order, Γ·Δ 0.2, s/(v·Δ) 0.1', 0.2, {
    tracks: 40,
    frames: 500,
    localizationError: 0.1,
  }),
  constantStudy('second order, Γ·Δ 0.1, s/(v·Δ) 0.3', 0.1, {
    tracks: 40,
    frames: 500,
    localizationError: 0.3,
  }),
  constantStudy('the same, 5 long tracks', 0.2, { tracks: 5, frames: 4000, localizationError: 0.1 }),
  {
    title: 'first order, s²/(2DΔ) 0.25',
    order: 'first',
    simulate: (seed) =>
      simulateFirstOrder({ tracks: 40, frames: 500, diffusion: 0.5, localizationError: 0.5, seed }),
    shapes: { ...CONSTANT, drift: 'constant' },
    places: [0],
    truth: { drift_x: constant(0), diffusion_xx: constant(0.5) },
  },
];

const VARIED = { dimensions: 1, tracks: 40, frames: 1000, substeps: 20, startSpread: 6, warmUp: 100 };
const frictionBump = (x: number): number => 0.15 * (1 + 1.5 * Math.exp((-x * x) / 18));
const noiseStep = (x: number): number => 0.3 * (1 + 0.6 * Math.tanh(x / 3));
const PLACES = [-8, -4, 0, 4, 8];

/** Both change over a length of 3; a displacement per frame is about Δ long. */
function variedStudy(
  varying: 'friction' | 'noise',
  interval: number,
  friction: (x: number) => number,
  noise: (x: number) => number,
): KnownStudy {
  return {
    title:
      varying === 'friction'
        ? `friction 0.15 (1 + 1.5 exp(−x²/18)), noise 0.3, force −0.02 x, s 0.1, Δ ${interval}`
        : `noise 0.3 (1 + 0.6 tanh(x/3)), friction 0.3, force −0.02 x, s 0.1, Δ ${interval}`,
    order: 'second',
    simulate: (seed) =>
      simulateVaried({
        ...VARIED,
        interval,
        force: (place, out) => out.fill(-0.02 * place[0]),
        friction: (place, out) => out.fill(friction(place[0])),
        noise: (place, out) => out.fill(noise(place[0])),
        localizationError: 0.1,
        seed,
      }),
    shapes: { ...CONSTANT, force: 'linear', [varying]: 'spline' },
    places: PLACES,
    truth: varying === 'friction' ? { friction_xx: friction } : { noise_xx: noise },
  };
}

const VARIED_STUDIES: readonly KnownStudy[] = [
  variedStudy('friction', 0.5, frictionBump, constant(0.3)),
  variedStudy('friction', 1, frictionBump, constant(0.3)),
  variedStudy('noise', 0.5, constant(0.3), noiseStep),
];

interface Finding {
  /** Relative to the truth, or absolute where that is 0. */
  readonly deviations: number[];
  covered: number;
}

/** Column → place → what came out over the seeds. */
function repeatStudy(study: KnownStudy, studies: number): Map<string, Finding[]> {
  const findings = new Map(
    Object.keys(study.truth).map((name) => [
      name,
      study.places.map((): Finding => ({ deviations: [], covered: 0 })),
    ]),
  );
  for (let seed = 1; seed <= studies; seed++) {
    const fitted = estimate(study.simulate(seed), study.shapes, study.order);
    const replicates = drawReplicates(fitted.estimate, 200, seed);
    const multiplier = pointwiseMultiplier(0.95, fitted.plan.blocks.count, 200);
    const spreads = measureSpread(fitted.estimate.model, replicates, Float64Array.from(study.places));
    for (const { name, scale, values, deviations } of spreads) {
      findings.get(name)?.forEach((finding, i) => {
        const truth = study.truth[name](study.places[i]);
        const distance = measureDistance(scale, values[i], truth);
        if (Math.abs(distance) <= multiplier * deviations[i]) finding.covered++;
        finding.deviations.push(truth === 0 ? values[i] : values[i] / truth - 1);
      });
    }
  }
  return findings;
}

function coverageTable(): void {
  const studies = Math.max(200, seeds);
  const rows = CONSTANT_STUDIES.map((study) => {
    const findings = repeatStudy(study, studies);
    const shares = [...findings].map(([name, [{ covered }]]) => `${name} ${percent(covered / studies)}`);
    return [study.title, shares.join(', ')];
  });
  printTable(
    `Coverage of 95 % intervals, constant coefficients, ${studies} studies`,
    ['case', 'covered'],
    rows,
  );
}

function variedTable(): void {
  for (const study of VARIED_STUDIES) {
    const rows: string[][] = [];
    for (const [name, places] of repeatStudy(study, seeds)) {
      places.forEach(({ deviations, covered }, i) => {
        rows.push([
          `${name} at x = ${study.places[i]}`,
          study.truth[name](study.places[i]).toFixed(3),
          `${percent(mean(deviations))} ± ${percent(deviation(deviations) / Math.sqrt(seeds))}`,
          percent(deviation(deviations)),
          percent(covered / seeds),
        ]);
      });
    }
    const { tracks, frames } = VARIED;
    printTable(
      `${study.title}; ${tracks} tracks × ${frames} frames, ${seeds} seeds`,
      ['coefficient', 'true', 'bias', 'scatter', 'covered by 95 % intervals'],
      rows,
    );
  }
}

if (only === '' || only === 'free') secondOrderTable('Second order, free', () => 0, 'constant');
if (only === '' || only === 'trapped')
  secondOrderTable('Second order, trapped (k = (0.3/Δ)²)', () => 0.09, 'linear');
if (only === '' || only === 'first') firstOrderTable();
if (only === '' || only === 'coverage') coverageTable();
if (only === '' || only === 'varied') variedTable();
