/**
 * A basis: functions of place whose weighted sums make a coefficient field.
 *
 * Symbols: `k` functions, `d` dimensions, `support` the largest number of functions that are non-zero at one place.
 */

/** A basis as data: what fit and scenario files hold, and what `createBasis` builds from. */
export type BasisSpec =
  /** One function, 1 everywhere (k = 1). */
  | { readonly kind: 'constant' }
  /** All monomials up to total degree `degree` in the scaled coordinates (x − centre)/scale; `linear` is degree 1. */
  | {
      readonly kind: 'polynomial';
      readonly degree: number;
      readonly centre: readonly number[];
      readonly scale: readonly number[];
    }
  /**
   * Tensor product of uniform B-splines of `degree` (1 to 3; absent: 3), `counts[a]` functions along axis `a` between `low` and `high`.
   * On a periodic axis (`periods[a]` > 0) they wrap and low/high span one period; elsewhere a place outside
   * the box is evaluated at the nearest point of the box.
   */
  | {
      readonly kind: 'spline';
      readonly counts: readonly number[];
      readonly low: readonly number[];
      readonly high: readonly number[];
      readonly periods: readonly number[];
      readonly degree?: number;
    }
  /** Tensor product of 1, cos, sin, … up to wave number `waves` per periodic axis (2·waves + 1 functions each);
   *  on an open axis constant. */
  | { readonly kind: 'waves'; readonly waves: number; readonly periods: readonly number[] };

export interface Basis {
  readonly spec: BasisSpec;
  readonly dimensions: number;
  readonly functionCount: number;
  readonly support: number;
  /**
   * Writes the functions that may be non-zero at the place `places[offset … offset + d − 1]` and their values.
   *
   * @param indices  at least `support` long; function numbers, each once; in increasing order except where an axis wraps
   * @param values  at least `support` long
   * @returns how many were written (≤ support)
   */
  evaluateInto(places: ArrayLike<number>, offset: number, indices: Int32Array, values: Float64Array): number;
  /** Like `evaluateInto`, with the derivative along `axis` (unit: 1/length) instead of the value; same indices. */
  differentiateInto(
    places: ArrayLike<number>,
    offset: number,
    axis: number,
    indices: Int32Array,
    values: Float64Array,
  ): number;
  /**
   * Roughness penalty, shape (k, k) row-major, symmetric positive semi-definite: cᵀPc is small for fields without
   * short waves and zero for the smoothest ones (constant; straight lines for open splines). Scaled to trace k.
   * Null where the basis needs none.
   */
  roughness(): Float64Array | null;
}
