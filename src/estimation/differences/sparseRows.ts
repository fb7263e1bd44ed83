/**
 * Sparse rows of a regression on local bases: few functions are non-zero at a place, so each row touches few entries.
 */

import type { Basis } from '../../fields/Basis.js';

/** Basis values of the latest rows of a run, so that each row is evaluated once. */
export class RecentBasis {
  readonly #indices: Int32Array[];
  readonly #values: Float64Array[];
  readonly #counts = new Int32Array(4);

  constructor(private readonly basis: Basis | null) {
    const support = basis?.support ?? 0;
    this.#indices = Array.from({ length: 4 }, () => new Int32Array(support));
    this.#values = Array.from({ length: 4 }, () => new Float64Array(support));
  }

  evaluate(positions: Float64Array, row: number, dimensions: number): void {
    if (!this.basis) return;
    const slot = row & 3;
    this.#counts[slot] = this.basis.evaluateInto(
      positions,
      row * dimensions,
      this.#indices[slot],
      this.#values[slot],
    );
  }

  count(row: number): number {
    return this.#counts[row & 3];
  }

  indices(row: number): Int32Array {
    return this.#indices[row & 3];
  }

  values(row: number): Float64Array {
    return this.#values[row & 3];
  }
}

/** A sparse vector that is refilled row by row. */
export class SparseRow {
  readonly indices: Int32Array;
  readonly values: Float64Array;
  length = 0;

  constructor(capacity: number) {
    this.indices = new Int32Array(capacity);
    this.values = new Float64Array(capacity);
  }

  clear(): void {
    this.length = 0;
  }

  append(offset: number, recent: RecentBasis, row: number, weight: number): void {
    const count = recent.count(row);
    const indices = recent.indices(row);
    const values = recent.values(row);
    let length = this.length;
    for (let i = 0; i < count; i++) {
      this.indices[length] = offset + indices[i];
      this.values[length++] = weight * values[i];
    }
    this.length = length;
  }
}

/** Adds one row to instrument–regressor products, instrument–response products and the Gram matrix of instruments. */
export function addOuterProducts(
  matrix: Float64Array,
  vector: Float64Array,
  gram: Float64Array,
  p: number,
  instruments: SparseRow,
  regressors: SparseRow,
  response: number,
): void {
  const { indices: rowsOf, values: weights, length: rowCount } = instruments;
  const { indices: columnsOf, values, length: columnCount } = regressors;
  for (let i = 0; i < rowCount; i++) {
    const weight = weights[i];
    const base = rowsOf[i] * p;
    vector[rowsOf[i]] += weight * response;
    for (let j = 0; j < columnCount; j++) matrix[base + columnsOf[j]] += weight * values[j];
    for (let j = 0; j < rowCount; j++) gram[base + rowsOf[j]] += weight * weights[j];
  }
}

/** Adds one row of an ordinary regression on a basis. */
export function addBasisRow(
  matrix: Float64Array,
  vector: Float64Array,
  total: Float64Array,
  p: number,
  offset: number,
  indices: Int32Array,
  values: Float64Array,
  count: number,
  response: number,
): void {
  for (let i = 0; i < count; i++) {
    const base = (offset + indices[i]) * p + offset;
    vector[offset + indices[i]] += values[i] * response;
    for (let j = 0; j < count; j++) {
      const product = values[i] * values[j];
      matrix[base + indices[j]] += product;
      total[base + indices[j]] += product;
    }
  }
}

/** Adds one row to the derivative of a moment vector with respect to the parameters of an earlier regression. */
export function addSensitivity(
  sensitivity: Float64Array,
  columns: number,
  offset: number,
  indices: Int32Array,
  values: Float64Array,
  count: number,
  row: SparseRow,
  weight: number,
): void {
  for (let i = 0; i < count; i++) {
    const base = (offset + indices[i]) * columns;
    for (let j = 0; j < row.length; j++)
      sensitivity[base + row.indices[j]] += weight * values[i] * row.values[j];
  }
}

/**
 * Slope of each fitted vector component along its own axis, as a function of the row.
 *
 * @param parameters  coefficients of component a start at a · k
 * @returns (row, axis) → slope, in the unit of the component per length; zero without a basis
 */
export function createOwnSlopes(
  basis: Basis | null,
  parameters: Float64Array,
  positions: Float64Array,
  dimensions: number,
): (row: number, axis: number) => number {
  if (!basis) return () => 0;
  const k = basis.functionCount;
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  return (row, axis) => {
    const count = basis.differentiateInto(positions, row * dimensions, axis, indices, values);
    let slope = 0;
    for (let i = 0; i < count; i++) slope += parameters[axis * k + indices[i]] * values[i];
    return slope;
  };
}
