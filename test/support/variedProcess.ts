/**
 * Test processes with coefficients that vary over space: simulated in small steps by a splitting whose friction–noise
 * part is exact, and observed with localization error. Independent of the code under test.
 *
 * Source  Bussi & Parrinello, Phys. Rev. E 75 (2007) 056707 (splitting with an exact friction–noise step).
 */

import { randomStream } from '../../src/numerics/random/RandomStream.js';
import { COORDINATE_NAMES, type TrackSet } from '../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../src/units.js';

export interface VariedProcess {
  readonly dimensions: number;
  readonly tracks: number;
  readonly frames: number;
  readonly interval: number;
  readonly substeps: number;
  /** Period of each axis, 0 where open; default all open. */
  readonly periods?: readonly number[];
  /** Force (second order) or Itô drift (first order) at a place. */
  readonly force: (place: Float64Array, out: Float64Array) => void;
  /** Friction per axis; absent at first order. */
  readonly friction?: (place: Float64Array, out: Float64Array) => void;
  /** Noise N per axis (second order) or diffusion D per axis (first order). */
  readonly noise: (place: Float64Array, out: Float64Array) => void;
  readonly localizationError: number;
  readonly lostFrames?: number;
  /** Standard deviation of the starting places. */
  readonly startSpread: number;
  /** Time simulated before recording begins. */
  readonly warmUp: number;
  readonly seed: number;
}

/** Recorded tracks of the process. */
export function simulateVaried(process: VariedProcess): TrackSet {
  const { dimensions: d, tracks, frames, interval, substeps, seed, friction } = process;
  const dt = interval / substeps;
  const place = new Float64Array(d);
  const velocity = new Float64Array(d);
  const force = new Float64Array(d);
  const rate = new Float64Array(d);
  const noise = new Float64Array(d);
  const times: number[] = [];
  const positions: number[] = [];
  const trackOffsets = new Int32Array(tracks + 1);
  for (let track = 0; track < tracks; track++) {
    const stream = randomStream(seed, 'varied process', track);
    const observe = randomStream(seed, 'varied process: observation', track);
    for (let axis = 0; axis < d; axis++) {
      place[axis] = process.startSpread * stream.normal();
      velocity[axis] = 0;
    }
    const step = (): void => {
      if (!friction) {
        process.force(place, force);
        process.noise(place, noise);
        for (let axis = 0; axis < d; axis++) {
          place[axis] += force[axis] * dt + Math.sqrt(2 * noise[axis] * dt) * stream.normal();
        }
        return;
      }
      for (let axis = 0; axis < d; axis++) place[axis] += (velocity[axis] * dt) / 2;
      process.force(place, force);
      friction(place, rate);
      process.noise(place, noise);
      for (let axis = 0; axis < d; axis++) {
        const decay = Math.exp(-rate[axis] * dt);
        const spread = Math.sqrt((noise[axis] / (2 * rate[axis])) * (1 - decay * decay));
        velocity[axis] += (force[axis] * dt) / 2;
        velocity[axis] = decay * velocity[axis] + spread * stream.normal();
        velocity[axis] += (force[axis] * dt) / 2;
        place[axis] += (velocity[axis] * dt) / 2;
      }
    };
    for (let i = 0; i < process.warmUp / dt; i++) step();
    for (let frame = 0; frame < frames; frame++) {
      if (frame > 0) for (let i = 0; i < substeps; i++) step();
      const lost = frame > 0 && observe.uniform() < (process.lostFrames ?? 0);
      if (!lost) times.push(frame * interval);
      for (let axis = 0; axis < d; axis++) {
        const seen = place[axis] + process.localizationError * observe.normal();
        if (!lost) positions.push(seen);
      }
    }
    trackOffsets[track + 1] = times.length;
  }
  return {
    dimensions: d,
    coordinates: COORDINATE_NAMES.slice(0, d),
    trackNames: Array.from({ length: tracks }, (_, track) => String(track + 1)),
    trackOffsets,
    times: Float64Array.from(times),
    positions: Float64Array.from(positions),
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: interval,
    periods: process.periods ?? new Array<number>(d).fill(0),
    units: NO_UNITS,
  };
}
