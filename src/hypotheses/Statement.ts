/**
 * A statement about coefficients, in the form every test works with.
 *
 * A statement reads some columns c_1 … c_K off a model (functions of place) and says that combinations of them equal
 * given functions: Σ_j M_ij(φ) c_j(q) = g_i(q; φ) for all visited q, with parameters φ that the data may choose. With
 * the columns' averages against smooth modes in place of the columns, this becomes a list of numbers that should vanish. Columns that
 * are positive by construction are read as logarithms.
 */

import type { Model } from '../fields/CoefficientField.js';

export interface Statement {
  /** Parameters the data may choose, by the names they are reported under. */
  readonly parameterNames: readonly string[];
  /** Names of the K columns, as in `evaluate`. */
  readonly columnNames: readonly string[];
  /** What the residual functions are, one name each, for tables by place. */
  readonly residualNames: readonly string[];
  /** Whether columns and targets are logarithms; tables by place turn them back. */
  readonly logarithmic: boolean;
  /** The K columns at places, shape (m, d): K arrays of length m. */
  columns(model: Model, places: Float64Array): Float64Array[];
  /** Numbers (no functions of place) that must vanish too; empty for most statements. */
  extras(model: Model): number[];
  readonly extraNames: readonly string[];
  /** Numbers read off the flexible fit that are reported with an interval but not tested; empty for most statements. */
  reports(model: Model): number[];
  readonly reportNames: readonly string[];
  /** M(φ), shape (residuals, K). */
  combination(parameters: ArrayLike<number>): Float64Array;
  /** The functions g at places, one array of length m per residual; null where they vanish. */
  target(parameters: ArrayLike<number>, places: Float64Array): Float64Array[] | null;
  /** The model with the statement made true and everything else as it is, on the model's own bases. */
  impose(model: Model, parameters: ArrayLike<number>, nodes: Float64Array): Model;
  /** Points to start the search for parameters from, best guesses first, given the columns at the nodes. */
  starts(columns: readonly Float64Array[], nodes: Float64Array): Float64Array[];
}

/** The combination of a statement that takes each column by itself. */
export function identity(size: number): Float64Array {
  const out = new Float64Array(size * size);
  for (let i = 0; i < size; i++) out[i * size + i] = 1;
  return out;
}
