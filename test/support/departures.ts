/**
 * Processes outside the model class, for challenges: memory in the friction, friction that grows with speed, noise in
 * kicks, coefficients that drift over the recording, a shaking stage, wrong links. One dimension, small steps.
 */

import { type RandomStream, randomStream } from '../../src/numerics/random/RandomStream.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../src/units.js';

export interface Departure {
  readonly tracks: number;
  readonly frames: number;
  readonly interval: number;
  readonly substeps: number;
  readonly localizationError: number;
  readonly seed: number;
}

/** Moves position, velocity and whatever else the state holds on by dt, at time t. */
type Step = (state: Float64Array, t: number, dt: number, stream: RandomStream) => void;

function simulate(design: Departure, size: number, warmUp: number, step: Step): TrackSet {
  const { tracks, frames, interval, substeps, localizationError, seed } = design;
  const dt = interval / substeps;
  const positions = new Float64Array(tracks * frames);
  const times = new Float64Array(tracks * frames);
  const state = new Float64Array(size);
  for (let track = 0; track < tracks; track++) {
    const stream = randomStream(seed, 'departure', track);
    const observe = randomStream(seed, 'departure: observation', track);
    state.fill(0);
    for (let i = 0; i < warmUp / dt; i++) step(state, 0, dt, stream);
    for (let frame = 0; frame < frames; frame++) {
      for (let i = 0; frame > 0 && i < substeps; i++)
        step(state, (frame - 1) * interval + i * dt, dt, stream);
      const row = track * frames + frame;
      times[row] = frame * interval;
      positions[row] = state[0] + localizationError * observe.normal();
    }
  }
  return {
    dimensions: 1,
    coordinates: ['x'],
    trackNames: Array.from({ length: tracks }, (_, track) => String(track + 1)),
    trackOffsets: Int32Array.from({ length: tracks + 1 }, (_, track) => track * frames),
    times,
    positions,
    localizationErrors: null,
    trackTypes: null,
    samplingInterval: interval,
    periods: [0],
    units: NO_UNITS,
  };
}

const STIFFNESS = 0.2; // of the trap, in units of 1/time² with friction 1

/**
 * Friction with an exponential memory: dv = (u − k q) dt, du = −(u + Γ v)/τ dt + √(2ΓT)/τ dW with Γ = T = 1, which is the
 * kernel (Γ/τ) exp(−t/τ) with the noise that belongs to it (Mori, Prog. Theor. Phys. 33 (1965) 423).
 *
 * @param memory  τ, relaxation times
 */
export function simulateMemory(design: Departure, memory: number): TrackSet {
  return simulate(design, 3, 20, (state, _t, dt, stream) => {
    state[0] += (state[1] * dt) / 2;
    state[1] += ((state[2] - STIFFNESS * state[0]) * dt) / 2;
    const decay = Math.exp(-dt / memory);
    state[2] =
      decay * state[2] - (1 - decay) * state[1] + Math.sqrt((1 - decay * decay) / memory) * stream.normal();
    state[1] += ((state[2] - STIFFNESS * state[0]) * dt) / 2;
    state[0] += (state[1] * dt) / 2;
  });
}

/** Friction `base + slope |v|`, noise 1. */
export function simulateSpeedDependence(design: Departure, base: number, slope: number): TrackSet {
  return simulate(design, 2, 20, (state, _t, dt, stream) => {
    state[0] += (state[1] * dt) / 2;
    const friction = base + slope * Math.abs(state[1]);
    state[1] += (-friction * state[1] - STIFFNESS * state[0]) * dt + Math.sqrt(dt) * stream.normal();
    state[0] += (state[1] * dt) / 2;
  });
}

/** Friction 1 and kicks at random times (`rate` per time) of standard deviation √(2/rate) instead of white noise. */
export function simulateKicks(design: Departure, rate: number): TrackSet {
  return simulate(design, 2, 20, (state, _t, dt, stream) => {
    state[0] += (state[1] * dt) / 2;
    state[1] += (-state[1] - STIFFNESS * state[0]) * dt;
    if (stream.uniform() < rate * dt) state[1] += Math.sqrt(2 / rate) * stream.normal();
    state[0] += (state[1] * dt) / 2;
  });
}

/** Friction 1 and noise that changes from 2 (1 − change/2) to 2 (1 + change/2) over the recording. */
export function simulateDrift(design: Departure, change: number): TrackSet {
  const duration = design.frames * design.interval;
  return simulate(design, 2, 20, (state, t, dt, stream) => {
    state[0] += (state[1] * dt) / 2;
    const noise = 2 * (1 + change * (t / duration - 0.5));
    state[1] += (-state[1] - STIFFNESS * state[0]) * dt + Math.sqrt(noise * dt) * stream.normal();
    state[0] += (state[1] * dt) / 2;
  });
}

/** The same stage under all tracks takes a random step of the given size from frame to frame. */
export function shakeStage(tracks: TrackSet, size: number, seed: number): TrackSet {
  const stream = randomStream(seed, 'stage');
  const offsets = new Map<number, number>();
  const frames = Math.max(...Array.from(tracks.times, (time) => Math.round(time / tracks.samplingInterval)));
  for (let frame = 0, at = 0; frame <= frames; frame++) {
    at += size * stream.normal();
    offsets.set(frame, at);
  }
  const positions = tracks.positions.map(
    (value, row) => value + (offsets.get(Math.round(tracks.times[row] / tracks.samplingInterval)) ?? 0),
  );
  return { ...tracks, positions };
}

/** Track number `track` jumps by `size` halfway, as if it went on as another particle. */
export function mislinkTrack(tracks: TrackSet, track: number, size: number): TrackSet {
  const start = tracks.trackOffsets[track];
  const end = tracks.trackOffsets[track + 1];
  const positions = tracks.positions.slice();
  for (let row = Math.floor((start + end) / 2); row < end; row++) positions[row] += size;
  return { ...tracks, positions };
}
