/**
 * One track as a recording would hold it: the process integrated from frame to frame, averaged over the exposure,
 * with localization error added.
 */

import { NumericalError } from '../errors.js';
import type { RandomStream } from '../numerics/random/RandomStream.js';
import type { Integrator } from './Integrator.js';
import { createVelocityDraw } from './startDraw.js';

/** What the recording does to the process. */
export interface Recording {
  /** Largest time step. */
  readonly step: number;
  /** Time the process runs before the first frame (before its exposure window). Default 0. */
  readonly warmUp?: number;
  /** Length of the window a position is averaged over, time; it ends at the frame's time. 0: none. */
  readonly exposure: number;
  /** Standard deviation of the localization error per axis, length d. */
  readonly localizationError: ArrayLike<number>;
  /** Shape (n, d); replaces it by one standard deviation per row and axis, where the table gave them. */
  readonly localizationErrors?: Float64Array | null;
}

const EXPOSURE_STEPS = 4; // least steps per exposure window; the trapezoid's error is a hundredth of the blur

/** Records one track; scratch space is shared between calls, so keep one per thread of control. */
export type TrackSimulator = (
  times: Float64Array,
  first: number,
  last: number,
  start: ArrayLike<number>,
  velocity: ArrayLike<number> | null,
  out: Float64Array,
  stream: RandomStream,
) => void;

/**
 * Prepares the recording of tracks. The simulator writes rows `first` (included) to `last` (excluded) of `out`
 * (shape (n, d)) at the times of the same rows. The process starts at `start` one exposure window and the
 * warm-up before the first frame's time; a null velocity is drawn from the kinetic temperature there.
 *
 * With an exposure the recorded position is the mean of the path over the window that ends at the frame's time
 * (trapezoid rule over the steps).
 *
 * @throws NumericalError  where a position stops being finite
 */
export function createTrackSimulator(integrator: Integrator, recording: Recording): TrackSimulator {
  const { evaluator } = integrator;
  const d = evaluator.dimensions;
  const { step, warmUp = 0, exposure, localizationError, localizationErrors = null } = recording;
  const q = new Float64Array(d);
  const v = new Float64Array(d);
  const before = new Float64Array(d);
  const mean = new Float64Array(d);
  const drawVelocity = createVelocityDraw(evaluator);

  /** Moves on by `duration`, leaving in `mean` the average over its last `window`. */
  const advanceAveraging = (duration: number, window: number, stream: RandomStream): void => {
    mean.fill(0);
    const plain = Math.max(0, duration - window);
    if (plain > 0) {
      const steps = countSteps(plain, step);
      integrator.advance(q, v, steps, plain / steps, stream);
    }
    const steps = Math.max(EXPOSURE_STEPS, countSteps(window, step));
    for (let i = 0; i < steps; i++) {
      before.set(q);
      integrator.advance(q, v, 1, window / steps, stream);
      for (let axis = 0; axis < d; axis++) mean[axis] += (0.5 * (before[axis] + q[axis])) / steps;
    }
  };

  return (times, first, last, start, velocity, out, stream) => {
    for (let axis = 0; axis < d; axis++) q[axis] = start[axis];
    if (evaluator.order === 'second') {
      if (velocity === null) drawVelocity(q, v, stream);
      else for (let axis = 0; axis < d; axis++) v[axis] = velocity[axis];
    }
    if (warmUp > 0) {
      const steps = countSteps(warmUp, step);
      integrator.advance(q, v, steps, warmUp / steps, stream);
    }
    for (let row = first; row < last; row++) {
      if (exposure > 0) {
        const duration = row === first ? exposure : times[row] - times[row - 1];
        advanceAveraging(duration, Math.min(exposure, duration), stream);
      } else if (row > first) {
        const duration = times[row] - times[row - 1];
        const steps = countSteps(duration, step);
        integrator.advance(q, v, steps, duration / steps, stream);
      }
      for (let axis = 0; axis < d; axis++) {
        const centre = exposure > 0 ? mean[axis] : q[axis];
        const error =
          localizationErrors === null ? localizationError[axis] : localizationErrors[row * d + axis];
        const seen = error > 0 ? centre + error * stream.normal() : centre;
        if (!Number.isFinite(seen)) throw escapeError(times[row] - times[first], step);
        out[row * d + axis] = seen;
      }
    }
  };
}

function countSteps(duration: number, step: number): number {
  return Math.max(1, Math.ceil(duration / step - 1e-9));
}

function escapeError(time: number, step: number): NumericalError {
  return new NumericalError(
    `a simulated position stopped being finite after time ${Number(time.toPrecision(4))} with step ${Number(step.toPrecision(4))}; use a smaller step, or a force that keeps the particles together`,
    { time, step },
  );
}
