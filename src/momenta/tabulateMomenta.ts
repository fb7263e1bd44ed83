/**
 * Momenta recovered from positions: mass × velocity averaged over the frames around each position, with what that
 * average leaves uncertain.
 *
 * The velocity at row k is the secant (y_b − y_a)/(t_b − t_a) over its neighbours (one-sided at the ends of a track).
 * Against the true velocity at t_k it errs by the localization errors of y_a and y_b, and by averaging over the window:
 * for a velocity of variance T forgotten at the rate Γ, with the window reaching α before and β after t_k,
 *
 *     Var(mean − v) = T [ 1 + 2(Γτ − 1 + e^{−Γτ})/(Γτ)² − 2(2 − e^{−Γα} − e^{−Γβ})/(Γτ) ],   τ = α + β.
 *
 * Source  the velocity correlation T e^{−Γ|t|} of Uhlenbeck & Ornstein, Phys. Rev. 36 (1930) 823, averaged over the
 *         window once and twice.
 */

import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import type { Survey } from './Survey.js';

export interface MomentumTable {
  /** Columns of one length n each, in the order of the file; NaN where a value is not known. */
  readonly columns: readonly { readonly name: string; readonly values: ArrayLike<number | string> }[];
}

/**
 * Momentum and kinetic energy of every position.
 *
 * Columns: track, time, the coordinates, `averaged_over` (time between the positions the velocity comes from), then per
 * axis `momentum_x` and `momentum_x_error` (standard deviation; without the share of the interval where the survey
 * resolved no velocity memory), `kinetic_energy` = Σ p²/2m, its `kinetic_energy_error`, and `kinetic_energy_offset`: by
 * how much localization error raises and averaging lowers it in the mean.
 *
 * @param mass  1 for momenta per unit mass
 */
export function tabulateMomenta(tracks: TrackSet, survey: Survey, mass: number): MomentumTable {
  const { dimensions, positions, times, trackOffsets, localizationErrors } = tracks;
  const n = times.length;
  const friction = survey.relaxationTime === null ? null : 1 / survey.relaxationTime;
  const names = new Array<string>(n);
  const window = new Float64Array(n);
  const momenta = Array.from({ length: dimensions }, () => new Float64Array(n));
  const errors = Array.from({ length: dimensions }, () => new Float64Array(n));
  const energy = new Float64Array(n);
  const energyError = new Float64Array(n);
  const energyOffset = new Float64Array(n);

  for (let track = 0; track < countTracks(tracks); track++) {
    const first = trackOffsets[track];
    const last = trackOffsets[track + 1] - 1;
    for (let row = first; row <= last; row++) {
      names[row] = tracks.trackNames[track];
      const a = Math.max(first, row - 1);
      const b = Math.min(last, row + 1);
      const span = times[b] - times[a];
      window[row] = span;
      const loss =
        friction === null ? null : measureAveraging(friction, times[row] - times[a], times[b] - times[row]);
      let squares = 0;
      let energyVariance = 0;
      let offset = 0;
      for (let axis = 0; axis < dimensions; axis++) {
        const at = (place: number): number => place * dimensions + axis;
        const velocity = (positions[at(b)] - positions[at(a)]) / span; // NaN for a track of one position
        const located = localizationErrors
          ? localizationErrors[at(a)] ** 2 + localizationErrors[at(b)] ** 2
          : 2 * survey.localizationError[axis] ** 2;
        const variance = survey.velocityVariance[axis];
        const fromError = located / span ** 2;
        const fromInterval = loss !== null && variance !== null ? variance * loss.distance : 0;
        momenta[axis][row] = mass * velocity;
        errors[axis][row] = mass * Math.sqrt(fromError + fromInterval);
        squares += velocity * velocity;
        const total = fromError + fromInterval;
        energyVariance += velocity * velocity * total + (total * total) / 2;
        offset += fromError - (loss !== null && variance !== null ? variance * (1 - loss.kept) : 0);
      }
      energy[row] = (mass * squares) / 2;
      energyError[row] = mass * Math.sqrt(energyVariance);
      energyOffset[row] = (mass * offset) / 2;
    }
  }
  const coordinates = tracks.coordinates.map((name, axis) => ({
    name,
    values: Float64Array.from({ length: n }, (_, row) => positions[row * dimensions + axis]),
  }));
  return {
    columns: [
      { name: 'track', values: names },
      { name: 'time', values: times },
      ...coordinates,
      { name: 'averaged_over', values: window },
      ...tracks.coordinates.flatMap((name, axis) => [
        { name: `momentum_${name}`, values: momenta[axis] },
        { name: `momentum_${name}_error`, values: errors[axis] },
      ]),
      { name: 'kinetic_energy', values: energy },
      { name: 'kinetic_energy_error', values: energyError },
      { name: 'kinetic_energy_offset', values: energyOffset },
    ],
  };
}

/**
 * Averaging over a window from `before` to `after` the instant: mean squared distance of the average from the velocity
 * at the instant, and variance kept by the average, both in units of the velocity variance.
 */
export function measureAveraging(
  friction: number,
  before: number,
  after: number,
): { distance: number; kept: number } {
  const x = friction * (before + after);
  // Series below 1e-3: the closed forms cancel there.
  const kept = x > 1e-3 ? (2 * (x + Math.expm1(-x))) / (x * x) : 1 - x / 3 + (x * x) / 12;
  if (x <= 1e-3) {
    const [a, b] = [friction * before, friction * after];
    return { distance: Math.max((a * a + b * b) / Math.max(x, Number.MIN_VALUE) - x / 3, 0), kept };
  }
  const cross = -(Math.expm1(-friction * before) + Math.expm1(-friction * after)) / x;
  return { distance: Math.max(1 + kept - 2 * cross, 0), kept };
}
