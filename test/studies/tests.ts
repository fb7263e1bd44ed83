/**
 * How often tests of hypotheses and challenges are right, on simulated studies. Run with
 *
 *   npm run study:tests [-- SEEDS [PART] [FIRST_SEED]]
 *
 * PART: null, power, wall, class, departures; default all. 10 000 positions each unless the table says otherwise.
 */

import { createRecorder } from '../../src/checks/createRecorder.js';
import { loadFormulaReader } from '../../src/fields/formula.js';
import { challengeModel } from '../../src/hypotheses/challenge/challengeModel.js';
import { CHECKS } from '../../src/hypotheses/challenge/ChallengeResult.js';
import type { Law } from '../../src/hypotheses/lawStatement.js';
import { resolveLaws } from '../../src/hypotheses/resolveLaw.js';
import { testHypothesis } from '../../src/hypotheses/testHypothesis.js';
import type { HypothesisName, TestResult } from '../../src/hypotheses/TestResult.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { bareFit } from '../support/bareFit.js';
import {
  simulateDrift,
  simulateKicks,
  simulateMemory,
  simulateSpeedDependence,
} from '../support/departures.js';
import { simulateFirstOrder, simulateSecondOrder } from '../support/exactProcesses.js';
import { simulateVaried } from '../support/variedProcess.js';
import { perpendicularDrag } from '../support/wallCorrections.js';
import { mean, percent, printTable } from './table.js';

const seeds = Number(process.argv[2] ?? 100);
const part = process.argv[3] ?? '';
const firstSeed = Number(process.argv[4] ?? 1);
const readFormula = await loadFormulaReader();

function lawOf(text: string, field: string, fixed: Readonly<Record<string, number>> = {}): Law {
  const context = { readFormula, coordinates: ['x'], field, laws: {}, start: {}, fixed };
  return resolveLaws([text], context)[0];
}

interface Cell {
  readonly title: string;
  readonly order: 'first' | 'second';
  readonly relaxationTime: number | null;
  readonly simulate: (seed: number) => TrackSet;
}

const TRACKS = 20;
const FRAMES = 500;

/** A trap in which friction × interval is `x`; lengths in displacements per frame of the thermal speed, times in frames. */
const stiffnessOf = (x: number): number => (x <= 0.1 ? 1.5 * x * x : 0.2 * x);

function trapped(x: number, error: number, dimensions = 1): Cell {
  return {
    title: `trap, ${dimensions}-D`,
    order: 'second',
    relaxationTime: 1 / x,
    simulate: (seed) =>
      simulateSecondOrder({
        dimensions,
        tracks: TRACKS / dimensions,
        frames: FRAMES,
        friction: x,
        stiffness: stiffnessOf(x),
        localizationError: error,
        seed,
      }),
  };
}

function free(x: number, error: number): Cell {
  return {
    title: 'free',
    order: 'second',
    relaxationTime: 1 / x,
    simulate: (seed) =>
      simulateSecondOrder({
        tracks: TRACKS,
        frames: FRAMES,
        friction: x,
        startSpread: 10 / x,
        localizationError: error,
        seed,
      }),
  };
}

const STEP = 0.55;

/** Friction x (1 + 0.55 tanh(q/w)) in a trap of width w; the noise constant, or at one temperature with the friction. */
function stepped(x: number, error: number, isothermal: boolean): Cell & { width: number } {
  const stiffness = stiffnessOf(x);
  const width = 1 / Math.sqrt(stiffness);
  return {
    title: isothermal ? 'friction and noise in one step' : 'friction in a step',
    width,
    order: 'second',
    relaxationTime: 1 / x,
    simulate: (seed) =>
      simulateVaried({
        dimensions: 1,
        tracks: TRACKS,
        frames: FRAMES,
        interval: 1,
        substeps: x > 0.3 ? 20 : 10,
        force: (place, out) => void (out[0] = -stiffness * place[0]),
        friction: (place, out) => void (out[0] = x * (1 + STEP * Math.tanh(place[0] / width))),
        noise: (place, out) =>
          void (out[0] = 2 * x * (isothermal ? 1 + STEP * Math.tanh(place[0] / width) : 1)),
        localizationError: error,
        startSpread: width,
        warmUp: 5 / x,
        seed,
      }),
  };
}

/** A first-order motion in a trap, κ × interval 0.05, error²/(2 D interval) = error². */
function diffusing(error: number): Cell {
  return {
    title: 'first order, trap',
    order: 'first',
    relaxationTime: null,
    simulate: (seed) =>
      simulateFirstOrder({
        tracks: TRACKS,
        frames: FRAMES,
        diffusion: 0.5,
        relaxation: 0.05,
        localizationError: error,
        seed,
      }),
  };
}

function testCell(
  cell: Cell,
  seed: number,
  hypothesis: HypothesisName,
  field?: string,
  laws?: Law[],
): TestResult {
  const tracks = cell.simulate(seed);
  const fit = bareFit(tracks, { order: cell.order, relaxationTime: cell.relaxationTime });
  const simulate = createRecorder(fit, tracks);
  return testHypothesis(fit, tracks, { hypothesis, field, laws, confidence: 0.95, seed, simulate });
}

