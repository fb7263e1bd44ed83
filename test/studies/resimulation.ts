/**
 * How often `resimulate` calls right models inconsistent, and how often wrong ones, over simulated studies that are
 * fitted as a user would fit them; and how well coefficients survive fit → scenario → simulate → fit.
 * Run with `npm run study:resimulation [studies] [part of a case's name, or round]`.
 */

import { resimulate } from '../../src/checks/resimulate.js';
import type { FitDocument } from '../../src/documents/FitDocument.js';
import type { StudyInput } from '../../src/documents/Study.js';
import { bump, fitDocument, measureRoundTrip } from '../support/roundTrip.js';
import { simulateVaried, type VariedProcess } from '../support/variedProcess.js';
import { percent, printTable } from './table.js';

const REPLICATES = 39; // p-values in steps of 0.025
const studies = Number(process.argv[2] ?? 60);
const only = process.argv[3] ?? '';

type Process = Omit<VariedProcess, 'seed'>;

interface Case {
  readonly name: string;
  readonly isRight: boolean;
  readonly process: Process;
  readonly study: StudyInput;
  /** Turns the fitted model into a wrong one. */
  readonly spoil?: (fit: FitDocument) => FitDocument;
}

const TRAP: Process = {
  dimensions: 2,
  tracks: 20,
  frames: 150,
  interval: 0.2,
  substeps: 8,
  force: (place, out) => {
    out[0] = -place[0];
    out[1] = -place[1];
  },
  friction: (_place, out) => void out.fill(1),
  noise: (_place, out) => void out.fill(2),
  localizationError: 0.02,
  startSpread: 1,
  warmUp: 10,
};

const BUMP: Process = {
  ...TRAP,
  frames: 400,
  friction: (place, out) => void out.fill(bump(place)),
  noise: (place, out) => void out.fill(2 * bump(place)),
};

const STIRRED: Process = {
  ...TRAP,
  frames: 400,
  force: (place, out) => {
    out[0] = -place[0] - 0.3 * place[1];
    out[1] = -place[1] + 0.3 * place[0];
  },
};

const LINEAR: StudyInput = { order: 'second', force: 'linear', friction: 'constant', noise: 'constant' };

const CASES: readonly Case[] = [
  { name: 'trap, second order', isRight: true, process: TRAP, study: LINEAR },
  {
    name: 'stirred bowl with friction and noise rising outwards, second order',
    isRight: true,
    process: {
      ...STIRRED,
      frames: 200,
      friction: (place, out) => void out.fill(0.8 + 0.1 * (place[0] ** 2 + place[1] ** 2)),
      noise: (place, out) => void out.fill(1.6 + 0.2 * (place[0] ** 2 + place[1] ** 2)),
    },
    study: { order: 'second', force: 'linear', friction: 'polynomial:2', noise: 'polynomial:2' },
  },
  {
    name: 'ring with waves of force, friction and noise, second order',
    isRight: true,
    process: {
      ...TRAP,
      dimensions: 1,
      frames: 200,
      periods: [4],
      force: (place, out) => {
        out[0] = 0.3 + 0.8 * Math.sin((Math.PI / 2) * place[0]);
      },
      friction: (place, out) => {
        out[0] = 1 + 0.5 * Math.cos((Math.PI / 2) * place[0]);
      },
      noise: (place, out) => {
        out[0] = 2 + 0.6 * Math.sin((Math.PI / 2) * place[0]);
      },
    },
    study: { order: 'second', force: 'waves:1', friction: 'waves:1', noise: 'waves:1' },
  },
  {
    name: 'well with diffusion rising outwards, first order',
    isRight: true,
    process: {
      dimensions: 1,
      tracks: 20,
      frames: 150,
      interval: 0.1,
      substeps: 40,
      force: (place, out) => {
        out[0] = -place[0];
      },
      noise: (place, out) => {
        out[0] = 0.5 * (1 + place[0] ** 2 / 4);
      },
      localizationError: 0.05,
      startSpread: 0.7,
      warmUp: 5,
    },
    study: { order: 'first', drift: 'linear', diffusion: 'polynomial:2' },
  },
  {
    name: 'bump of friction and noise, automatic splines',
    isRight: true,
    process: { ...BUMP, frames: 200 },
    study: { order: 'second', force: 'linear' },
  },
  {
    name: 'constant friction fitted to a bump',
    isRight: false,
    process: BUMP,
    study: { order: 'second', force: 'linear', friction: 'constant' },
  },
  {
    name: 'first order fitted to second-order tracks',
    isRight: false,
    process: TRAP,
    study: { order: 'first', drift: 'linear', diffusion: 'constant' },
  },
  {
    name: 'no stirring where there is some',
    isRight: false,
    process: STIRRED,
    study: LINEAR,
    spoil: removeStirring,
  },
];

