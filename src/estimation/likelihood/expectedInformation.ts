/**
 * The information a recording holds about all coefficients: that of its steps about the local coefficients, laid on the
 * basis functions that are not zero there. It is positive semi-definite by construction, which the observed curvature is
 * not, and costs next to nothing; Fisher scoring uses it as its metric.
 *
 * Source  Fisher scoring: Rao, Proc. Camb. Phil. Soc. 44 (1948) 50.
 */

import { readErrorVariances } from './errorVariances.js';
import type { PlaceGroups } from './gatherPlaces.js';
import type { FieldSlot, LikelihoodLayout } from './layout.js';
import { type LocalInformation, type LocalSetting, numberLocal } from './localInformation.js';
import type { PassSetting } from './PathPass.js';
import { weighComponents } from './readCoefficients.js';

/** Where a local parameter goes: the functions of a basis from an offset on, or one parameter of its own. */
interface Target {
  readonly basis: number;
  readonly offset: number;
}

/**
 * @returns shape (p, p)
 */
export function expectInformation(
  groups: PlaceGroups,
  layout: LikelihoodLayout,
  setting: PassSetting,
  local: LocalInformation,
  parameters: Float64Array,
): Float64Array {
  const d = layout.dimensions;
  const p = layout.size;
  const out = new Float64Array(p * p);
  const frictionSums = new Float64Array(layout.friction?.components ?? 0);
  const noiseSums = new Float64Array(layout.noise.components);
  const errors = new Float64Array(d);
  readErrorVariances(layout, setting, parameters, errors);
  const targets = listTargets(layout);
  const weights = new Float64Array(numberLocal(layout).count ** 2);
  // A target of its own has one function that is one everywhere.
  const indices = [...layout.bases.map((basis) => new Int32Array(basis.support)), new Int32Array(1)];
  const values = [...layout.bases.map((basis) => new Float64Array(basis.support)), Float64Array.of(1)];
  for (let group = 0; group < groups.count; group++) {
    const at = group * d;
    layout.bases.forEach((basis, b) => {
      const count = basis.evaluateInto(groups.places, at, indices[b], values[b]);
      values[b].fill(0, count);
    });
    if (layout.friction) weigh(parameters, layout.friction, indices, values, frictionSums);
    weigh(parameters, layout.noise, indices, values, noiseSums);
    const here: LocalSetting = {
      frictionSums,
      noiseSums,
      interval: groups.intervals[group],
      errorVariances: groups.errorVariances ? groups.errorVariances.subarray(at, at + d) : errors,
      flow: groups.flow ? groups.flow.subarray(at, at + d) : null,
    };
    weights.fill(0);
    local(here, groups.steps[group], weights);
    spread(out, p, targets, weights, indices, values);
  }
  for (let i = 0; i < p; i++) {
    for (let j = 0; j < i; j++) out[i * p + j] = out[j * p + i];
  }
  return out;
}

/** Weighted sums of the components of a field. */
function weigh(
  parameters: Float64Array,
  slot: FieldSlot,
  indices: readonly Int32Array[],
  values: readonly Float64Array[],
  out: Float64Array,
): void {
  if (slot.basis >= 0)
    weighComponents(
      parameters,
      slot,
      indices[slot.basis],
      values[slot.basis],
      0,
      values[slot.basis].length,
      out,
    );
}

/** In the order of the local parameters; null for those that are not estimated. */
function listTargets(layout: LikelihoodLayout): (Target | null)[] {
  const targets: (Target | null)[] = [];
  for (const slot of [layout.force, layout.friction, layout.noise]) {
    if (!slot) continue;
    for (let component = 0; component < slot.components; component++) {
      const offset = slot.offset + component * slot.functionCount;
      targets.push(slot.basis < 0 ? null : { basis: slot.basis, offset });
    }
  }
  for (let axis = 0; axis < layout.dimensions; axis++) {
    targets.push(
      layout.errorOffset < 0 ? null : { basis: layout.bases.length, offset: layout.errorOffset + axis },
    );
  }
  return targets;
}

/** Adds the information about local parameters to the upper triangle of that about their functions. */
function spread(
  out: Float64Array,
  p: number,
  targets: readonly (Target | null)[],
  weights: Float64Array,
  indices: readonly Int32Array[],
  values: readonly Float64Array[],
): void {
  const count = targets.length;
  for (let a = 0; a < count; a++) {
    const first = targets[a];
    if (!first) continue;
    for (let b = a; b < count; b++) {
      const second = targets[b];
      const weight = weights[a * count + b];
      if (!second || weight === 0) continue;
      const fi = indices[first.basis];
      const fv = values[first.basis];
      const si = indices[second.basis];
      const sv = values[second.basis];
      for (let i = 0; i < fi.length; i++) {
        const scaled = weight * fv[i];
        const base = (first.offset + fi[i]) * p + second.offset;
        for (let j = 0; j < si.length; j++) {
          if (a !== b || si[j] >= fi[i]) out[base + si[j]] += scaled * sv[j];
        }
      }
    }
  }
}
