/**
 * Drift and diffusion averaged over where a particle is during a step at first order: it spreads over the step, and the
 * coefficients bend over the spread. With P the variance of the filter, the mean variance over a step of length h is
 * δ² = P + Dh per axis. The mean of a function over it is read from the centre and from two places along each of d axes,
 * √(3d) δ away, with weights that are right to the second order in δ and that never turn a wave of any length upside
 * down (in one dimension the Gauss–Hermite rule of three points). Without it a diffusion that bends is off by hD″/2.
 *
 * Source  Itô–Taylor expansion of the moments: Kessler, Scand. J. Stat. 24 (1997) 211; the rule: Julier & Uhlmann, Proc.
 *         IEEE 92 (2004) 401.
 */

import type { LikelihoodLayout } from './layout.js';
import { type CoefficientReader, probe } from './readCoefficients.js';

const LARGEST_CHANGE = 2; // of a diffusion, either way: expansions hold for small ones

export interface StepAverage {
  /**
   * Adds to the drift (length d) and multiplies the diffusion (shape (d, d), positive diagonal) of a place.
   *
   * @param spreads  length d: δ, length
   */
  apply(reader: CoefficientReader, spreads: Float64Array, force: Float64Array, noise: Float64Array): void;
}

/** @param read  writes the diffusion matrix, shape (d, d), of the weighted sums of its components */
export function createStepAverage(
  layout: LikelihoodLayout,
  read: (sums: Float64Array, out: Float64Array) => void,
): StepAverage | null {
  const d = layout.dimensions;
  const bends = [layout.force, layout.noise].some(
    ({ basis }) => basis >= 0 && layout.bases[basis].spec.kind !== 'constant',
  );
  if (!bends) return null;
  const reach = Math.sqrt(3 * d);
  const weight = 1 / (6 * d);
  const sums = new Float64Array(layout.noise.components);
  const shiftedForce = new Float64Array(d);
  const shifted = new Float64Array(d * d);
  const forceChange = new Float64Array(d);
  const change = new Float64Array(d * d);
  return {
    apply(reader, spreads, force, noise) {
      forceChange.fill(0);
      change.fill(0);
      for (let axis = 0; axis < d; axis++) {
        for (let sign = -1; sign <= 1; sign += 2) {
          probe(reader, axis, sign * reach * spreads[axis], shiftedForce, sums);
          read(sums, shifted);
          for (let i = 0; i < d; i++) forceChange[i] += weight * (shiftedForce[i] - force[i]);
          for (let i = 0; i < d * d; i++) change[i] += weight * (shifted[i] - noise[i]);
        }
      }
      // The whole change is cut where it would be large, so that the matrix stays positive.
      let share = 1;
      for (let i = 0; i < d; i++) {
        const own = noise[i * d + i];
        const moved = change[i * d + i];
        const most = moved > 0 ? (LARGEST_CHANGE - 1) * own : (1 - 1 / LARGEST_CHANGE) * own;
        if (Math.abs(moved) > most) share = Math.min(share, most / Math.abs(moved));
      }
      for (let i = 0; i < d; i++) force[i] += share * forceChange[i];
      for (let i = 0; i < d * d; i++) noise[i] += share * change[i];
    },
  };
}