/** The fit without the antisymmetric part of its linear force, in the best coefficients and in every draw. */
function removeStirring(fit: FitDocument): FitDocument {
  const { model } = fit;
  if (model.order !== 'second') throw new Error('a second-order fit was expected');
  const [x, y] = model.force.coefficients;
  const k = x.length;
  // The slope of the x component along y and of the y component along x are the two that differ most from zero off the diagonal.
  const [xAlongY, yAlongX] = findCrossTerms(x, y);
  const symmetrize = (vector: number[]): number[] => {
    const out = [...vector];
    const mean = 0.5 * (out[xAlongY] + out[k + yAlongX]);
    out[xAlongY] = mean;
    out[k + yAlongX] = mean;
    return out;
  };
  const best = symmetrize([...x, ...y]);
  return {
    ...fit,
    model: { ...model, force: { ...model.force, coefficients: [best.slice(0, k), best.slice(k)] } },
    uncertainty: { ...fit.uncertainty, replicates: fit.uncertainty.replicates.map(symmetrize) },
  };
}

/** Of the linear functions (all but the constant, which is the first), each component's trap is its largest. */
function findCrossTerms(x: readonly number[], y: readonly number[]): [number, number] {
  const slopes = [1, 2];
  const trapOf = (row: readonly number[]): number => (Math.abs(row[1]) > Math.abs(row[2]) ? 1 : 2);
  const [a, b] = [trapOf(x), trapOf(y)];
  return [slopes.find((index) => index !== a) ?? 2, slopes.find((index) => index !== b) ?? 1];
}

const rows: string[][] = [];
for (const { name, isRight, process: motion, study, spoil } of CASES) {
  if (only !== '' && !name.includes(only)) continue;
  let rejected = 0;
  const reasons = new Map<string, number>();
  for (let seed = 1; seed <= studies; seed++) {
    const tracks = simulateVaried({ ...motion, seed });
    const fitted = await fitDocument(tracks, study);
    const result = await resimulate(spoil ? spoil(fitted) : fitted, tracks, { seed, replicates: REPLICATES });
    if (!result.consistent) rejected++;
    for (const { name: statistic, adjusted } of result.statistics) {
      if (adjusted <= result.level) reasons.set(statistic, (reasons.get(statistic) ?? 0) + 1);
    }
    if (seed % 10 === 0) console.error(`${name}: ${rejected} of ${seed}`);
  }
  const share = rejected / studies;
  const error = Math.sqrt((share * (1 - share)) / studies);
  rows.push([
    name,
    isRight ? 'right' : 'wrong',
    `${percent(share)} ± ${percent(error)}`,
    [...reasons]
      .sort((a, b) => b[1] - a[1])
      .slice(0, 3)
      .map(([statistic, count]) => `${statistic} ${count}`)
      .join(', '),
  ]);
  console.error(rows[rows.length - 1].join(' | '));
}
if (rows.length > 0) {
  printTable(
    `Called inconsistent, ${studies} studies each`,
    ['case', 'model', 'called inconsistent', 'seen by'],
    rows,
  );
}

if (only === '' || only === 'round') {
  const table: string[][] = [];
  for (const dimensions of [1, 2] as const) {
    const { friction, noise, frictionByVisits, noiseByVisits, positions } =
      await measureRoundTrip(dimensions);
    table.push([
      String(dimensions),
      String(positions),
      percent(friction),
      percent(noise),
      percent(frictionByVisits),
      percent(noiseByVisits),
    ]);
  }
  printTable(
    'Fit → scenario → simulate → fit: root mean square of second ÷ first fit − 1 over the visited region',
    ['dimensions', 'positions', 'friction', 'noise', 'friction, by visits', 'noise, by visits'],
    table,
  );
}
