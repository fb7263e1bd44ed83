/** Momenta from the smoother of a fit, with the kinetic temperature the fit finds at each place. */

import type { FitResult } from '../documents/FitDocument.js';
import { smoothPath } from '../estimation/likelihood/smoothPath.js';
import type { MomentumTable } from '../momenta/tabulateMomenta.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import { evaluateFit } from './evaluateFit.js';

/**
 * Columns: track, time, the recorded coordinates, then per axis `momentum_x` and its posterior standard deviation
 * `momentum_x_error`; `kinetic_energy`, the posterior mean of Σ p²/2m (the variance of p included), and its posterior
 * standard deviation `kinetic_energy_error`; then `temperature_xx` … with `_low` and `_high` as `evaluate` gives them.
 *
 * @param fit  by likelihood, second order
 * @param mass  1 for momenta per unit mass
 * @throws UsageError  for fits that cannot be smoothed with
 */
export function tabulateSmoothedMomenta(tracks: TrackSet, fit: FitResult, mass: number): MomentumTable {
  const d = tracks.dimensions;
  const n = tracks.times.length;
  const errors = fit.localizationError.map(({ value }) => value);
  const { velocities, velocityVariances } = smoothPath(tracks, fit.model, errors, fit.study.exposure);
  const names = new Array<string>(n);
  for (let track = 0; track < countTracks(tracks); track++)
    names.fill(tracks.trackNames[track], tracks.trackOffsets[track], tracks.trackOffsets[track + 1]);
  const pick = (values: Float64Array, axis: number, scale: (value: number) => number) =>
    Float64Array.from({ length: n }, (_, row) => scale(values[row * d + axis]));
  const energy = new Float64Array(n);
  const energyError = new Float64Array(n);
  for (let row = 0; row < n; row++) {
    let mean = 0;
    let variance = 0;
    for (let axis = 0; axis < d; axis++) {
      const v = velocities[row * d + axis];
      const spread = velocityVariances[row * d + axis];
      mean += v * v + spread;
      variance += 4 * v * v * spread + 2 * spread * spread; // of the square of a normal variable
    }
    energy[row] = (mass * mean) / 2;
    energyError[row] = (mass * Math.sqrt(variance)) / 2;
  }
  const temperatures = evaluateFit(fit, tracks.positions).columns.filter(({ name }) =>
    name.startsWith('temperature_'),
  );
  return {
    columns: [
      { name: 'track', values: names },
      { name: 'time', values: tracks.times },
      ...tracks.coordinates.map((name, axis) => ({ name, values: pick(tracks.positions, axis, (x) => x) })),
      ...tracks.coordinates.flatMap((name, axis) => [
        { name: `momentum_${name}`, values: pick(velocities, axis, (v) => mass * v) },
        { name: `momentum_${name}_error`, values: pick(velocityVariances, axis, (v) => mass * Math.sqrt(v)) },
      ]),
      { name: 'kinetic_energy', values: energy },
      { name: 'kinetic_energy_error', values: energyError },
      ...temperatures.flatMap(({ name, values, low, high }) => [
        { name, values },
        { name: `${name}_low`, values: low },
        { name: `${name}_high`, values: high },
      ]),
    ],
  };
}
