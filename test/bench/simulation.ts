/**
 * Particle steps per second and core of the integrators, beside the same spline loop in C++ where a compiler is at hand.
 * Run with `npm run bench:simulation [steps]`. Times are processor times, so that a busy machine disturbs little.
 */

import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { ScenarioInput } from '../../src/documents/Scenario.js';
import type { FieldForm, FieldLink, FieldName } from '../../src/fields/CoefficientField.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { createIntegrator } from '../../src/simulation/createIntegrator.js';
import { createScenario } from '../../src/simulation/parseScenario.js';
import { createScenarioEvaluator } from '../../src/simulation/ScenarioEvaluator.js';
import { tabulateSplineCells } from '../../src/fields/splineCells.js';
import { printTable } from '../studies/table.js';

const steps = Number(process.argv[2] ?? 2_000_000);
const REPEATS = 5; // after one for warming up
const STEP = 0.02;

const friction = (x: number, y: number): number => 0.6 + 1.6 * Math.exp(-(x * x + y * y) / 0.8);

type Field = Extract<NonNullable<ScenarioInput['coefficients']['force']>, { basis: unknown }>;
type SplineSpec = Extract<Field['basis'], { kind: 'spline' }>;

function splineOf(d: number, count: number): SplineSpec {
  const all = <Value>(value: Value): Value[] => new Array<Value>(d).fill(value);
  return { kind: 'spline', counts: all(count), low: all(-3), high: all(3), periods: all(0) };
}

/** Spline coefficients that follow a function: its values at the centres of the splines. */
function follow(spec: SplineSpec, f: (place: readonly number[]) => number): number[] {
  const d = spec.counts.length;
  const count = spec.counts[0];
  return Array.from({ length: count ** d }, (_, index) => {
    const place = Array.from({ length: d }, (__, axis) => {
      const i = Math.floor(index / count ** (d - 1 - axis)) % count;
      return -3 + ((i - 1) / (count - 3)) * 6;
    });
    return f(place);
  });
}

const field = (
  name: FieldName,
  form: FieldForm,
  link: FieldLink,
  basis: SplineSpec,
  coefficients: number[][],
): Field => ({ name, form, link, basis, coefficients });

const plane = splineOf(2, 10);
const sums = {
  force: [follow(plane, ([x, y]) => -x - 0.3 * y), follow(plane, ([x, y]) => -y + 0.3 * x)],
  friction: [follow(plane, ([x, y]) => friction(x, y))],
  noise: [follow(plane, ([x, y]) => 2 * friction(x, y))],
};
const logarithm = (rows: number[][]): number[][] => rows.map((row) => row.map(Math.log));
const splines = {
  force: field('force', 'vector', 'identity', plane, sums.force),
  friction: field('friction', 'scalar', 'identity', plane, sums.friction),
  noise: field('noise', 'scalar', 'identity', plane, sums.noise),
};
const line = splineOf(1, 16);
const space = splineOf(3, 7);
const bump = '0.6+1.6*exp(-(x^2+y^2)/0.8)';

const CASES: readonly [string, number, 'first' | 'second', ScenarioInput['coefficients']][] = [
  ['2-D, second order, splines', 2, 'second', splines],
  [
    '2-D, second order, splines of logarithms',
    2,
    'second',
    {
      force: splines.force,
      friction: field('friction', 'scalar', 'log', plane, logarithm(sums.friction)),
      noise: field('noise', 'scalar', 'log', plane, logarithm(sums.noise)),
    },
  ],
  [
    '2-D, second order, matrix friction and noise',
    2,
    'second',
    {
      force: splines.force,
      friction: field('friction', 'matrix', 'identity', plane, [
        sums.friction[0],
        follow(plane, () => -0.2),
        follow(plane, () => 0.2),
        sums.friction[0],
      ]),
      noise: field('noise', 'matrix', 'identity', plane, [
        sums.noise[0],
        follow(plane, () => 0.1),
        sums.noise[0],
      ]),
    },
  ],
  [
    '2-D, second order, formulas',
    2,
    'second',
    {
      force: { form: 'vector', formulas: ['-x-0.3*y', '-y+0.3*x'] },
      friction: { form: 'scalar', formulas: [bump] },
      noise: { form: 'scalar', formulas: [`2*(${bump})`] },
    },
  ],
  [
    '1-D, second order, splines',
    1,
    'second',
    {
      force: field('force', 'vector', 'identity', line, [follow(line, ([x]) => -x)]),
      friction: field('friction', 'scalar', 'identity', line, [follow(line, ([x]) => friction(x, 0))]),
      noise: field('noise', 'scalar', 'identity', line, [follow(line, ([x]) => 2 * friction(x, 0))]),
    },
  ],
  [
    '3-D, second order, splines',
    3,
    'second',
    {
      force: field(
        'force',
        'vector',
        'identity',
        space,
        [0, 1, 2].map((axis) => follow(space, (place) => -place[axis])),
      ),
      friction: field('friction', 'scalar', 'identity', space, [follow(space, ([x, y]) => friction(x, y))]),
      noise: field('noise', 'scalar', 'identity', space, [follow(space, ([x, y]) => 2 * friction(x, y))]),
    },
  ],
  [
    '2-D, first order, splines, diffusion that varies',
    2,
    'first',
    {
      drift: field('drift', 'vector', 'identity', plane, sums.force),
      diffusion: field('diffusion', 'scalar', 'identity', plane, [
        follow(plane, ([x, y]) => 1 / friction(x, y)),
      ]),
    },
  ],
];

