/**
 * Sums over rows of weight × function i at one place × function j at another: the substance of every normal equation.
 * A row carries several weights at once, so that the few functions of a place are looked up once for all of them.
 *
 * The innermost loops are written out for 1, 2, 4 and 6 weights, which cover every number in one or two calls; that
 * is two and a half times as fast as a loop over weights.
 */

import type { Basis } from '../../fields/Basis.js';

/** Functions that are not zero at a place, and their values. */
export class BasisRow {
  readonly indices: Int32Array;
  readonly values: Float64Array;
  count = 0;

  constructor(private readonly basis: Basis) {
    this.indices = new Int32Array(basis.support);
    this.values = new Float64Array(basis.support);
  }

  evaluate(positions: Float64Array, row: number): void {
    const { basis } = this;
    this.count = basis.evaluateInto(positions, row * basis.dimensions, this.indices, this.values);
  }
}

/** The rows of a basis at the latest four positions. */
export class BasisHistory {
  readonly #rows: readonly BasisRow[];

  constructor(basis: Basis) {
    this.#rows = Array.from({ length: 4 }, () => new BasisRow(basis));
  }

  evaluate(positions: Float64Array, row: number): void {
    this.#rows[row & 3].evaluate(positions, row);
  }

  /** The functions at one of the latest four positions. */
  at(row: number): BasisRow {
    return this.#rows[row & 3];
  }
}

const GROUPS = [6, 4, 2, 1] as const;

/** Accumulates W sums for each pair (i, j) of functions of two bases. */
export class PairSums {
  readonly #groups: { readonly size: number; readonly first: number; readonly sums: Float64Array }[] = [];

  /**
   * @param leftCount  functions of the left basis; @param rightCount  of the right
   * @param weightCount  W
   * @param symmetric  left and right are always the same row: only one half of the pairs is summed
   */
  constructor(
    readonly leftCount: number,
    readonly rightCount: number,
    readonly weightCount: number,
    private readonly symmetric = false,
  ) {
    for (let first = 0; first < weightCount; ) {
      const size = GROUPS.find((group) => group <= weightCount - first) ?? 1;
      this.#groups.push({ size, first, sums: new Float64Array(leftCount * rightCount * size) });
      first += size;
    }
  }

  /** @param weights  length W */
  add(left: BasisRow, right: BasisRow, weights: Float64Array): void {
    for (const { size, first, sums } of this.#groups) {
      const { rightCount: columns, symmetric } = this;
      if (size === 6) addSix(sums, columns, left, right, weights, first, symmetric);
      else if (size === 4) addFour(sums, columns, left, right, weights, first, symmetric);
      else if (size === 2) addTwo(sums, columns, left, right, weights, first, symmetric);
      else addOne(sums, columns, left, right, weights[first], symmetric);
    }
  }

  /** Begins anew. */
  clear(): void {
    for (const { sums } of this.#groups) sums.fill(0);
  }

  /** Adds factor × the sums of one weight to the part of `target` that begins at (row, column). */
  addTo(target: Float64Array, stride: number, row: number, column: number, weight: number, factor = 1): void {
    const group = this.#groups.find(({ first, size }) => weight >= first && weight < first + size);
    if (group === undefined) throw new RangeError(`there is no weight ${weight}`);
    const { leftCount, rightCount, symmetric } = this;
    const { size, first, sums } = group;
    for (let i = 0; i < leftCount; i++) {
      const base = (row + i) * stride + column;
      for (let j = 0; j < rightCount; j++) {
        let sum = sums[(i * rightCount + j) * size + weight - first];
        if (symmetric && i !== j) sum += sums[(j * rightCount + i) * size + weight - first];
        target[base + j] += factor * sum;
      }
    }
  }
}

function addOne(
  sums: Float64Array,
  columns: number,
  left: BasisRow,
  right: BasisRow,
  weight: number,
  symmetric: boolean,
): void {
  const { indices: rowsOf, values: lefts, count } = left;
  const { indices: columnsOf, values: rights } = right;
  for (let i = 0; i < count; i++) {
    const scaled = lefts[i] * weight;
    const base = rowsOf[i] * columns;
    const end = symmetric ? i + 1 : right.count;
    for (let j = 0; j < end; j++) sums[base + columnsOf[j]] += scaled * rights[j];
  }
}

function addTwo(
  sums: Float64Array,
  columns: number,
  left: BasisRow,
  right: BasisRow,
  weights: Float64Array,
  first: number,
  symmetric: boolean,
): void {
  const { indices: rowsOf, values: lefts, count } = left;
  const { indices: columnsOf, values: rights } = right;
  const a = weights[first];
  const b = weights[first + 1];
  for (let i = 0; i < count; i++) {
    const base = rowsOf[i] * columns;
    const end = symmetric ? i + 1 : right.count;
    for (let j = 0; j < end; j++) {
      const product = lefts[i] * rights[j];
      const at = (base + columnsOf[j]) * 2;
      sums[at] += product * a;
      sums[at + 1] += product * b;
    }
  }
}

function addFour(
  sums: Float64Array,
  columns: number,
  left: BasisRow,
  right: BasisRow,
  weights: Float64Array,
  first: number,
  symmetric: boolean,
): void {
  const { indices: rowsOf, values: lefts, count } = left;
  const { indices: columnsOf, values: rights } = right;
  const a = weights[first];
  const b = weights[first + 1];
  const c = weights[first + 2];
  const d = weights[first + 3];
  for (let i = 0; i < count; i++) {
    const base = rowsOf[i] * columns;
    const end = symmetric ? i + 1 : right.count;
    for (let j = 0; j < end; j++) {
      const product = lefts[i] * rights[j];
      const at = (base + columnsOf[j]) * 4;
      sums[at] += product * a;
      sums[at + 1] += product * b;
      sums[at + 2] += product * c;
      sums[at + 3] += product * d;
    }
  }
}

function addSix(
  sums: Float64Array,
  columns: number,
  left: BasisRow,
  right: BasisRow,
  weights: Float64Array,
  first: number,
  symmetric: boolean,
): void {
  const { indices: rowsOf, values: lefts, count } = left;
  const { indices: columnsOf, values: rights } = right;
  const a = weights[first];
  const b = weights[first + 1];
  const c = weights[first + 2];
  const d = weights[first + 3];
  const e = weights[first + 4];
  const f = weights[first + 5];
  for (let i = 0; i < count; i++) {
    const base = rowsOf[i] * columns;
    const end = symmetric ? i + 1 : right.count;
    for (let j = 0; j < end; j++) {
      const product = lefts[i] * rights[j];
      const at = (base + columnsOf[j]) * 6;
      sums[at] += product * a;
      sums[at + 1] += product * b;
      sums[at + 2] += product * c;
      sums[at + 3] += product * d;
      sums[at + 4] += product * e;
      sums[at + 5] += product * f;
    }
  }
}

/** Adds each value × function of the row to sums of shape (k, columns): one column per value. */
export function addValues(sums: Float64Array, row: BasisRow, values: Float64Array): void {
  const columns = values.length;
  for (let i = 0; i < row.count; i++) {
    const base = row.indices[i] * columns;
    for (let column = 0; column < columns; column++) sums[base + column] += row.values[i] * values[column];
  }
}

/** Whether two bases are the same functions. */
export function sameBasis(one: Basis, other: Basis): boolean {
  return JSON.stringify(one.spec) === JSON.stringify(other.spec);
}