/** Rows as they come, for those who wait. */
class Rows extends Array<string[]> {
  override push(...rows: string[][]): number {
    for (const row of rows) console.error(row.join(' | '));
    return super.push(...rows);
  }
}

const allSeeds = (): number[] => Array.from({ length: seeds }, (_, i) => firstSeed + i);
const scatter = (share: number): string =>
  `${percent(share)} ± ${percent(Math.sqrt((share * (1 - share)) / seeds))}`;

function nullTable(): void {
  const rows = new Rows();
  const run = (
    hypothesis: HypothesisName,
    x: string,
    error: number,
    cell: Cell,
    field?: string,
    laws?: Law[],
  ): void => {
    const values = allSeeds().map((seed) => testCell(cell, seed, hypothesis, field, laws).p);
    const rejected = values.filter((p) => p < 0.05).length / seeds;
    rows.push([hypothesis, cell.title, x, String(error), scatter(rejected), mean(values).toFixed(2)]);
  };
  for (const [x, error] of [
    [0.05, 0.1],
    [0.1, 0.3],
    [0.2, 0.1],
    [0.5, 0.3],
  ]) {
    run('uniform-friction', String(x), error, trapped(x, error));
    run('uniform-noise', String(x), error, trapped(x, error));
    run('uniform-temperature', String(x), error, stepped(x, error, true));
    run('zero-force', String(x), error, free(x, error));
    const step = stepped(x, error, false);
    run('law', String(x), error, step, 'friction', [lawOf(`g0*(1+a*tanh(x/${step.width}))`, 'friction')]);
  }
  run('conservative-force', '0.2', 0.1, trapped(0.2, 0.1, 2));
  run('isotropic-friction', '0.2', 0.1, trapped(0.2, 0.1, 2));
  run('uniform-noise', '–', 0.3, diffusing(0.3));
  printTable(
    `True statements rejected at 5 %; ${TRACKS * FRAMES} positions, ${seeds} seeds`,
    ['statement', 'process', 'Γ·Δ', 's/(v·Δ)', 'rejected', 'mean p'],
    rows,
  );
}

function powerTable(): void {
  const rows = new Rows();
  for (const [x, error] of [
    [0.05, 0.1],
    [0.1, 0.1],
    [0.2, 0.3],
    [0.5, 0.1],
  ]) {
    const cell = stepped(x, error, false);
    const law = lawOf(`g0*(1+a*tanh(x/${cell.width}))`, 'friction');
    let [rejected, covered] = [0, 0];
    const amplitudes: number[] = [];
    for (const seed of allSeeds()) {
      if (testCell(cell, seed, 'uniform-friction').rejected) rejected++;
      const { a } = testCell(cell, seed, 'law', 'friction', [law]).parameters;
      if (a.low <= STEP && STEP <= a.high) covered++;
      amplitudes.push(a.value);
    }
    rows.push([
      String(x),
      String(error),
      scatter(rejected / seeds),
      scatter(covered / seeds),
      mean(amplitudes).toFixed(3),
    ]);
  }
  printTable(
    `Friction with a step of ±55 %; ${TRACKS * FRAMES} positions, ${seeds} seeds`,
    ['Γ·Δ', 's/(v·Δ)', 'uniform-friction rejected', 'amplitude covered (95 %)', 'mean amplitude (0.55)'],
    rows,
  );
}

/** Heights of a sphere of radius 1 above a floor: weight and a short-ranged repulsion, at one temperature. */
function heights(mobility: (height: number) => number, lowest: number): Cell {
  const slope = (h: number): number => (mobility(h + 1e-4) - mobility(h - 1e-4)) / 2e-4;
  // A table keeps the exact series out of the inner loop.
  const cells = 20_000;
  const highest = 25;
  const tabulate = (f: (h: number) => number): Float64Array =>
    Float64Array.from({ length: cells + 1 }, (_, i) => f(lowest + (i / cells) * (highest - lowest)));
  const [diffusion, gradient] = [tabulate(mobility), tabulate(slope)];
  const read = (table: Float64Array, h: number): number =>
    table[Math.max(0, Math.min(cells, Math.round(((h - lowest) / (highest - lowest)) * cells)))];
  return {
    title: 'heights',
    order: 'first',
    relaxationTime: null,
    simulate: (seed) =>
      simulateVaried({
        dimensions: 1,
        tracks: 100,
        frames: 1000,
        interval: 0.004,
        substeps: 4,
        force: (place, out) => {
          const gap = Math.max(place[0] - lowest, 0);
          const pull = -1 + 30 * Math.exp(-gap / 0.1);
          out[0] = read(gradient, place[0]) + read(diffusion, place[0]) * pull;
        },
        noise: (place, out) => void (out[0] = read(diffusion, place[0])),
        localizationError: 0.02,
        startSpread: 0,
        warmUp: 6,
        seed,
      }),
  };
}

