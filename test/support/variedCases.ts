/**
 * Motions with position-dependent coefficients of known course, for studies and tests of every estimator. Lengths are
 * in units where the thermal speed is about one per unit of time; one frame per unit of time.
 */

import type { StudyInput } from '../../src/documents/Study.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { simulateVaried, type VariedProcess } from './variedProcess.js';

type Write = (place: Float64Array, out: Float64Array) => void;

export interface VariedCase {
  readonly title: string;
  readonly order: 'first' | 'second';
  readonly dimensions: number;
  readonly study: StudyInput;
  readonly force: Write;
  readonly friction?: Write;
  readonly noise: Write;
  /** Friction × interval in the middle of its range, for the length of blocks. */
  readonly relaxationTime: number | null;
  readonly process: Omit<VariedProcess, 'seed' | 'force' | 'friction' | 'noise' | 'dimensions'>;
}

const WIDTH = 5; // of the bump, in displacements per frame: about ten frames to cross it both ways

const DESIGN = {
  tracks: 60,
  frames: 1000,
  interval: 1,
  substeps: 16,
  localizationError: 0.2,
  startSpread: WIDTH,
};

/** Friction doubled over a bump, noise rising through it, in a bowl; `friction` × interval outside the bump. */
export function bumpCase(friction: number): VariedCase {
  return {
    title: `bump, ΓΔ ${friction}–${2 * friction}`,
    order: 'second',
    dimensions: 1,
    study: {},
    force: ([x], out) => void (out[0] = (-0.6 * x) / WIDTH ** 2),
    friction: ([x], out) => void (out[0] = friction * (1 + Math.exp(-0.5 * (x / (WIDTH / 2)) ** 2))),
    noise: ([x], out) => void (out[0] = 2 * friction * (1.2 + 0.4 * Math.tanh(x / WIDTH))),
    relaxationTime: 1 / (1.5 * friction),
    process: { ...DESIGN, warmUp: 12 / friction },
  };
}

/** Two dimensions: a bowl that stirs, a friction bump, and a temperature gradient. */
export function stirCase(lostFrames: number): VariedCase {
  const friction = 0.15;
  return {
    title: `stirring and temperature gradient${lostFrames > 0 ? `, ${100 * lostFrames} % of frames missing` : ''}`,
    order: 'second',
    dimensions: 2,
    study: {},
    force: ([x, y], out) => {
      out[0] = (-x - 0.5 * y) / WIDTH ** 2;
      out[1] = (-y + 0.5 * x) / WIDTH ** 2;
    },
    friction: ([x, y], out) =>
      void out.fill(friction * (1 + Math.exp(-0.5 * ((x * x + y * y) / (WIDTH / 2) ** 2)))),
    noise: ([x], out) => void out.fill(2 * friction * (1.3 + 0.5 * Math.tanh(x / WIDTH))),
    relaxationTime: 1 / (1.5 * friction),
    process: { ...DESIGN, warmUp: 12 / friction, lostFrames },
  };
}

/** Two dimensions, periodic along x: a tilted washboard with friction and noise that follow it. */
export function periodicCase(): VariedCase {
  const friction = 0.15;
  const turn = (2 * Math.PI) / (4 * WIDTH);
  return {
    title: 'periodic box',
    order: 'second',
    dimensions: 2,
    study: {},
    force: ([x, y], out) => {
      out[0] = 0.05 + 0.05 * Math.sin(turn * x);
      out[1] = -y / WIDTH ** 2;
    },
    friction: ([x], out) => void out.fill(friction * (1.5 + 0.7 * Math.cos(turn * x))),
    noise: ([x], out) => void out.fill(2 * friction * (1.3 + 0.5 * Math.sin(turn * x))),
    relaxationTime: 1 / (1.5 * friction),
    process: { ...DESIGN, warmUp: 12 / friction, periods: [4 * WIDTH, 0] },
  };
}

/** Three dimensions, friction of its own along each axis. */
export function axesCase(): VariedCase {
  const friction = 0.15;
  return {
    title: 'three dimensions, friction per axis',
    order: 'second',
    dimensions: 3,
    study: { frictionForm: 'axes' },
    force: (place, out) => {
      for (let axis = 0; axis < 3; axis++) out[axis] = -place[axis] / WIDTH ** 2;
    },
    friction: ([, , z], out) => {
      const common = friction * (1 + 0.6 * Math.tanh(z / WIDTH));
      out[0] = common;
      out[1] = common;
      out[2] = 1.5 * common;
    },
    noise: ([x], out) => void out.fill(2 * friction * (1.2 + 0.3 * Math.tanh(x / WIDTH))),
    relaxationTime: 1 / (1.5 * friction),
    process: { ...DESIGN, warmUp: 12 / friction },
  };
}

/** First order in one dimension: diffusion rising across a bowl of drift. */
export function diffusionCase(localizationError: number): VariedCase {
  return {
    title: `diffusion rising, localization error ${localizationError}`,
    order: 'first',
    dimensions: 1,
    study: {},
    force: ([x], out) => void (out[0] = -0.05 * x),
    noise: ([x], out) => void (out[0] = 0.5 * (1.2 + 0.6 * Math.tanh((1.5 * x) / WIDTH))),
    relaxationTime: null,
    process: { ...DESIGN, frames: 500, substeps: 30, startSpread: WIDTH / 2, warmUp: 20, localizationError },
  };
}

/** Recorded tracks of a case. */
export function simulateCase(given: VariedCase, seed: number): TrackSet {
  const { process, dimensions, force, friction, noise } = given;
  return simulateVaried({ ...process, dimensions, force, friction, noise, seed });
}

/** The true value of a column of the fit at a place. */
export function truthOf(given: VariedCase, column: string, place: Float64Array): number {
  const d = given.dimensions;
  const [force, friction, noise] = [new Float64Array(d), new Float64Array(d), new Float64Array(d)];
  given.force(place, force);
  given.friction?.(place, friction);
  given.noise(place, noise);
  const axis = 'xyz'.indexOf(column[column.length - 1]);
  if (column.startsWith('force') || column.startsWith('drift')) return force[axis];
  if (column.startsWith('friction')) return friction[axis];
  if (column.startsWith('noise') || column.startsWith('diffusion')) return noise[axis];
  return noise[axis] / (2 * friction[axis]);
}
