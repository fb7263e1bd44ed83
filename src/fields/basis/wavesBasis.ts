/**
 * Tensor product of 1, cos, sin, cos 2, sin 2, … up to a wave number along each periodic axis; constant along open
 * axes. First axis slowest.
 */

import type { Basis, BasisSpec } from '../Basis.js';

type WavesSpec = Extract<BasisSpec, { kind: 'waves' }>;

export function createWavesBasis(spec: WavesSpec, dimensions: number): Basis {
  const counts = spec.periods.map((period) => (period > 0 ? 2 * spec.waves + 1 : 1));
  const k = counts.reduce((product, count) => product * count, 1);
  const own = counts.map((count) => new Float64Array(count));

  const combine = (
    places: ArrayLike<number>,
    offset: number,
    along: number,
    indices: Int32Array,
    values: Float64Array,
  ): number => {
    for (let axis = 0; axis < dimensions; axis++) {
      const angular = spec.periods[axis] > 0 ? (2 * Math.PI) / spec.periods[axis] : 0;
      fillAxis(own[axis], places[offset + axis] * angular, axis === along ? angular : 0, axis === along);
    }
    for (let i = 0; i < k; i++) {
      let rest = i;
      let product = 1;
      for (let axis = dimensions - 1; axis >= 0; axis--) {
        product *= own[axis][rest % counts[axis]];
        rest = Math.floor(rest / counts[axis]);
      }
      indices[i] = i;
      values[i] = product;
    }
    return k;
  };

  return {
    spec,
    dimensions,
    functionCount: k,
    support: k,
    evaluateInto: (places, offset, indices, values) => combine(places, offset, -1, indices, values),
    differentiateInto: (places, offset, axis, indices, values) =>
      combine(places, offset, axis, indices, values),
    roughness: () => waveNumberPenalty(counts),
  };
}

function fillAxis(out: Float64Array, phase: number, angular: number, derivative: boolean): void {
  out[0] = derivative ? 0 : 1;
  for (let i = 1; i < out.length; i += 2) {
    const wave = (i + 1) / 2;
    const cosine = Math.cos(wave * phase);
    const sine = Math.sin(wave * phase);
    out[i] = derivative ? -wave * angular * sine : cosine;
    out[i + 1] = derivative ? wave * angular * cosine : sine;
  }
}

/** The squared second derivative of a wave grows with the fourth power of its number. */
function waveNumberPenalty(counts: readonly number[]): Float64Array {
  const k = counts.reduce((product, count) => product * count, 1);
  const penalty = new Float64Array(k * k);
  let trace = 0;
  for (let i = 0; i < k; i++) {
    let rest = i;
    let squared = 0;
    for (let axis = counts.length - 1; axis >= 0; axis--) {
      squared += Math.ceil((rest % counts[axis]) / 2) ** 2;
      rest = Math.floor(rest / counts[axis]);
    }
    penalty[i * k + i] = squared ** 2;
    trace += squared ** 2;
  }
  return penalty.map((value) => (value * k) / trace);
}
