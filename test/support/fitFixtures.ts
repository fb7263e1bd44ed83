/**
 * Fit documents made by hand, for tests that need a finished fit without running an estimator.
 */

import { type FitDocument, fitSchema } from '../../src/documents/FitDocument.js';
import { studySchema } from '../../src/documents/Study.js';
import type { BasisSpec } from '../../src/fields/Basis.js';
import type { CoefficientField, FieldForm, FieldName, Model } from '../../src/fields/CoefficientField.js';
import { createBasis } from '../../src/fields/createBasis.js';
import { randomStream } from '../../src/numerics/random/RandomStream.js';

export interface ExampleFitOptions {
  readonly order?: 'first' | 'second';
  readonly dimensions?: 1 | 2 | 3;
  /** Replaces the default model (a trap with constant friction and noise) altogether. */
  readonly model?: Model;
  /** Trap: force −stiffness·x per axis (drift at first order), periodic axes excepted. */
  readonly stiffness?: number;
  readonly friction?: number;
  /** Noise at second order, diffusion at first. */
  readonly noise?: number;
  /** Relative standard deviation of the coefficient draws. */
  readonly scatter?: number;
  readonly replicates?: number;
  readonly interval?: number;
  readonly localizationError?: number;
  readonly periods?: readonly number[];
  /** The visited region is the box from −reach to reach along open axes. */
  readonly reach?: number;
  readonly tracks?: number;
  readonly positions?: number;
  readonly seed?: number;
}

const NAMES = ['x', 'y', 'z'];

/** A field with constant components. */
export function constantField(name: FieldName, form: FieldForm, values: readonly number[]): CoefficientField {
  return { name, form, link: 'identity', basis: { kind: 'constant' }, coefficients: values.map((v) => [v]) };
}

/** The force (or drift) −stiffness·x on open axes, zero on periodic ones. */
export function trapField(
  name: 'force' | 'drift',
  stiffness: number,
  periods: readonly number[],
): CoefficientField {
  const d = periods.length;
  if (periods.every((period) => period > 0) || stiffness === 0) {
    return constantField(name, 'vector', new Array<number>(d).fill(0));
  }
  const basis: BasisSpec = {
    kind: 'polynomial',
    degree: 1,
    centre: new Array<number>(d).fill(0),
    scale: new Array<number>(d).fill(1),
  };
  const functions = createBasis(basis, d);
  const indices = new Int32Array(functions.support);
  const slopes = new Float64Array(functions.support);
  const coefficients = periods.map((period, axis) => {
    const row = new Array<number>(functions.functionCount).fill(0);
    const count = functions.differentiateInto(new Array<number>(d).fill(0), 0, axis, indices, slopes);
    for (let i = 0; i < count; i++)
      if (slopes[i] !== 0 && period === 0) row[indices[i]] = -stiffness / slopes[i];
    return row;
  });
  return { name, form: 'vector', link: 'identity', basis, coefficients };
}

/** A fit document that passes `fitSchema`. */
export function exampleFit(options: ExampleFitOptions = {}): FitDocument {
  const order = options.model?.order ?? options.order ?? 'second';
  const dimensions = options.model?.dimensions ?? options.dimensions ?? 2;
  const periods = options.model?.periods ?? options.periods ?? new Array<number>(dimensions).fill(0);
  const { stiffness = 1, friction = 1, noise = 2, scatter = 0.02, replicates = 40 } = options;
  const {
    interval = 0.1,
    localizationError = 0,
    reach = 3,
    tracks = 10,
    positions = 1000,
    seed = 1,
  } = options;
  const model: Model =
    options.model ??
    (order === 'second'
      ? {
          order,
          dimensions,
          periods,
          force: trapField('force', stiffness, periods),
          friction: constantField('friction', 'scalar', [friction]),
          noise: constantField('noise', 'scalar', [noise]),
        }
      : {
          order: 'first',
          reading: 'ito',
          dimensions,
          periods,
          drift: trapField('drift', stiffness, periods),
          diffusion: constantField('diffusion', 'scalar', [noise]),
        });
  const fields =
    model.order === 'second' ? [model.force, model.friction, model.noise] : [model.drift, model.diffusion];
  const vector = fields.flatMap((field) => field.coefficients.flat());
  const draws = Array.from({ length: replicates }, (_, index) => {
    const stream = randomStream(seed, 'example-fit', index);
    return vector.map((value) => value * (1 + scatter * stream.normal()));
  });
  const cells = new Array<number>(dimensions).fill(6);
  const cellCount = 6 ** dimensions;
  const sample = randomStream(seed, 'example-sample');
  return fitSchema.parse({
    format: 'wanderlaw-fit',
    version: 1,
    program: 'wanderlaw 0.1.0',
    created: '2025-01-01T00:00:00.000Z',
    timing: {},
    study: studySchema.parse({ order, seed, replicates: Math.max(20, replicates) }),
    sources: [{ path: 'example.csv', sha256: '0'.repeat(64) }],
    data: {
      tracks,
      positions,
      dimensions,
      coordinates: NAMES.slice(0, dimensions),
      samplingInterval: interval,
      units: { length: null, time: null },
      mass: null,
    },
    model,
    localizationError: Array.from({ length: dimensions }, () => ({
      value: localizationError,
      low: localizationError * 0.9,
      high: localizationError * 1.1,
    })),
    uncertainty: {
      method: 'made by hand',
      blocks: tracks,
      confidence: 0.95,
      multiplier: 1.96,
      simultaneous: {},
      replicates: draws,
    },
    visited: {
      low: periods.map((period) => (period > 0 ? 0 : -reach)),
      high: periods.map((period) => (period > 0 ? period : reach)),
      cells,
      counts: new Array<number>(cellCount).fill(Math.ceil(positions / cellCount)),
      threshold: 5,
    },
    trackSample: Array.from({ length: 5 }, (_, track) => ({
      name: String(track + 1),
      points: Array.from({ length: 20 }, (_, row) => [
        row * interval,
        ...periods.map((period) => (period > 0 ? period * sample.uniform() : (reach / 3) * sample.normal())),
      ]),
    })),
    survey: { missingFrames: 0 },
    diagnostics: {},
    warnings: [],
  });
}
