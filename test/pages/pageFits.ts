/** Fit documents with enough shape to make pictures of: made by hand from formulas, no estimator involved. */

import type { ResimulationResult, ResimulationSeries } from '../../src/checks/ResimulationResult.js';
import { type FitDocument, fitSchema } from '../../src/documents/FitDocument.js';
import { type Scenario, scenarioSchema } from '../../src/documents/Scenario.js';
import { studySchema } from '../../src/documents/Study.js';
import type { BasisSpec } from '../../src/fields/Basis.js';
import type { CoefficientField, FieldForm, FieldName, Model } from '../../src/fields/CoefficientField.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

type Place = readonly number[];

interface Grid {
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly splines: readonly number[];
}

/** Places about which the tensor B-splines of the grid are centred, first axis slowest. */
function listCentres(grid: Grid): number[][] {
  let places: number[][] = [[]];
  grid.splines.forEach((count, axis) => {
    const [low, high] = [grid.low[axis], grid.high[axis]];
    const step = (high - low) / (count - 3);
    places = places.flatMap((place) =>
      Array.from({ length: count }, (_, i) => [...place, low + (i - 1) * step]),
    );
  });
  return places;
}

/** A spline field that follows functions of place (a smoothed version of them, as coefficients are their values). */
function splineField(
  name: FieldName,
  form: FieldForm,
  grid: Grid,
  functions: readonly ((place: Place) => number)[],
): CoefficientField {
  const basis: BasisSpec = {
    kind: 'spline',
    counts: [...grid.splines],
    low: [...grid.low],
    high: [...grid.high],
    periods: grid.low.map(() => 0),
  };
  const isPositive = form === 'scalar' || form === 'axes';
  const coefficients = functions.map((evaluate) =>
    listCentres(grid).map((place) => (isPositive ? Math.log(evaluate(place)) : evaluate(place))),
  );
  return { name, form, link: isPositive ? 'log' : 'identity', basis, coefficients };
}

interface Shape {
  readonly model: Model;
  readonly grid: Grid;
  /** Relative density of positions at a place. */
  readonly density: (place: Place) => number;
  readonly cells: readonly number[];
  readonly positions: number;
  readonly tracks: number;
  readonly interval: number;
  readonly units: { length: string | null; time: string | null };
  readonly localizationError: number;
  readonly file: string;
  /** Standard deviation of the numbers of each field where positions are plenty. */
  readonly scatter: readonly number[];
  readonly survey?: Record<string, unknown>;
}

function buildFit(shape: Shape): FitDocument {
  const { model, grid } = shape;
  const d = model.dimensions;
  const cellSize = (axis: number) => (grid.high[axis] - grid.low[axis]) / shape.cells[axis];
  let centres: number[][] = [[]];
  shape.cells.forEach((count, axis) => {
    centres = centres.flatMap((place) =>
      Array.from({ length: count }, (_, i) => [...place, grid.low[axis] + (i + 0.5) * cellSize(axis)]),
    );
  });
  const densities = centres.map((place) => shape.density(place));
  const total = densities.reduce((a, b) => a + b, 0);
  const counts = densities.map((density) => Math.round((density / total) * shape.positions));
  const occupied = counts.filter((count) => count > 0);
  const threshold = Math.max(1, Math.round((0.05 * shape.positions) / occupied.length));

  const fields =
    model.order === 'second' ? [model.force, model.friction, model.noise] : [model.drift, model.diffusion];
  const best = Math.max(...densities);
  const replicates = Array.from({ length: 60 }, (_, index) => {
    const stream = randomStream(3, 'page-fit', index);
    return fields.flatMap((field, number) =>
      field.coefficients.flatMap((row) => {
        const places = row.length > 1 ? listCentres(grid) : [[]];
        return row.map((value, i) => {
          const density = places[i].length > 0 ? shape.density(places[i]) : best;
          const poverty = Math.sqrt(best / Math.max(density, best * 1e-3));
          return value + shape.scatter[number] * Math.min(poverty, 12) * stream.normal();
        });
      }),
    );
  });
  const trackSample = Array.from({ length: 14 }, (_, track) => {
    const stream = randomStream(5, 'page-track', track);
    // A walk that prefers dense places (Metropolis), so that tracks lie in the visited region.
    let place = grid.low.map((low, axis) => low + stream.uniform() * (grid.high[axis] - low));
    for (let i = 0; i < 200 && shape.density(place) < best * 0.3; i++) {
      place = grid.low.map((low, axis) => low + stream.uniform() * (grid.high[axis] - low));
    }
    const points = Array.from({ length: 90 }, (_, row) => {
      const next = place.map(
        (value, axis) => value + 0.035 * (grid.high[axis] - grid.low[axis]) * stream.normal(),
      );
      const inside = next.every((value, axis) => value > grid.low[axis] && value < grid.high[axis]);
      if (inside && stream.uniform() < shape.density(next) / shape.density(place)) place = next;
      return [row * 10 * shape.interval, ...place];
    });
    return { name: `track ${track + 1}`, points };
  });
  const names =
    model.order === 'second' ? ['force', 'friction', 'noise', 'temperature'] : ['drift', 'diffusion'];
  const simultaneous: Record<string, number> = {};
  for (const name of names)
    for (const suffix of ['x', 'y', 'z', 'xx', 'yy', 'zz']) simultaneous[`${name}_${suffix}`] = 3.3;
  return fitSchema.parse({
    format: 'wanderlaw-fit',
    version: 1,
    program: 'wanderlaw 0.1.0',
    created: '2025-01-01T00:00:00.000Z',
    timing: { reading: 0.4, fitting: 2.1 },
    study: studySchema.parse({ order: model.order }),
    sources: [{ path: `data/${shape.file}`, sha256: '3f'.repeat(32) }],
    data: {
      tracks: shape.tracks,
      positions: shape.positions,
      dimensions: d,
      coordinates: ['x', 'y', 'z'].slice(0, d),
      samplingInterval: shape.interval,
      units: shape.units,
      mass: null,
    },
    model,
    localizationError: Array.from({ length: d }, () => ({
      value: shape.localizationError,
      low: shape.localizationError * 0.93,
      high: shape.localizationError * 1.07,
    })),
    uncertainty: {
      method: `one-step bootstrap over ${shape.tracks} tracks`,
      blocks: shape.tracks,
      confidence: 0.95,
      multiplier: 2,
      simultaneous,
      replicates,
    },
    visited: { low: [...grid.low], high: [...grid.high], cells: [...shape.cells], counts, threshold },
    trackSample,
    survey: {
      missingFrames: 37,
      recommendedOrder: model.order,
      relaxationTime: model.order === 'second' ? 6 * shape.interval : null,
      ...shape.survey,
    },
    diagnostics: { splinesPerAxis: [...grid.splines], penalty: 0.013 },
    warnings: [],
  });
}

