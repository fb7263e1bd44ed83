/**
 * How the parameter vector of the likelihood is laid out: the coefficients of all fields in model order (see
 * `modelParameters`), then the logarithms of the localization error variances, one per axis, where they are estimated.
 */

import type { Basis, BasisSpec } from '../../fields/Basis.js';
import type { CoefficientField, Model } from '../../fields/CoefficientField.js';
import { createBasis } from '../../fields/createBasis.js';
import { modelFields } from '../../fields/modelParameters.js';

/** One field: where its coefficients are, and which of the distinct bases they weigh. */
export interface FieldSlot {
  readonly field: CoefficientField;
  /** Index into `bases`; −1 for a field that is zero. */
  readonly basis: number;
  readonly functionCount: number;
  readonly offset: number;
  readonly components: number;
}

export interface LikelihoodLayout {
  readonly model: Model;
  readonly dimensions: number;
  /** Distinct bases; fields with the same one share its evaluation. */
  readonly bases: readonly Basis[];
  /** Force (second order) or drift (first order). */
  readonly force: FieldSlot;
  /** Null at first order. */
  readonly friction: FieldSlot | null;
  /** Noise (second order) or diffusion (first order). */
  readonly noise: FieldSlot;
  /** Number of coefficients of the model. */
  readonly modelSize: number;
  /** Where the d logarithms of the localization error variances start; −1 where they are known. */
  readonly errorOffset: number;
  readonly size: number;
}

/**
 * @param zeroForce  whether the force (drift) is zero by the plan and not fitted
 * @param errorEstimated  whether the localization error is fitted
 */
export function layOutLikelihood(
  model: Model,
  zero: { readonly force: boolean; readonly friction: boolean },
  errorEstimated: boolean,
): LikelihoodLayout {
  const { dimensions } = model;
  const specs: string[] = [];
  const bases: Basis[] = [];
  const share = (spec: BasisSpec): number => {
    const key = JSON.stringify(spec);
    const found = specs.indexOf(key);
    if (found >= 0) return found;
    specs.push(key);
    bases.push(createBasis(spec, dimensions));
    return bases.length - 1;
  };
  let offset = 0;
  const place = (field: CoefficientField, isZero: boolean): FieldSlot => {
    const basis = share(field.basis);
    const { functionCount } = bases[basis];
    const components = field.coefficients.length;
    const slot = { field, basis: isZero ? -1 : basis, functionCount, offset, components };
    offset += components * functionCount;
    return slot;
  };
  const fields = modelFields(model);
  const force = place(fields[0], zero.force);
  const friction = model.order === 'second' ? place(model.friction, zero.friction) : null;
  const noise = place(fields[fields.length - 1], false);
  return {
    model,
    dimensions,
    bases,
    force,
    friction,
    noise,
    modelSize: offset,
    errorOffset: errorEstimated ? offset : -1,
    size: offset + (errorEstimated ? dimensions : 0),
  };
}

/**
 * All parameters in the order of the places of their functions, the localization errors last: systems whose entries are
 * there for functions that overlap then have them near the diagonal.
 */
export function orderByPlace(layout: LikelihoodLayout): Int32Array {
  const keys = new Float64Array(layout.size).fill(2);
  for (const slot of [layout.force, layout.friction, layout.noise]) {
    if (!slot) continue;
    for (let i = 0; i < slot.components * slot.functionCount; i++)
      keys[slot.offset + i] = (i % slot.functionCount) / slot.functionCount;
  }
  return Int32Array.from(keys.keys()).sort((a, b) => keys[a] - keys[b] || a - b);
}
