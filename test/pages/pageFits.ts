/** Fits for the tests of pages: one for each number of dimensions and order that pages draw differently. */

import type { FitDocument } from '../../src/documents/FitDocument.js';
import { buildFit, type Grid, type Place, splineField } from './buildFit.js';

export const bump = (distance: number, width: number) => Math.exp(-((distance / width) ** 2) / 2);

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

/** Two dimensions, second order, periodic across stripes that are slow and sticky: micrometres and hours. */
export function stripeFit(): FitDocument {
  const grid: Grid = { low: [-120, 0], high: [120, 40], splines: [7, 12], periods: [0, 40] };
  const across = ([, y]: Place) => Math.cos((2 * Math.PI * (y - 20)) / 40);
  return buildFit({
    model: {
      order: 'second',
      dimensions: 2,
      periods: [0, 40],
      force: splineField('force', 'vector', grid, [
        () => 0,
        ([, y]) => -260 * Math.sin((2 * Math.PI * (y - 20)) / 40),
      ]),
      friction: splineField('friction', 'scalar', grid, [(place) => 3 * Math.exp(0.6 * across(place))]),
      noise: splineField('noise', 'axes', grid, [
        () => 5200,
        (place) => 5200 * Math.exp(-0.5 * across(place)),
      ]),
    },
    grid,
    density: (place) => bump(place[0], 48) * Math.exp(0.9 * across(place)),
    cells: [24, 24],
    positions: 24_000,
    tracks: 120,
    interval: 0.1,
    units: { length: 'µm', time: 'h' },
    localizationError: 0.5,
    file: 'stripe-cells.csv',
    scatter: [22, 0.08, 0.06],
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
