/**
 * A fitted model simulated at the design of the recording: the same starts, frames and gaps, localization error and
 * exposure.
 */

import type { FitOfAnyOrigin } from '../documents/FitDocument.js';
import type { Scenario } from '../documents/Scenario.js';
import { randomStream } from '../numerics/random/RandomStream.js';
import { buildScenario } from '../simulation/buildScenario.js';
import { createIntegrator } from '../simulation/createIntegrator.js';
import { createBasisEvaluator, type ScenarioEvaluator } from '../simulation/ScenarioEvaluator.js';
import { createTrackSimulator } from '../simulation/simulateTrack.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';

/** Everything a worker needs to simulate the recording again. */
export interface Design {
  readonly scenario: Scenario;
  readonly tracks: TrackSet;
  /** Standard deviation of the localization error per axis and the standard error of that number. */
  readonly localizationError: readonly { readonly value: number; readonly standardError: number }[];
  readonly step: number;
}

/** The design of a recording under a fitted model. */
export function createDesign(fit: FitOfAnyOrigin, tracks: TrackSet): Design {
  const scenario = { ...buildScenario(fit), ensemble: null }; // replicates are handed their draws one by one
  return {
    scenario,
    tracks,
    localizationError: fit.localizationError.map(({ value, high }) => ({
      value: Math.max(0, value),
      // The lower end may have been cut off at zero; the upper end never is.
      standardError: Math.max(0, (high - value) / fit.uncertainty.multiplier),
    })),
    step: scenario.integration.step ?? scenario.observation.interval,
  };
}

/**
 * Simulates the whole recording once.
 *
 * Tracks start at their first recorded position. At second order the velocity there is drawn given the first recorded
 * displacement: with u = Δq/Δ, c = (1 − e)/(ΓΔ), e = exp(−ΓΔ) and T = N/(2Γ) at the start,
 *
 *   Var u = 2T (ΓΔ − 1 + e)/(ΓΔ)² + 2s²/Δ² ,   v | u ~ normal with mean (T c/Var u) u and variance T − (T c)²/Var u
 *
 * (free Ornstein–Uhlenbeck process, Uhlenbeck & Ornstein 1930), so that thrown particles start thrown.
 *
 * @param draw  coefficient vector to simulate, or null: the fitted one
 * @param purpose  names the random streams; one per replicate and track
 * @param varyError  draws the localization error from its uncertainty too
 * @returns shape (n, d); the positions in the rows of the recording
 */
export function simulateDesign(
  design: Design,
  draw: readonly number[] | null,
  seed: number,
  purpose: string,
  varyError: boolean,
): Float64Array {
  const { scenario, tracks, step } = design;
  const d = tracks.dimensions;
  const { times, positions, trackOffsets } = tracks;
  const errorStream = randomStream(seed, `${purpose}-error`);
  const localizationError = design.localizationError.map(({ value, standardError }) =>
    varyError ? Math.abs(value + standardError * errorStream.normal()) : value,
  );
  const evaluator = createBasisEvaluator(scenario, draw);
  const simulate = createTrackSimulator(createIntegrator(scenario, evaluator), {
    step,
    exposure: scenario.observation.exposure * tracks.samplingInterval,
    localizationError,
    localizationErrors: tracks.localizationErrors,
  });
  const drawVelocity = createVelocityDraw(evaluator, localizationError);
  const out = new Float64Array(times.length * d);
  const start = new Float64Array(d);
  const velocity = new Float64Array(d);
  for (let track = 0; track < countTracks(tracks); track++) {
    const first = trackOffsets[track];
    const last = trackOffsets[track + 1];
    const stream = randomStream(seed, purpose, track);
    for (let axis = 0; axis < d; axis++) start[axis] = positions[first * d + axis];
    const isThrown = evaluator.order === 'second' && last - first > 1;
    if (isThrown) {
      const duration = times[first + 1] - times[first];
      for (let axis = 0; axis < d; axis++) {
        velocity[axis] = (positions[(first + 1) * d + axis] - start[axis]) / duration;
      }
      drawVelocity(start, velocity, duration, () => stream.normal());
    }
    simulate(times, first, last, start, isThrown ? velocity : null, out, stream);
  }
  return out;
}

/** Turns a displacement per time into a draw of the velocity at its beginning, in place. */
function createVelocityDraw(evaluator: ScenarioEvaluator, localizationError: readonly number[]) {
  const { dimensions: d, bathSize, bathForm } = evaluator;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  return (start: Float64Array, velocity: Float64Array, duration: number, normal: () => number): void => {
    evaluator.evaluateInto(start, force, friction, noise);
    for (let axis = 0; axis < d; axis++) {
      const i = bathForm === 'scalar' ? 0 : bathForm === 'axes' ? axis : axis * (d + 1);
      const x = Math.max(friction[i] * duration, 1e-3); // next to no friction: the series' leading terms suffice
      const e = Math.exp(-x);
      const temperature = (noise[i] * duration) / (2 * x);
      const covariance = (temperature * (1 - e)) / x;
      const seen = (2 * temperature * (x - 1 + e)) / (x * x) + 2 * (localizationError[axis] / duration) ** 2;
      const gain = seen > 0 ? covariance / seen : 1;
      const spread = Math.sqrt(Math.max(0, temperature - gain * covariance));
      velocity[axis] = gain * velocity[axis] + spread * normal();
    }
  };
}
