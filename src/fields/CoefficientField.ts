/**
 * A coefficient field: a vector or matrix of place, each component a weighted sum of one basis.
 *
 * Components by form, in this order:
 *   vector  (force, drift)               x, y, z
 *   scalar                               one component `xx`, meaning that value on the whole diagonal
 *   axes                                 `xx`, `yy`, `zz`
 *   matrix  (friction)                   all d² row-major: `xx`, `xy`, …
 *   matrix  (noise, diffusion)           symmetric, upper triangle row-major: `xx`, `xy`, `yy`, …
 */

import type { BasisSpec } from './Basis.js';

export type FieldName = 'force' | 'friction' | 'noise' | 'drift' | 'diffusion';
export type FieldForm = 'vector' | 'scalar' | 'axes' | 'matrix';

/**
 * How a component's weighted sum becomes its value: `identity` the sum itself; `log` its exponential (positive by
 * construction; scalar and axes forms); `log-matrix` the exponential of the symmetric matrix of all sums (noise and
 * diffusion in matrix form), or of the matrix's symmetric part plus its antisymmetric part (friction in matrix form).
 */
export type FieldLink = 'identity' | 'log' | 'log-matrix';

export interface CoefficientField {
  readonly name: FieldName;
  readonly form: FieldForm;
  readonly link: FieldLink;
  readonly basis: BasisSpec;
  /** One array of k coefficients per component, in the order above. */
  readonly coefficients: readonly (readonly number[])[];
}

/** The model: second order (force, friction, noise) or first order (drift in the Itô reading, diffusion). */
export type Model =
  | {
      readonly order: 'second';
      readonly dimensions: number;
      readonly periods: readonly number[];
      readonly force: CoefficientField;
      readonly friction: CoefficientField;
      readonly noise: CoefficientField;
    }
  | {
      readonly order: 'first';
      readonly reading: 'ito';
      readonly dimensions: number;
      readonly periods: readonly number[];
      readonly drift: CoefficientField;
      readonly diffusion: CoefficientField;
    };

/**
 * The coefficients as functions of place, ready for hot loops (made by `createModelEvaluator`).
 * Vectors have length d, matrices are d × d row-major and always full (a scalar form fills the diagonal).
 */
export interface ModelEvaluator {
  readonly model: Model;
  /** Force (second order) or drift (first order) at a place. */
  forceInto(places: ArrayLike<number>, offset: number, out: Float64Array): void;
  /** Friction matrix; second order only (zero at first order). */
  frictionInto(places: ArrayLike<number>, offset: number, out: Float64Array): void;
  /** Noise matrix σσᵀ (second order) or diffusion matrix D (first order). */
  noiseInto(places: ArrayLike<number>, offset: number, out: Float64Array): void;
}
