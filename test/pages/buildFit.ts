/** Fit documents out of formulas: made by hand with enough shape to make pictures of, no estimator involved. */

import { type FitDocument, fitSchema } from '../../src/documents/FitDocument.js';
import { studySchema } from '../../src/documents/Study.js';
import type { BasisSpec } from '../../src/fields/Basis.js';
import type { CoefficientField, FieldForm, FieldName, Model } from '../../src/fields/CoefficientField.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

export type Place = readonly number[];

export interface Grid {
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly splines: readonly number[];
  /** Period of each axis, 0 = open; all open where left out. */
  readonly periods?: readonly number[];
}

/** Places about which the tensor B-splines of the grid are centred, first axis slowest. */
function listCentres(grid: Grid): number[][] {
  let places: number[][] = [[]];
  grid.splines.forEach((count, axis) => {
    const [low, high] = [grid.low[axis], grid.high[axis]];
    const isPeriodic = (grid.periods?.[axis] ?? 0) > 0;
    const step = (high - low) / (isPeriodic ? count : count - 3);
    places = places.flatMap((place) =>
      Array.from({ length: count }, (_, i) => [...place, low + (i - 1) * step]),
    );
  });
  return places;
}

/** A spline field that follows functions of place (a smoothed version of them, as coefficients are their values). */
export function splineField(
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
    periods: [...(grid.periods ?? grid.low.map(() => 0))],
  };
  const isPositive = form === 'scalar' || form === 'axes';
  const coefficients = functions.map((evaluate) =>
    listCentres(grid).map((place) => (isPositive ? Math.log(evaluate(place)) : evaluate(place))),
  );
  return { name, form, link: isPositive ? 'log' : 'identity', basis, coefficients };
}

export interface FitShape {
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

/** What a survey would say, with displacements that are correlated as a model of the order makes them. */
function describeSurvey({ model, interval, positions, tracks, localizationError }: FitShape) {
  const isSecond = model.order === 'second';
  const memory = 6 * interval;
  // R₀ of the motion is 1; localization error adds 2 s² at lag 0 and takes s² away at lag 1
  const error = 0.12;
  const covariances = Array.from({ length: 25 }, (_, lag) => {
    const motion = lag === 0 ? 1 : isSecond ? 0.92 * Math.exp(-(lag * interval) / memory) : 0;
    return motion + (lag === 0 ? 2 * error : lag === 1 ? -error : 0);
  });
  return {
    tracks,
    positions,
    dimensions: model.dimensions,
    interval,
    missingFrames: 37,
    duration: (positions / tracks) * interval,
    recommendedOrder: model.order,
    relaxationTime: isSecond ? memory : null,
    relaxationTimeInterval: isSecond ? { low: 0.93 * memory, high: 1.08 * memory, level: 0.95 } : null,
    frictionTimesInterval: isSecond ? 1 / 6 : null,
    localizationError: Array.from({ length: model.dimensions }, () => localizationError),
    expectedPrecision: isSecond ? { friction: 0.017, noise: 0.009 } : null,
    displacementCovariances: Array.from({ length: model.dimensions }, (_, axis) =>
      covariances.map((value, lag) => value * (lag > 1 ? 1 - 0.1 * axis : 1)),
    ),
  };
}

export function buildFit(shape: FitShape): FitDocument {
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
      const inside = next.every(
        (value, axis) =>
          (grid.periods?.[axis] ?? 0) > 0 || (value > grid.low[axis] && value < grid.high[axis]),
      );
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
    survey: { ...describeSurvey(shape), ...shape.survey } as FitDocument['survey'],
    diagnostics: { splinesPerAxis: [...grid.splines], penalty: 0.013 },
    warnings: [],
  });
}