const bump = (distance: number, width: number) => Math.exp(-((distance / width) ** 2) / 2);

/** One dimension, first order, SI units: beads above a floor. */
export function beadFit(): FitDocument {
  const grid: Grid = { low: [0.6e-6], high: [8e-6], splines: [12] };
  const hindered = ([z]: Place) => 4.3e-13 * (1 - (9 / 16) * (0.5e-6 / Math.max(z, 0.55e-6)));
  return buildFit({
    model: {
      order: 'first',
      reading: 'ito',
      dimensions: 1,
      periods: [0],
      drift: splineField('drift', 'vector', grid, [
        ([z]) => 2.1e-7 * (Math.exp(-(z - 0.6e-6) / 0.7e-6) - 0.35),
      ]),
      diffusion: splineField('diffusion', 'scalar', grid, [hindered]),
    },
    grid,
    density: ([z]) => Math.exp(-Math.max(0, z - 0.4e-6) / 1.6e-6) * (z < 0.5e-6 ? 0.1 : 1),
    cells: [64],
    positions: 60_000,
    tracks: 60,
    interval: 0.02,
    units: { length: 'm', time: 's' },
    localizationError: 2.4e-8,
    file: 'settling-beads.csv',
    scatter: [1.2e-8, 0.03],
  });
}

const ring = ([x, y]: Place) =>
  bump(Math.hypot(x / 1.25, y / 0.85) - 0.62, 0.19) + 0.25 * bump(Math.hypot(x, y), 0.5);

/** Two dimensions, second order: a bowl with a strip of felt, stirred air and uneven jets, visited as a ring. */
export function tableFit(): FitDocument {
  const grid: Grid = { low: [-1.25, -0.85], high: [1.25, 0.85], splines: [10, 8] };
  return buildFit({
    model: {
      order: 'second',
      dimensions: 2,
      periods: [0, 0],
      force: splineField('force', 'vector', grid, [
        ([x, y]) => -0.9 * x - 0.7 * y,
        ([x, y]) => -0.9 * y + 0.7 * x,
      ]),
      friction: splineField('friction', 'scalar', grid, [([x]) => 0.4 + 0.9 * bump(x - 0.35, 0.22)]),
      noise: splineField('noise', 'scalar', grid, [([x, y]) => 0.22 * (1.2 + 0.8 * Math.tanh(x + y))]),
    },
    grid,
    density: ring,
    cells: [24, 24],
    positions: 80_000,
    tracks: 40,
    interval: 0.05,
    units: { length: 'm', time: 's' },
    localizationError: 0.0021,
    file: 'felt-table.csv',
    scatter: [0.03, 0.05, 0.03],
  });
}

/** Three dimensions, second order, noise per axis, micrometres and hours. */
export function gelFit(): FitDocument {
  const grid: Grid = { low: [-30, -20, 0], high: [30, 20, 25], splines: [6, 6, 5] };
  return buildFit({
    model: {
      order: 'second',
      dimensions: 3,
      periods: [0, 0, 0],
      force: splineField('force', 'vector', grid, [
        ([x]) => -1.1 * x,
        ([, y]) => -0.9 * y,
        ([, , z]) => -1.5 * (z - 11),
      ]),
      friction: splineField('friction', 'scalar', grid, [([, , z]) => 1.4 + 2.6 * Math.exp(-z / 6)]),
      noise: splineField('noise', 'axes', grid, [() => 900, () => 700, ([, , z]) => 400 + 20 * z]),
    },
    grid,
    density: ([x, y, z]) => bump(x, 9) * bump(y, 7) * bump(z - 11, 5),
    cells: [12, 12, 12],
    positions: 120_000,
    tracks: 300,
    interval: 0.05,
    units: { length: 'µm', time: 'h' },
    localizationError: 0.31,
    file: 'cells-in-gel.csv',
    scatter: [2, 0.06, 0.05],
    survey: {
      warnings: [
        { code: 'few-visits', message: 'the outer cells hold few positions; expect wide intervals there' },
        {
          code: 'common-drift',
          message: 'all tracks drift together by 0.12 µm/h along y; is the stage moving?',
        },
      ],
    },
  });
}

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
    warnings: [
      {
        code: 'confining-force',
        message: 'The force confines in every direction, so positions settle to a steady law.',
      },
    ],
  });
}