interface Speed {
  /** Steps per second of processor time. */
  readonly best: number;
  readonly mean: number;
  readonly deviation: number;
  readonly checksum: number;
}

async function measure(
  d: number,
  order: 'first' | 'second',
  coefficients: ScenarioInput['coefficients'],
): Promise<Speed> {
  const scenario = createScenario({
    format: 'wanderlaw-scenario',
    version: 1,
    dimensions: d,
    order,
    axes: Array.from({ length: d }, () => ({ kind: 'open' as const })),
    coefficients,
    visited: { low: new Array<number>(d).fill(-3), high: new Array<number>(d).fill(3) },
    continuation: { kind: 'confine', stiffness: 1 },
    start: { kind: 'normal', mean: new Array<number>(d).fill(0), spread: new Array<number>(d).fill(1) },
    observation: { tracks: 1, frames: 2, interval: 1, localizationError: new Array<number>(d).fill(0) },
  });
  const integrator = createIntegrator(scenario, await createScenarioEvaluator(scenario));
  const q = new Float64Array(d).fill(0.1);
  const v = new Float64Array(d);
  const stream = randomStream(1, 'bench');
  const speeds: number[] = [];
  for (let repeat = 0; repeat <= REPEATS; repeat++) {
    const began = process.cpuUsage();
    integrator.advance(q, v, steps, STEP, stream);
    const { user, system } = process.cpuUsage(began);
    if (repeat > 0) speeds.push((steps / (user + system)) * 1e6);
  }
  const mean = speeds.reduce((sum, value) => sum + value, 0) / REPEATS;
  const square = speeds.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return {
    best: Math.max(...speeds),
    mean,
    deviation: Math.sqrt(square / (REPEATS - 1)),
    checksum: q.reduce((sum, value) => sum + value, 0),
  };
}

/** The C++ loop over the same table of cells; null where there is no compiler. */
function measureCpp(): number | null {
  const tabulated = tabulateSplineCells(createBasis(plane, 2), plane, [
    ...sums.force,
    ...sums.friction,
    ...sums.noise,
  ]);
  if (tabulated === null) return null;
  const { cells, widths, table } = tabulated;
  const directory = mkdtempSync(join(tmpdir(), 'spline-loop-'));
  try {
    const data = Float64Array.of(cells[0], plane.low[0], plane.low[1], widths[0], widths[1], ...table);
    writeFileSync(join(directory, 'cells.bin'), new Uint8Array(data.buffer));
    const source = fileURLToPath(new URL('./splineLoop.cpp', import.meta.url));
    const program = join(directory, 'loop');
    execFileSync('g++', ['-O3', '-o', program, source], { stdio: 'pipe' });
    const text = execFileSync(program, [join(directory, 'cells.bin'), String(steps)], { encoding: 'utf8' });
    return Number(text.split(' ')[0]);
  } catch {
    return null; // no compiler here, or one that does not know -O3
  } finally {
    rmSync(directory, { recursive: true, force: true });
  }
}

const millions = (value: number): string => (value / 1e6).toFixed(2);
const rows: string[][] = [];
const cpp = measureCpp();
for (const [name, d, order, coefficients] of CASES) {
  const { best, mean, deviation, checksum } = await measure(d, order, coefficients);
  const ratio = cpp === null || name !== CASES[0][0] ? '' : (cpp / best).toFixed(2);
  rows.push([name, millions(best), `${millions(mean)} ± ${millions(deviation)}`, ratio, checksum.toFixed(6)]);
}
if (cpp !== null) rows.push(['the first of these in C++, g++ -O3', millions(cpp), '', '1', '']);
printTable(
  `Million particle steps per second and core, ${REPEATS} repeats of ${steps} steps`,
  ['case', 'best', 'mean ± deviation', 'C++ ÷ this', 'checksum'],
  rows,
);