function wallTable(): void {
  const rows = new Rows();
  const faxen = (h: number): number => 1 - 9 / (8 * h) + 1 / (2 * h ** 3);
  for (const [title, law, cell] of [
    ['exact series', 'wall-perpendicular', heights((h) => 1 / perpendicularDrag(Math.max(h, 1.0001)), 1.02)],
    ['two terms of Faxén', 'faxen-perpendicular', heights(faxen, 1.5)],
  ] as const) {
    let [lawRejected, linearRejected, uniformRejected] = [0, 0, 0];
    const scales: number[] = [];
    for (const seed of allSeeds()) {
      const tracks = cell.simulate(seed);
      const fit = bareFit(tracks, { order: 'first' });
      const run = (hypothesis: HypothesisName, laws?: Law[]): TestResult =>
        testHypothesis(fit, tracks, { hypothesis, field: 'diffusion', laws, confidence: 0.95, seed });
      const wall = run('law', [lawOf(law, 'diffusion', { radius: 1 })]);
      if (wall.rejected) lawRejected++;
      scales.push(wall.parameters.c0.value);
      if (run('law', [lawOf('linear', 'diffusion')]).rejected) linearRejected++;
      if (run('uniform-noise').rejected) uniformRejected++;
    }
    const off = scales.map((scale) => Math.abs(scale - 1));
    rows.push([
      title,
      law,
      scatter(lawRejected / seeds),
      `${mean(scales).toFixed(4)}, at most ${percent(Math.max(...off), 2)} off`,
      scatter(uniformRejected / seeds),
      scatter(linearRejected / seeds),
    ]);
  }
  printTable(
    `Diffusion near a wall; 100 000 heights, ${seeds} seeds`,
    ['truth', 'law', 'law rejected', 'scale (1)', 'uniform-noise rejected', 'linear rejected'],
    rows,
  );
}

function challengeRow(title: string, cell: Cell): string[] {
  const alone = new Map<string, number>();
  let any = 0;
  const flagged = new Map<string, number>();
  for (const seed of allSeeds()) {
    const tracks = cell.simulate(seed);
    const fit = bareFit(tracks, { order: cell.order, relaxationTime: cell.relaxationTime });
    const { checks, holds } = challengeModel(fit, tracks, 0.95);
    for (const check of checks) {
      alone.set(check.name, (alone.get(check.name) ?? 0) + (check.pAlone < 0.05 ? 1 : 0));
      flagged.set(check.name, (flagged.get(check.name) ?? 0) + (check.holds ? 0 : 1));
    }
    if (!holds) any++;
  }
  const share = (counts: Map<string, number>, name: string): string =>
    counts.has(name) ? percent((counts.get(name) ?? 0) / seeds) : '–';
  const row = [
    title,
    ...CHECKS.map((name) => `${share(alone, name)} (${share(flagged, name)})`),
    percent(any / seeds),
  ];
  console.error(row.join(' | '));
  return row;
}

const CHALLENGE_HEAD = ['process', ...CHECKS, 'any, corrected'];

function classTable(): void {
  printTable(
    `Challenges inside the model class: p < 5 % alone (and flagged after correction); ${TRACKS * FRAMES} positions, ${seeds} seeds; scatter ± ${percent(Math.sqrt((0.05 * 0.95) / seeds))}`,
    CHALLENGE_HEAD,
    [
      challengeRow('trap, Γ·Δ 0.1, s 0.3', trapped(0.1, 0.3)),
      challengeRow('step in friction, Γ·Δ 0.2, s 0.1', stepped(0.2, 0.1, false)),
      challengeRow('step in both, Γ·Δ 0.5, s 0.1', stepped(0.5, 0.1, true)),
      challengeRow('trap, 2-D, Γ·Δ 0.2, s 0.1', trapped(0.2, 0.1, 2)),
      challengeRow('first order, trap', diffusing(0.3)),
    ],
  );
}

function departuresTable(): void {
  // 60 000 positions, interval 0.2 relaxation times
  const design = { tracks: 60, frames: 1000, interval: 0.2, substeps: 20, localizationError: 0.02 };
  const cell = (title: string, simulate: (seed: number) => TrackSet): Cell => ({
    title,
    order: 'second',
    relaxationTime: 1,
    simulate,
  });
  printTable(
    `Challenges outside the model class: p < 5 % alone (and flagged after correction); 60 000 positions, ${seeds} seeds`,
    CHALLENGE_HEAD,
    [
      cell('friction 0.3 + 0.8 |v|', (seed) => simulateSpeedDependence({ ...design, seed }, 0.3, 0.8)),
      cell('memory of 1.2 relaxation times', (seed) => simulateMemory({ ...design, seed }, 1.2)),
      cell('kicks, 4 per relaxation time', (seed) => simulateKicks({ ...design, seed }, 4)),
      cell('noise up by 20 %', (seed) => simulateDrift({ ...design, seed }, 0.2)),
    ].map((departure) => challengeRow(departure.title, departure)),
  );
}

const PARTS: Readonly<Record<string, () => void>> = {
  null: nullTable,
  power: powerTable,
  wall: wallTable,
  class: classTable,
  departures: departuresTable,
};
for (const [name, print] of Object.entries(PARTS)) if (part === '' || part === name) print();
